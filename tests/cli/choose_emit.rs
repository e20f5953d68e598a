//! `harness choose` and `harness emit` from outside.

use std::process::Command;

use crate::bench::{Bench, Run};

const FIGURES: [&str; 8] =
    ["--bounce", "5 ms", "--disturbance", "300 us", "--quiet-time", "5 ms", "--latency", "20 ms"];

#[test]
fn choose_from_figures_alone_ranks_what_holds_and_says_what_was_assumed() {
    let run = Bench::new().run(&[&["choose"][..], &FIGURES].concat()).ends(0);
    for part in [
        "bounces for at most 5 ms after a make and 5 ms after a break",
        "First state-machine confirm=2 patience=2 lockout=2 at a tick of 2 ms",
        "shortest_closed = 70 ms, ",
        "Left out disturbances 5 ms apart come faster than a tick of 5 ms can tell apart",
        "* none that holds beats it",
    ] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    assert!(!run.flowing().contains("latency.make = "), "it was given: {}", run.stdout);
    // Why each value was assumed is for those who ask.
    assert!(!run.flowing().contains("default: "), "{}", run.stdout);
    let run = Bench::new().run(&[&["choose", "--details"][..], &FIGURES].concat()).ends(0);
    for part in [
        "required.shortest_closed = 70 ms, ",
        "(default: ",
        "by closed form; the majority register by exploring it",
    ] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    assert!(run.stderr.is_empty(), "{}", run.stderr);
}

#[test]
fn choose_for_what_nothing_can_do_ends_with_1_and_says_by_how_much() {
    let run = Bench::new().run(&["choose", "--bounce", "5 ms", "--latency", "2 ms"]).ends(1);
    assert!(run.stdout.contains("None holds"), "{}", run.stdout);
    assert!(run.flowing().contains("more than the 2 ms allowed"), "{}", run.stdout);
    assert!(!run.stdout.contains("none that holds beats it"), "no row has the mark: {}", run.stdout);
    let json =
        Bench::new().run(&["choose", "--bounce", "5 ms", "--latency", "2 ms", "--json"]).ends(1).json();
    assert_eq!((&json["outcome"], &json["schema"]), (&"does-not-hold".into(), &1.into()));
}

#[test]
fn choose_and_emit_give_the_same_bytes_twice() {
    for command in [&["choose", "--json"][..], &["emit"]] {
        let line = [command, &FIGURES].concat();
        assert_eq!(Bench::new().run(&line), Bench::new().run(&line));
    }
}

#[test]
fn emit_to_standard_output_is_formatted_and_is_what_a_file_gets() {
    let bench = Bench::new();
    let run = bench.run(&[&["emit"][..], &FIGURES].concat()).ends(0);
    bench.run(&[&["emit", "--output", "gate.rs"][..], &FIGURES].concat()).ends(0);
    let file = bench.path().join("gate.rs");
    assert_eq!(std::fs::read_to_string(&file).expect("a file"), run.stdout);
    let formatted = Command::new("rustfmt")
        .args(["--check", "--edition", "2024"])
        .arg(&file)
        .output()
        .expect("rustfmt runs");
    assert!(formatted.status.success(), "{}", String::from_utf8_lossy(&formatted.stdout));
}

#[test]
fn emit_of_a_law_that_does_not_hold_writes_nothing_and_ends_with_1() {
    let bench = Bench::new();
    let law = ["emit", "--law", "shift-register 2", "--tick", "1 ms", "--output", "gate.rs"];
    let run = bench.run(&[&law[..], &FIGURES].concat()).ends(1);
    assert!(run.stdout.contains("Recommended  nothing: none of 1 candidates holds"), "{}", run.stdout);
    assert!(bench.listing().is_empty());
}

#[test]
fn emit_of_a_law_that_cannot_be_is_refused() {
    let told = ("", "a window of 70 samples does not fit the register", &["use at most 64"][..]);
    Bench::new().refuses(&["prove", "shift-register 70", "--envelope", "dwell=20"], &[told]);
    let law = ["emit", "--law", "shift-register 70", "--tick", "1 ms"];
    Bench::new().refuses(&[&law[..], &FIGURES].concat(), &[told]);
}

