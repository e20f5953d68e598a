//! The answer of a study: what to use, what is proved of it, for which contact, and how sure that is.

use debounce_core::{Change, PerChange};
use maud::{Markup, html};

use crate::choose::Candidate;
use crate::prove::{Beyond, Recovery};
use crate::report::{claim_words, nothing_words, words};
use crate::study::{Caution, Guarantees, Study};

/// The whole answer.
pub(super) fn of(study: &Study) -> Markup {
    let best = study.ranking.recommended().zip(study.guarantees.as_ref());
    html! {
        @match best {
            Some((best, _)) => (recommended(study, best)),
            None => (nothing(study)),
        }
        dl {
            @if let Some((_, found)) = best {
                dt { "Proved" }
                dd {
                    "inside the envelope every operation is reported once and in order, within these times: for all "
                    (found.proof.states) " reachable states of contact, disturbances and logic"
                    @if let Some(wider) = found.explored_wider() {
                        "; explored with dwells of " (wider.dwell.open) " open and " (wider.dwell.closed)
                        " closed and a quiet of " (wider.quiet)
                        " samples, which allows all that the envelope does and more"
                    }
                }
            }
            dt { "Envelope" }
            dd { "the contact " (words::envelope(&study.resolved.at_contact()).join("; ")) }
            dt { "Confidence" }
            @for line in confidence(study) { dd { (line) } }
        }
        (fits(study))
        (warnings(&study.cautions()))
        @if let Some((best, found)) = best { (more(study, best, found)) }
    }
}

fn recommended(study: &Study, best: &Candidate) -> Markup {
    let tick = study.tick(best);
    let worst = best.worst_below_ns.unwrap_or(PerChange { make: u64::MAX, break_: u64::MAX });
    html! {
        p class="choice" { strong { (best.parameters) } " at a tick of " strong { (tick) } }
        div class="figures" {
            (fact("a make is reported in less than", &words::at_most(worst.make), "make"))
            (fact("a break is reported in less than", &words::at_most(worst.break_), "break"))
            (fact("RAM an input", &words::count(best.state_bytes as usize, "byte"), "plain"))
            (fact("ticks a second", &format!("{:.0}", tick.ticks_per_second()), "plain"))
        }
    }
}

/// Why this one, what was measured of it, and what is proved beyond the promise.
fn more(study: &Study, best: &Candidate, found: &Guarantees) -> Markup {
    let beyond = beyond(&found.beyond);
    html! {
        dl {
            dt { "Why this one" }
            @if let Some(reason) = &study.ranking.reason { dd { (reason) } }
            dd { (from_the_limit(best)) }
            @for (one, measured) in study.observed.iter().zip(&best.measured) {
                @if let (Some(make), Some(break_)) = (&measured.make.latency, &measured.break_.latency) {
                    dt { "Measured" }
                    dd {
                        "on " (one.name) ", over every phase of the tick, none missed, none false: make median "
                        (words::about(make.delay.median_ns)) ", worst " (words::at_most(make.delay.below_ns))
                        "; break median " (words::about(break_.delay.median_ns)) ", worst "
                        (words::at_most(break_.delay.below_ns))
                    }
                }
            }
            @if let Some(text) = failures(study) { dd { (text) } }
            @if !beyond.is_empty() { dt { "Beyond" } }
            @for line in beyond { dd { (line) } }
        }
    }
}

/// How few operations fail, by those that the recordings let one judge.
fn failures(study: &Study) -> Option<String> {
    claim_words::failures(&study.failures()?, study.claims.confidence)
}

fn fact(what: &str, value: &str, class: &str) -> Markup {
    html! { p class={ "fact " (class) } { b { (value) } " " span { (what) } } }
}

fn from_the_limit(best: &Candidate) -> String {
    let at_tick = best
        .times_limit
        .map_or("its distance from the limit at this tick is not known".to_owned(), |times| {
            format!("its worst latency is {times:.2} times what any logic needs at this tick")
        });
    let at_any = best.times_physical_limit.map(|times| format!(", {times:.2} times what no tick could beat"));
    at_tick + &at_any.unwrap_or_default()
}

