//! `harness limit` from outside: the limit, the logic that reaches it in every format, and where there is none.

use harness::demo;

use crate::bench::{Bench, Told};

const ENVELOPE: &str = "dwell=20 bounce=5/3 glitch=1/1 quiet=10";
/// Quiet lies between the two widths, where no formula is known.
const NO_FORMULA: &str = "dwell=30 bounce=3/2 glitch=1/3 quiet=2";

#[test]
fn limit_of_an_envelope_is_that_of_the_closed_form() {
    let run = Bench::new().run(&["limit", "--envelope", ENVELOPE, "--tick", "1 ms"]).ends(0);
    // max(B + G, G - 1) + G + 1, by hand.
    for part in [
        "no logic whatever can promise less",
        "Make 8 samples (less than 8 ms at the nominal tick)",
        "Break 6 samples (less than 6 ms at the nominal tick)",
        "says the same",
        "Frontier one point, 8 and 6",
        "\"state-machine confirm=2 patience=2 lockout=4/2\" reaches it too",
        "slowest break:",
    ] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
}

/// What was written as a table is proved by another run: exactly the limit, and 1.00 times it.
#[test]
fn limit_logic_written_as_a_table_is_proved_to_reach_it() {
    for (envelope, make, break_) in [(ENVELOPE, 8, 6), (NO_FORMULA, 9, 8)] {
        for file in ["best.kiss2", "best.csv"] {
            for earliest in [&[][..], &["--earliest"]] {
                let bench = Bench::new();
                let line = [&["limit", "--envelope", envelope, "--machine", file][..], earliest].concat();
                let run = bench.run(&line).ends(0);
                assert!(run.flowing().contains(&format!("Written {file}")), "{}", run.stdout);
                let proved = bench.run(&["prove", "--table", file, "--envelope", envelope, "--json"]).ends(0);
                let result = proved.json()["result"].clone();
                let bounds = &result["bounds_samples"];
                assert_eq!(
                    (&bounds["make"]["worst"], &bounds["break"]["worst"]),
                    (&make.into(), &break_.into())
                );
                assert_eq!(result["limit_samples"]["make"], make);
            }
        }
    }
}

#[test]
fn limit_logic_is_written_in_every_format_and_nothing_else_is() {
    let bench = Bench::new();
    for (file, has) in [
        ("best.txt", "closed sample"),
        ("best.dot", "digraph machine {"),
        ("best.svg", "<svg"),
        ("best.rs", "pub static BEST: TableLaw"),
    ] {
        bench.run(&["limit", "--envelope", NO_FORMULA, "--machine", file]).ends(0);
        let text = std::fs::read_to_string(bench.path().join(file)).expect("a file");
        assert!(text.contains(has), "{file}: {text}");
    }
    assert_eq!(bench.listing().len(), 4);
    let told: Told<'_> = ("best.pdf", "\"pdf\" is no format for a machine", &["end the file in .kiss2"]);
    bench.refuses(&["limit", "--envelope", NO_FORMULA, "--machine", "best.pdf"], &[told]);
}

/// The logic that was found runs over a recording as any law does, and so does a law written as a table.
#[test]
fn limit_logic_written_as_a_table_is_replayed() {
    let bench = Bench::with("vent.vcd", demo::RECORDING);
    let recording = ["vent.vcd", "--closed", "high", "--tick", "5 ms", "--quiet-time", "20 ms"];
    bench.run(&[&["limit", "--machine", "best.kiss2"], &recording[..]].concat()).ends(0);
    let replay = |law: &str| bench.run(&[&["replay", law], &recording[..], &["--json"]].concat());
    assert_eq!(replay("best.kiss2").ends(0).json()["result"]["law"], "best.kiss2");
    // A law that fails on this recording fails as a table in the same places.
    let law = "shift-register 1";
    bench.run(&["prove", law, "--envelope", "dwell=3", "--machine", "law.csv"]).ends(0);
    let [table, built_in] = ["law.csv", law].map(|law| replay(law).ends(1).json());
    assert_eq!(table["result"]["runs"], built_in["result"]["runs"]);
}

#[test]
fn limit_where_no_logic_exists_ends_with_1_and_says_why() {
    let bench = Bench::new();
    for (envelope, reason) in [
        (
            "dwell=9 bounce=3 glitch=1/2 quiet=1",
            "quiet of 1 sample between disturbances of 1 lets either position",
        ),
        ("dwell=3 bounce=3", "a waveform of 4 samples leaves a change in doubt for ever"),
        ("dwell=3/2 lost=2", "the contact may be closed between two samples"),
    ] {
        let run = bench.run(&["limit", "--envelope", envelope, "--machine", "best.kiss2"]).ends(1);
        assert!(run.flowing().contains(&format!("Unsolvable no logic exists: {reason}")), "{}", run.stdout);
        let json = bench.run(&["limit", "--envelope", envelope, "--json"]).ends(1).json();
        assert!(json["result"]["unsolvable"].as_str().is_some_and(|text| text.contains(reason)), "{json}");
    }
    assert!(bench.listing().is_empty(), "there is no logic to be written");
}

#[test]
fn limit_that_does_not_fit_is_unknown_and_ends_with_2() {
    let told: Told<'_> = (
        "",
        "the limit is unknown: the envelope alone has too many states",
        &["a longer tick period", "harness prove"],
    );
    let envelope = "dwell=100000000 bounce=50 glitch=30/50 quiet=40";
    Bench::new().refuses(&["limit", "--envelope", envelope], &[told]);
}

/// Where the search is too long the closed form answers, and the built-in machine is what is written.
#[test]
fn limit_of_large_numbers_is_the_closed_form_with_the_machine_of_its_proof() {
    let bench = Bench::new();
    let envelope = "dwell=150 bounce=60 glitch=12 quiet=26";
    let run = bench.run(&["limit", "--envelope", envelope, "--machine", "best.csv", "--json"]).ends(0);
    let result = run.json()["result"].clone();
    // 60 + 2 * 12 + 1, by hand.
    assert_eq!(result["limit_samples"]["make"], 85);
    assert_eq!(result["evidence"], "closed-form");
    let law = "state-machine confirm=13 patience=13 lockout=59";
    assert_eq!((&result["law"], &result["logic"]["name"]), (&law.into(), &law.into()));
    let same = bench.run(&["compare", "best.csv", law]).ends(0);
    assert!(same.stdout.contains("both report the same at every sample"), "{}", same.stdout);
}
