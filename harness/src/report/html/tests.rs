//! What must be true of every report, whatever is in it.

use std::collections::BTreeSet;

use debounce_core::{Envelope, PerChange};

use super::{
    Characterised, Compared, Limited, Origin, Proved, Reaching, characterised, compared, limit, proof,
};
use crate::characterise::SegmentOptions;
use crate::choose::Preference;
use crate::clock_range::{ClockQuestion, clock_range};
use crate::demo;
use crate::law_text::LawParameters;
use crate::logic::Logic;
use crate::machine::{MachineTable, compare};
use crate::problem::SourceText;
use crate::prove::{Beyond, Effort, LimitAnswer, Limits, prove_within, solve_limit};
use crate::requirement::{Requirement, parse};
use crate::study::{Caution, Claims, Observed, Study, measured, observe};
use crate::trace::{ReadOptions, read_bytes};

fn recorded() -> Observed {
    let options = ReadOptions { resolution_ns: Some(demo::RESOLUTION_NS), ..ReadOptions::default() };
    let recording = read_bytes(demo::RECORDING_NAME, demo::RECORDING, &options).expect("the demo");
    observe(demo::RECORDING_NAME, recording, &SegmentOptions::default()).expect("operations")
}

fn requirement(changed: (&str, &str)) -> Requirement {
    let text = demo::REQUIREMENT.replace(changed.0, changed.1);
    parse(SourceText::new("contact.toml", text)).expect("a requirement")
}

/// A study with few candidates, so that it is quick.
fn studied(changed: (&str, &str), observed: Vec<Observed>) -> Study {
    let laws = [
        "state-machine confirm=2 patience=2 lockout=2/1",
        "integrator 3",
        "shift-register 5",
        "majority-register 3 of 4",
    ];
    let laws: Vec<LawParameters> = laws.iter().map(|law| law.parse().expect("a law")).collect();
    Study::among(observed, &requirement(changed), Preference::default(), Some(laws), |_| {}).expect("a study")
}

fn proved(law: &str, envelope: Envelope) -> String {
    let logic = Logic::try_new(&law.parse().expect("a law")).expect("parameters");
    let table = logic.table().expect("a table");
    let found = prove_within(&table, &envelope, &Limits::default()).expect("a proof");
    let machine = MachineTable::of_table(&table);
    let beyond = Beyond::of(&table, &found, Effort::Quick, &Limits::default());
    let (name, limit, clock, caution) = (law, None, None, None);
    proof(
        &Proved {
            name,
            machine: &machine,
            envelope: &envelope,
            proof: &found,
            limit,
            beyond: &beyond,
            clock,
            allowed: PerChange::default(),
            caution,
        },
        &origin(),
    )
}

fn machine(law: &str) -> MachineTable {
    let logic = Logic::try_new(&law.parse().expect("a law")).expect("parameters");
    MachineTable::of_table(&logic.table().expect("a table"))
}

fn told(one: &str, other: &str) -> String {
    let machines = [&machine(one), &machine(other)];
    let apart = compare(machines[0], machines[1]);
    compared(&Compared { names: [one, other], machines, apart: apart.as_ref() }, &origin())
}

fn limited(envelope: Envelope) -> String {
    let answer = solve_limit(&envelope, &Limits::default()).expect("within the limits");
    let page = |found| limit(&Limited { envelope: &envelope, clock: None, caution: None, found }, &origin());
    match &answer {
        LimitAnswer::Solved(solution) => page(Ok(Reaching {
            latency: solution.latency,
            name: "the logic found",
            machine: &MachineTable::of_table(&solution.logic),
            proof: None,
            evidence: "a search".to_owned(),
            law: None,
        })),
        LimitAnswer::Unsolvable(reason) => page(Err(reason)),
        _ => panic!("neither a limit nor none"),
    }
}

fn page(study: &Study, invented: bool) -> String {
    super::study(study, &clock_range(&ClockQuestion::of(&study.resolved)), invented, &origin())
}

fn origin() -> Origin {
    Origin { command: "harness study --output 'a & b'".to_owned(), ..Origin::default() }
}

const SAME: (&str, &str) = ("control", "control");

