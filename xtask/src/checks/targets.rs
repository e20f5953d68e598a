//! `debounce-core` builds and lints clean for bare metal, with no features and with all.

use crate::install;
use crate::session::Session;

/// From the smallest part without atomic read-modify-write to one with a floating-point unit, and another family.
const TARGETS: [&str; 4] =
    ["thumbv6m-none-eabi", "thumbv7m-none-eabi", "thumbv7em-none-eabihf", "riscv32imc-unknown-none-elf"];

pub(super) fn run(session: &mut Session) {
    let lints = session.expect(install::component("clippy", "clippy"));
    for target in TARGETS {
        if !session.expect(install::target(target)) {
            continue;
        }
        for features in ["--no-default-features", "--all-features"] {
            session.cargo(&["build", "--package", "debounce-core", "--target", target, features]);
            if lints {
                let package = ["clippy", "--package", "debounce-core", "--target", target, features];
                session.cargo(&[&package[..], &["--", "-D", "warnings"]].concat());
            }
        }
    }
}
