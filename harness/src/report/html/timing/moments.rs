//! Which stretches of a recording are worth a diagram.

use debounce_core::{Change, Position};

use super::title_word;
use crate::characterise::Operation;
use crate::conformance::Conformance;
use crate::report::words;
use crate::study::Observed;

/// A stretch of a recording.
#[derive(Clone, PartialEq, Debug)]
pub(in crate::report::html) struct Moment {
    /// What it shows, in a few words.
    pub(super) title: String,
    /// The same in a sentence.
    pub(super) description: String,
    /// From when to when, in nanoseconds of the recording.
    pub(super) window: (u64, u64),
    /// The instant that counts as 0.
    pub(super) zero_ns: u64,
    /// Which run of the logic is drawn, where there is one.
    pub(in crate::report::html) run: usize,
}

impl Moment {
    /// The window for the script: from, until, zero, run.
    pub(super) fn data(&self) -> String {
        format!("[{},{},{},{}]", self.window.0, self.window.1, self.zero_ns, self.run)
    }

    /// Whether both show the same stretch, or nearly.
    fn shows(&self, zero_ns: u64) -> bool {
        self.zero_ns == zero_ns
    }
}

/// A change of the contact with room before and after it: to the end of its bounce or to its report.
pub(in crate::report::html) fn around(one: &Observed, at_ns: u64, until_ns: u64) -> (u64, u64) {
    let trace = &one.recording.trace;
    let length = until_ns.saturating_sub(at_ns).max(trace.resolution_ns().max(1) * 20);
    let from = at_ns.saturating_sub(length / 4).max(trace.start_ns());
    (from, at_ns.saturating_add(length).saturating_add(length / 3).min(trace.end_ns()).max(from + 1))
}

/// The operation that began at an instant.
fn operation(one: &Observed, at_ns: u64) -> Option<&Operation> {
    one.segmentation.operations.iter().find(|operation| operation.burst.first_ns == at_ns)
}

/// The operation that was reported last of all, at the phase of the tick at which that was so.
pub(in crate::report::html) fn slowest(
    one: &Observed,
    change: Change,
    at_ns: u64,
    delay_ns: u64,
    run: usize,
) -> Moment {
    let bounce = operation(one, at_ns).map_or(0, Operation::bounce_ns);
    Moment {
        title: format!("Slowest {}, at {}", title_word(change), words::instant(at_ns)),
        description: format!(
            "The {} of the recording that the logic reports last, at the phase of the tick at which it is slowest: \
             reported {} after the first edge; its bounce lasts {}.",
            title_word(change),
            words::at_most(delay_ns),
            words::about(bounce),
        ),
        window: around(one, at_ns, at_ns + delay_ns.max(bounce)),
        zero_ns: at_ns,
        run,
    }
}

/// What is remarkable about the contact itself, each only once.
pub(in crate::report::html) fn remarkable(one: &Observed, moments: &mut Vec<Moment>, reach_ns: u64) {
    let segmentation = &one.segmentation;
    for change in [Change::Make, Change::Break] {
        let of_kind = segmentation.operations.iter().filter(|operation| operation.change == change);
        let longest =
            of_kind.max_by_key(|operation| (operation.bounce_ns(), u64::MAX - operation.burst.first_ns));
        if let Some(operation) = longest {
            let burst = operation.burst;
            push(
                moments,
                Moment {
                    title: format!(
                        "Longest bounce after a {}, at {}",
                        title_word(change),
                        words::instant(burst.first_ns)
                    ),
                    description: format!("{} edges in {}.", burst.edges, words::about(burst.width_ns())),
                    window: around(one, burst.first_ns, burst.last_ns.max(burst.first_ns + reach_ns)),
                    zero_ns: burst.first_ns,
                    run: 0,
                },
            );
        }
    }
    for position in Position::BOTH {
        let there = segmentation.disturbances.iter().filter(|disturbance| disturbance.position == position);
        let widest = there
            .max_by_key(|disturbance| (disturbance.burst.width_ns(), u64::MAX - disturbance.burst.first_ns));
        if let Some(disturbance) = widest {
            let burst = disturbance.burst;
            push(
                moments,
                Moment {
                    title: format!(
                        "Widest disturbance while {}, at {}",
                        words::position(position),
                        words::instant(burst.first_ns)
                    ),
                    description: format!(
                        "The line is disturbed for {}; the contact stays {}.",
                        words::about(burst.width_ns()),
                        words::position(position)
                    ),
                    window: around(one, burst.first_ns, burst.last_ns.max(burst.first_ns + reach_ns)),
                    zero_ns: burst.first_ns,
                    run: 0,
                },
            );
        }
    }
    for pair in shortest_stays(one) {
        let (from, until) = (pair[0].burst.first_ns, pair[1].burst.first_ns);
        let position = words::position(pair[0].change.to());
        push(
            moments,
            Moment {
                title: format!("Shortest time {position}, at {}", words::instant(from)),
                description: format!("The contact stays {position} for {}.", words::about(until - from)),
                window: around(one, from, until + reach_ns / 2),
                zero_ns: from,
                run: 0,
            },
        );
    }
}

/// For each position the two operations that lie nearest to each other around it.
fn shortest_stays(one: &Observed) -> impl Iterator<Item = &[Operation]> {
    Position::BOTH.into_iter().rev().filter_map(|position| {
        let pairs =
            one.segmentation.operations.windows(2).filter(move |pair| pair[0].change.to() == position);
        pairs.min_by_key(|pair| pair[1].burst.first_ns - pair[0].burst.first_ns)
    })
}

/// Where the recording leaves the envelope, the first few places.
pub(in crate::report::html) fn outside(
    one: &Observed,
    conformance: &Conformance,
    moments: &mut Vec<Moment>,
    reach_ns: u64,
) {
    const MOST: usize = 6;
    for violation in conformance.violations.iter().take(MOST) {
        let (found, allowed) = (violation.found_ns, violation.allowed_ns);
        push(
            moments,
            Moment {
                title: format!("Outside the envelope, at {}", words::instant(violation.at_ns)),
                description: format!(
                    "The {}: {} found, {} allowed.",
                    violation.clause.text(),
                    words::about(found),
                    words::about(allowed)
                ),
                window: around(one, violation.at_ns, violation.at_ns + found.max(allowed).max(reach_ns)),
                zero_ns: violation.at_ns,
                run: 0,
            },
        );
    }
}

fn push(moments: &mut Vec<Moment>, moment: Moment) {
    if !moments.iter().any(|known| known.shows(moment.zero_ns)) {
        moments.push(moment);
    }
}