/// One report of each kind, and those that differ most.
fn reports() -> Vec<(&'static str, String)> {
    let observed = recorded();
    let resolved = requirement(SAME).fill_in(&measured(std::slice::from_ref(&observed))).expect("values");
    let observed = std::slice::from_ref(&observed);
    let claims = Claims::of(observed, &resolved).expect("claims");
    let warnings = Caution::all(observed, &resolved, &claims);
    let found = Characterised { observed, resolved: &resolved, claims: &claims, warnings: &warnings };
    vec![
        ("study", page(&studied(SAME, observed.to_vec()), true)),
        ("choice", page(&studied(SAME, Vec::new()), false)),
        (
            "nothing holds",
            page(&studied(("latency = \"50 ms\"", "latency = \"3 ms\""), observed.to_vec()), true),
        ),
        ("characterised", characterised(&found, &origin())),
        ("limit", limited(Envelope::clean(20, 20).bounce(5, 3).glitch(1, 1).quiet(10))),
        ("no logic", limited(Envelope::clean(20, 20).glitch(3, 3).quiet(2))),
        ("different", told("integrator 3", "shift-register 3")),
        ("equivalent", told("shift-register 4", "state-machine confirm=4")),
        ("proved", proved("integrator 5", Envelope::clean(20, 20).bounce(5, 3).glitch(1, 1).quiet(10))),
        ("refuted", proved("shift-register 2", Envelope::clean(40, 40).bounce(5, 5))),
    ]
}

/// Every value of an attribute.
fn values<'a>(html: &'a str, attribute: &str) -> Vec<&'a str> {
    let opening = format!(" {attribute}=\"");
    html.split(opening.as_str()).skip(1).filter_map(|rest| rest.split('"').next()).collect()
}

#[test]
fn reports_need_nothing_else_and_are_small() {
    for (name, html) in reports() {
        assert!(html.len() < 1_000_000, "{name}: {} bytes", html.len());
        let rest = html.replace("http://www.w3.org/2000/svg", "");
        for other in ["http:", "https:", "@import", "url(", "src=", "<link", "<img", "<iframe"] {
            let found = rest.matches(other).count();
            let allowed = if other == "url(" { rest.matches("url(#").count() } else { 0 };
            assert_eq!(found, allowed, "{name}: {other}");
        }
        assert!(html.contains("default-src 'none'"), "{name}: a browser must refuse to fetch");
    }
}

#[test]
fn reports_name_every_part_once_and_link_to_parts_that_are_there() {
    for (name, html) in reports() {
        let ids = values(&html, "id");
        let known: BTreeSet<&str> = ids.iter().copied().collect();
        assert_eq!(known.len(), ids.len(), "{name}: an id is used twice in {ids:?}");
        let links =
            values(&html, "href").into_iter().map(|link| link.strip_prefix('#').expect("a link inside"));
        let labels = values(&html, "aria-labelledby").into_iter().flat_map(str::split_whitespace);
        for target in links.chain(labels) {
            assert!(known.contains(target), "{name}: nothing has the id {target}");
        }
    }
}

#[test]
fn reports_have_a_language_one_title_and_headings_in_order() {
    for (name, html) in reports() {
        assert!(html.starts_with("<!DOCTYPE html><html lang=\"en\">"), "{name}");
        assert_eq!(html.matches("<h1>").count(), 1, "{name}");
        assert!(html.contains("class=\"skip\" href=\"#answer\""), "{name}: a way past the contents");
        let answer = html.find("id=\"answer\"").expect("an answer");
        let other = html.find("<section id=\"").map_or(usize::MAX, |first| first);
        assert!(answer <= other + "<section ".len(), "{name}: the answer stands first");
        let mut level = 1;
        for (at, _) in html.match_indices("<h") {
            let digit = html.as_bytes()[at + 2];
            if digit.is_ascii_digit() {
                let next = digit - b'0';
                assert!(next <= level + 1, "{name}: a heading of level {next} after one of {level}");
                level = next;
            }
        }
    }
}

#[test]
fn pictures_have_words_for_those_who_do_not_see_them() {
    for (name, html) in reports() {
        for picture in html.split("<svg ").skip(1) {
            let tag = picture.split('>').next().unwrap_or_default();
            let inside = picture.split("</svg>").next().unwrap_or_default();
            let told = tag.contains("role=\"img\"") && inside.contains("<title>");
            assert!(told || tag.contains("aria-hidden=\"true\""), "{name}: {tag}");
        }
    }
}

