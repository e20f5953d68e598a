//! The generated text: its layout, what it says, what it refuses to say. That it compiles is a test of its own.

use std::process::Command;

use debounce_core::{Bounds, Latency, PerChange};

use super::rust::module_text;
use super::*;
use crate::problem::SourceText;
use crate::requirement::{Measured, parse};

const LAWS: [&str; 8] = [
    "integrator 5",
    "integrator 300 up=1 down=20",
    "shift-register 8",
    "majority-register 6 of 8",
    "majority-register 9 of 16",
    "majority-register 17 of 32",
    "state-machine confirm=3/2 patience=2/1 lockout=4/0",
    "state-machine confirm=65535 patience=65535 lockout=65535",
];

const SHORT: &str = "[contact]\nname = \"sluice gate, upper end\"\nrole = \"guarding\"\n[required]\nlatency = \"30 ms\"\n\
                     [clock]\ntick = \"1 ms\"";
/// Every number as wide as it gets, and a rate that is no whole number of nanoseconds or of hertz.
const WIDE: &str = "[contact]\nname = \"\u{202e}a \\\"quoted\\\" {name} \\\\ of * many * very * long * words * that * \
                    cannot * stand * on * one * line * of * a * comment * at * all\"\n[required]\nlatency = \"30000 s\"\n\
                    shortest_closed = \"20000 s\"\nshortest_open = \"20000.000000001 s\"\nbounce = \"10000.123456789 s\"\n\
                    disturbance = \"1000.123456789 s\"\nquiet = \"2000.123456789 s\"\ncalm = \"3000.123456789 s\"\n\
                    [clock]\ntick = \"32.7681 kHz\"\nlost = \"3 ticks\"\ntolerance = \"12.3456 %\"";

fn configuration(requirement: &str, law: &str, worst: u32, proof: Proof) -> Configuration {
    let requirement =
        parse(SourceText::new("contact.toml", requirement)).unwrap_or_else(|error| panic!("{error}"));
    let resolved = requirement.resolve(&Measured::default()).unwrap_or_else(|error| panic!("{error}"));
    let latency = Latency { best: 3, worst };
    let bounds = Bounds { latency: PerChange { make: latency, break_: latency } };
    let tick = resolved.ticks.value[0];
    let envelope = resolved.physical().in_ticks(&resolved.clock(tick)).expect("quiet is seen");
    Configuration::new(&resolved, tick, envelope, law.parse().unwrap(), bounds, proof)
        .provenance("harness 0.1.0, contact.toml, gate.vcd (64 operations)")
}

/// What `rustfmt` with its default settings would change.
fn rustfmt(text: &str) -> Result<(), String> {
    // A file, because with standard input `--check` ends with 0 whatever it finds.
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("contact.rs");
    std::fs::write(&file, text).unwrap();
    let mut command = Command::new("rustfmt");
    command.args(["--check", "--edition", "2024"]).arg(&file);
    let output = command.output().expect("rustfmt is part of the toolchain");
    if output.status.success() {
        return Ok(());
    }
    Err(String::from_utf8_lossy(&output.stdout).into_owned() + &String::from_utf8_lossy(&output.stderr))
}

#[test]
fn module_of_every_law_is_laid_out_as_rustfmt_would() {
    for law in LAWS {
        for (requirement, worst) in [(SHORT, 12), (WIDE, 600_000_000)] {
            for proof in [Proof::ClosedForm, Proof::Explored { states: 12_345 }] {
                let text = module_text(&configuration(requirement, law, worst, proof));
                rustfmt(&text).unwrap_or_else(|changes| panic!("{law}, {proof:?}:\n{changes}\n{text}"));
                let long = text.lines().find(|line| line.chars().count() > 100);
                assert_eq!(long, None, "{law}, {proof:?}");
                assert!(!text.contains('\u{202e}'));
            }
        }
    }
    rustfmt("fn  main() {}\n").expect_err("the check itself finds fault with bad layout");
}

#[test]
fn module_by_closed_form_asks_the_compiler() {
    let text = module_text(&configuration(SHORT, LAWS[6], 12, Proof::ClosedForm));
    for part in [
        "pub struct SluiceGateUpperEnd;",
        "sluice_gate_upper_end::starting()",
        "pub const PERIOD: Period = Period::from_ns(1_000_000);",
        "LAW.verdict(&ENVELOPE)\n        .holds_within(ALLOWED_MAKE, ALLOWED_BREAK),",
        "pub const ALLOWED_MAKE: u32 = 29;",
        "/// Longest allowed delay of the report of a make, in nanoseconds: 30 ms.",
        "gate.vcd (64 operations)",
    ] {
        assert!(text.contains(part), "{part} is missing in\n{text}");
    }
    assert!(!text.contains("explor"), "{text}");
}

#[test]
fn module_by_exploring_pins_and_claims_no_more() {
    let text = module_text(&configuration(SHORT, LAWS[6], 12, Proof::Explored { states: 12_345 }));
    assert!(!text.contains("verdict"), "{text}");
    for part in [
        "exploring all 12345 states",
        "LAW.parameters().confirm.make == 3",
        "LAW.parameters().lockout.break_ == 0",
        "ENVELOPE.bounce.make == ",
        "worst: 12",
    ] {
        assert!(text.replace("\n//!", "").contains(part), "{part} is missing in\n{text}");
    }
}

#[test]
fn module_for_a_guarding_contact_carries_the_caution() {
    let text = module_text(&configuration(SHORT, LAWS[0], 12, Proof::ClosedForm));
    assert!(text.contains("//! # Caution\n//!\n//! Debouncing makes no input safe"), "{text}");
    let control = SHORT.replace("guarding", "control");
    let text = module_text(&configuration(&control, LAWS[0], 12, Proof::ClosedForm));
    assert!(!text.contains("Caution"));
}

#[test]
fn module_that_does_not_hold_is_refused() {
    let late = configuration(SHORT, LAWS[0], 30, Proof::ClosedForm);
    let error = rust_module(&late).expect_err("30 ticks and 2 % are more than 30 ms");
    assert_eq!(
        error.to_string(),
        "the make latency of up to 30 samples can take 30.6 ms, longer than the required 30 ms"
    );
    // The time would do, but these bounds are not those of the law.
    let error =
        rust_module(&configuration(SHORT, LAWS[0], 29, Proof::ClosedForm)).expect_err("invented bounds");
    assert_eq!(error.to_string(), "the closed form of integrator 5 does not say what was proved");
    let explored = configuration(SHORT, LAWS[3], 29, Proof::Explored { states: 1 });
    assert_eq!(explored.law.verdict(&explored.envelope), Ok(Verdict::Unknown));
    assert!(rust_module(&explored).is_ok());
    assert!(rust_module(&Configuration { proof: Proof::ClosedForm, ..explored.clone() }).is_err());
    let minority = Configuration { law: "majority-register 3 of 8".parse().unwrap(), ..explored };
    assert!(
        rust_module(&minority)
            .expect_err("no majority")
            .to_string()
            .starts_with("majority-register 3 of 8: ")
    );
    let mut narrow = configuration(SHORT, LAWS[0], 12, Proof::ClosedForm);
    narrow.envelope = narrow.envelope.bounce(narrow.envelope.bounce.make - 1, narrow.envelope.bounce.break_);
    let error = rust_module(&narrow).expect_err("the bounce does not fit");
    assert_eq!(
        error.to_string(),
        "the bounce at a make of 10 ms is 11 samples of this clock, but the envelope was proved with 10"
    );
}
