//! The generated Rust module in a real build: it compiles for the host and for a Cortex-M0, and a copy that
//! someone edited out of the requirement does not.
//!
//! Each build is a program of its own in a folder of its own; all of them share one target folder.

use std::path::{Path, PathBuf};

use debounce_core::{
    Bounds, Envelope, Integrator, Latency, MajorityRegister, PerChange, ShiftRegister, StateMachine,
    StateMachineParameters, Verdict,
};
use harness::emit::{Configuration, Proof, rust_module};
use harness::law_text::LawParameters;
use harness::problem::SourceText;
use harness::requirement::{Measured, Resolved, parse};
use integration_tests::firmware;

const HOST: Option<&str> = None;
const CORTEX_M0: Option<&str> = Some("thumbv6m-none-eabi");

const GATE: &str = "\
[contact]
name = \"sluice gate, upper end\"
[required]
latency = \"20 ms\"
shortest_closed = \"60 ms\"
shortest_open = \"60 ms\"
bounce = { make = \"3 ms\", break = \"2 ms\" }
disturbance = { open = \"800 us\", closed = \"800 us\" }
quiet = \"20 ms\"
[clock]
tick = \"1 ms\"
";

fn resolved(text: &str) -> Resolved {
    let requirement =
        parse(SourceText::new("contact.toml", text)).unwrap_or_else(|problems| panic!("{problems}"));
    requirement.resolve(&Measured::default()).unwrap_or_else(|problems| panic!("{problems}"))
}

fn envelope(resolved: &Resolved) -> Envelope {
    resolved.physical().in_ticks(&resolved.clock(resolved.ticks.value[0])).expect("quiet is seen")
}

fn configuration(resolved: &Resolved, law: LawParameters, verdict: Verdict) -> Configuration {
    let Verdict::Holds(bounds) = verdict else { panic!("{law} does not hold: {verdict:?}") };
    Configuration::new(resolved, resolved.ticks.value[0], envelope(resolved), law, bounds, Proof::ClosedForm)
}

/// The state machine that reaches the limit of the envelope.
fn best(resolved: &Resolved) -> Configuration {
    let law = StateMachine::<u16>::for_envelope(&envelope(resolved)).expect("a closed form");
    let StateMachineParameters { confirm, patience, lockout } = law.parameters();
    let parameters = LawParameters::StateMachine { confirm, patience, lockout };
    configuration(resolved, parameters, law.verdict(&envelope(resolved)))
}

fn build(name: &str, module: &str, target: Option<&str>) -> Result<(), String> {
    firmware::check(name, module, target, &target_folder())
}

fn target_folder() -> PathBuf {
    Path::new(env!("CARGO_TARGET_TMPDIR")).join("emitted")
}

#[track_caller]
fn compiles(name: &str, configuration: &Configuration, target: Option<&str>) {
    let module = rust_module(configuration).unwrap_or_else(|error| panic!("{error}"));
    let law = &configuration.law;
    build(name, &module, target).unwrap_or_else(|errors| panic!("{law} for {target:?}:\n{errors}\n{module}"));
}

/// Edits the module and expects the build to stop with `message`.
#[track_caller]
fn edited_stops(name: &str, configuration: &Configuration, from: &str, to: &str, message: &str) {
    let module = rust_module(configuration).unwrap_or_else(|error| panic!("{error}"));
    assert_eq!(module.matches(from).count(), 1, "\"{from}\" must stand once in\n{module}");
    let errors =
        build(name, &module.replace(from, to), HOST).expect_err("the edited module must not compile");
    assert!(errors.contains(message), "\"{from}\" to \"{to}\":\n{errors}");
}

#[test]
fn emitted_laws_by_closed_form_compile_on_the_host() {
    let resolved = resolved(GATE);
    let e = envelope(&resolved);
    compiles("best", &best(&resolved), HOST);
    let integrator = LawParameters::Integrator { full_scale: 8, up: 1, down: 1 };
    compiles("integrator", &configuration(&resolved, integrator, Integrator::<u8>::new(8).verdict(&e)), HOST);
    let register = LawParameters::ShiftRegister { window: 6 };
    compiles("register", &configuration(&resolved, register, ShiftRegister::new(6).verdict(&e)), HOST);
}

/// A module that pins what a prover found. Where no closed form answers, the bounds are invented: that the
/// module pins them is the point here, not what they are.
fn pinned(resolved: &Resolved, law: LawParameters) -> Configuration {
    let latency = Latency { best: 3, worst: 12 };
    let bounds = match law.verdict(&envelope(resolved)).expect("a law") {
        Verdict::Holds(bounds) => bounds,
        Verdict::Unknown => Bounds { latency: PerChange { make: latency, break_: latency } },
        Verdict::Fails(clause) => panic!("{law} fails: {clause:?}"),
    };
    Configuration::new(
        resolved,
        resolved.ticks.value[0],
        envelope(resolved),
        law,
        bounds,
        Proof::Explored { states: 4_321 },
    )
}

#[test]
fn emitted_law_by_exploring_compiles_on_the_host() {
    let resolved = resolved(GATE);
    compiles("pinned_machine", &pinned(&resolved, best(&resolved).law), HOST);
    for (name, law) in [
        ("pinned_majority", "majority-register 9 of 12"),
        ("pinned_integrator", "integrator 8"),
        ("pinned_register", "shift-register 6"),
    ] {
        compiles(name, &pinned(&resolved, law.parse().expect("a law")), HOST);
    }
}

#[test]
fn emitted_module_compiles_for_any_name_and_rate() {
    let names = ["24 V door", "fn", "self", "дверь", "\\\"; } fn x() {{ /* \\\\ \\u202e", "Envelope", "law"];
    for (index, name) in names.iter().enumerate() {
        let text = GATE
            .replace("sluice gate, upper end", name)
            .replace("\"1 ms\"", ["\"1 kHz\"", "\"937.5 Hz\""][index % 2]);
        compiles(&format!("name_{index}"), &best(&resolved(&text)), HOST);
    }
    compiles("rate", &best(&resolved(&GATE.replace("\"1 ms\"", "\"900.1 Hz\""))), HOST);
}

#[test]
fn emitted_module_compiles_for_a_cortex_m0() {
    compiles("cortex", &best(&resolved(GATE)), CORTEX_M0);
}

#[test]
fn emitted_module_edited_out_of_the_requirement_stops_the_build() {
    let configuration = best(&resolved(GATE));
    let LawParameters::StateMachine { confirm, .. } = configuration.law else { panic!("a state machine") };
    let confirm = format!("StateMachineParameters::confirm({}, {})", confirm.make, confirm.break_);
    let holds = "the parameters of LAW do not hold inside ENVELOPE; choose them anew";
    edited_stops("hasty", &configuration, &confirm, "StateMachineParameters::confirm(1, 1)", holds);
    let late = "the parameters of LAW no longer keep the requirement; choose them anew";
    edited_stops("stricter", &configuration, "ALLOWED_MAKE: u32 = 19", "ALLOWED_MAKE: u32 = 3", late);
    let outside = "the clock or a time of the requirement leaves ENVELOPE; make this module anew";
    edited_stops("faster_clock", &configuration, "from_ns(1_000_000)", "from_ns(100_000)", outside);
    edited_stops(
        "longer_bounce",
        &configuration,
        "BOUNCE_MAKE_NS: u64 = 3_",
        "BOUNCE_MAKE_NS: u64 = 9_",
        outside,
    );
    edited_stops(
        "shorter_quiet",
        &configuration,
        "\npub const QUIET_NS: u64 = 20_",
        "\npub const QUIET_NS: u64 = 2_",
        outside,
    );
    let delay = "a proved latency takes longer than the requirement allows; choose anew";
    edited_stops(
        "less_time",
        &configuration,
        "LATENCY_MAKE_NS: u64 = 20_000_000",
        "LATENCY_MAKE_NS: u64 = 4_000_000",
        delay,
    );
}

#[test]
fn emitted_module_by_exploring_edited_at_all_stops_the_build() {
    let law = "majority-register 9 of 12".parse().expect("a law");
    let configuration = pinned(&resolved(GATE), law);
    let stops = "LAW, ENVELOPE or BOUNDS is not what was proved by exploring; prove it anew";
    edited_stops("pin_majority", &configuration, "MAJORITY: u8 = 9", "MAJORITY: u8 = 10", stops);
    edited_stops("pin_window", &configuration, "WINDOW: u8 = 12", "WINDOW: u8 = 13", stops);
    edited_stops("pin_quiet", &configuration, ".quiet(19)", ".quiet(18)", stops);
    edited_stops(
        "pin_bounds",
        &configuration,
        "make: Latency { best: 3, worst: 12 }",
        "make: Latency { best: 3, worst: 9 }",
        stops,
    );
    // A law of the same kind beside the constants is found as well.
    edited_stops("pin_law", &configuration, "::new(MAJORITY, WINDOW)", "::new(10, WINDOW)", stops);
}

#[test]
fn emitted_majority_register_verdict_is_asked_before_it_is_written() {
    let e = envelope(&resolved(GATE));
    // What decides between the two kinds of module: only a closed form that answers may be asserted.
    assert_eq!(MajorityRegister::<u16>::new(9, 12).verdict(&e), Verdict::Unknown);
}
