//! `harness compare` from outside: laws that are one and the same, laws that are not, tables that are none.

use std::io::BufReader;

use crate::bench::{Bench, Told};

/// Four states: a make after two closed samples, a break after two open ones.
const DRAWN: &str = "state,sample,next,output\noff,0,off,0\noff,1,rise,0\nrise,0,off,0\nrise,1,on,0\non,1,on,1\n\
                     on,0,fall,1\nfall,1,on,1\nfall,0,off,1\n";

#[test]
fn compare_of_equivalent_logics_ends_with_0() {
    let bench = Bench::with("drawn.csv", DRAWN);
    for (one, other) in [
        ("shift-register 4", "state-machine confirm=4"),
        ("integrator 4", "integrator 12 up=3 down=3"),
        ("drawn.csv", "shift-register 2"),
        ("majority-register 3 of 3", "shift-register 3"),
    ] {
        let run = bench.run(&["compare", one, other]).ends(0);
        assert!(run.stdout.contains("both report the same at every sample"), "{}", run.stdout);
        assert_eq!(
            bench.run(&["compare", one, other, "--json"]).ends(0).json()["result"]["equivalent"],
            true
        );
    }
}

#[test]
fn compare_of_different_logics_ends_with_1_and_shows_the_fewest_samples() {
    let bench = Bench::with("drawn.csv", DRAWN);
    let run = bench.run(&["compare", "integrator 3", "shift-register 3", "--witness", "w.vcd"]).ends(1);
    // Any contrary sample clears the window, while the integrator only goes one back.
    let expected = "\
tick     1
reads    ##_##
one      ____#
other    _____
";
    assert!(run.stdout.contains(expected), "{}", run.stdout);
    for part in [
        "after 5 samples from rest open, and never after fewer",
        "then integrator 3 reports a make, and shift-register 3 reports nothing",
        "Written w.vcd",
    ] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    let json = bench.run(&["compare", "integrator 3", "shift-register 3", "--json"]).ends(1).json();
    let apart = &json["result"]["apart"];
    assert_eq!((&apart["start"], &apart["samples"]), (&"open".into(), &"11011".into()));
    assert_eq!(apart["edges"], serde_json::json!(["make", null]));

    // Read by a crate of others: one tick of rest, then one tick a millisecond.
    let bytes = std::fs::read(bench.path().join("w.vcd")).expect("a file");
    let mut parser = vcd::Parser::new(BufReader::new(bytes.as_slice()));
    let header = parser.parse_header().expect("a VCD");
    let one = header.find_var(&["apart", "one"]).expect("a channel").code;
    let (mut now, mut rises) = (0, Vec::new());
    for command in parser {
        match command.expect("a VCD") {
            vcd::Command::Timestamp(at) => now = at,
            vcd::Command::ChangeScalar(id, vcd::Value::V1) if id == one => rises.push(now),
            _ => {}
        }
    }
    assert_eq!(rises, [5_000_000], "at the fifth sample, in ns");
    bench.run(&["compare", "drawn.csv", "shift-register 3"]).ends(1);
}

#[test]
fn compare_of_what_is_no_logic_is_refused() {
    let bench = Bench::with("drawn.csv", DRAWN.replace("on,1,on,1\n", ""));
    let incomplete: Told<'_> =
        ("drawn.csv:6:1", "state \"on\" has no line for sample 1 (closed)", &["say where it goes then"]);
    let missing: Told<'_> = ("none.kiss2", "the table cannot be read: no such file", &["check the path"]);
    bench.refuses(&["compare", "drawn.csv", "shift-register 2"], &[incomplete]);
    bench.refuses(&["compare", "shift-register 2", "none.kiss2"], &[missing]);
    let usage: Told<'_> = ("", "the following required arguments were not provided", &["compare"]);
    bench.refuses_usage(&["compare", "shift-register 2"], usage);
    let slip: Told<'_> = ("", "\"shift-registr\" is not a law", &["write \"shift-register 8\""]);
    bench.refuses_usage(&["compare", "shift-register 2", "shift-registr 3"], slip);
}
