//! The command `harness`.
#![forbid(unsafe_code)]

use std::process::ExitCode;

fn main() -> ExitCode {
    harness::cli::run(std::env::args_os())
}
