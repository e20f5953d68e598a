//! `harness recheck` on the example firmware: it holds as it stands, and each copy in which someone changed
//! something says which claim broke and by how much.

use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

use integration_tests::firmware;

use crate::bench::{Bench, Run};

const EXAMPLE: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/../examples/hatch-firmware");
const FILES: [&str; 3] = ["contact.toml", "recordings/hatch_button.vcd", "src/hatch_button.rs"];
/// The law that was shipped.
const LAW: &str = "state-machine confirm=2 patience=2 lockout=2";
const RESOLUTION: [&str; 2] = ["--resolution", "1 us"];

fn example(file: &str) -> String {
    fs::read_to_string(Path::new(EXAMPLE).join(file)).unwrap_or_else(|error| panic!("{file}: {error}"))
}

/// A copy of the example in which `from` was turned into `to` in one file.
fn changed(file: &str, from: &str, to: &str) -> Bench {
    let bench = Bench::new();
    for name in FILES {
        let mut text = example(name);
        if name == file {
            assert!(text.contains(from), "nothing to change in {file}: {from}");
            text = text.replacen(from, to, 1);
        }
        let path = bench.path().join(name);
        fs::create_dir_all(path.parent().expect("a folder")).expect("a folder");
        fs::write(path, text).expect("a file");
    }
    bench
}

fn copied() -> Bench {
    changed("contact.toml", "invented", "invented")
}

fn recheck(bench: &Bench, more: &[&str]) -> Run {
    bench.run(&[&["recheck", "contact.toml"][..], &RESOLUTION, more].concat())
}

/// The run says that exactly this claim is broken, and why.
#[track_caller]
fn breaks(bench: &Bench, claim: &str, remark: &str) {
    let run = recheck(bench, &[]).ends(1);
    let text = run.flowing();
    assert!(text.contains(&format!("Broken {claim}")) && text.contains(remark), "{}", run.stdout);
    assert_eq!(text.matches("Broken ").count(), 1, "{}", run.stdout);
    assert!(text.contains(" claims is broken"), "{}", run.stdout);
}

#[test]
fn recheck_of_the_example_holds() {
    let run = recheck(&copied(), &[]).ends(0);
    assert!(run.stdout.contains("claims hold") && run.stderr.is_empty(), "{run:?}");
    let answer = recheck(&copied(), &["--json"]).ends(0).json();
    let claims = answer["result"]["checked"][0]["claims"].as_array().expect("claims");
    assert!(claims.iter().all(|claim| claim["standing"] == "holds"), "{answer}");
    for subject in ["recording", "proof", "latency", "budget", "firmware"] {
        assert!(claims.iter().any(|claim| claim["subject"] == subject), "{subject}: {answer}");
    }
}

#[test]
fn recheck_does_not_depend_on_the_folder_it_runs_in() {
    let bench = copied();
    let path = bench.path().join("contact.toml");
    let run = Bench::new().run(&["recheck", path.to_str().expect("a path"), "--resolution", "1 us"]);
    assert_eq!(run.code, Some(0), "{}", run.stdout);
}

#[test]
fn recheck_example_module_is_what_emit_writes_and_compiles() {
    let bench = copied();
    let line = ["emit", "--requirement", "contact.toml", "--output", "again.rs"];
    bench.run(&[&line[..], &RESOLUTION].concat()).ends(0);
    let again = fs::read_to_string(bench.path().join("again.rs")).expect("a module");
    if std::env::var_os("HARNESS_REWRITE_EXAMPLE").is_some() {
        fs::write(Path::new(EXAMPLE).join("src/hatch_button.rs"), &again).expect("it can be written");
    }
    assert_eq!(again, example("src/hatch_button.rs"), "HARNESS_REWRITE_EXAMPLE=1 writes it anew");
    let target = Path::new(env!("CARGO_TARGET_TMPDIR")).join("emitted");
    let program = example("src/lib.rs");
    let body = program.split_once("pub mod hatch_button;").expect("the module").1;
    let inside = body.replace("use hatch_button::", "use self::hatch_button::");
    // The firmware itself, around the module, as one file of a program of its own.
    let whole = format!("//! The example.\npub mod hatch_button {{\n{again}\n}}\n{inside}");
    firmware::check("hatch", &whole, None, &target).unwrap_or_else(|errors| panic!("{errors}"));
}

#[test]
fn recheck_lines_of_the_example_are_those_that_hold() {
    let bench = copied();
    let workflow = example(".github/workflows/contact.yml");
    let lines: Vec<&str> =
        workflow.lines().map(str::trim).filter(|line| line.starts_with("harness ")).collect();
    assert_eq!(lines.len(), 1, "{workflow}");
    let words: Vec<&str> = lines[0]
        .split('"')
        .enumerate()
        .flat_map(|(index, part)| if index % 2 == 1 { vec![part] } else { part.split_whitespace().collect() })
        .collect();
    bench.run(&words[1..]).ends(0);
    assert!(example("README.md").contains("harness recheck contact.toml --resolution \"1 us\""));
    for file in ["recheck.xml", "recheck.md"] {
        assert!(bench.path().join(file).exists() && workflow.contains(file), "{file}");
    }
}

