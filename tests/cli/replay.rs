//! `harness replay` over the built-in recording, written to a file: careless choices fail on it.

use harness::demo;

use crate::bench::Bench;

fn demo_bench() -> Bench {
    Bench::with("vent.vcd", demo::RECORDING)
}

#[track_caller]
fn ends(law: &str, tick: &str, code: i32, has: &str) {
    let run = demo_bench().run(&["replay", law, "vent.vcd", "--closed", "high", "--tick", tick]).ends(code);
    assert!(run.stdout.contains(has), "\"{has}\" is not in {}", run.stdout);
    assert!(run.stderr.is_empty(), "{}", run.stderr);
}

#[test]
fn replay_of_careless_choices_fails_on_the_demo() {
    ends("shift-register 3", "1 ms", 1, "False edge");
    ends("shift-register 1", "10 ms", 1, "False edge");
}

#[test]
fn replay_of_a_careful_choice_holds_on_the_demo() {
    ends("shift-register 4", "1 ms", 0, "none missed and none false, at any phase of the nominal tick");
}

#[test]
fn replay_of_what_study_recommends_holds_on_the_demo() {
    let study = Bench::new().run(&["study"]).ends(0);
    let line = study.stdout.lines().find_map(|line| line.strip_prefix("Recommended  ")).expect("a line");
    let (law, tick) = line.split_once(" at a tick of ").expect("law and tick");
    let run = demo_bench().run(&[
        "replay",
        law,
        "vent.vcd",
        "--closed",
        "high",
        "--tick",
        tick,
        "--tolerance",
        "2 %",
    ]);
    assert_eq!(run.code, Some(0), "{}", run.stdout);
}

#[test]
fn replay_of_a_slow_tick_misses_the_quick_operation() {
    ends("shift-register 2", "50 ms", 1, "Missed");
}

#[test]
fn replay_gives_the_same_bytes_twice_and_json_that_parses() {
    let line = ["replay", "shift-register 3", "vent.vcd", "--closed", "high", "--tick", "1 ms", "--json"];
    let run = demo_bench().run(&line).ends(1);
    assert_eq!(run, demo_bench().run(&line));
    let json = run.json();
    assert_eq!((&json["outcome"], &json["command"]), (&"does-not-hold".into(), &"replay".into()));
    assert!(!json["result"]["runs"][0]["measured"].is_null(), "{json}");
}

#[test]
fn replay_at_many_ticks_takes_one_line_for_each() {
    let line = ["replay", "integrator 3", "vent.vcd", "--closed", "high"];
    let run = demo_bench().run(&[&line[..], &["--tick", "1 ms, 2 ms, 5 ms, 10 ms"]].concat());
    let rows = |tick: &str| run.stdout.lines().filter(|line| line.starts_with(tick)).count();
    assert!(["1 ms ", "2 ms ", "5 ms ", "10 ms "].into_iter().all(|tick| rows(tick) == 1), "{}", run.stdout);
    assert!(run.stdout.lines().count() <= 12, "{}", run.stdout);
    assert!(run.flowing().contains("; none missed, "), "{}", run.stdout);
    assert!(run.flowing().contains("--tick with one period shows where they are"), "{}", run.stdout);
    // One line tells the same as the whole of one period.
    let one = demo_bench().run(&[&line[..], &["--tick", "5 ms"]].concat()).flowing();
    let worst =
        one.split("always less than ").nth(1).and_then(|rest| rest.split(';').next()).expect("a delay");
    assert!(run.stdout.contains(&format!("5 ms         make < {worst}, ")), "{worst}: {}", run.stdout);
}

/// A last break so near the end that no tick may see it is no change that was judged.
#[test]
fn replay_counts_what_the_recording_cuts_off_apart() {
    let mut csv = "time_ms,gate\n0,0\n".to_owned();
    for operation in 0..3 {
        let make = 100 + operation * 300;
        csv.push_str(&format!("{make},1\n{},0\n", make + 100));
    }
    csv.push_str("801,0\n");
    let bench = Bench::with("gate.csv", csv);
    let line =
        ["replay", "shift-register 3", "gate.csv", "--time-unit", "ms", "--closed", "high", "--tick", "1 ms"];
    let text = bench.run(&line).ends(0).flowing();
    assert!(text.contains("Makes 3 changes; "), "{text}");
    assert!(
        text.contains("Breaks 2 changes and 1 more too near the end of the recording to be judged; "),
        "{text}"
    );
    assert!(text.contains("of 5 changes; "), "{text}");
}
