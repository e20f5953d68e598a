//! Why no candidate holds and what to do about it, in sentences: the same on the screen and in the report.

use debounce_core::{Change, PerChange};

use super::words;
use crate::choose::Shortfall;
use crate::study::Study;

/// The latency asked for and the least that any candidate promises, where the nearest one fails for another reason:
/// the candidates that are quick enough then break a promise, and the latency is what kept the others out.
#[must_use]
pub fn latency_shortfall(study: &Study) -> Option<String> {
    let ranking = &study.ranking;
    let too_slow = |shortfall: &Shortfall| matches!(shortfall, Shortfall::TooSlow { .. });
    if ranking.candidates.first().is_some_and(|nearest| nearest.shortfalls.iter().any(too_slow)) {
        return None;
    }
    let asked = required_ns(study);
    let least = |change: Change| {
        let worst = ranking.candidates.iter().filter_map(|one| one.worst_below_ns);
        worst.map(|worst| *worst.of(change)).min()
    };
    let least = least(Change::Make).zip(least(Change::Break));
    let required = format!(
        "{} for a make and {} for a break are required",
        words::about(asked.make),
        words::about(asked.break_)
    );
    match least {
        None => {
            Some(format!("{required}, and no candidate so quick reports every operation once and in order"))
        }
        Some((make, break_)) if make > asked.make || break_ > asked.break_ => Some(format!(
            "{required}; the least that any candidate promises is {} and {}",
            words::at_most(make),
            words::at_most(break_)
        )),
        Some(_) => None,
    }
}

/// What no tick and no logic could beat.
#[must_use]
pub fn least_of_all(study: &Study) -> String {
    let PerChange { make, break_ } = study.ranking.physical_limit_ns;
    format!(
        "no logic at any tick can promise less than {} at a make or {} at a break in this envelope",
        words::at_most(make),
        words::at_most(break_)
    )
}

/// What to do about a study that does not hold.
#[must_use]
pub fn advice(study: &Study) -> &'static str {
    if study.conformance.iter().any(|found| !found.conforms()) {
        return "relax what is asked, record the contact again, or state the figures that the recording exceeds";
    }
    let (asked, least) = (required_ns(study), study.ranking.physical_limit_ns);
    if least.make > asked.make || least.break_ > asked.break_ {
        "relax what is asked: in this envelope no tick and no logic can be so quick"
    } else {
        "relax what is asked, or allow a shorter tick"
    }
}

fn required_ns(study: &Study) -> PerChange<u64> {
    let latency = &study.resolved.required.latency;
    PerChange { make: latency.make.value.ns(), break_: latency.break_.value.ns() }
}
