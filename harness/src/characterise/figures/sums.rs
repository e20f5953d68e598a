//! How the figures are summed up from operations and disturbances of one or several recordings.

use debounce_core::{Change, Position};

use super::{ChangeFigures, DisturbanceFigures, DwellFigures};
use crate::characterise::independence::Independence;
use crate::characterise::operations::{Ambiguity, Disturbance, Doubt, Operation, Segmentation};
use crate::characterise::quantile::Spread;
use crate::characterise::tail::Tail;

fn operations<'a>(recordings: &'a [&Segmentation]) -> impl Iterator<Item = &'a Operation> {
    recordings.iter().flat_map(|one| &one.operations)
}

pub(super) fn disturbances<'a>(recordings: &'a [&Segmentation]) -> impl Iterator<Item = &'a Disturbance> {
    recordings.iter().flat_map(|one| &one.disturbances)
}

pub(super) fn change(recordings: &[&Segmentation], change: Change) -> ChangeFigures {
    let of_kind = || operations(recordings).filter(|o| o.change == change);
    let mut bounces: Vec<u64> = of_kind().map(Operation::bounce_ns).collect();
    let independence = Independence::of(&bounces);
    let mut edges: Vec<u64> = of_kind().map(|o| o.burst.edges as u64).collect();
    let mut gaps: Vec<u64> = of_kind().map(|o| o.burst.longest_gap_ns).filter(|&ns| ns > 0).collect();
    let mut pulses: Vec<u64> = of_kind().filter_map(|o| o.burst.shortest_pulse_ns).collect();
    let (mut safe, mut longest_bounce_in_doubt_ns) = (Vec::with_capacity(bounces.len()), 0);
    for one in recordings {
        for (operation, reach) in one.operations.iter().zip(one.reaches_ns()) {
            if operation.change == change {
                safe.push(reach.saturating_add(one.resolution_ns));
                if reach > operation.bounce_ns() {
                    longest_bounce_in_doubt_ns = longest_bounce_in_doubt_ns.max(reach);
                }
            }
        }
    }
    safe.sort_unstable();
    let bounce_ns = Spread::of(&mut bounces);
    ChangeFigures {
        count: bounces.len(),
        ambiguous: of_kind().filter(|o| o.ambiguity.is_some()).count(),
        bounce_ns,
        edges: Spread::of(&mut edges),
        longest_gap_ns: Spread::of(&mut gaps),
        shortest_pulse_ns: Spread::of(&mut pulses),
        tail: Tail::of_sorted(&bounces),
        sorted_bounces_ns: bounces,
        sorted_safe_bounces_ns: safe,
        longest_bounce_in_doubt_ns,
        independence,
    }
}

/// A part of a change's burst that may be a disturbance: where it began, from when to when.
fn disturbance_in_doubt(operation: &Operation) -> Option<(Position, u64, u64)> {
    let Ambiguity { doubt, at_ns, run_ns } = operation.ambiguity?;
    let Operation { burst, change, .. } = operation;
    match doubt {
        // Only a run inside the burst; one after it belongs to the disturbance there.
        Doubt::SecondBurstOrDisturbance if at_ns < burst.last_ns => {
            Some((change.to(), at_ns + run_ns, burst.last_ns))
        }
        Doubt::DisturbanceBeforeChange if at_ns >= burst.first_ns && at_ns < burst.last_ns => {
            Some((change.to().opposite(), burst.first_ns, at_ns))
        }
        _ => None,
    }
}

pub(super) fn disturbances_in(recordings: &[&Segmentation], position: Position) -> DisturbanceFigures {
    let there = || disturbances(recordings).filter(|d| d.position == position);
    let mut widths: Vec<u64> = there().map(|d| d.burst.width_ns()).collect();
    let in_doubt = operations(recordings).filter_map(disturbance_in_doubt);
    DisturbanceFigures {
        count: widths.len(),
        ambiguous: there().filter(|d| d.ambiguity.is_some()).count(),
        width_ns: Spread::of(&mut widths),
        widest_in_doubt_ns: in_doubt.filter(|d| d.0 == position).map(|d| d.2 - d.1).max().unwrap_or(0),
    }
}

/// The shortest rest between two disturbances, doubtful ones included. A single one shows none: the stretches from it
/// to the ends of the recording say nothing of how near the next one comes.
pub(super) fn quiet(segmentation: &Segmentation) -> Option<u64> {
    let mut all: Vec<(u64, u64)> =
        segmentation.disturbances.iter().map(|d| (d.burst.first_ns, d.burst.last_ns)).collect();
    all.extend(segmentation.operations.iter().filter_map(disturbance_in_doubt).map(|d| (d.1, d.2)));
    all.sort_unstable();
    all.windows(2).map(|pair| pair[1].0 - pair[0].1).min()
}

pub(super) fn calm(segmentation: &Segmentation) -> Option<u64> {
    let inside = segmentation.operations.iter().filter_map(|operation| {
        let Ambiguity { doubt, at_ns, run_ns } = operation.ambiguity?;
        (doubt == Doubt::SecondBurstOrDisturbance && at_ns < operation.burst.last_ns).then_some(run_ns)
    });
    segmentation.disturbances.iter().filter_map(|d| d.since_bounce_ns).chain(inside).min()
}

pub(super) fn dwell(recordings: &[&Segmentation], position: Position) -> DwellFigures {
    let pairs = || {
        let all = recordings.iter().flat_map(|one| one.operations.windows(2));
        all.filter(|pair| pair[0].change.to() == position)
    };
    let operations = operations(recordings).filter_map(|o| {
        let found = o.ambiguity?;
        let inside = found.at_ns >= o.burst.first_ns && found.at_ns < o.burst.last_ns;
        (found.doubt == Doubt::OneOrSeveralOperations && inside).then_some(found.run_ns)
    });
    let disturbances = disturbances(recordings).filter(|d| d.position == position.opposite());
    let there_and_back = disturbances.filter_map(|d| {
        let found = d.ambiguity?;
        (found.doubt == Doubt::DisturbanceOrOperation).then_some(found.run_ns)
    });
    DwellFigures {
        count: pairs().count(),
        shortest_ns: pairs().map(|pair| pair[1].burst.first_ns - pair[0].burst.first_ns).min(),
        shortest_settled_ns: pairs().map(|pair| pair[1].burst.first_ns - pair[0].burst.last_ns).min(),
        // A burst that may be several operations puts both positions in doubt.
        shortest_in_doubt_ns: operations.chain(there_and_back).min(),
    }
}
