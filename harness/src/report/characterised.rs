//! What recordings show and allow to claim, as JSON values. Times are in nanoseconds, chances and shares from 0 to 1.

use debounce_core::{Change, Position};
use serde_json::{Value, json};

use super::words;
use crate::characterise::{
    ChangeFigures, Claim, Extent, Figures, Histogram, Independence, Operation, Spread, Step, tail::Tail,
};
use crate::quantity::Time;
use crate::replay::Failures;
use crate::study::{Claims, DesignBounce, Extreme, Observed};

/// The name of the quantiles' convention, as it stands beside them (R. J. Hyndman, Y. Fan, Am. Stat. 50 (1996)).
pub const QUANTILES: &str = "type 7 (Hyndman and Fan, 1996)";

/// A spread.
#[must_use]
pub fn spread(spread: Spread) -> Value {
    json!({ "min": spread.min, "median": spread.median, "p95": spread.p95, "p99": spread.p99, "max": spread.max })
}

/// The figures of recordings, one or several.
#[must_use]
pub fn figures(figures: &Figures) -> Value {
    let position = |which: Position| {
        let disturbances = figures.disturbances.of(which);
        let dwell = figures.dwell.of(which);
        json!({
            "disturbances": disturbances.count,
            "ambiguous": disturbances.ambiguous,
            "width_ns": disturbances.width_ns.map(spread),
            "widest_in_doubt_ns": disturbances.widest_in_doubt_ns,
            "dwells": dwell.count,
            "shortest_dwell_ns": dwell.shortest_ns,
            "shortest_dwell_in_doubt_ns": dwell.shortest_in_doubt_ns,
        })
    };
    let changes = &figures.changes;
    json!({
        "recorded_ns": figures.recorded_ns,
        "resolution_ns": figures.resolution_ns,
        "quantiles": QUANTILES,
        "make": change(&changes.make, figures.resolution_ns),
        "break": change(&changes.break_, figures.resolution_ns),
        "open": position(Position::Open),
        "closed": position(Position::Closed),
        "disturbances_per_second": figures.disturbances_per_second(),
        "rests": figures.rests,
        "disturbance_spacing_ns": figures.spacing_ns.map(spread),
        "quiet_ns": figures.quiet_ns,
        "calm_ns": figures.calm_ns,
        "cut_off": figures.fragments,
    })
}

fn change(figures: &ChangeFigures, resolution_ns: u64) -> Value {
    json!({
        "count": figures.count,
        "ambiguous": figures.ambiguous,
        "bounce_ns": figures.bounce_ns.map(spread),
        "edges": figures.edges.map(spread),
        "longest_gap_ns": figures.longest_gap_ns.map(spread),
        "shortest_pulse_ns": figures.shortest_pulse_ns.map(spread),
        "longest_bounce_in_doubt_ns": figures.longest_bounce_in_doubt_ns,
        "histogram": figures.histogram(resolution_ns).map(|bins| histogram(&bins)),
        "distribution": figures.distribution().into_iter().map(step).collect::<Value>(),
        "independence": independence(&figures.independence),
        "tail": figures.tail.as_ref().map(tail),
    })
}

fn histogram(histogram: &Histogram) -> Value {
    json!({ "from_ns": histogram.from_ns, "bin_ns": histogram.bin_ns, "counts": histogram.counts })
}

fn step(step: Step) -> Value {
    json!({ "ns": step.ns, "at_most": step.at_most })
}

fn independence(found: &Independence) -> Value {
    json!({
        "runs": found.runs.map(|test| json!({
            "above_median": test.above,
            "below_median": test.below,
            "runs": test.runs,
            "expected": test.expected,
            "p_value": test.p_value,
        })),
        "trend": found.trend.map(|test| json!({
            "s": test.s,
            "tau": test.tau,
            "p_value": test.p_value,
        })),
        "doubtful": found.is_doubtful(),
    })
}

