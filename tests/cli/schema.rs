//! What `--json` prints against the published schemas, by a general library.

use harness::demo;
use harness::schema::{bundled, names};
use jsonschema::Validator;
use serde_json::{Value, json};

use crate::bench::Bench;

const CONTACT: &str = "\
[[recording]]
path = \"vent.vcd\"
[contact]
name = \"vent\"
closed = \"high\"
role = \"guarding\"
[required]
shortest_closed = \"45 ms\"
shortest_open = \"45 ms\"
quiet = \"20 ms\"
[clock]
tick = \"5 ms\"
";

const ENVELOPE: [&str; 2] = ["--envelope", "dwell=20 bounce=5/3 glitch=1/1 quiet=10"];
const RECORDING: [&str; 3] = ["vent.vcd", "--closed", "high"];

/// A network with a plain or a Schmitt input, and what makes it one with a diode.
const FILTER: [&str; 6] =
    ["--pull", "10 kohm 5 %", "--series", "1 kohm 5 %", "--capacitor", "100 nF 10 % X7R"];
const DIODE: [&str; 6] = ["--series", "10 kohm", "--capacitor", "100 nF", "--diode", "silicon"];

/// Two contacts for `generate`.
const PANEL: &str = "\
[scenario]
seed = 7
[[contact]]
name = \"start\"
preset = \"tactile\"
[[contact]]
name = \"door\"
preset = \"reed\"
[[operation]]
habit = \"presses\"
count = 4
";

/// Envelopes for which no closed form is proved, in which no logic is faithful, and of which the limit is not known.
const NO_FORMULA: &str = "dwell=30 bounce=3/2 glitch=1/3 quiet=2";
const UNSOLVABLE: &str = "dwell=3 bounce=3";
const UNKNOWN: &str = "dwell=100000000 bounce=50 glitch=30/50 quiet=40";

