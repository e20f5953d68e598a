//! The command `harness` from outside: exit codes, output that cannot be written, readers that go away.

use std::fs::File;
use std::process::{Command, Output, Stdio};

fn harness() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_harness"));
    command.env_remove("NO_COLOR").env_remove("CLICOLOR_FORCE").stdin(Stdio::null());
    command
}

fn run(arguments: &[&str]) -> Output {
    harness().args(arguments).output().expect("the command runs")
}

#[track_caller]
fn check(arguments: &[&str], code: i32, stdout_has: &str, stderr_has: &str) {
    let output = run(arguments);
    let text = |bytes: &[u8]| String::from_utf8(bytes.to_vec()).expect("UTF-8");
    let (stdout, stderr) = (text(&output.stdout), text(&output.stderr));
    let shown = format!("{arguments:?}\n--- stdout\n{stdout}--- stderr\n{stderr}");
    assert_eq!(output.status.code(), Some(code), "{shown}");
    assert!(stdout.contains(stdout_has) && stdout.is_empty() == stdout_has.is_empty(), "{shown}");
    assert!(stderr.contains(stderr_has) && stderr.is_empty() == stderr_has.is_empty(), "{shown}");
    assert!(!stdout.contains('\x1b') && !stderr.contains('\x1b'), "no colour without a terminal: {shown}");
}

#[test]
fn command_alone_says_what_to_do_first() {
    check(&[], 0, "Start with the built-in demo:  harness study", "");
}

#[test]
fn command_help_and_version_go_to_stdout() {
    check(&["--help"], 0, "Exit codes: 0 holds, 1 does not hold, 2 bad input or usage", "");
    check(&["--version"], 0, "harness 0.", "");
}

#[test]
fn command_with_a_slip_ends_with_2() {
    check(&["--jsn"], 2, "", "--jsn");
}

#[cfg(target_os = "linux")]
#[test]
fn command_on_a_full_disk_says_so_and_ends_with_2() {
    let full = File::options().write(true).open("/dev/full").expect("the kernel's full device");
    for arguments in [&[][..], &["--help"], &["--version"]] {
        let full = full.try_clone().expect("a handle");
        let output = harness().args(arguments).stdout(full).output().expect("the command runs");
        let stderr = String::from_utf8(output.stderr).expect("UTF-8");
        assert_eq!(output.status.code(), Some(2), "{arguments:?}: {stderr}");
        assert!(
            stderr.starts_with("error: standard output cannot be written: no space left on device"),
            "{stderr}"
        );
    }
}

#[test]
fn command_whose_reader_goes_away_ends_quietly() {
    let (reader, writer) = std::io::pipe().expect("a pipe");
    drop(reader);
    let output = harness().stdout(writer).output().expect("the command runs");
    assert_eq!(output.status.code(), Some(0));
    assert!(output.stderr.is_empty(), "{}", String::from_utf8_lossy(&output.stderr));
}
