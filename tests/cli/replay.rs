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
