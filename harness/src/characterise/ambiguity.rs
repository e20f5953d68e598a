//! What cannot be told apart: the rules by which a reading is called ambiguous.
//!
//! Every rule looks at one run on which the decision rests, and compares it with the gap g that ends a burst:
//!
//! * inside a burst, where fewer than 10 operations of the kind were recorded: a run in the new position of at least
//!   1 ms (g/8 if that is less) and at least twice every other such run of the burst: what follows may be a disturbance
//!   instead of bounce;
//! * inside a burst, runs of g/2 and more are nearly long enough to have ended it;
//! * inside a burst, where at least 10 operations of the kind were recorded: a run in either position that is at least
//!   twice every other such run of the burst and either twice what nine in ten operations of the kind hold (but 0.1 ms)
//!   or twice what half of them hold (but 1 ms): what follows, or what precedes, may be a disturbance; a burst of at
//!   least twice the edges of nine in ten may hold one somewhere; and so may one with a touch of less than half of what
//!   nine in ten have as their shortest;
//! * between bursts, runs shorter than 2g are nearly short enough to have joined them; and a disturbance that
//!   follows a bounce within twice the longest bounce seen may be a late second burst of it.
//!
//! The 1 ms and the g/8 leave out the ordinary quiet stretches of one bounce, which would make nearly every bounce
//! ambiguous: real closures show second bursts after 0.2 to 0.5 ms (plots of eight switches by G. Sutherland,
//! "switch_bouncing", public domain); 1 ms is twice that.

use super::lengths::Lengths;
use super::operations::{Ambiguity, Doubt};

/// From this run on, what follows in the same burst may be something else than its bounce.
const LONG_REST_NS: u64 = 1_000_000;

/// What the operations of one kind usually look like inside.
#[derive(Debug, Default)]
pub(super) struct Usual {
    /// The longest run of each burst in the new position, and in the old one.
    there: Lengths,
    back: Lengths,
    edges: Lengths,
    /// The shortest run of each burst in the new position.
    touches: Lengths,
}

/// Runs shorter than this are not looked at twice: second bursts of real closures begin after 0.2 to 0.5 ms, and most
/// bounces hold runs of some 10 us (the plots named above); half the former (our choice).
const LEAST_UNUSUAL_NS: u64 = 100_000;

/// From so many operations on, what nine in ten of them show is called usual (our choice).
const ENOUGH: u64 = 10;

impl Usual {
    /// Takes in the burst of one operation.
    pub(super) fn add(&mut self, edges: &[u64]) {
        self.there.add(longest(edges, 0).map_or(0, |(_, ns)| ns));
        self.back.add(longest(edges, 1).map_or(0, |(_, ns)| ns));
        self.edges.add(edges.len() as u64);
        self.touches.add(shortest(edges, 0).map_or(0, |(_, ns)| ns));
    }

    /// Judges the burst of an operation against the others.
    pub(super) fn judge(&self, edges: &[u64], gap_ns: u64, resolution_ns: u64) -> Option<Ambiguity> {
        if self.edges.total() < ENOUGH {
            return by_its_own(edges, gap_ns);
        }
        // Operations without such a run at all count as runs of no more than the recorder sees.
        let in_percent = |lengths: &Lengths, percent: u64| {
            let without = self.edges.total() - lengths.total();
            let below = (percent * self.edges.total()).saturating_sub(100 * without);
            let percent_of_those = below.checked_div(lengths.total()).unwrap_or(0);
            let seen = if percent_of_those == 0 { None } else { lengths.at_least_percent(percent_of_those) };
            seen.unwrap_or(0).max(resolution_ns)
        };
        let usual = |lengths: &Lengths| {
            let twice = |percent| in_percent(lengths, percent).saturating_mul(2);
            twice(90).max(LEAST_UNUSUAL_NS).min(twice(50).max(LONG_REST_NS))
        };
        let odd = |first: usize, lengths: &Lengths, doubt| {
            let (index, ns) = longest(edges, first)?;
            let runs = (first..edges.len() - 1).step_by(2);
            let stands_out = runs.into_iter().all(|i| i == index || run(edges, i) <= ns / 2);
            (stands_out && ns >= usual(lengths)).then_some(Ambiguity {
                doubt,
                at_ns: edges[index],
                run_ns: ns,
            })
        };
        // Too many edges, or a touch far shorter than any usual one.
        let crowded = || {
            let (index, run_ns) = longest(edges, 0)?;
            let usual = self.edges.at_least_percent(90)?;
            let doubt = Doubt::SecondBurstOrDisturbance;
            (edges.len() as u64 >= 2 * usual.max(3)).then_some(Ambiguity {
                doubt,
                at_ns: edges[index],
                run_ns,
            })
        };
        let touch = || {
            let (index, ns) = shortest(edges, 0)?;
            let usual = self.touches.at_least_percent(10)?;
            let is_odd = ns.saturating_add(resolution_ns) < usual / 2;
            let doubt =
                if index == 0 { Doubt::DisturbanceBeforeChange } else { Doubt::SecondBurstOrDisturbance };
            // Where the doubt is about what comes before, the decision rests on the run after the touch.
            let at = if index == 0 { 1 } else { index };
            is_odd.then(|| Ambiguity { doubt, at_ns: edges[at], run_ns: run(edges, at) })
        };
        odd(0, &self.there, Doubt::SecondBurstOrDisturbance)
            .or_else(|| odd(1, &self.back, Doubt::DisturbanceBeforeChange))
            .or_else(crowded)
            .or_else(touch)
    }
}

/// The shortest run among every other one from `first` on, the earliest of several, and its index.
fn shortest(edges: &[u64], first: usize) -> Option<(usize, u64)> {
    (first..edges.len().saturating_sub(1)).step_by(2).map(|i| (i, run(edges, i))).min_by_key(|&(_, ns)| ns)
}

/// Judges a burst where there are too few others to compare it with.
fn by_its_own(edges: &[u64], gap_ns: u64) -> Option<Ambiguity> {
    let (index, ns) = longest(edges, 0)?;
    let mut runs = (0..edges.len() - 1).step_by(2);
    let stands_out = runs.all(|i| i == index || run(edges, i) <= ns / 2);
    let doubt = Doubt::SecondBurstOrDisturbance;
    (stands_out && ns >= gap_ns.div_ceil(8).min(LONG_REST_NS)).then_some(Ambiguity {
        doubt,
        at_ns: edges[index],
        run_ns: ns,
    })
}

/// The longest run among every other one from `first` on, the earliest of several, and its index.
fn longest(edges: &[u64], first: usize) -> Option<(usize, u64)> {
    let runs = (first..edges.len().saturating_sub(1)).step_by(2).map(|i| (i, run(edges, i)));
    runs.max_by(|a, b| a.1.cmp(&b.1).then(b.0.cmp(&a.0)))
}

/// Judges the inside of a burst with an odd number of edges, a change, by the gap alone: runs that nearly ended it.
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
    if let Some(longest) = (0..runs).step_by(2).max_by_key(|&i| run(edges, i))
        && near(longest)
    {
        return Some(doubt(longest, Doubt::SecondBurstOrDisturbance));
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
