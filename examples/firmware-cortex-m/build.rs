//! Gives the linker the memory of the part, here and in `async-panel`.

use std::path::Path;
use std::{env, fs};

fn main() {
    // And on nothing else but this program, which cargo watches by itself.
    println!("cargo:rerun-if-env-changed=TARGET");
    let ram = match env::var("TARGET").as_deref() {
        // The nRF51822 of the emulated microbit.
        Ok("thumbv6m-none-eabi") => "16K",
        // The LM3S6965.
        _ => "64K",
    };
    let memory = format!(
        "MEMORY {{ FLASH : ORIGIN = 0x00000000, LENGTH = 256K  RAM : ORIGIN = 0x20000000, LENGTH = {ram} }}\n"
    );
    let out = env::var("OUT_DIR").expect("cargo sets OUT_DIR");
    fs::write(Path::new(&out).join("memory.x"), memory).expect("the memory layout can be written");
    println!("cargo:rustc-link-search={out}");
    println!("cargo:rustc-link-arg-bins=-Tlink.x");
    println!("cargo:rustc-link-arg-bins=--nmagic");
}
