//! What goes wrong with the logic that was turned down: of each kind the nearest miss, with its counter-example.

use maud::html;

use super::Section;
use super::latency::kind;
use super::witness::{LETTERS, refuted};
use crate::choose::{Candidate, Judgement};
use crate::prove::{Limits, prove_within};
use crate::report::words;
use crate::study::Study;

/// Counter-examples that are drawn.
const MOST: usize = 3;

/// One counter-example for each kind of law that is refuted at the recommended tick, or at the first one.
pub(super) fn section(study: &Study) -> Option<Section> {
    let clock = study.ranking.candidates.first()?.clock;
    let mut shown: Vec<(&Candidate, maud::Markup)> = Vec::new();
    let here = study.ranking.candidates.iter().filter(|one| one.clock == clock);
    for one in here.filter(|one| matches!(one.judgement, Judgement::Refuted { .. })) {
        let is_new = shown.iter().all(|(known, _)| kind(&known.parameters) != kind(&one.parameters));
        if shown.len() < MOST && is_new {
            let id = format!("refused-{}", shown.len() + 1);
            shown.extend(counter_example(study, one, &id).map(|picture| (one, picture)));
        }
    }
    if shown.is_empty() {
        return None;
    }
    let body = html! {
        p {
            "Of each kind of logic that does not hold at a tick of " (study.tick(shown[0].0))
            " the nearest miss, with a shortest waveform inside the envelope that shows why. " (LETTERS)
        }
        div class="pair refused" {
            @for (one, picture) in &shown {
                div {
                    h3 { code { (one.parameters) } }
                    @let reasons: Vec<String> = one.shortfalls.iter().map(words::shortfall).collect();
                    p { "Turned down because " (reasons.join("; ")) "." }
                    (picture)
                }
            }
        }
    };
    Some(Section { id: "refused", heading: "What was turned down".to_owned(), body })
}

/// The waveform that refutes a candidate; `None` where finding it takes too long.
fn counter_example(study: &Study, one: &Candidate, id: &str) -> Option<maud::Markup> {
    let envelope = study.ranking.view(one).envelope.ok()?;
    let few = Limits { memory_bytes: 1 << 18, threads: 1, ..Limits::default() };
    let proof = prove_within(&one.logic.table().ok()?, &envelope, &few).ok()?;
    let (clause, witness) = proof.refutation()?;
    Some(refuted(clause, witness, id))
}
