//! The report of a single proof.

use debounce_core::{Change, Envelope, PerChange, TickClock};
use maud::{Markup, html};

use super::{Origin, Page, answer, envelope, logic, origin, witness};
use crate::machine::MachineTable;
use crate::prove::{Beyond, Contract, Outcome, Proof};
use crate::quantity::Time;
use crate::report::words;

/// A finished proof with everything a report says of it.
#[derive(Clone, Copy, Debug)]
pub struct Proved<'a> {
    /// What the logic is called.
    pub name: &'a str,
    /// The machine behind it.
    pub machine: &'a MachineTable,
    /// The envelope in samples.
    pub envelope: &'a Envelope,
    /// The proof.
    pub proof: &'a Proof,
    /// What no logic could beat, where it is known, in samples.
    pub limit: Option<PerChange<u32>>,
    /// What holds beyond the bounds.
    pub beyond: &'a Beyond,
    /// The sample clock, where one is known.
    pub clock: Option<TickClock>,
    /// The latency that is required for a make and for a break, where one is.
    pub allowed: PerChange<Option<Time>>,
    /// The caution for the role of the contact, where there is one.
    pub caution: Option<&'static str>,
}

/// The report of a proof.
#[must_use]
pub fn proof(proved: &Proved<'_>, origin: &Origin) -> String {
    let sections = vec![
        witness::of_proof(proved.proof),
        envelope::in_samples(proved.envelope),
        logic::section(proved.name, &proved.machine.minimised().machine),
        origin::section(origin, &[], &method()),
    ];
    let page = Page {
        title: proved.name.to_owned(),
        kind: "Proof of a logic".to_owned(),
        invented: false,
        cautions: proved.caution.into_iter().collect(),
        answer: answered(proved),
        sections,
    };
    page.html()
}

fn answered(proved: &Proved<'_>) -> Markup {
    let proof = proved.proof;
    html! {
        @match &proof.outcome {
            Outcome::Faithful { bounds, .. } => {
                p class="choice holds" {
                    strong { "Proved: " }
                    @match proof.contract {
                        Contract::Follow => "every operation is reported once and in order",
                        Contract::Alternate => "the output turns over once for every make",
                    }
                }
                div class="figures" {
                    @for change in [Change::Make, Change::Break] {
                        @let latency = bounds.latency.at(change);
                        p class={ "fact " (words::change(change)) } {
                            b { (words::count(latency.worst as usize, "sample")) } " "
                            span { "at most for a " (words::change(change)) ", at least " (latency.best) }
                        }
                    }
                }
                dl {
                    @for change in [Change::Make, Change::Break] {
                        @if let Some(line) = line(proved, change, bounds.latency.at(change).worst) {
                            dt { "Latency at " (words::change(change)) }
                            dd { (line) }
                        }
                    }
                    @let beyond = answer::beyond(proved.beyond);
                    @if !beyond.is_empty() { dt { "Beyond" } }
                    @for line in beyond { dd { (line) } }
                    (size(proof))
                }
            }
            Outcome::Refuted { clause, .. } => {
                p class="choice fails" { strong { "Refuted: " } (words::clause(*clause)) }
                p { "The " a href="#waveforms" { "counter-example" } " is a shortest one." }
                dl { (size(proof)) }
            }
        }
    }
}

/// The latency in time, and against the limit.
fn line(proved: &Proved<'_>, change: Change, worst: u32) -> Option<String> {
    let time = proved.clock.map(|clock| words::delay_below(&clock, worst));
    let allowed = allowed(&proved.clock, *proved.allowed.of(change), worst);
    let limit = proved.limit.map(|limit| {
        let limit = limit.at(change);
        format!(
            "no logic can promise less than {limit} samples ({:.2} times)",
            f64::from(worst) / f64::from(limit)
        )
    });
    let parts: Vec<String> = time.into_iter().chain(allowed).chain(limit).collect();
    (!parts.is_empty()).then(|| parts.join("; "))
}

/// Whether a required latency is kept.
fn allowed(clock: &Option<TickClock>, allowed: Option<Time>, worst: u32) -> Option<String> {
    let (clock, allowed) = (clock.as_ref()?, allowed?);
    Some(words::against(clock.delay_ns(worst).1, allowed))
}

fn size(proof: &Proof) -> Markup {
    html! {
        dt { "Explored" }
        dd {
            (proof.states) " states of contact, disturbances and logic together, " (proof.transitions) " transitions; \
             the envelope alone has " (proof.environment_states) ", the logic " (proof.law_states)
        }
    }
}

fn method() -> Vec<String> {
    vec![
        "Envelope and logic are explored together, every reachable state; a search that is not finished proves nothing."
            .to_owned(),
        "The latency counts the first sample that can see the new position as 1.".to_owned(),
    ]
}
