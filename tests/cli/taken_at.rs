//! Recordings of a line with a network between contact and pin: `study`, `replay` and `characterise` agree.

use serde_json::Value;

use crate::bench::Bench;

const NETWORK: &str =
    "[network]\npull = \"10 kohm 5 %\"\nseries = \"1 kohm 5 %\"\ncapacitor = \"100 nF 10 %\"\n";
const CLOCK: &str = "[clock]\ntick = \"1 ms\"\n";
const READING: [&str; 4] = ["gate.csv", "--time-unit", "us", "-r"];

/// Thirty operations with a little bounce, in microseconds.
fn recording() -> String {
    let mut csv = "time_us,gate\n0,1\n".to_owned();
    for operation in 0..30 {
        let make = 200_000 + operation * 400_000;
        for (at, level) in [(0, 0), (150, 1), (300, 0), (150_000, 1), (150_100, 0), (150_200, 1)] {
            csv.push_str(&format!("{},{level}\n", make + at));
        }
    }
    csv + "12600000,1\n"
}

fn bench() -> Bench {
    Bench::with("gate.csv", recording())
        .and("bare.toml", CLOCK)
        .and("network.toml", format!("{CLOCK}{NETWORK}"))
        .and("pin.toml", format!("[[recording]]\npath = \"gate.csv\"\ntaken_at = \"pin\"\n{CLOCK}{NETWORK}"))
}

fn replayed(bench: &Bench, law: &str, more: &[&str]) -> Value {
    bench.run(&[&["replay", law, "--json"], &READING[..3], more].concat()).ends(0).json()["result"].take()
}

/// The worst delay at a break, the edge that the pull resistor makes slow.
fn slowest_break(replayed: &Value) -> u64 {
    replayed["runs"][0]["measured"]["nominal"]["break"]["latency"]["delay"]["below_ns"]
        .as_u64()
        .unwrap_or_else(|| panic!("no delay: {replayed}"))
}

#[test]
fn replay_behind_a_network_measures_what_study_measures() {
    let bench = bench();
    for more in [&["-r", "network.toml"][..], &["-r", "network.toml", "--taken-at", "pin"]] {
        let line = [&["study", "--json"], &READING[..3], more].concat();
        let study = bench.run(&line).ends(0).json()["result"].take();
        let best = &study["choice"]["candidates"][0];
        let law = best["law"].as_str().expect("a law");
        let replayed = replayed(&bench, law, more);
        let found = &replayed["runs"][0]["measured"]["nominal"];
        for change in ["make", "break"] {
            let delay = &best["measured"][0][change]["delay"];
            assert!(delay.is_object(), "{best}");
            assert_eq!(&found[change]["latency"]["delay"], delay, "{more:?}");
        }
    }
}

#[test]
fn replay_of_a_recording_taken_at_the_pin_does_not_pass_it_through_the_network_again() {
    let bench = bench();
    let law = "state-machine confirm=2";
    let bare = replayed(&bench, law, &["-r", "bare.toml"]);
    let contact = replayed(&bench, law, &["-r", "network.toml"]);
    let pin = replayed(&bench, law, &["-r", "network.toml", "--taken-at", "pin"]);
    // About 0.9 ms from a break to the threshold.
    assert!(slowest_break(&contact) > slowest_break(&bare) + 500_000, "{contact}");
    assert_eq!(slowest_break(&pin), slowest_break(&bare));
    for (found, taken_at) in [(&bare, Value::Null), (&contact, "contact".into()), (&pin, "pin".into())] {
        assert_eq!(found["runs"][0]["taken_at"], taken_at);
    }
}