/// Runs that together show every field of every command, and how they end.
fn runs() -> Vec<(i32, Vec<&'static str>)> {
    let line = |code: i32, parts: &[&[&'static str]]| (code, parts.concat());
    vec![
        line(0, &[&["study"]]),
        line(1, &[&["study"], &RECORDING, &["--latency", "5 ms", "--tick", "2 ms"]]),
        line(0, &[&["study", "--requirement", "contact.toml", "--output", "results"]]),
        line(2, &[&["study", "gone.vcd"]]),
        line(0, &[&["characterise"], &RECORDING, &["--gap", "9 ms"]]),
        line(0, &[&["characterise"], &RECORDING, &["--gap", "9 ms", "--operations"]]),
        line(2, &[&["characterise", "--requirement", "broken.toml"]]),
        line(0, &[&["choose", "--bounce", "5 ms", "--tick", "1 ms"]]),
        line(1, &[&["choose"], &RECORDING, &["--latency", "5 ms", "--tick", "2 ms", "--ram", "1 byte"]]),
        line(0, &[&["prove", "integrator 6"], &ENVELOPE]),
        line(1, &[&["prove", "shift-register 2"], &ENVELOPE, &["--witness", "broken.vcd"]]),
        line(0, &[&["limit"], &ENVELOPE]),
        line(0, &[&["limit", "--envelope", NO_FORMULA, "--machine", "best.kiss2"]]),
        line(1, &[&["limit", "--envelope", UNSOLVABLE]]),
        line(2, &[&["limit", "--envelope", UNKNOWN]]),
        line(0, &[&["compare", "shift-register 4", "state-machine confirm=4"]]),
        line(1, &[&["compare", "integrator 3", "shift-register 3", "--witness", "apart.vcd"]]),
        line(0, &[&["replay", "shift-register 4"], &RECORDING, &["--tick", "1 ms"]]),
        line(1, &[&["replay", "shift-register 1"], &RECORDING, &["--tick", "10 ms"]]),
        line(1, &[&["replay", "shift-register 40"], &RECORDING, &["--tick", "20 ms", "--draws", "0"]]),
        line(0, &[&["generate", "tactile", "--operations", "8", "--output", "button.vcd", "--volts"]]),
        line(0, &[&["generate", "encoder"]]),
        line(0, &[&["generate", "panel.toml"]]),
        line(0, &[&["generate", "--list"]]),
        line(2, &[&["generate", "tactil"]]),
        line(0, &[&["network"], &FILTER]),
        line(1, &[&["network"], &FILTER, &["--input", "lvcmos-3.3"]]),
        line(0, &[&["network", "--input", "schmitt-hc", "--supply", "5 V"], &DIODE]),
        line(0, &[&["emit", "--bounce", "5 ms", "--tick", "1 ms"]]),
        line(0, &[&["emit", "--bounce", "5 ms", "--tick", "1 ms", "--output", "contact.rs"]]),
        line(1, &[&["emit", "--bounce", "5 ms", "--latency", "3 ms", "--tick", "1 ms"]]),
        line(0, &[&["recheck", "contact.toml"]]),
        line(1, &[&["recheck", "contact.toml", "late.toml", "--junit", "recheck.xml"]]),
        line(2, &[&["recheck", "broken.toml"]]),
        line(0, &[&["schema", "study"]]),
        line(0, &[&["completions", "bash"]]),
        line(0, &[&["manual"]]),
        line(0, &[&["manual", "--output", "man1"]]),
        line(2, &[&["stduy"]]),
    ]
}

fn bench() -> Bench {
    Bench::with("vent.vcd", demo::RECORDING)
        .and("contact.toml", CONTACT)
        .and("late.toml", CONTACT.replace("[required]\n", "[required]\nlatency = \"9 ms\"\n"))
        .and("panel.toml", PANEL)
        .and("broken.toml", CONTACT.replace("45 ms", "45"))
}

/// The schema with every field that it does not name forbidden: a reader may meet new ones, a release may not
/// leave one out of the schema.
fn strict(mut schema: Value) -> Value {
    fn close(schema: &mut Value) {
        match schema {
            Value::Array(items) => items.iter_mut().for_each(close),
            Value::Object(members) => {
                if members.get("properties").is_some_and(Value::is_object) {
                    members.entry("additionalProperties").or_insert(json!(false));
                }
                // An alternative names what tells it from the others, and not all there is.
                let inner = members.iter_mut().filter(|(key, _)| *key != "oneOf");
                inner.for_each(|(_, value)| close(value));
            }
            _ => {}
        }
    }
    close(&mut schema);
    schema
}

fn validator(schema: &Value) -> Validator {
    jsonschema::draft202012::new(schema).unwrap_or_else(|error| panic!("{error}"))
}

fn faults(validator: &Validator, document: &Value) -> Vec<String> {
    let told = |error: jsonschema::ValidationError<'_>| {
        let text: String = error.to_string().chars().take(300).collect();
        format!("{} at {}", text, error.instance_path())
    };
    validator.iter_errors(document).take(8).map(told).collect()
}

#[test]
fn schema_of_every_command_is_a_schema_and_every_command_has_one() {
    let mut published: Vec<&str> = names().filter(|name| *name != "usage").collect();
    let mut commands = crate::help::commands();
    published.sort_unstable();
    commands.sort_unstable();
    assert_eq!(published, commands, "harness/schema holds one file for each command");
    for name in names() {
        let schema = bundled(name).expect("a schema");
        assert!(jsonschema::meta::is_valid(&schema), "{name}");
        let printed = Bench::new().run(&["schema", name]).ends(0).json();
        assert_eq!(printed, schema, "{name}");
    }
}

#[test]
fn json_of_every_command_keeps_its_schema() {
    let bench = bench();
    let mut met = Vec::new();
    for (code, arguments) in runs() {
        let document = bench.run(&[&arguments[..], &["--json"]].concat()).ends(code).json();
        let command = document["command"].as_str().expect("a command").to_owned();
        let schema = bundled(&command).unwrap_or_else(|| panic!("no schema for {command}"));
        // What keeps the stricter one keeps the published one as well.
        let told = faults(&validator(&strict(schema)), &document);
        assert_eq!(told, [""; 0], "describe it in harness/schema/{command}.json: {arguments:?}");
        met.push(command);
    }
    assert!(names().all(|name| met.iter().any(|command| command == name)), "{met:?}");
}

/// Every value of a document, by its path; of a list only the first item.
fn paths(value: &Value, here: &str, found: &mut Vec<String>) {
    match value {
        Value::Object(members) => {
            for (key, value) in members {
                let path = format!("{here}/{}", key.replace('~', "~0").replace('/', "~1"));
                found.push(path.clone());
                paths(value, &path, found);
            }
        }
        Value::Array(items) => {
            if let Some(first) = items.first() {
                found.push(format!("{here}/0"));
                paths(first, &format!("{here}/0"), found);
            }
        }
        _ => {}
    }
}

#[test]
fn schema_refuses_a_value_of_another_kind_anywhere() {
    let bench = bench();
    let line = |code: i32, parts: &[&[&'static str]]| (code, parts.concat());
    for (code, arguments) in [
        line(0, &[&["choose", "--bounce", "5 ms", "--tick", "1 ms", "--latency", "40 ms"]]),
        line(1, &[&["choose"], &RECORDING, &["--latency", "5 ms", "--tick", "2 ms"]]),
        line(0, &[&["characterise"], &RECORDING, &["--gap", "9 ms", "--operations"]]),
        line(0, &[&["prove", "integrator 6"], &ENVELOPE]),
        line(0, &[&["limit"], &ENVELOPE]),
        line(1, &[&["limit", "--envelope", UNSOLVABLE]]),
        line(1, &[&["compare", "integrator 3", "shift-register 3"]]),
        line(0, &[&["generate", "tactile", "--operations", "8"]]),
        line(0, &[&["generate", "--list"]]),
        line(1, &[&["network"], &FILTER, &["--input", "lvcmos-3.3"]]),
        line(0, &[&["recheck", "contact.toml"]]),
        line(2, &[&["stduy"]]),
    ] {
        let document = bench.run(&[&arguments[..], &["--json"]].concat()).ends(code).json();
        let schema = validator(&bundled(document["command"].as_str().expect("a command")).expect("a schema"));
        let mut all = Vec::new();
        paths(&document, "", &mut all);
        assert!(all.len() > 5, "{all:?}");
        for path in all {
            let mut spoilt = document.clone();
            *spoilt.pointer_mut(&path).expect("a value") = json!({ "another": ["kind"] });
            assert!(!schema.is_valid(&spoilt), "{arguments:?}: anything may stand at {path}");
        }
        for key in ["schema", "version", "command", "outcome"] {
            let mut cut = document.clone();
            cut.as_object_mut().expect("an object").remove(key);
            assert!(!schema.is_valid(&cut), "{arguments:?}: {key} may be missing");
        }
    }
}