/// An indication, and marked as one.
fn tail(tail: &Tail) -> Value {
    json!({
        "is_a_claim": false,
        "threshold_ns": tail.threshold_ns,
        "excesses": tail.excesses,
        "scale_ns": tail.pareto.scale,
        "shape": tail.pareto.shape,
        "exceeded_once_in_1000_ns": tail.exceeded_once_in(1e3),
        "exceeded_once_in_1000000_ns": tail.exceeded_once_in(1e6),
        "ends_ns": tail.pareto.end().map(|end| end + tail.threshold_ns as f64),
    })
}

/// What may be claimed, and what is taken for the design.
#[must_use]
pub fn claims(claims: &Claims) -> Value {
    let of = |which: Change| {
        let design = claims.design.of(which);
        claims.bounce.at(which).map(|claim| {
            let mut value = claim_of(&claim);
            value["design"] = design_of(design);
            value
        })
    };
    json!({
        "confidence": claims.confidence.fraction(),
        "coverage": claims.coverage.fraction(),
        "method": "order statistics (Wilks, 1941), operations taken as independent and alike",
        "make": of(Change::Make),
        "break": of(Change::Break),
        "others": claims.extremes.iter().map(extreme).collect::<Value>(),
    })
}

fn extreme(found: &Extreme) -> Value {
    json!({
        "figure": found.key(),
        "recorded": found.count,
        "needed": found.needed,
        "seen_ns": found.seen.map(Time::ns),
        "covered": found.covered,
        "taken_ns": found.taken.value.ns(),
        "taken_from": found.taken.origin.word(),
    })
}

fn claim_of(claim: &Claim) -> Value {
    json!({
        "operations": claim.operations,
        "longest_bounce_ns": claim.longest_ns,
        "covered": claim.covered,
        "operations_needed": claim.needed,
        "operations_more": claim.more_needed(),
        "limit": claim.limit.map(|limit| json!({
            "bounce_ns": limit.ns,
            "rank": limit.rank,
            "confidence": limit.confidence,
        })),
    })
}

fn design_of(design: &DesignBounce) -> Value {
    json!({
        "bounce_ns": design.ns,
        "origin": design.origin.word(),
        "margin": design.margin.map(|margin| margin.fraction()),
        "recorded": design.recorded,
        "longer": design.longer,
        "covered": design.covered,
    })
}

/// Every operation of a recording.
#[must_use]
pub fn operations(one: &Observed) -> Value {
    let resolution_ns = one.segmentation.resolution_ns;
    let reaches = one.segmentation.reaches_ns();
    let row = |(operation, reach): (&Operation, u64)| {
        let burst = &operation.burst;
        json!({
            "kind": words::change(operation.change),
            "at_ns": burst.first_ns,
            "bounce_ns": operation.bounce_ns(),
            "bounce_at_most_ns": reach.saturating_add(resolution_ns),
            "edges": burst.edges,
            "longest_gap_ns": burst.longest_gap_ns,
            "shortest_pulse_ns": burst.shortest_pulse_ns,
            "dwell_before": extent(operation.dwell_before),
            "dwell_after": extent(operation.dwell_after),
            "doubt": operation.ambiguity.map(|ambiguity| json!({
                "between": ambiguity.doubt.text(),
                "at_ns": ambiguity.at_ns,
                "run_ns": ambiguity.run_ns,
            })),
        })
    };
    one.segmentation.operations.iter().zip(reaches).map(row).collect()
}

fn extent(extent: Extent) -> Value {
    json!({ "ns": extent.seen_ns(), "exact": extent.exact().is_some() })
}

/// How often operations failed in a replay, with the exact bound; `None` where the confidence is no share.
#[must_use]
pub fn failures(failures: &Failures, confidence: crate::quantity::Share) -> Option<Value> {
    let share = crate::characterise::tolerance::Share::try_new(confidence.fraction()).ok()?;
    let (missed, doubled) = failures.rates_at_most(share).ok()?;
    Some(json!({
        "changes": failures.changes,
        "missed": failures.missed,
        "doubled": failures.doubled,
        "confidence": confidence.fraction(),
        "missed_at_most": missed,
        "doubled_at_most": doubled,
        "method": "exact binomial bound (Clopper and Pearson, 1934)",
    }))
}
