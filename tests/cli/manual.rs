//! The manual pages through groff, and the scripts for shells through the shells that are there.

use std::fs;
use std::io::Write;
use std::process::{Command, Stdio};

use crate::bench::{Bench, harness};
use crate::help::commands;

/// What groff says about a page, every warning on; and the page as text.
fn set(page: &[u8]) -> (String, String) {
    let mut groff = Command::new("groff");
    groff.args(["-man", "-Tascii", "-ww", "-P-cbou"]);
    groff.stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::piped());
    let mut child = groff.spawn().expect("this test needs groff: apt-get install groff");
    child.stdin.take().expect("a pipe").write_all(page).expect("groff reads");
    let output = child.wait_with_output().expect("groff ends");
    let text = |bytes| String::from_utf8_lossy(bytes).into_owned();
    (text(&output.stderr), text(&output.stdout))
}

#[test]
fn manual_pages_are_set_without_a_warning() {
    let bench = Bench::new();
    bench.run(&["manual", "--output", "man1"]).ends(0);
    let mut expected: Vec<String> =
        commands().iter().map(|command| format!("man1/harness-{command}.1")).collect();
    expected.extend(["man1".to_owned(), "man1/harness.1".to_owned()]);
    expected.sort();
    assert_eq!(bench.listing().into_keys().collect::<Vec<_>>(), expected);
    for name in expected.iter().filter(|name| name.ends_with(".1")) {
        let page = fs::read(bench.path().join(name)).expect("a page");
        let (warnings, text) = set(&page);
        assert_eq!(warnings, "", "{name}");
        for part in ["NAME", "SYNOPSIS", "DESCRIPTION", "--json", "--quiet"] {
            assert!(text.contains(part), "{part} is not in {name}:\n{text}");
        }
    }
    assert_eq!(set(b".TH X 1\n.no-such-request\n").0.lines().count(), 1, "so the test above can fail");
}

#[test]
fn manual_page_of_one_command_holds_its_examples() {
    let run = Bench::new().run(&["manual", "study"]).ends(0);
    let (_, text) = set(run.stdout.as_bytes());
    assert!(text.contains("harness study --requirement contact.toml --output results"), "{text}");
    let told = [("", "\"stduy\" is not a command", &["write study"][..])];
    Bench::new().refuses(&["manual", "stduy"], &told);
}

#[test]
fn completions_for_bash_are_read_by_bash_and_complete_a_command() {
    let script = Bench::new().run(&["completions", "bash"]).ends(0).stdout;
    let ask =
        "COMP_WORDS=(harness rec); COMP_CWORD=1; _harness harness rec harness; echo \"${COMPREPLY[*]}\"";
    let output = Command::new("bash").args(["--norc", "-c", &format!("{script}\n{ask}")]).output();
    let output = output.expect("bash runs");
    assert_eq!(String::from_utf8_lossy(&output.stdout).trim(), "recheck", "{output:?}");
}

#[test]
fn completions_for_every_shell_name_every_command() {
    for shell in ["bash", "elvish", "fish", "powershell", "zsh"] {
        let script = Bench::new().run(&["completions", shell]).ends(0).stdout;
        for command in commands() {
            assert!(script.contains(&command), "{command} is not in the script for {shell}");
        }
    }
}

#[test]
fn command_starts_in_milliseconds() {
    // The best of several: what else the machine does is not counted against it.
    let best = (0..10).map(|_| {
        let start = std::time::Instant::now();
        let output = harness().arg("--help").output().expect("the command runs");
        assert!(output.status.success());
        start.elapsed()
    });
    let best = best.min().expect("ten runs");
    assert!(best.as_millis() < 100, "{best:?}");
}