#[test]
fn report_of_a_study_has_every_section_its_data_allow() {
    let html = page(&studied(SAME, vec![recorded()]), true);
    let sections = [
        "answer",
        "envelope",
        "recorded",
        "conformance",
        "overlay",
        "bounce",
        "claims",
        "latency",
        "plane",
        "ticks",
        "logic",
        "waveforms",
        "refused",
        "cost",
        "requirement",
        "origin",
    ];
    let found: Vec<&str> =
        html.split("<section id=\"").skip(1).filter_map(|rest| rest.split('"').next()).collect();
    assert_eq!(found, sections);
    // Without a recording there is nothing to show of one.
    let html = page(&studied(SAME, Vec::new()), false);
    for gone in ["recorded", "conformance", "overlay", "bounce", "claims", "latency"] {
        assert!(!html.contains(&format!("<section id=\"{gone}\"")), "{gone}");
    }
    assert!(html.contains("whether a contact stays inside the envelope is not known"));
}

#[test]
fn report_of_a_guarding_or_metering_contact_begins_with_its_caution() {
    for (role, words) in [
        ("guarding", "debouncing makes no input safe"),
        ("metering", "debouncing makes no input fit for trade"),
    ] {
        let html = page(&studied(("control", role), Vec::new()), false);
        let caution = html.find(words).expect(role);
        assert!(caution < html.find("<nav").expect("contents"), "{role}");
    }
    let html = page(&studied(SAME, Vec::new()), false);
    assert!(
        html.contains("Nothing here has been assessed for such use."),
        "the general caution is in every report"
    );
}

#[test]
fn report_escapes_what_it_is_given() {
    let html = page(&studied(("vent push-button", "<script>alert(1)</script> & co"), Vec::new()), false);
    assert!(html.contains("&lt;script&gt;alert(1)&lt;/script&gt; &amp; co"));
    assert!(!html.contains("<script>alert"));
    assert!(html.contains("'a &amp; b'"));
}

#[test]
fn report_of_the_same_study_has_the_same_bytes() {
    let found = studied(SAME, vec![recorded()]);
    let again = studied(SAME, vec![recorded()]);
    assert_eq!(page(&found, true), page(&again, true));
}

#[test]
fn report_of_a_limit_says_it_or_why_there_is_none() {
    let found = limited(Envelope::clean(20, 20).bounce(5, 3).glitch(1, 1).quiet(10));
    assert!(found.contains("<b>8 samples</b> <span>for a make") && found.contains("id=\"logic-diagram\""));
    let none = limited(Envelope::clean(20, 20).glitch(3, 3).quiet(2));
    assert!(none.contains("No logic whatever: ") && !none.contains("id=\"logic-diagram\""));
}

#[test]
fn report_of_a_comparison_shows_the_samples_that_tell_apart_or_none() {
    let different = told("integrator 3", "shift-register 3");
    assert!(different.contains("after 5 samples") && different.contains("id=\"apart\""));
    let same = told("shift-register 4", "state-machine confirm=4");
    assert!(same.contains("Equivalent: ") && !same.contains("id=\"apart\""));
}

#[test]
fn report_of_a_study_shows_claims_and_how_latency_is_distributed() {
    let html = page(&studied(SAME, vec![recorded()]), true);
    // 60 recorded cover 95 % with 95.3 % confidence: 1 - 0.95^60 (S. S. Wilks, 1941).
    for part in [
        "rank 1 of 60 (the longest), with 95.3 % confidence",
        "that claim with a margin of 25 %",
        "0 missed, 0 doubled of 120",
    ] {
        assert!(html.contains(part), "{part}");
    }
    assert!(html.contains("class=\"steps make\"") && html.contains("class=\"steps break\""));
}

#[test]
fn report_of_a_refuted_law_shows_its_counter_example_tick_by_tick() {
    let html = proved("shift-register 2", Envelope::clean(40, 40).bounce(5, 5));
    assert!(html.contains("Refuted: ") && html.contains("id=\"counter-example\""));
    assert!(html.contains("tick     1"), "the same in text, for a reader of text");
}