#[test]
fn place_of_a_recording_is_said_with_what_follows_from_it() {
    let bench = bench();
    let says = |arguments: &[&str], parts: &[&str]| {
        let run = bench.run(&[arguments, &["--time-unit", "us"]].concat()).ends(0);
        for part in parts {
            assert!(run.flowing().contains(part), "\"{part}\" is not in {}", run.stdout);
        }
    };
    let contact = ["taken at the contact, so the pin sees it through [network]", "write taken_at = \"pin\""];
    let pin = ["taken at the pin, so [network] is in it", "line 3 of the requirement"];
    let law = "state-machine confirm=2";
    for (file, parts) in [("network.toml", &contact), ("pin.toml", &pin)] {
        let given: &[&str] = if file == "pin.toml" { &[] } else { &["gate.csv"] };
        says(&[&["study"], given, &["-r", file]].concat(), parts);
        says(&[&["characterise"], given, &["-r", file]].concat(), parts);
        says(&[&["replay", law], given, &["-r", file]].concat(), parts);
    }
    says(&["replay", law, "-r", "pin.toml"], &["delays are counted from the first edge at the pin"]);
    says(
        &["study", "-r", "pin.toml"],
        &["counted from the first edge at the pin", "inside the envelope of the proof"],
    );
}

/// A network hides pulses, so what the pin shows is not taken for the contact's bounce.
#[test]
fn figures_of_the_contact_are_not_read_off_a_recording_of_the_pin() {
    let bench = bench();
    let origin = |file: &str| {
        let given: &[&str] = if file == "pin.toml" { &[] } else { &["gate.csv"] };
        let line = [&["study", "--json", "--time-unit", "us"], given, &["-r", file]].concat();
        let json = bench.run(&line).ends(0).json();
        let rows = json["result"]["requirement"].as_array().expect("a list").clone();
        let row = rows.into_iter().find(|row| row["key"] == "required.bounce.make").expect("a row");
        row["origin"].as_str().expect("a word").to_owned()
    };
    assert_eq!(origin("network.toml"), "measured");
    assert_eq!(origin("pin.toml"), "default");
}

#[test]
fn recording_of_the_pin_without_a_network_is_warned_of_and_read_as_before() {
    let bench = bench();
    let line = ["characterise", "gate.csv", "--time-unit", "us", "--taken-at", "pin"];
    let run = bench.run(&line).ends(0);
    assert!(run.stderr.contains("no [network] says what stands in front of it"), "{}", run.stderr);
    assert_eq!(run.stdout, bench.run(&line[..4]).ends(0).stdout);
}

#[test]
fn network_that_is_wrong_is_refused_by_all_that_read_recordings() {
    let bench =
        bench().and("wrong.toml", "[[recording]]\npath = \"gate.csv\"\n[network]\npull = \"0 ohm\"\n").and(
            "slip.toml",
            "[[recording]]\npath = \"gate.csv\"\ntaken_at = \"pn\"\n[network]\npull = \"1 kohm\"\n",
        );
    for command in [&["characterise"][..], &["replay", "integrator 3"], &["study"]] {
        let refuses = |file, told| {
            bench.refuses(&[command, &["--time-unit", "us", "-r", file]].concat(), &[told]);
        };
        refuses(
            "wrong.toml",
            ("wrong.toml:4:8", "a resistor of 0 ohm cannot do this", &["at least \"10 ohm\""][..]),
        );
        let help = &["write \"pin\""][..];
        refuses("slip.toml", ("slip.toml:3:12", "\"pn\" is not a place where a recording is taken", help));
    }
}

#[test]
fn envelope_behind_a_network_is_said_to_be_the_one_at_the_pin() {
    let bench = bench();
    let says = |line: &[&str], part: &str| {
        let text = bench.run(&[line, &["--time-unit", "us"]].concat()).flowing();
        assert!(text.contains(part), "\"{part}\" is not in {text}");
    };
    for command in ["study", "choose"] {
        let network = [command, "gate.csv", "-r", "network.toml"];
        says(&network, "Envelope at the pin, behind the network: the line stays closed");
        says(&[command, "gate.csv", "-r", "bare.toml"], "Envelope the contact stays closed");
    }
    // The bounce at the pin stands on a default, and that is said where the design is.
    says(&["study", "-r", "pin.toml"], "for a contact that bounces for 10 ms (the default)");
}
