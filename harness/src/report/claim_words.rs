//! What recordings allow to claim, in sentences: the same on the screen and in the report.

use debounce_core::Change;

use super::words;
use crate::characterise::{ChangeFigures, Claim, Independence, tail::Tail, tolerance};
use crate::quantity::Share;
use crate::replay::Failures;
use crate::requirement::Origin;
use crate::study::{Claims, DesignBounce};

/// The share of all operations that bounces no longer than the longest recorded.
#[must_use]
pub fn claim(claim: &Claim, change: Change) -> String {
    format!(
        "{} of {}s bounce no longer than {}",
        words::covered(claim.covered),
        words::change(change),
        words::at_most(claim.longest_ns)
    )
}

/// The tolerance limit that reaches the coverage and the confidence asked for, or how many operations it still needs.
#[must_use]
pub fn limit(claims: &Claims, claim: &Claim, change: Change) -> String {
    match claim.limit {
        Some(limit) => format!(
            "{} of {}s bounce no longer than {}, rank {} of {} ({}), with {} confidence (asked {})",
            claims.coverage,
            words::change(change),
            words::at_most(limit.ns),
            limit.rank,
            claim.operations,
            if limit.rank == 1 { "the longest" } else { "counted from the longest" },
            words::covered(limit.confidence),
            claims.confidence,
        ),
        None => format!(
            "none for {} of {}s: {} recorded, {} needed, {} more",
            claims.coverage,
            words::change(change),
            claim.operations,
            claim.needed,
            claim.more_needed(),
        ),
    }
}

/// On which claim the bounce that is designed for stands.
#[must_use]
pub fn design_basis(design: &DesignBounce) -> String {
    if let (Origin::Measured, Some(margin)) = (design.origin, design.margin) {
        return format!("that claim with a margin of {margin}");
    }
    let origin = design_origin(design);
    match design.covered {
        Some(covered) => format!(
            "{origin}; {} of {} recorded were longer, so it covers {} of all",
            design.longer,
            design.recorded,
            words::covered(covered)
        ),
        None if design.recorded > 0 => {
            format!("{origin}; every one of {} recorded was longer", design.recorded)
        }
        None => format!("{origin}; none was recorded"),
    }
}

/// Where the bounce that is designed for comes from; where a network lengthens it, also what it lengthens.
fn design_origin(design: &DesignBounce) -> String {
    let Some(contact) = design.of_contact else { return design.origin.to_string() };
    let from = match contact.origin {
        Origin::Default(_) => "the default".to_owned(),
        origin => origin.to_string(),
    };
    format!("{}, for a contact that bounces for {} ({from})", design.origin, contact.value)
}

/// With which confidence how few operations fail, by those that a replay could judge.
#[must_use]
pub fn failures(found: &Failures, confidence: Share) -> Option<String> {
    let share = tolerance::Share::try_new(confidence.fraction()).ok()?;
    let (missed, doubled) = found.rates_at_most(share).ok()?;
    Some(format!(
        "{} missed, {} doubled of {} changes; with {confidence} confidence at most {} of all missed, {} doubled",
        found.missed,
        found.doubled,
        found.changes,
        words::rate_at_most(missed),
        words::rate_at_most(doubled),
    ))
}

/// Whether the order of the operations is that of independent ones.
#[must_use]
pub fn order(found: &Independence) -> String {
    let runs = found.runs.map(|test| {
        format!(
            "{} runs about the median where {:.1} are to be expected (Wald-Wolfowitz: chance {})",
            test.runs,
            test.expected,
            words::chance(test.p_value)
        )
    });
    let trend = found.trend.map(|test| {
        format!("a trend of {:+.2} (Mann-Kendall: chance {})", test.tau, words::chance(test.p_value))
    });
    let tests: Vec<String> = runs.into_iter().chain(trend).collect();
    if tests.is_empty() {
        return "too much alike to test whether they are independent".to_owned();
    }
    let verdict =
        if found.is_doubtful() { "not what independent ones show" } else { "as independent ones may be" };
    format!("in their order {}: {verdict}", tests.join(" and "))
}

/// What the longest ones indicate of still longer ones; `None` where they are too few.
#[must_use]
pub fn indication(found: &ChangeFigures) -> Option<String> {
    let tail = found.tail.as_ref()?;
    Some(format!(
        "an indication and no claim: by the {} longest (peaks over {}, generalised Pareto, shape {:+.2}), one in 1000 \
         exceeds {}",
        tail.excesses,
        words::about(tail.threshold_ns),
        tail.pareto.shape,
        words::at_most(exceeded_once_in_1000(tail)),
    ))
}

/// One in 1000 exceeds this, rounded up to a nanosecond.
fn exceeded_once_in_1000(tail: &Tail) -> u64 {
    tail.exceeded_once_in(1e3).ceil() as u64
}
