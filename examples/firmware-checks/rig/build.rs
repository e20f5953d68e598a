//! Puts the linker script and the memory of the emulated part where the images' linker finds them.

use std::path::Path;
use std::{env, fs};

fn main() {
    println!("cargo:rerun-if-changed=link");
    let target = env::var("TARGET").expect("cargo sets TARGET");
    let memory = match target.as_str() {
        "thumbv6m-none-eabi" => "nrf51822.x",
        "thumbv7m-none-eabi" => "lm3s6965.x",
        "riscv32imc-unknown-none-elf" => "virt.x",
        // Built for the host, to lint it or as a dependency there: nothing is linked.
        _ => return,
    };
    let out = env::var("OUT_DIR").expect("cargo sets OUT_DIR");
    for (from, to) in [(memory, "memory.x"), ("image.x", "image.x")] {
        fs::copy(Path::new("link").join(from), Path::new(&out).join(to)).expect("a linker script is copied");
    }
    println!("cargo:rustc-link-search={out}");
}
