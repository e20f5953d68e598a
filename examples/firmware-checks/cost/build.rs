//! Compiles the plain C with the C compiler for the part, where there is one, and links by the rig's script.

use std::path::Path;
use std::process::Command;
use std::{env, fs};

fn main() {
    println!("cargo:rustc-link-arg-bins=-Timage.x");
    println!("cargo:rerun-if-changed=c");
    println!("cargo:rustc-check-cfg=cfg(with_c)");
    let target = env::var("TARGET").expect("cargo sets TARGET");
    let (program, part): (_, &[&str]) = match target.as_str() {
        "thumbv6m-none-eabi" => ("arm-none-eabi-gcc", &["-mthumb", "-mcpu=cortex-m0"]),
        "thumbv7m-none-eabi" => ("arm-none-eabi-gcc", &["-mthumb", "-mcpu=cortex-m3"]),
        "riscv32imc-unknown-none-elf" => {
            ("riscv64-unknown-elf-gcc", &["-march=rv32imc_zicsr", "-mabi=ilp32"])
        }
        // Built for the host, to lint it: nothing is measured there.
        _ => return,
    };
    let out = env::var("OUT_DIR").expect("cargo sets OUT_DIR");
    for entry in fs::read_dir("c").expect("the folder c is there") {
        let path = entry.expect("the folder c can be read").path();
        if path.extension().is_none_or(|extension| extension != "c") {
            continue;
        }
        let object = Path::new(&out).join(path.with_extension("o").file_name().expect("a file has a name"));
        let mut compiler = Command::new(program);
        compiler.args(["-O2", "-ffreestanding", "-std=c11", "-Wall", "-Wextra", "-Werror"]);
        compiler.args(["-ffunction-sections", "-c", "-o"]).arg(&object).arg(&path);
        let status = compiler.args(part).status();
        assert!(status.is_ok_and(|status| status.success()), "{program} does not compile {path:?}");
        println!("cargo:rustc-link-arg-bins={}", object.display());
    }
    println!("cargo:rustc-cfg=with_c");
}