#[test]
fn recheck_of_a_shorter_latency_says_by_how_much_it_is_missed() {
    let bench = changed("contact.toml", "make = \"15 ms\"", "make = \"5 ms\"");
    let run = recheck(&bench, &[]).ends(1);
    let text = run.flowing();
    assert!(text.contains("Broken a make is reported within 5 ms it can take "), "{}", run.stdout);
    assert!(text.contains(" too long"), "{}", run.stdout);
    assert!(text.contains("Open src/hatch_button.rs is what the requirement gives"), "{}", run.stdout);
}

#[test]
fn recheck_of_a_changed_recording_names_it() {
    let bench = changed("recordings/hatch_button.vcd", "seeded generator", "generator");
    breaks(&bench, "recordings/hatch_button.vcd is unchanged", "its SHA-256 is ");
}

#[test]
fn recheck_of_a_shorter_bounce_says_where_the_recording_leaves_it() {
    let bench = changed("contact.toml", "bounce = \"5 ms\"", "bounce = \"1 ms\"");
    let run = recheck(&bench, &[]).ends(1);
    let text = run.flowing();
    assert!(
        text.contains("Broken recordings/hatch_button.vcd lies inside the envelope at "),
        "{}",
        run.stdout
    );
    assert!(text.contains(" found, 300 us allowed, "), "{}", run.stdout);
}

#[test]
fn recheck_of_an_edited_module_gives_the_line() {
    let bench = changed(
        "src/hatch_button.rs",
        "pub const LATENCY_MAKE_NS: u64 = 15",
        "pub const LATENCY_MAKE_NS: u64 = 25",
    );
    breaks(
        &bench,
        "src/hatch_button.rs is what the requirement gives",
        "is `pub const LATENCY_MAKE_NS: u64 = 25_000_000;`, the requirement gives `pub const LATENCY_MAKE_NS: u64 = 15_000_000;`",
    );
}

/// A patient state machine takes 30 instructions on a Cortex-M3 at worst, by `debounce-core/COST.md`.
#[test]
fn recheck_of_an_instruction_budget_counts_on_the_core_that_is_named() {
    let budget = |text: &str| changed("contact.toml", "ram = \"4 bytes\"", text);
    let enough = budget("ram = \"4 bytes\"\ninstructions = \"30 instructions\"\ncore = \"cortex-m3\"");
    let run = recheck(&enough, &[]).ends(0);
    let claim = "a tick takes at most 30 instructions an input on cortex-m3: 30, as counted for a patient state machine";
    assert!(run.flowing().contains(claim), "{}", run.stdout);
    // Elsewhere it takes more, and where no core is named the most counts.
    let run = recheck(&budget("ram = \"4 bytes\"\ninstructions = \"30 instructions\""), &[]).ends(1);
    let text = run.flowing();
    assert!(
        text.contains("Broken a tick takes at most 30 instructions an input on any core"),
        "{}",
        run.stdout
    );
    assert!(text.contains("36, as counted for a patient state machine, 6 too many"), "{}", run.stdout);
}

#[test]
fn requirement_names_the_cores_that_were_looked_at() {
    let bench = changed("contact.toml", "ram = \"4 bytes\"", "core = \"cortex-m7\"\ninstructions = 30");
    let run = recheck(&bench, &[]).ends(2);
    assert!(
        run.stderr.contains("\"cortex-m7\" is not a core whose instructions were counted"),
        "{}",
        run.stderr
    );
    assert!(run.stderr.contains("write \"30 instructions\""), "{}", run.stderr);
}

#[test]
fn recheck_of_a_smaller_budget_says_by_how_many_bytes() {
    let run = recheck(&changed("contact.toml", "ram = \"4 bytes\"", "ram = \"1 byte\""), &[]).ends(1);
    let text = run.flowing();
    assert!(text.contains("Broken an input takes at most 1 bytes of RAM"), "{}", run.stdout);
    assert!(text.contains(" too many"), "{}", run.stdout);
}

#[test]
fn recheck_of_a_tick_that_may_not_be_chosen_says_so() {
    let bench = changed("contact.toml", "tick = \"2 ms\"", "tick = \"500 us\"");
    let text = recheck(&bench, &[]).ends(1).flowing();
    assert!(text.contains("a tick of 500 us is 1000 ticks a second too many"), "{text}");
    assert!(text.contains("a tick of 500 us is not among them"), "{text}");
}

#[test]
fn recheck_of_a_law_that_does_not_follow_the_contact_refutes_it() {
    let bench = changed("contact.toml", LAW, "shift-register 1");
    let text = recheck(&bench, &[]).ends(1).flowing();
    assert!(text.contains("Broken shift-register 1 at a tick of 2 ms reports every operation"), "{text}");
    assert!(text.contains("Open a make is reported within 15 ms"), "{text}");
}

