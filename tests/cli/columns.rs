//! Text for people: ASCII, no wider than asked, no longer than a screen unless asked.

use harness::demo;

use crate::bench::{Bench, Run};
use crate::help::commands;

/// Every command with an answer for people, those that fail too.
const ANSWERS: [&[&str]; 14] = [
    &[],
    &["--help"],
    &["study"],
    &["study", "vent.vcd", "--closed", "high", "--latency", "5 ms", "--tick", "5 ms"],
    &["characterise", "vent.vcd", "--closed", "high"],
    &["choose", "vent.vcd", "--closed", "high", "--tick", "5 ms"],
    &["choose", "--bounce", "5 ms", "--latency", "6 ms", "--tick", "1 ms"],
    &["prove", "integrator 5", "--envelope", "dwell=20 bounce=5/3 glitch=1/1 quiet=10", "--tick", "1 ms"],
    &["prove", "shift-register 2", "--envelope", "dwell=20 bounce=5/3 glitch=1/1 quiet=10", "--tick", "1 ms"],
    &["replay", "shift-register 3", "vent.vcd", "--closed", "high", "--tick", "1 ms"],
    &["replay", "shift-register 1", "vent.vcd", "--closed", "high", "--tick", "10 ms"],
    &["emit", "--bounce", "5 ms", "--latency", "3 ms", "--tick", "1 ms"],
    &["recheck", "contact.toml"],
    &["manual", "--output", "man1"],
];

const CONTACT: &str = "\
[[recording]]
path = \"vent.vcd\"
[contact]
closed = \"high\"
role = \"guarding\"
[required]
bounce = \"1 ms\"
latency = \"9 ms\"
[clock]
tick = \"5 ms\"
";

fn bench() -> Bench {
    Bench::with("vent.vcd", demo::RECORDING).and("contact.toml", CONTACT)
}

/// In a plain locale, as wide as `columns`, or as wide as it likes.
fn run(bench: &Bench, arguments: &[&str], columns: Option<&str>) -> Run {
    let mut command = bench.command();
    command.env_remove("COLUMNS").env("LC_ALL", "C").args(arguments);
    if let Some(columns) = columns {
        command.env("COLUMNS", columns);
    }
    Run::of(command.output().expect("the command runs"))
}

#[track_caller]
fn fits(arguments: &[&str], text: &str, columns: usize) {
    for line in text.lines() {
        assert!(line.is_ascii(), "{arguments:?}: {line}");
        // A word that is too long by itself, such as a path, is not broken.
        let words = line.split_whitespace().count();
        assert!(line.len() <= columns || words == 1, "{arguments:?}: {} columns: {line}", line.len());
    }
}

#[test]
fn text_of_every_command_is_ascii_and_fits_80_columns() {
    let bench = bench();
    for arguments in ANSWERS {
        let unknown = run(&bench, arguments, None);
        fits(arguments, &unknown.stdout, 80);
        fits(arguments, &unknown.stderr, 80);
        // A screen of a laptop.
        assert!(
            unknown.stdout.lines().count() <= 50,
            "{arguments:?}: more than a screen\n{}",
            unknown.stdout
        );
    }
    for arguments in [ANSWERS[4], ANSWERS[7]] {
        let (narrow, wide) = (run(&bench, arguments, Some("60")), run(&bench, arguments, Some("120")));
        let widest = |run: &Run| run.stdout.lines().map(str::len).max();
        assert!(widest(&narrow) < widest(&wide), "{}", wide.stdout);
        fits(arguments, &wide.stdout, 120);
    }
}

#[test]
fn help_of_every_command_is_ascii_and_fits_80_columns() {
    for command in commands() {
        let help = run(&Bench::new(), &[&command, "--help"], None).ends(0);
        fits(&[&command], &help.stdout, 80);
    }
}

#[test]
fn quiet_leaves_nothing_on_standard_error() {
    let bench = Bench::with("vent.vcd", demo::RECORDING);
    let line = ["characterise", "vent.vcd", "--closed", "high", "--quiet"];
    assert!(bench.run(&line).ends(0).stderr.is_empty());
}
