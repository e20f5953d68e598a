//! `harness prove` from outside: true and refuted claims, witnesses, tables.

use std::io::BufReader;

use integration_tests::toggle::TOGGLE;

use crate::bench::{Bench, Told};

const ENVELOPE: &str = "dwell=20 bounce=5/3 glitch=1/1 quiet=10";
const LAMP: &str = ".i 1\n.o 1\n.r off\n0 off off 0\n1 off on 0\n0 on off 1\n1 on on 1\n.e\n";

#[test]
fn prove_of_a_true_claim_ends_with_0_and_gives_exact_bounds() {
    let run = Bench::new()
        .run(&["prove", "state-machine confirm=2 patience=2 lockout=4/2", "--envelope", ENVELOPE])
        .ends(0);
    // The limit of section 3 of the core's own documents: max(B + G, G - 1) + G + 1.
    for part in [
        "Proved       every operation is reported once and in order",
        "Make         at most 8 samples, at least 1; no logic can promise less than 8 (1.00 x)",
        "Break        at most 6 samples, at least 1; no logic can promise less than 6 (1.00 x)",
        "slowest make:",
    ] {
        assert!(run.stdout.contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    assert!(!run.stdout.contains("again: "), "{}", run.stdout);
}

/// Immunity, shortest operations and recovery of an integrator: by hand, five samples in a row or in all make it
/// turn over, so four of a disturbance never do.
#[test]
fn prove_shows_what_holds_beyond_the_bounds() {
    let bench = Bench::new();
    let run = bench.run(&["prove", "integrator 5", "--envelope", ENVELOPE]).ends(0);
    for part in [
        "Immunity bears disturbances up to 4 samples while open, or up to 4 samples while closed, all else as it is",
        "a lone one from rest is never reported up to 4 while open and up to 4 while closed",
        "Shortest operations always served, in samples: 12 closed with 10 open",
        "Recovery right for good within 12 samples after an operation that was too short",
        "right for good within 7 samples from any state of the law",
    ] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    let beyond = bench.run(&["prove", "integrator 5", "--envelope", ENVELOPE, "--json"]).ends(0).json();
    let beyond = &beyond["result"]["beyond"];
    assert_eq!(beyond["lone_disturbance"], serde_json::json!({ "open": 4, "closed": 4 }));
    assert_eq!(beyond["immunity"], serde_json::json!({ "open": 4, "closed": 4 }));
    assert_eq!(beyond["shortest_operations"], serde_json::json!([{ "open": 10, "closed": 12 }]));
    assert_eq!(beyond["after_short_operations"]["within_samples"], 12);
    assert_eq!(beyond["not_searched"], serde_json::json!({}));
}

/// A proof too large to be repeated says so, and how to ask.
#[test]
fn prove_of_a_large_product_says_what_was_not_searched_and_how_to_ask() {
    let bench = Bench::new();
    let law = "state-machine confirm=4 patience=4 lockout=15";
    let line = ["prove", law, "--envelope", "dwell=160 bounce=16 glitch=3 quiet=80"];
    let quick = bench.run(&line).ends(0);
    for part in ["Not searched immunity, shortest operations and recovery", "--thorough does it all the same"]
    {
        assert!(quick.flowing().contains(part), "\"{part}\" is not in {}", quick.stdout);
    }
    let thorough = bench.run(&[&line[..], &["--thorough"]].concat()).ends(0);
    assert!(
        thorough.flowing().contains("Immunity bears disturbances up to 3 samples"),
        "{}",
        thorough.stdout
    );
    assert!(!thorough.flowing().contains("Not searched"), "{}", thorough.stdout);
}

/// A lamp that turns over has no position to come back to, and the best lamp needs what the best make needs.
#[test]
fn prove_of_a_lamp_shows_its_limit_and_says_nothing_of_recovery() {
    let bench = Bench::with("lamp.kiss2", TOGGLE);
    let line = ["prove", "--table", "lamp.kiss2", "--contract", "alternate", "--envelope", "dwell=5"];
    let run = bench.run(&line).ends(0);
    for part in [
        "the output turns over once for every make",
        "Make at most 1 sample, at least 1; no logic can promise less than 1 (1.00 x)",
        "Recovery says nothing of an output that turns over",
    ] {
        assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
    }
    assert!(!run.stdout.contains("--thorough"), "{}", run.stdout);
}

/// The row of a timing diagram, one character a tick.
fn row(stdout: &str, name: &str) -> String {
    let line =
        stdout.lines().find(|line| line.starts_with(name)).unwrap_or_else(|| panic!("{name}: {stdout}"));
    line[name.len()..].trim().to_owned()
}

#[test]
fn prove_of_a_refuted_claim_ends_with_1_and_its_witness_is_what_was_drawn() {
    let bench = Bench::new();
    let line = ["prove", "shift-register 3", "--envelope", ENVELOPE, "--witness", "w.vcd"];
    let run = bench.run(&line).ends(1);
    assert!(run.stdout.contains("Refuted      an edge is reported that the contact did not make"));
    assert!(run.flowing().contains("Written w.vcd"), "{}", run.stdout);
    assert_eq!(run, bench.run(&line), "the same bytes twice");

    // Read by a crate of others: one tick of rest, then a column a tick of 1 ms.
    let bytes = std::fs::read(bench.path().join("w.vcd")).expect("a file");
    let mut parser = vcd::Parser::new(BufReader::new(bytes.as_slice()));
    let header = parser.parse_header().expect("a VCD");
    assert!(
        header
            .items
            .iter()
            .any(|item| matches!(item, vcd::ScopeItem::Comment(text) if text.contains("harness prove")))
    );
    let commands: Vec<vcd::Command> = parser.map(|command| command.expect("a VCD")).collect();
    for (name, drawn) in [("contact", "contact"), ("samples", "reads"), ("output", "output")] {
        let code = header.find_var(&["witness", name]).expect("a channel").code;
        let mut values = Vec::new();
        let (mut now, mut value) = (0_u64, None);
        for command in &commands {
            match command {
                vcd::Command::Timestamp(at) => {
                    values.extend((now..*at).filter(|ns| ns % 1_000_000 == 0).map(|_| value));
                    now = *at;
                }
                vcd::Command::ChangeScalar(id, new) if *id == code => value = Some(*new),
                _ => {}
            }
        }
        let read: String = values
            .into_iter()
            .skip(1)
            .map(|value| if value == Some(vcd::Value::V1) { '#' } else { '_' })
            .collect();
        assert_eq!(read, row(&run.stdout, drawn), "{name}");
    }

    // And by the command itself, which finds the same fault in it.
    let replay = ["replay", "shift-register 3", "w.vcd", "--channel", "witness.samples", "--closed", "high"];
    let again = bench.run(&[&replay[..], &["--tick", "1 ms", "--gap", "2500 us"]].concat());
    assert!(again.stderr.is_empty() && again.code != Some(2), "{}", again.stderr);
}

/// Splits a line as a shell would: double and single quotes and spaces.
fn words(line: &str) -> Vec<String> {
    let (mut words, mut quote) = (vec![String::new()], None);
    for letter in line.chars() {
        match (quote, letter) {
            (None, '"' | '\'') => quote = Some(letter),
            (Some(open), _) if open == letter => quote = None,
            (None, ' ') => words.push(String::new()),
            _ => words.last_mut().expect("never empty").push(letter),
        }
    }
    words
}

/// The line that a refutation prints says the same again.
#[track_caller]
fn says_it_again(bench: &Bench, arguments: &[&str]) {
    let run = bench.run(arguments).ends(1);
    // A stroke at the end of a line joins it with the next, as a shell has it.
    let joined = run.stdout.replace(" \\\n   ", "");
    let line = joined.lines().find_map(|line| line.strip_prefix("again: harness ")).expect("a line");
    let words = words(line);
    let words: Vec<&str> = words.iter().map(String::as_str).collect();
    assert_eq!(bench.run(&words), run, "{line}");
}

#[test]
fn prove_again_gives_the_same_answer() {
    let bench = Bench::with("a lamp.kiss2", LAMP)
        .and("mealy.kiss2", LAMP.replace("1 off on 0", "1 off on 1").replace("0 on off 1", "0 on off 0"))
        .and("contact.toml", "[required]\nbounce = \"5 ms\"\n[clock]\ntick = \"1 ms\"\nlost = \"1 tick\"\n");
    says_it_again(&bench, &["prove", "shift-register 3", "--envelope", ENVELOPE]);
    says_it_again(&bench, &["prove", "shift-register 3", "--envelope", ENVELOPE, "--tick", "30 Hz"]);
    says_it_again(&bench, &["prove", "shift-register 3", "--bounce", "5 ms", "--tick", "1 ms"]);
    says_it_again(&bench, &["prove", "shift-register 3", "--requirement", "contact.toml"]);
    says_it_again(&bench, &["prove", "integrator 3", "--contract", "alternate", "--envelope", ENVELOPE]);
    says_it_again(&bench, &["prove", "--table", "a lamp.kiss2", "--envelope", ENVELOPE]);
    let mealy = ["prove", "--table", "mealy.kiss2", "--reading", "mealy", "--envelope", ENVELOPE];
    says_it_again(&bench, &mealy);
}

#[test]
fn prove_with_several_tick_periods_is_refused() {
    let helps = ["choose one, such as --tick \"1 ms\""];
    let told: Told<'_> = ("", "there are several tick periods: 1 ms, 2 ms", &helps);
    let law = ["prove", "integrator 5", "--tick", "1 ms,2 ms"];
    Bench::new().refuses(&[&law[..], &["--bounce", "5 ms"]].concat(), &[told]);
    Bench::new().refuses(&[&law[..], &["--envelope", "dwell=20"]].concat(), &[told]);
}

#[test]
fn prove_without_law_or_envelope_or_with_two_envelopes_is_refused() {
    let bench = Bench::new();
    bench.refuses(
        &["prove", "--envelope", "dwell=20"],
        &[("", "no law is given", &["\"integrator 5\"", "--table"])],
    );
    bench.refuses(
        &["prove", "integrator 5"],
        &[("", "no envelope is given", &["--envelope", "--requirement"])],
    );
    let told: Told<'_> = ("", "the envelope is given in ticks and by", &["either --envelope"]);
    bench.refuses(&["prove", "integrator 5", "--envelope", "dwell=20", "--bounce", "5 ms"], &[told]);
    bench.refuses(&["prove", "integrator 5", "gate.vcd", "--envelope", "dwell=20"], &[told]);
}

/// `prove --table` refuses it so.
#[track_caller]
fn refuses_table(name: &str, content: impl AsRef<[u8]>, told: &[Told<'_>]) {
    Bench::with(name, content).refuses(&["prove", "--table", name, "--envelope", "dwell=5"], told);
}

#[test]
fn table_with_faults_is_refused_at_each_of_them() {
    let told: [Told<'_>; 2] = [
        ("lamp.kiss2:5:1", "\"2\" is no sample", &["use 0 (open), 1 (closed) or - (either)"]),
        ("lamp.kiss2:6:1", "a line of a table has 4 words, not 2", &["present state, next state, output"]),
    ];
    refuses_table(
        "lamp.kiss2",
        LAMP.replace("1 off on 0", "2 off on 0").replace("0 on off 1", "0 on"),
        &told,
    );
    let told: [Told<'_>; 2] = [
        ("lamp.csv:3:7", "\"2\" is no output", &["use 0 (open) or 1 (closed)"]),
        ("lamp.csv:4:1", "a line of a table has 4 fields, not 3", &["state,sample,next,output"]),
    ];
    refuses_table("lamp.csv", "state,sample,next,output\na,0,a,0\na,1,b,2\nb,0,a\n", &told);
}

#[test]
fn table_that_is_none_is_refused_once() {
    refuses_table("lamp.kiss2", "", &[("lamp.kiss2", "the table is empty", &["KISS2"])]);
    refuses_table("lamp.kiss2", "# only this\n", &[("lamp.kiss2", "the table is empty", &["KISS2"])]);
    let rubbish: Vec<u8> = (0..2048_u32).map(|n| (n.wrapping_mul(2_654_435_761) >> 13) as u8).collect();
    refuses_table("lamp.kiss2", rubbish, &[("lamp.kiss2", "the table is no text", &["KISS2"])]);
    let missing: Told<'_> = ("none.kiss2", "the table cannot be read: no such file", &["check the path"]);
    let folder: Told<'_> = (".", "the table cannot be read: is a directory", &["name a file"]);
    for told in [missing, folder] {
        Bench::new().refuses(&["prove", "--table", told.0, "--envelope", "dwell=5"], &[told]);
    }
}

#[test]
fn table_with_very_many_bad_lines_lists_the_first_and_says_so() {
    let text = LAMP.replace(".e\n", &"0 on\n".repeat(30));
    let bench = Bench::with("lamp.kiss2", text);
    let run = bench.run(&["prove", "--table", "lamp.kiss2", "--envelope", "dwell=5"]).ends(2);
    assert_eq!(run.stderr.matches("error: lamp.kiss2:").count(), 21, "{}", run.stderr);
    assert!(run.stderr.contains("more bad lines follow"), "{}", run.stderr);
}

/// Incomplete, not deterministic, not reachable, without reset, of the wrong width, with something left open.
#[test]
fn table_that_is_no_machine_is_refused_whatever_is_wrong() {
    let edited = |from: &str, to: &str| LAMP.replace(from, to);
    for (text, place, message, help) in [
        (
            edited("1 on on 1\n", ""),
            "lamp.kiss2:6:3",
            "state \"on\" has no line for sample 1 (closed)",
            "say where",
        ),
        (
            edited("1 on on 1\n", "1 on on 1\n1 on off 1\n"),
            "lamp.kiss2:8:3",
            "state \"on\" with sample 1 (closed) was already given in line 7, with another next state",
            "keep one of the two",
        ),
        (
            edited(".e", "- far on 1\n.e"),
            "lamp.kiss2:8:3",
            "state \"far\" is never reached from the reset state \"off\"",
            "remove its lines",
        ),
        (edited(".r off\n", ""), "lamp.kiss2", "the table names no reset state", ".r off"),
        (edited(".i 1", ".i 2"), "lamp.kiss2:1:4", ".i says \"2\" bits", ""),
        (
            edited("1 off on 0", "1 off - 0"),
            "lamp.kiss2:5:7",
            "the next state of \"off\" is left open",
            "name the state",
        ),
    ] {
        let helps = if help.is_empty() { vec![] } else { vec![help] };
        refuses_table("lamp.kiss2", text, &[(place, message, &helps)]);
    }
}

#[test]
fn envelope_that_contradicts_itself_is_refused() {
    let bench = Bench::new();
    for (envelope, message, help) in [
        ("dwell=0", "an envelope needs a dwell of at least 1 tick", "write"),
        ("dwell=9 glitch=1 quiet=0", "a quiet of 0 ticks lets one disturbance run into the next", "quiet=1"),
        ("dwell=9 bounse=3", "\"bounse\" is no part of an envelope", "write bounce="),
    ] {
        for command in [&["prove", "integrator 3"][..], &["limit"]] {
            let line = [command, &["--envelope", envelope]].concat();
            bench.refuses_usage(&line, ("", message, &[help]));
        }
    }
}

#[test]
fn prove_that_would_not_fit_says_unfinished_and_ends_with_2() {
    let told: Told<'_> = ("", "unfinished: the envelope has more than", &["use a longer tick period"]);
    let envelope = "dwell=100000000 bounce=5 glitch=1 quiet=100000";
    Bench::new().refuses(&["prove", "integrator 5", "--envelope", envelope], &[told]);
}

/// A proof that comes later than the requirement allows is no reason to be content.
#[test]
fn prove_holds_the_required_latency_against_the_proof() {
    let text = "[required]\nlatency = \"20 ms\"\nshortest_closed = \"60 ms\"\nshortest_open = \"60 ms\"\n\
                bounce = \"5 ms\"\ndisturbance = \"1 ms\"\nquiet = \"10 ms\"\n[clock]\ntick = \"4 ms\"\n";
    let prove = |latency: &str, code: i32| {
        let text = text.replace("20 ms", latency);
        let bench = Bench::with("contact.toml", &text);
        let law = "state-machine confirm=2 patience=2 lockout=1";
        let asked = ["prove", law, "--requirement", "contact.toml"];
        let json = bench.run(&[&asked[..], &["--json"]].concat()).ends(code).json();
        let found = json["result"]["required_latency"]["make"].clone();
        (bench.run(&asked).ends(code).flowing(), found)
    };
    let (text, late) = prove("10 ms", 1);
    // 5 samples, each 2 % long, and the jitter of 20 us.
    assert_eq!((&late["allowed_ns"], &late["below_ns"]), (&10_000_000.into(), &20_420_000.into()), "{text}");
    assert!(text.contains("at most 5 samples (less than 20.5 ms), at least"), "{text}");
    assert!(text.contains("10.5 ms more than the 10 ms required"), "{text}");
    assert!(prove("40 ms", 0).0.contains("as required, 40 ms"));
}
