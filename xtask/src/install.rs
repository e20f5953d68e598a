//! Gets what a check needs and the machine lacks, or says the exact line that would.

use std::path::Path;
use std::process::{Command, Stdio};
use std::sync::OnceLock;

use crate::session::{cargo, output_of, run};

/// Makes sure that cargo has the subcommand `command`, which the rustup component `component` brings.
pub(crate) fn component(command: &str, component: &str) -> Result<(), String> {
    if answers(&mut cargo(&[command, "--version"])) {
        return Ok(());
    }
    rustup(&["component", "add", component], &format!("cargo {command}"))
}

/// Makes sure that the toolchain holds the core library for `target`.
pub(crate) fn target(target: &str) -> Result<(), String> {
    let folder = output_of(Command::new("rustc").args(["--print", "target-libdir", "--target", target]))?;
    if Path::new(folder.trim()).is_dir() {
        return Ok(());
    }
    rustup(&["target", "add", target], &format!("the target {target}"))
}

/// Makes sure that `program` can be run, which the system package `package` brings.
pub(crate) fn program(program: &str, package: &str) -> Result<(), String> {
    if answers(Command::new(program).arg("--version")) {
        return Ok(());
    }
    if !answers(Command::new("apt-get").arg("--version")) {
        return Err(format!("{program} is missing and there is no apt-get here; install it, then try again"));
    }
    if output_of(Command::new("id").arg("-u"))?.trim() != "0" {
        let line = apt_line(package);
        return Err(format!("{program} is missing; get it with `sudo {line}`"));
    }
    // The lists are read once per run, and only if something is missing.
    static LISTS: OnceLock<Result<(), String>> = OnceLock::new();
    LISTS.get_or_init(|| run(Command::new("apt-get").args(["update", "--quiet"]))).clone()?;
    let line = apt_line(package);
    run(Command::new("env").arg("DEBIAN_FRONTEND=noninteractive").args(line.split(' ')))?;
    if answers(Command::new(program).arg("--version")) {
        Ok(())
    } else {
        Err(format!("{program} is still missing after `{line}`"))
    }
}

fn apt_line(package: &str) -> String {
    format!("apt-get install --yes --no-install-recommends {package}")
}

fn rustup(words: &[&str], missing: &str) -> Result<(), String> {
    let advice = |reason: String| {
        format!(
            "{missing} is missing ({reason}); get it with `rustup {}` (https://rustup.rs)",
            words.join(" ")
        )
    };
    run(Command::new("rustup").args(words)).map_err(advice)
}

/// Whether the command can be started and ends well.
fn answers(command: &mut Command) -> bool {
    let status = command.stdin(Stdio::null()).stdout(Stdio::null()).stderr(Stdio::null()).status();
    status.is_ok_and(|status| status.success())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn program_that_is_there_is_not_installed() {
        assert_eq!(program("cargo", "no-such-package"), Ok(()));
    }

    #[test]
    fn command_that_is_not_there_does_not_answer() {
        assert!(!answers(&mut Command::new("no-such-program-here")));
        assert!(answers(Command::new("rustc").arg("--version")));
    }

    #[test]
    fn target_unknown_to_the_compiler_is_an_error() {
        assert!(target("no-such-target").is_err());
    }

    #[test]
    fn component_missing_is_advised_with_the_exact_line() {
        let message = rustup(&["component", "frobnicate"], "cargo thing").unwrap_err();
        assert!(message.starts_with("cargo thing is missing ("), "{message}");
        assert!(
            message.ends_with("get it with `rustup component frobnicate` (https://rustup.rs)"),
            "{message}"
        );
    }
}
