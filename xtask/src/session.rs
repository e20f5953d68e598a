//! One run of the checks: where the workspace stands, what failed so far, how many tests ran.

use std::ffi::OsString;
use std::io::{self, BufRead, BufReader, Write};
use std::path::Path;
use std::process::{Command, Stdio};

use crate::tally::Tally;

/// Runs commands for the checks and collects what fails instead of stopping at it.
pub(crate) struct Session {
    failures: Vec<String>,
    tally: Tally,
}

impl Session {
    pub(crate) fn new() -> Self {
        Self { failures: Vec::new(), tally: Tally::default() }
    }

    /// The root of the workspace, one level above this package.
    pub(crate) fn root() -> &'static Path {
        let package = Path::new(env!("CARGO_MANIFEST_DIR"));
        package.parent().unwrap_or(package)
    }

    /// Notes a failure; the check goes on.
    pub(crate) fn fail(&mut self, message: impl Into<String>) {
        let message = message.into();
        eprintln!("error: {message}");
        self.failures.push(message);
    }

    /// Notes the failure of `result`, if it is one; true when it is none.
    pub(crate) fn expect(&mut self, result: Result<(), String>) -> bool {
        result.map_err(|message| self.fail(message)).is_ok()
    }

    /// The failures since the last call.
    pub(crate) fn take_failures(&mut self) -> Vec<String> {
        std::mem::take(&mut self.failures)
    }

    /// The tests that ran so far.
    pub(crate) fn tally(&self) -> Tally {
        self.tally
    }

    /// Runs cargo with `words`; a failure is noted.
    pub(crate) fn cargo(&mut self, words: &[&str]) {
        self.cargo_with(words, &[]);
    }

    /// Runs cargo with `words` and more environment; a failure is noted.
    pub(crate) fn cargo_with(&mut self, words: &[&str], environment: &[(&str, &str)]) {
        let mut command = cargo(words);
        command.envs(environment.iter().copied());
        let result = run(&mut command);
        self.expect(result);
    }

    /// Runs `cargo test` with `words` after it, counts the tests, and notes failures and tests that did not run.
    pub(crate) fn cargo_test(&mut self, words: &[&str]) {
        // Every test binary runs, also after a failure, so that the count is of all tests.
        let words: Vec<&str> = ["test", "--no-fail-fast"].iter().chain(words).copied().collect();
        let mut command = cargo(&words);
        let ran = tee(&mut command);
        let text = shown(&command);
        match ran {
            Ok((tally, result)) => {
                self.tally += tally;
                let complete = || tally.complete().map_err(|reason| format!("`{text}`: {reason}"));
                self.expect(result.and_then(|()| complete()));
            }
            Err(error) => self.fail(format!("cannot run `{text}`: {error}")),
        }
    }
}

/// A cargo command in the root of the workspace.
pub(crate) fn cargo(words: &[&str]) -> Command {
    let program = std::env::var_os("CARGO").unwrap_or_else(|| OsString::from("cargo"));
    let mut command = Command::new(program);
    command.args(words).current_dir(Session::root());
    // What cargo set for this program must not reach the crates that it builds next: those that read such a
    // variable would be built again on every change between `cargo xtask` and plain cargo.
    for (name, _) in std::env::vars_os() {
        let text = name.to_string_lossy();
        if text.starts_with("CARGO_PKG_") || text.starts_with("CARGO_MANIFEST_") {
            command.env_remove(&name);
        }
    }
    command
}

/// Runs a command to its end, its output going where ours goes.
pub(crate) fn run(command: &mut Command) -> Result<(), String> {
    announce(command);
    let status = command.stdin(Stdio::null()).status();
    let status = status.map_err(|error| format!("cannot run `{}`: {error}", shown(command)))?;
    if status.success() { Ok(()) } else { Err(format!("`{}` failed ({status})", shown(command))) }
}

/// Runs a command to its end and gives back its standard output.
pub(crate) fn output_of(command: &mut Command) -> Result<String, String> {
    let output = command.stdin(Stdio::null()).stderr(Stdio::inherit()).output();
    let output = output.map_err(|error| format!("cannot run `{}`: {error}", shown(command)))?;
    if output.status.success() {
        Ok(String::from_utf8_lossy(&output.stdout).into_owned())
    } else {
        Err(format!("`{}` failed ({})", shown(command), output.status))
    }
}

/// Runs a command that runs tests, passing its output on line by line while counting.
fn tee(command: &mut Command) -> io::Result<(Tally, Result<(), String>)> {
    announce(command);
    let mut child = command.stdin(Stdio::null()).stdout(Stdio::piped()).spawn()?;
    let mut tally = Tally::default();
    if let Some(pipe) = child.stdout.take() {
        let mut reader = BufReader::new(pipe);
        let mut out = io::stdout().lock();
        let mut line = Vec::new();
        while reader.read_until(b'\n', &mut line)? > 0 {
            out.write_all(&line)?;
            tally.read_line(&String::from_utf8_lossy(&line));
            line.clear();
        }
        out.flush()?;
    }
    let status = child.wait()?;
    let failed = || Err(format!("`{}` failed ({status})", shown(command)));
    Ok((tally, if status.success() { Ok(()) } else { failed() }))
}

fn announce(command: &Command) {
    say(&format!("$ {}", shown(command)));
}

/// Prints a line. Where nobody can read the result there is nothing to go on for.
pub(crate) fn say(line: &str) {
    let mut out = io::stdout().lock();
    if let Err(error) = writeln!(out, "{line}").and_then(|()| out.flush()) {
        give_up(&error);
    }
}

/// Ends the program because the results cannot be written; without a word if the reader has just gone.
pub(crate) fn give_up(error: &io::Error) -> ! {
    if error.kind() != io::ErrorKind::BrokenPipe {
        eprintln!("error: cannot write the results: {error}");
    }
    std::process::exit(2)
}

/// The command as one would type it: the program without its folder, and the words after it.
fn shown(command: &Command) -> String {
    let program = Path::new(command.get_program());
    let mut text = program.file_stem().unwrap_or(program.as_os_str()).to_string_lossy().into_owned();
    for word in command.get_args() {
        text.push(' ');
        text.push_str(&word.to_string_lossy());
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn root_holds_the_workspace_manifest() {
        let text = std::fs::read_to_string(Session::root().join("Cargo.toml")).unwrap();
        assert!(text.contains("[workspace]"));
    }

    #[test]
    fn shown_command_has_no_folder() {
        assert_eq!(shown(Command::new("/opt/bin/cargo").args(["fmt", "--check"])), "cargo fmt --check");
    }

    #[test]
    fn run_missing_program_says_which() {
        let message = run(&mut Command::new("no-such-program-here")).unwrap_err();
        assert!(message.starts_with("cannot run `no-such-program-here`: "), "{message}");
    }

    #[test]
    fn failures_taken_once_are_gone() {
        let mut session = Session::new();
        assert!(session.expect(Ok(())));
        assert!(!session.expect(Err("the roof leaks".to_owned())));
        assert_eq!(session.take_failures(), ["the roof leaks"]);
        assert!(session.take_failures().is_empty());
    }
}
