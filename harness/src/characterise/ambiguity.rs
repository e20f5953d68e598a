//! What cannot be told apart: the rules by which a reading is called ambiguous.
//!
//! Every rule looks at one run on which the decision rests, and compares it with the gap g that ends a burst:
//!
//! * inside a burst, a run in the new position of at least 1 ms (g/8 if that is less) and at least twice every
//!   other such run of the burst: what follows may be a disturbance instead of bounce;
//! * inside a burst, runs of g/2 and more are nearly long enough to have ended it;
//! * between bursts, runs shorter than 2g are nearly short enough to have joined them; and a disturbance that
//!   follows a bounce within twice the longest bounce seen may be a late second burst of it.
//!
//! The 1 ms and the g/8 leave out the ordinary quiet stretches of one bounce, which would make nearly every bounce
//! ambiguous: real closures show second bursts after 0.2 to 0.5 ms (plots of eight switches by G. Sutherland,
//! "switch_bouncing", public domain); 1 ms is twice that.

use super::operations::{Ambiguity, Doubt};

/// From this run on, what follows in the same burst may be something else than its bounce.
const LONG_REST_NS: u64 = 1_000_000;

/// Judges the inside of a burst with an odd number of edges, a change.
pub(super) fn inside_change(edges: &[u64], gap_ns: u64) -> Option<Ambiguity> {
    let doubt = |index: usize, doubt| Ambiguity { doubt, at_ns: edges[index], run_ns: run(edges, index) };
    let runs = edges.len() - 1;
    let near = |index: usize| run(edges, index) >= gap_ns.div_ceil(2);
    // Even runs lie in the new position, odd ones in the old.
    if let Some(there) = (0..runs).step_by(2).find(|&i| near(i))
        && (there + 1..runs).step_by(2).any(near)
    {
        return Some(doubt(there, Doubt::OneOrSeveralOperations));
    }
    if let Some(longest) = (0..runs).step_by(2).max_by_key(|&i| run(edges, i)) {
        let ns = run(edges, longest);
        let stands_out = (0..runs).step_by(2).all(|i| i == longest || run(edges, i) <= ns / 2);
        if near(longest) || stands_out && ns >= gap_ns.div_ceil(8).min(LONG_REST_NS) {
            return Some(doubt(longest, Doubt::SecondBurstOrDisturbance));
        }
    }
    if let Some(longest) = (1..runs).step_by(2).max_by_key(|&i| run(edges, i))
        && near(longest)
    {
        return Some(doubt(longest, Doubt::DisturbanceBeforeChange));
    }
    None
}

/// Judges the inside of a burst with an even number of edges, a disturbance.
pub(super) fn inside_disturbance(edges: &[u64], gap_ns: u64) -> Option<Ambiguity> {
    (0..edges.len() - 1)
        .step_by(2)
        .max_by_key(|&i| run(edges, i))
        .filter(|&i| run(edges, i) >= gap_ns.div_ceil(2))
        .map(|i| Ambiguity { doubt: Doubt::DisturbanceOrOperation, at_ns: edges[i], run_ns: run(edges, i) })
}

/// Judges the run between the end of a change's burst and a disturbance after it.
pub(super) fn after_bounce(
    bounce_end_ns: u64,
    run_ns: u64,
    gap_ns: u64,
    longest_bounce_ns: u64,
) -> Option<Ambiguity> {
    let reach = gap_ns.saturating_mul(2).max(longest_bounce_ns.saturating_mul(2));
    (run_ns < reach).then_some(Ambiguity {
        doubt: Doubt::SecondBurstOrDisturbance,
        at_ns: bounce_end_ns,
        run_ns,
    })
}

/// Judges the run between the end of a disturbance and a change after it.
pub(super) fn before_change(disturbance_end_ns: u64, run_ns: u64, gap_ns: u64) -> Option<Ambiguity> {
    (run_ns < gap_ns.saturating_mul(2)).then_some(Ambiguity {
        doubt: Doubt::DisturbanceBeforeChange,
        at_ns: disturbance_end_ns,
        run_ns,
    })
}

/// Judges the settled run between two changes.
pub(super) fn between_changes(settled_from_ns: u64, run_ns: u64, gap_ns: u64) -> Option<Ambiguity> {
    (run_ns < gap_ns.saturating_mul(2)).then_some(Ambiguity {
        doubt: Doubt::OneOrSeveralOperations,
        at_ns: settled_from_ns,
        run_ns,
    })
}

fn run(edges: &[u64], index: usize) -> u64 {
    edges[index + 1] - edges[index]
}
