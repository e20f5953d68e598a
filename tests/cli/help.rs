//! Every example of every help text is run, in a folder that holds what it names.

use std::fs;

use harness::demo;

use crate::bench::Bench;

const CONTACT: &str = "\
[contact]
name = \"gate\"
closed = \"high\"
[[recording]]
path = \"gate.vcd\"
channel = \"top.gate\"
[required]
latency = \"50 ms\"
shortest_closed = \"45 ms\"
shortest_open = \"45 ms\"
quiet = \"20 ms\"
[clock]
tick = [\"2 ms\", \"5 ms\"]
[firmware]
module = \"src/gate.rs\"
law = \"state-machine confirm=2 patience=2 lockout=2/1\"
tick = \"5 ms\"
";

const OWN: &str = ".i 1\n.o 1\n.r off\n0 off off 0\n1 off on 0\n0 on off 1\n1 on on 1\n";

/// A folder with everything that the examples name.
fn bench() -> Bench {
    let recording = String::from_utf8(demo::RECORDING.to_vec()).expect("text");
    let recording =
        recording.replace("module harness", "module top").replace("vent_button $end", "gate $end");
    let mut volts = String::from("time_us,gate_V\n");
    for press in 0..40 {
        for (at, level) in [(0, 0.1), (100_000, 3.2), (100_300, 0.2), (100_700, 3.1), (250_000, 0.1)] {
            volts.push_str(&format!("{},{level}\n", press * 400_000 + at));
        }
    }
    let bench = Bench::new();
    for folder in ["src", "gate/src", "door/src"] {
        fs::create_dir_all(bench.path().join(folder)).expect("a folder");
    }
    let bench = ["gate.vcd", "day1.vcd", "day2.vcd", "gate/gate.vcd", "door/gate.vcd"]
        .iter()
        .fold(bench, |bench, name| bench.and(name, &recording))
        .and("gate.csv", volts)
        .and("own.kiss2", OWN);
    for folder in ["", "gate/", "door/"] {
        let requirement = format!("{folder}contact.toml");
        fs::write(bench.path().join(&requirement), CONTACT).expect("a file");
        let module = format!("{folder}src/gate.rs");
        bench.run(&["emit", "--requirement", &requirement, "--output", &module]).ends(0);
    }
    bench
}

/// Splits a line as a shell does, as far as the examples go.
fn words(line: &str) -> Vec<String> {
    let parts = line.split('"').enumerate();
    parts
        .flat_map(|(index, part)| match index % 2 {
            0 => part.split_whitespace().map(str::to_owned).collect::<Vec<_>>(),
            _ => vec![part.to_owned()],
        })
        .collect()
}

/// The examples of a help text.
pub(crate) fn examples(help: &str) -> Vec<Vec<String>> {
    let (_, examples) = help.split_once("\nExamples:\n").expect("examples");
    // A stroke at the end of a line joins it with the next.
    let joined = examples.replace("\\\n", " ");
    joined.lines().map(str::trim).filter(|line| line.starts_with("harness ")).map(words).collect()
}

pub(crate) fn commands() -> Vec<String> {
    let help = Bench::new().run(&["--help"]).ends(0).stdout;
    let lines = help.lines().skip_while(|line| *line != "Commands:").skip(1);
    let lines = lines.take_while(|line| line.starts_with("  ")).filter(|line| !line.starts_with("   "));
    lines.filter_map(|line| line.split_whitespace().next()).map(str::to_owned).collect()
}

#[test]
fn help_examples_of_every_command_run() {
    let bench = bench();
    for command in commands() {
        let help = bench.run(&[&command, "--help"]).ends(0).stdout;
        let examples = examples(&help);
        assert_eq!(examples.len(), 3, "{help}");
        for example in examples {
            let arguments: Vec<&str> = example[1..].iter().map(String::as_str).collect();
            assert_eq!(arguments[0], command, "{example:?}");
            let run = bench.run(&arguments);
            // Whether what is asked holds depends on the recording; that it can be answered does not.
            assert!(matches!(run.code, Some(0 | 1)), "{example:?}: {run:?}");
            assert!(!run.stdout.is_empty(), "{example:?}");
        }
    }
}