/// What is proved outside the promise.
pub(super) fn beyond(found: &Beyond) -> Vec<String> {
    let mut lines = Vec::new();
    let known = |samples: Option<u32>| {
        samples.map_or("none".to_owned(), |samples| words::count(samples as usize, "sample"))
    };
    if let Ok(immunity) = &found.immunity {
        lines.push(format!(
            "all else as it is, it bears disturbances of up to {} while open, or up to {} while closed",
            known(immunity.open),
            known(immunity.closed)
        ));
    }
    if let Some(pair) = found.shortest_operations.as_ref().ok().and_then(|pairs| pairs.first()) {
        let (closed, open) = (pair.closed, pair.open);
        lines.push(format!("operations are served down to {closed} samples closed and {open} open"));
    }
    if let Ok(Recovery::Within(samples)) = &found.after_short_operations {
        lines.push(format!(
            "after operations that are too short the output is right again within {}",
            words::count(*samples as usize, "sample")
        ));
    }
    if let Ok(Recovery::Within(samples)) = &found.from_any_state {
        lines.push(format!(
            "from any state whatever, as after an upset, it is right within {}",
            words::count(*samples as usize, "sample")
        ));
    }
    lines
}

fn nothing(study: &Study) -> Markup {
    let nearest = study.ranking.candidates.first();
    html! {
        p class="choice fails" { strong { "No candidate gives what is asked" } }
        p { (words::count(study.ranking.candidates.len(), "candidate")) " were judged." }
        @if let Some(nearest) = nearest {
            p {
                "Nearest: " strong { (nearest.parameters) } " at a tick of " (study.tick(nearest)) ", but "
                (nearest.shortfalls.iter().map(words::shortfall).collect::<Vec<_>>().join("; ")) "."
            }
        }
        @if let Some(text) = nothing_words::latency_shortfall(study) { p { (text) "." } }
        p { "Next: " (nothing_words::advice(study)) "." }
    }
}

/// Whether the recordings lie inside the envelope.
fn fits(study: &Study) -> Markup {
    let outside = study.conformance.iter().filter(|found| !found.conforms()).count();
    html! {
        @if outside > 0 {
            p class="fails" {
                (words::count(outside, "recording")) " of " (study.observed.len()) " leave the envelope, so what is \
                 proved does not cover what was recorded: see " a href="#conformance" { "Do the recordings fit?" }
            }
        } @else if !study.observed.is_empty() {
            p class="holds" {
                "Every recording lies inside the "
                @if study.guarantees.is_some() { "envelope of the proof." } @else { "required envelope." }
            }
        }
    }
}

/// How sure it is that operations to come stay inside.
fn confidence(study: &Study) -> Vec<String> {
    let (confidence, coverage) = (study.resolved.confidence.value, study.resolved.coverage.value);
    let claims = [Change::Make, Change::Break].into_iter().filter_map(|change| {
        let claim = study.claims.bounce.at(change)?;
        let short = if claim.operations < claim.needed {
            format!("; {} are needed for {coverage}", claim.needed)
        } else {
            String::new()
        };
        Some(format!(
            "with {confidence} confidence {}, from {} recorded, were they independent{short}; designed for {}: {}",
            claim_words::claim(&claim, change),
            claim.operations,
            words::at_most(study.claims.design.of(change).ns),
            claim_words::design_basis(study.claims.design.of(change)),
        ))
    });
    let lines: Vec<String> = claims.collect();
    if lines.is_empty() {
        return vec![
            "nothing was recorded: whether a contact stays inside the envelope is not known".to_owned(),
        ];
    }
    lines
}

/// What weakens the recordings, each with what to do.
pub(super) fn warnings(cautions: &[Caution]) -> Markup {
    html! {
        @if !cautions.is_empty() {
            p { "Before you lean on the recordings:" }
            ul { @for caution in cautions { li { (caution) "." } } }
        }
    }
}
