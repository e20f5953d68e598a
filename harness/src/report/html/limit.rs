//! The report of a limit: what no logic can beat, and a logic that reaches it.

use debounce_core::{Change, Envelope, PerChange, TickClock};
use maud::{Markup, html};

use super::{Origin, Page, Section, envelope, logic, origin, witness};
use crate::machine::MachineTable;
use crate::prove::{NoLogic, Outcome, Proof, Witness};
use crate::report::words;

/// A limit with everything a report says of it.
#[derive(Clone, Debug)]
pub struct Limited<'a> {
    /// The envelope in samples.
    pub envelope: &'a Envelope,
    /// The sample clock, where one is known.
    pub clock: Option<TickClock>,
    /// The caution for the role of the contact, where there is one.
    pub caution: Option<&'static str>,
    /// The limit, or why there is no logic.
    pub found: Result<Reaching<'a>, &'a NoLogic>,
}

/// A limit with a logic that has exactly that latency.
#[derive(Clone, Debug)]
pub struct Reaching<'a> {
    /// The least worst latency that any logic can have, in samples.
    pub latency: PerChange<u32>,
    /// What the logic is called.
    pub name: &'a str,
    /// The logic.
    pub machine: &'a MachineTable,
    /// Its exploration; `None` where it does not fit.
    pub proof: Option<&'a Proof>,
    /// How the limit is known.
    pub evidence: String,
    /// The built-in law that reaches it, where one is known to.
    pub law: Option<String>,
}

/// The report of a limit.
#[must_use]
pub fn limit(limited: &Limited<'_>, origin: &Origin) -> String {
    let mut sections: Vec<Section> = vec![envelope::in_samples(limited.envelope)];
    match &limited.found {
        Ok(reaching) => {
            sections.extend(reaching.proof.map(witness::of_proof));
            sections.push(logic::section(reaching.name, &reaching.machine.minimised().machine));
        }
        Err(NoLogic::AlwaysInDoubt { witness }) => sections.push(in_doubt(witness)),
        Err(_) => {}
    }
    sections.push(origin::section(origin, &[], &method()));
    let page = Page {
        title: "What no logic can beat".to_owned(),
        kind: "Limit of an envelope".to_owned(),
        invented: false,
        cautions: limited.caution.into_iter().collect(),
        answer: answered(limited),
        sections,
    };
    page.html()
}

fn in_doubt(shown: &Witness) -> Section {
    let title = "The output of the logic that is as early as any can be";
    let body = html! { p { (witness::LETTERS) } (witness("in-doubt", title, shown)) };
    Section { id: "waveforms", heading: "Counter-example".to_owned(), body }
}

fn answered(limited: &Limited<'_>) -> Markup {
    let reaching = match &limited.found {
        Ok(reaching) => reaching,
        Err(reason) => {
            return html! {
                p class="choice fails" { strong { "No logic whatever: " } (reason) }
                p { "Nothing reports every operation of this envelope once and in order." }
            };
        }
    };
    html! {
        p class="choice" { strong { "No logic whatever can promise less" } }
        div class="figures" {
            @for change in [Change::Make, Change::Break] {
                @let samples = reaching.latency.at(change);
                p class={ "fact " (words::change(change)) } {
                    b { (words::count(samples as usize, "sample")) } " "
                    span { "for a " (words::change(change)) @if let Some(clock) = &limited.clock { ", " (words::delay_below(clock, samples)) } }
                }
            }
        }
        dl {
            dt { "Known from" } dd { (reaching.evidence) }
            dt { "Frontier" }
            dd { "one logic has both at once, so make and break are not traded for each other" }
            dt { "Reached by" } dd { (reaching.name) @if let Some(law) = &reaching.law { "; the built-in " code { (law) } " reaches it" } }
            dt { "Proved" }
            dd {
                @match reaching.proof {
                    Some(Proof { states, outcome: Outcome::Faithful { .. }, .. }) => {
                        "for all " (states) " states of contact, disturbances and logic together"
                    }
                    _ => "by the written proof; exploring it would not fit the memory allowed",
                }
            }
        }
    }
}

fn method() -> Vec<String> {
    vec![
        "Everything that a logic can know from its samples is followed; where a closed form is proved for the envelope, \
         it must say the same."
            .to_owned(),
        "The latency counts the first sample that can see the new position as 1.".to_owned(),
    ]
}
