//! A generated module in a program of its own.

use std::fs;
use std::path::Path;
use std::process::Command;

/// Type-checks the module, and evaluates its constants, in a program without the standard library, called `name`;
/// for the host where no `target` is named. Builds with the same `target_folder` share what they can.
///
/// # Errors
/// What the compiler had to say.
///
/// # Panics
/// When there is no place for the program or cargo cannot be run.
pub fn check(name: &str, module: &str, target: Option<&str>, target_folder: &Path) -> Result<(), String> {
    let folder = tempfile::tempdir().expect("a folder");
    let core = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("../debounce-core")
        .canonicalize()
        .expect("the core crate");
    let manifest = format!(
        "[package]\nname = \"{name}\"\nversion = \"0.0.0\"\nedition = \"2024\"\n\
         [dependencies]\ndebounce-core = {{ path = {core:?} }}\n[workspace]\n"
    );
    let library = "#![no_std]\n#![deny(warnings, missing_docs)]\n//! Firmware.\npub mod contact;\n";
    fs::create_dir(folder.path().join("src")).expect("a folder");
    for (file, text) in
        [("Cargo.toml", manifest.as_str()), ("src/lib.rs", library), ("src/contact.rs", module)]
    {
        fs::write(folder.path().join(file), text).expect("a file");
    }
    let mut cargo = Command::new(env!("CARGO"));
    cargo.args(["check", "--quiet", "--offline", "--color", "never"]).current_dir(folder.path());
    cargo.env("CARGO_TARGET_DIR", target_folder).env_remove("RUSTFLAGS");
    if let Some(target) = target {
        have(target);
        cargo.args(["--target", target]);
    }
    let output = cargo.output().expect("cargo runs");
    if output.status.success() {
        return Ok(());
    }
    Err(String::from_utf8_lossy(&output.stderr).into_owned())
}

/// Makes sure that the toolchain holds the core library for `target`.
///
/// # Panics
/// When it does not and rustup cannot add it; the message is the line to run.
pub fn have(target: &str) {
    let output = Command::new("rustc").args(["--print", "target-libdir", "--target", target]).output();
    let folder = output.map(|output| String::from_utf8_lossy(&output.stdout).trim().to_owned());
    if folder.is_ok_and(|folder| !folder.is_empty() && Path::new(&folder).is_dir()) {
        return;
    }
    let added = Command::new("rustup").args(["target", "add", target]).status();
    assert!(added.is_ok_and(|status| status.success()), "this test needs: rustup target add {target}");
}
