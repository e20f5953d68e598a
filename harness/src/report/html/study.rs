//! The report of a study, and of a choice.

use debounce_core::{Change, PerChange};

use super::bounce::Limit;
use super::timing::{self, LogicRun, Moment, Shown};
use super::{
    Origin, Page, Section, answer, bounce, claims, conformance, cost, distribution, envelope, latency, logic,
    network, origin, plane, requirement, simpler, tick, witness,
};
use crate::choose::Candidate;
use crate::clock_range::ClockRange;
use crate::machine::MachineTable;
use crate::study::{Guarantees, Observed, Study};
use crate::trace::Trace;

/// The report of a study; `range` answers [`ClockQuestion::of`](crate::clock_range::ClockQuestion::of) its requirement.
#[must_use]
pub fn study(study: &Study, range: &ClockRange, invented: bool, origin: &Origin) -> String {
    let title = &study.resolved.name.value;
    let best = study.ranking.recommended();
    let machine =
        best.and_then(|best| Some(MachineTable::of_table(&best.logic.table().ok()?).minimised().machine));
    let mut sections = vec![envelope_section(study, best)];
    let front = study.resolved.network.as_ref();
    sections.extend(front.map(|front| network::section(&front.resolved.network.waveforms())));
    sections.extend(timing::section(
        &shown(study, best, machine.as_ref()),
        "Recorded, and what the logic makes of it",
    ));
    sections.extend(conformance::section(study));
    sections.extend(bounce::section(&study.observed, |change| limits(study, change)));
    sections.extend(distribution::section(&study.observed, |change| limits(study, change)));
    sections.extend(claims::section(&study.claims));
    sections.extend(latency::section(study));
    sections.extend(plane::section(study));
    sections.extend(tick::section(study, range));
    sections.extend(
        machine
            .as_ref()
            .zip(best)
            .map(|(machine, best)| logic::section(&best.parameters.to_string(), machine)),
    );
    sections.extend(study.guarantees.as_ref().map(worst));
    sections.extend(simpler::section(study));
    sections.push(cost::section(study));
    sections.push(requirement::section(&study.resolved));
    sections.push(origin::section(origin, &study.observed, &method(study)));
    let page = Page {
        title: title.clone(),
        kind: "Study of a contact".to_owned(),
        invented,
        cautions: study.resolved.caution().into_iter().collect(),
        answer: answer::of(study),
        sections,
    };
    page.html()
}

/// What the pin shows of a recording: the recording itself where no network stands between them.
fn at_pin(study: &Study, one: &Observed) -> Trace {
    let network = study.resolved.network.as_ref().map(|front| &front.resolved.network);
    one.at_pin(network).unwrap_or_else(|_| one.recording.trace.clone())
}

fn envelope_section(study: &Study, best: Option<&Candidate>) -> Section {
    let ticks = best.and_then(|best| {
        let envelope = study.ranking.view(best).envelope.as_ref().ok()?;
        Some((envelope, study.tick(best).to_string()))
    });
    let network = study.resolved.network.as_ref().map(|front| front.sentences()).unwrap_or_default();
    envelope::section(&study.resolved.at_contact(), &network, ticks)
}

/// The waveforms of the proof, and those that show what is not given.
fn worst(found: &Guarantees) -> Section {
    let mut section = witness::of_proof(&found.proof);
    let after = found.beyond.after_short_operations.as_ref().ok().and_then(|recovery| {
        let title = "After operations that are too short the output can stay wrong";
        witness::recovery(recovery, "after-short", title)
    });
    let upset = found.beyond.from_any_state.as_ref().ok().and_then(|recovery| {
        witness::recovery(recovery, "from-any-state", "From some states the output can stay wrong")
    });
    let before = section.body;
    section.body = maud::html! { (before) @if let Some(shown) = after { (shown) } @if let Some(shown) = upset { (shown) } };
    section
}

/// What is claimed of the bounce, and what the envelope allows.
fn limits(study: &Study, change: Change) -> Vec<Limit> {
    let claimed = study.claims.bounce.at(change).map(|claim| Limit {
        name: "claimed",
        at_ns: claim.longest_ns,
        class: "claimed",
    });
    let allowed = Limit { name: "envelope", at_ns: study.claims.design.of(change).ns, class: "asked" };
    claimed.into_iter().chain([allowed]).collect()
}

/// The recordings with their moments, and the recommended logic at work on them.
fn shown<'a>(study: &'a Study, best: Option<&Candidate>, machine: Option<&MachineTable>) -> Vec<Shown<'a>> {
    study
        .observed
        .iter()
        .enumerate()
        .map(|(index, one)| {
            let worst = best.and_then(|best| best.worst_below_ns);
            let reach_ns = worst.map_or(0, |PerChange { make, break_ }| make.max(break_));
            let (mut runs, mut moments) = match best.zip(machine) {
                Some((best, machine)) => slowest(study, best, machine, one, index),
                None => (Vec::new(), Vec::new()),
            };
            if let (Some((best, machine)), true) = (best.zip(machine), runs.is_empty()) {
                runs.push(LogicRun::of(
                    machine,
                    &study.ranking.view(best).clock,
                    0,
                    &at_pin(study, one),
                    &one.truth,
                ));
            }
            timing::outside(one, &study.conformance[index], &mut moments, reach_ns);
            timing::remarkable(one, &mut moments, reach_ns);
            Shown { one, runs, moments }
        })
        .collect()
}

/// The slowest make and the slowest break, each at its own phase of the tick.
fn slowest(
    study: &Study,
    best: &Candidate,
    machine: &MachineTable,
    one: &Observed,
    index: usize,
) -> (Vec<LogicRun>, Vec<Moment>) {
    let clock = study.ranking.view(best).clock;
    let pin = at_pin(study, one);
    let (mut runs, mut moments) = (Vec::new(), Vec::new());
    for change in [Change::Make, Change::Break] {
        let latencies = best.measured.get(index).and_then(|measured| measured.at(change).latency.as_ref());
        let Some(latencies) = latencies else { continue };
        let slowest = latencies.slowest;
        // The delay rises toward the end of the span, so the last phase in it is the slowest.
        let run = LogicRun::of(machine, &clock, slowest.phase.until - 1, &pin, &one.truth);
        let delay_ns = run.delay_of(one, slowest.at_ns).unwrap_or(latencies.delay.below_ns);
        moments.push(timing::slowest(one, change, slowest.at_ns, delay_ns, runs.len()));
        runs.push(run);
    }
    (runs, moments)
}

fn method(study: &Study) -> Vec<String> {
    let lines = [
        "Operations, bounces and disturbances are read from the edges of the recording; what is in doubt is counted on \
         the safe side.",
        "Times become samples, and samples times, with the tolerance and the jitter of the clock, always rounded toward \
         the safe side.",
        "Bounds are proved by exploring every reachable state of envelope and logic together, or by a closed form whose \
         proof is written down and compared with exploration.",
        "Measured delays are exact over every phase of the tick: nothing is drawn at random.",
        "Quantiles of recorded times are those of definition 7 of R. J. Hyndman and Y. Fan, Am. Stat. 50 (1996) 361-365.",
    ];
    let from = usize::from(study.observed.is_empty());
    lines[from..].iter().map(|line| (*line).to_owned()).collect()
}