/// Bounce of 5 ms and disturbances of 300 us in time: by hand, two samples confirm, and the bounce touches
/// ceil(5.004 ms / 1.96 ms) = 3 samples at a tick of 2 ms, so a make takes 3 + 1 + 1 + 1 samples.
#[test]
fn choose_shows_where_each_law_works_over_all_tick_periods() {
    let line = [
        "choose",
        "--bounce",
        "5 ms",
        "--disturbance",
        "300 us",
        "--quiet-time",
        "5 ms",
        "--latency",
        "20 ms",
    ];
    let bench = Bench::new();
    let run = bench.run(&[&line[..], &["--plot", "--details", "--list", "1"]].concat()).ends(0);
    for part in [
        "Clock state-machine: works, and is in time, from 200 us to 2.44 ms",
        "and over 734 rounding steps",
        "Free tick 2.4 ms with state-machine",
        "slowest tick in time by the tolerance of the clock: 0 % 2.49 ms,",
        "Power 500 wake-ups a second",
        "asleep for at least 99.95 % of the time",
        "o state-machine, + integrator, x shift-register",
    ] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    let plot = run.stdout.lines().skip_while(|line| !line.contains("20 ms |---"));
    assert!(plot.clone().count() > 10 && plot.clone().all(|line| line.len() <= 80), "{}", run.stdout);

    let result = bench.run(&[&line[..], &["--json"]].concat()).ends(0).json()["result"].clone();
    let curve = &result["clock"]["curves"][0];
    let pieces = curve["pieces"].as_array().expect("a list");
    let at_2_ms = |piece: &&serde_json::Value| {
        piece["from_ns"].as_u64() <= Some(2_000_000) && piece["until_ns"].as_u64() >= Some(2_000_000)
    };
    let piece = pieces.iter().find(at_2_ms).expect("a piece");
    assert_eq!(piece["worst_samples"]["make"], 6);
    assert_eq!(
        piece["worst_samples"]["make"],
        result["choice"]["recommended"]["bounds_samples"]["make"]["worst"]
    );
    assert_eq!(result["sleep"]["operations_per_hour"], 60);
    assert_eq!(result["slowest_by_tolerance"].as_array().map(Vec::len), Some(5));
}

/// A column is no narrower than its header and its times: only a law may be broken, between its parameters.
#[test]
fn table_of_candidates_breaks_no_header_and_no_time_at_80_columns() {
    let vent = Bench::with("vent.vcd", harness::demo::RECORDING);
    let table = |latency: &str| {
        let mut command = vent.command();
        command.env("COLUMNS", "80").args(["choose", "vent.vcd", "--closed", "high", "--tick", "1 ms"]);
        let run = Run::of(command.args(["--latency", latency]).output().expect("the command runs"));
        let rows: Vec<String> =
            run.stdout.lines().skip_while(|line| !line.contains(" law ")).map(str::to_owned).collect();
        rows.split(|row| row.is_empty()).next().expect("a table").to_vec()
    };
    for (latency, last) in [("15 ms", " make"), ("100 ms", "")] {
        let rows = table(latency);
        for header in ["law ", "tick ", "make < ", "break < ", "median ", "bytes"] {
            assert!(rows[0].contains(header), "{rows:#?}");
        }
        assert!(rows[1].matches(" ms ").count() >= 4 && rows[1].ends_with(last), "{rows:#?}");
        assert!(rows.iter().all(|row| row.len() <= 80), "{rows:#?}");
    }
}

#[test]
fn emit_of_a_law_in_the_place_of_a_recording_says_where_it_belongs() {
    let told = ("", "reads as a law", &["give --law \"integrator 6\""][..]);
    Bench::new().refuses(&["emit", "integrator 6", "--bounce", "5 ms", "--latency", "20 ms"], &[told]);
}

#[test]
fn emit_comments_promise_no_more_than_their_constants() {
    let line = [
        "emit",
        "--bounce",
        "5.0001 ms",
        "--latency",
        "40 ms",
        "--shortest-open",
        "81.36 ms",
        "--tick",
        "1 ms",
    ];
    let module = Bench::new().run(&line).ends(0).stdout;
    let comment =
        "/// Shortest time open, in nanoseconds: 81.3 ms.\npub const SHORTEST_OPEN_NS: u64 = 81_360_000;";
    assert!(module.contains(comment), "{module}");
    let comment = "/// Longest bounce after a make, in nanoseconds: 5.01 ms.\n";
    assert!(module.contains(comment), "{module}");
}

#[test]
fn latency_below_zero_is_told_as_a_time() {
    let told = ("", "\"-3 ms\" is below zero; a time is zero or more", &[][..]);
    Bench::new().refuses_usage(&["study", "--latency", "-3 ms"], told);
}
