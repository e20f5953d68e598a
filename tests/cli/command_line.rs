//! The command `harness` from outside: exit codes, output that cannot be written, readers that go away.

mod bad_output;
mod bad_recording;
mod bad_requirement;
mod bench;
mod characterise;
mod choose_emit;
mod columns;
mod compare;
mod generate;
mod help;
mod limit;
mod manual;
mod network;
mod prove;
mod recheck;
mod replay;
mod report;
mod schema;
mod study;
mod taken_at;

use std::fs::File;
use std::process::Output;

use bench::{Bench, harness};

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
    let told =
        ("", "invalid value '20' for '--latency <TIME>': \"20\" has no unit", &["write \"20 ms\""][..]);
    Bench::new().refuses_usage(&["choose", "--latency", "20"], told);
    Bench::new().refuses_usage(&["prove", "integrater 5"], ("", "is not a law", &["write \"integrator 5\""]));
    Bench::new().refuses_usage(&["stduy"], ("", "unrecognized subcommand", &["'study'"]));
}

/// The commands with a long answer as well as those with a short one.
const ANSWERS: [&[&str]; 5] =
    [&[], &["--help"], &["--version"], &["study", "--json"], &["emit", "--bounce", "5 ms", "--tick", "1 ms"]];

#[cfg(target_os = "linux")]
#[test]
fn command_on_a_full_disk_says_so_and_ends_with_2() {
    let full = File::options().write(true).open("/dev/full").expect("the kernel's full device");
    for arguments in ANSWERS {
        let full = full.try_clone().expect("a handle");
        let output = harness().args(arguments).stdout(full).output().expect("the command runs");
        let stderr = String::from_utf8(output.stderr).expect("UTF-8");
        assert_eq!(output.status.code(), Some(2), "{arguments:?}: {stderr}");
        assert!(
            stderr.starts_with(
                "error: standard output cannot be written: no space left on device\nhelp: make room"
            ),
            "{arguments:?}: {stderr}"
        );
    }
}

#[test]
fn command_whose_reader_goes_away_ends_quietly() {
    for arguments in ANSWERS {
        let (reader, writer) = std::io::pipe().expect("a pipe");
        drop(reader);
        let output = harness().args(arguments).stdout(writer).output().expect("the command runs");
        assert_eq!(output.status.code(), Some(0), "{arguments:?}");
        assert!(output.stderr.is_empty(), "{arguments:?}: {}", String::from_utf8_lossy(&output.stderr));
    }
}

#[test]
fn command_whose_reader_goes_away_still_tells_the_outcome() {
    for (code, law) in [(0, "shift-register 3"), (1, "shift-register 2")] {
        let (reader, writer) = std::io::pipe().expect("a pipe");
        drop(reader);
        let arguments = ["prove", law, "--envelope", "dwell=30 bounce=5"];
        let output = harness().args(arguments).stdout(writer).output().expect("the command runs");
        assert_eq!(output.status.code(), Some(code), "{}", String::from_utf8_lossy(&output.stderr));
    }
}
