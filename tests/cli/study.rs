//! `harness study` from outside: the demo, the files it writes, and that nothing depends on the day.

use integration_tests::firmware;

use crate::bench::{Bench, Run, harness};

#[test]
fn study_of_the_demo_says_on_one_screen_what_to_do() {
    let run = Bench::new().run(&["study"]).ends(0);
    for part in [
        "invented",
        "Recorded     ",
        "Envelope     ",
        "Assumed      calm = 0 ns, lost = 0 ticks (by default; choose --details says why)\n",
        "Recommended  ",
        "Proved       ",
        "Measured     ",
        "Next         ",
    ] {
        assert!(run.stdout.contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    assert!(run.stdout.lines().count() <= 32, "{} lines:\n{}", run.stdout.lines().count(), run.stdout);
    let widest = run.stdout.lines().map(|line| line.chars().count()).max();
    assert!(widest <= Some(100), "{widest:?}\n{}", run.stdout);
    assert!(run.stderr.is_empty() && !run.stdout.contains('\x1b'), "{run:?}");
}

#[test]
fn study_writes_its_results_and_a_module_that_compiles() {
    let bench = Bench::new();
    let run = bench.run(&["study", "--output", "results"]).ends(0);
    assert!(
        run.stdout
            .contains("Written      results/report.html, results/study.json, results/vent_push_button.rs"),
        "{}",
        run.stdout
    );
    let names: Vec<String> = bench.listing().into_keys().collect();
    assert_eq!(
        names,
        ["results", "results/report.html", "results/study.json", "results/vent_push_button.rs"]
    );
    let read = |name: &str| std::fs::read_to_string(bench.path().join(name)).expect("a file");
    let results: serde_json::Value = serde_json::from_str(&read("results/study.json")).expect("JSON");
    assert!(results.is_object(), "{results}");
    let target = std::path::Path::new(env!("CARGO_TARGET_TMPDIR")).join("study");
    firmware::check("study", &read("results/vent_push_button.rs"), None, &target)
        .unwrap_or_else(|errors| panic!("{errors}"));
}

#[test]
fn study_gives_the_same_bytes_twice() {
    let [one, two] = [Bench::new(), Bench::new()];
    assert_eq!(one.run(&["study", "-o", "out"]), two.run(&["study", "-o", "out"]));
    assert_eq!(one.listing(), two.listing());
    assert_eq!(one.run(&["study", "--json"]), two.run(&["study", "--json"]));
}

#[test]
fn study_as_json_has_its_schema_and_outcome() {
    let run = Bench::new().run(&["study", "--json"]).ends(0);
    let json = run.json();
    assert_eq!(
        (&json["schema"], &json["command"], &json["outcome"]),
        (&1.into(), &"study".into(), &"holds".into())
    );
    assert!(json["result"].is_object() && run.stderr.is_empty(), "{run:?}");
}

#[test]
fn study_has_colours_only_where_they_are_asked_for() {
    let run = |name: &str, value: &str| {
        Run::of(harness().arg("study").env(name, value).output().expect("the command runs")).ends(0)
    };
    let plain = run("NO_COLOR", "1");
    assert!(!plain.stdout.contains('\x1b'));
    let forced = run("CLICOLOR_FORCE", "1");
    assert!(forced.stdout.contains('\x1b'), "so the test above can fail");
    let both = Run::of(
        harness()
            .arg("study")
            .env("NO_COLOR", "1")
            .env("CLICOLOR_FORCE", "0")
            .output()
            .expect("the command runs"),
    );
    assert_eq!(both, plain);
    // Colour carries no meaning: without it the text is the same.
    assert_eq!(anstream::adapter::strip_str(&forced.stdout).to_string(), plain.stdout);
}

#[test]
fn study_that_does_not_hold_ends_with_1_and_writes_no_module() {
    let bench = Bench::with("vent.vcd", harness::demo::RECORDING);
    let line = ["study", "vent.vcd", "--closed", "high", "--latency", "5 ms", "--output", "results"];
    let run = bench.run(&line).ends(1);
    assert!(run.stdout.contains("Recommended  nothing: none of "), "{}", run.stdout);
    let names: Vec<String> = bench.listing().into_keys().collect();
    assert_eq!(names, ["results", "results/report.html", "results/study.json", "vent.vcd"]);
}

#[test]
fn study_says_which_values_are_defaults() {
    let bench = Bench::with("vent.vcd", harness::demo::RECORDING);
    let line = ["study", "vent.vcd", "--closed", "high", "--latency", "50 ms", "--tick", "5 ms"];
    let run = bench.run(&line);
    for part in
        ["calm = 0 ns", "tolerance = 2 %", "jitter = 20 us", "(by default; choose --details says why)"]
    {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    // What was given or measured is none.
    for part in ["latency.make = ", "tick = ", "bounce.make = "] {
        assert!(!run.flowing().contains(part), "\"{part}\" is in {}", run.stdout);
    }
}

#[test]
fn study_that_finds_nothing_speaks_of_no_proof_and_names_the_latency_asked_for() {
    let bench = Bench::with("vent.vcd", harness::demo::RECORDING);
    let figures = [
        "--shortest-closed",
        "40 ms",
        "--shortest-open",
        "40 ms",
        "--disturbance",
        "4 ms",
        "--quiet-time",
        "15 ms",
    ];
    let study = |latency| {
        let line = ["study", "vent.vcd", "--closed", "high", "--latency", latency];
        bench.run(&[&line[..], &figures].concat()).ends(1)
    };
    let hopeless = study("10 us").flowing();
    for part in [
        "10 us for a make and 10 us for a break are required",
        "lies inside the required envelope; nothing is proved of it",
        "Next relax what is asked: in this envelope no tick and no logic can be so quick",
    ] {
        assert!(hopeless.contains(part), "\"{part}\" is not in {hopeless}");
    }
    assert!(!hopeless.contains("envelope of the proof") && !hopeless.contains("exceeds"), "{hopeless}");

    let line = ["study", "vent.vcd", "--closed", "high", "--latency", "10 us", "--bounce", "1 ms"];
    let exceeding = bench.run(&[&line[..], &figures].concat()).ends(1).flowing();
    assert!(exceeding.contains("leaves the envelope at "), "{exceeding}");
    assert!(exceeding.contains("state the figures that the recording exceeds"), "{exceeding}");
}