/// `contact.toml:line:column` of a text in it.
fn place(bench: &Bench, text: &str) -> String {
    let contact = fs::read_to_string(bench.path().join("contact.toml")).expect("a file");
    let (before, _) = contact.split_once(text).unwrap_or_else(|| panic!("{text} is not in {contact}"));
    let column = before.rsplit('\n').next().unwrap_or_default().chars().count() + 1;
    format!("contact.toml:{}:{column}", before.matches('\n').count() + 1)
}

#[test]
fn recheck_of_bad_input_tells_every_file_and_ends_with_2() {
    let bench = changed("contact.toml", "make = \"15 ms\"", "make = \"15\"");
    let helps = ["write \"15 ms\""];
    let told =
        [(&*place(&bench, "\"15\""), "\"15\" has no unit", &helps[..]), ("gone.toml", "cannot be read", &[])];
    bench.refuses(&["recheck", "contact.toml", "gone.toml"], &told);

    let bench = changed("contact.toml", "src/hatch_button.rs\"\n", "src/gone.rs\"\n");
    let help = ["harness emit --requirement contact.toml --output src/gone.rs"];
    bench.refuses(
        &["recheck", "contact.toml"],
        &[("src/gone.rs", "the generated module cannot be read", &help)],
    );

    let bench = changed("contact.toml", LAW, "integrater 5");
    let told = [(&*place(&bench, "\"integrater 5\""), "is not a law", &["write \"integrator 5\""][..])];
    bench.refuses(&["recheck", "contact.toml"], &told);

    let bench = changed("contact.toml", "module = \"src/hatch_button.rs\"\n", "");
    let told = [(&*place(&bench, &format!("\"{LAW}\"")), "has no module", &["write module = "][..])];
    bench.refuses(&["recheck", "contact.toml"], &told);
}

/// The document keeps the schema of the Jenkins xUnit plug-in.
#[track_caller]
fn keeps_the_schema(bench: &Bench, file: &str) -> String {
    let schema = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("../tests/data/junit/junit-10.xsd");
    let mut lint = Command::new("xmllint");
    lint.args(["--noout", "--nonet", "--schema"]).arg(schema).arg(bench.path().join(file));
    let output = lint.output().expect("this test needs xmllint: apt-get install libxml2-utils");
    let text = fs::read_to_string(bench.path().join(file)).expect("a file");
    assert!(output.status.success(), "{}\n{text}", String::from_utf8_lossy(&output.stderr));
    text
}

#[test]
fn recheck_writes_junit_that_keeps_its_schema() {
    let bench = copied();
    recheck(&bench, &["--junit", "recheck.xml"]).ends(0);
    let holds = keeps_the_schema(&bench, "recheck.xml");
    assert!(holds.contains(" failures=\"0\" errors=\"0\""), "{holds}");

    // A name that means something to XML, and a broken claim that leaves another one open.
    let bench = changed("contact.toml", "make = \"15 ms\"", "make = \"5 ms\"");
    recheck(&bench, &["--junit", "recheck.xml"]).ends(1);
    let broken = keeps_the_schema(&bench, "recheck.xml");
    assert!(broken.contains(" failures=\"1\" errors=\"0\"") && broken.contains("<skipped"), "{broken}");
    assert!(broken.contains("type=\"broken claim\""), "{broken}");

    let bench = changed("contact.toml", "make = \"15 ms\"", "make = \"<15 & \"");
    recheck(&bench, &["--junit", "recheck.xml"]).ends(2);
    let failed = keeps_the_schema(&bench, "recheck.xml");
    assert!(failed.contains(" failures=\"0\" errors=\"1\""), "{failed}");
}

#[test]
fn recheck_summary_lists_the_broken_claims_first() {
    let bench = changed("contact.toml", "ram = \"4 bytes\"", "ram = \"1 byte\"");
    recheck(&bench, &["--summary", "recheck.md"]).ends(1);
    let text = fs::read_to_string(bench.path().join("recheck.md")).expect("a file");
    let rows: Vec<&str> = text.lines().filter(|line| line.starts_with("| ")).collect();
    assert!(text.starts_with("### hatch button: 1 of "), "{text}");
    assert!(rows[2].starts_with("| **broken** | an input takes at most 1 bytes of RAM | "), "{text}");
    // Every row of a table has the same cells.
    assert!(rows.iter().all(|row| row.matches(" |").count() == 3), "{text}");
}

#[test]
fn recheck_gives_the_same_bytes_twice() {
    let [one, two] = [copied(), copied()];
    let files = ["--junit", "recheck.xml", "--summary", "recheck.md"];
    assert_eq!(recheck(&one, &files), recheck(&two, &files));
    assert_eq!(one.listing(), two.listing());
}
