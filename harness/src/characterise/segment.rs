//! From a recording to operations and disturbances.

use debounce_core::{Change, PerChange, Position};

use super::ambiguity::{self, Usual};
use super::gap::{self, Gap, GapOrigin};
use super::operations::{Burst, Disturbance, Extent, Fragment, Operation, RecordingEnd, Segmentation};
use crate::quantity::{Time, counted};
use crate::trace::Trace;

/// How to segment; the default finds everything from the data.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub struct SegmentOptions {
    /// The shortest run that ends a burst, where the caller knows better than the data.
    pub gap_ns: Option<u64>,
}

/// Why a recording cannot be segmented.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum SegmentError {
    /// The line never changes.
    #[error("the recording holds no operation: the line stays {} throughout; check the channel and the wiring", word(*.position))]
    NoEdges {
        /// Where it stays.
        position: Position,
    },
    /// There are edges, but none of the bursts leads from one position to the other.
    #[error(
        "the recording holds no operation: every burst of its {} returns to where it began or is cut off (a burst \
         ends after {} of rest); record a whole make or break, or state a shorter gap",
        counted(*.edges as u64, "edge"),
        Time::from_ns(*.gap_ns)
    )]
    NoOperation {
        /// The number of edges.
        edges: usize,
        /// The gap that was used.
        gap_ns: u64,
    },
    /// The line changes all the time.
    #[error(
        "the line never settles: of its {edges} edges no two are further apart than {}; a contact rests now and \
         then: check the channel, or state the rest that ends a burst with --gap",
        Time::from_ns(*.longest_ns)
    )]
    NeverSettles {
        /// The number of edges.
        edges: usize,
        /// The longest run, those at the ends of the recording included.
        longest_ns: u64,
    },
    /// The line changes all the time, at the gap that was stated.
    #[error(
        "the stated gap of {} ends no burst: of the {} no two are further apart than {}; state a shorter gap, or \
         leave it out to have it found",
        Time::from_ns(*.gap_ns),
        counted(*.edges as u64, "edge"),
        Time::from_ns(*.longest_ns)
    )]
    GapTooLong {
        /// The number of edges.
        edges: usize,
        /// The longest run, those at the ends of the recording included.
        longest_ns: u64,
        /// The gap that was stated.
        gap_ns: u64,
    },
    /// A gap of 0 would make every edge an operation of its own, bounce included.
    #[error(
        "a gap of 0 ns ends no burst; state how long the line rests between two operations, such as 20 ms"
    )]
    GapOfZero,
}

fn word(position: Position) -> &'static str {
    match position {
        Position::Open => "open",
        Position::Closed => "closed",
    }
}

/// Reads a recording as makes, breaks and disturbances.
///
/// # Method
/// Derived here. Edges closer than the gap form a burst; one that ends in the position in which it began is a
/// disturbance, any other a change with its bounce. The gap is the emptiest stretch among the lengths of the
/// runs on a logarithmic scale, unless `options` states it. What cannot be told apart so is marked on the
/// operation or disturbance; [`Doubt`](super::Doubt) says what it counts as and which side the claims take.
///
/// # Errors
/// When no operation was recorded whole.
pub fn segment(trace: &Trace, options: &SegmentOptions) -> Result<Segmentation, SegmentError> {
    let edges = trace.edges();
    if edges.is_empty() {
        return Err(SegmentError::NoEdges { position: trace.initial() });
    }
    let longest_ns = longest_run(trace);
    // Unless somebody states how long this one rests.
    match options.gap_ns {
        None if longest_ns < LEAST_REST_NS => {
            return Err(SegmentError::NeverSettles { edges: edges.len(), longest_ns });
        }
        Some(gap_ns) if longest_ns < gap_ns => {
            return Err(SegmentError::GapTooLong { edges: edges.len(), longest_ns, gap_ns });
        }
        _ => {}
    }
    let gap = match options.gap_ns {
        Some(0) => return Err(SegmentError::GapOfZero),
        Some(ns) => Gap { ns, origin: GapOrigin::Given },
        None => gap::find(edges, trace.start_ns(), trace.end_ns()),
    };
    let mut reading = Reading::new(trace, gap);
    let mut before = 0;
    for burst in edges.chunk_by(|a, b| b - a < gap.ns) {
        reading.take(burst, trace.position_after(before));
        before += burst.len();
    }
    let mut segmentation = reading.segmentation;
    if segmentation.operations.is_empty() {
        return Err(SegmentError::NoOperation { edges: edges.len(), gap_ns: gap.ns });
    }
    set_dwells(&mut segmentation);
    mark_unusual(edges, &mut segmentation);
    mark_neighbours(&mut segmentation);
    Ok(segmentation)
}

/// A contact that is operated rests at least this long somewhere in a recording (our choice: 20 presses a second would
/// rest for 25 ms, a quick encoder for 5 ms; a clock or a data line never does).
const LEAST_REST_NS: u64 = 5_000_000;

/// The longest run of a trace, those at its ends included.
fn longest_run(trace: &Trace) -> u64 {
    trace.runs().map(|run| run.until_ns - run.from_ns).max().unwrap_or(0)
}

/// The segmentation as it grows, burst by burst.
struct Reading {
    segmentation: Segmentation,
    last_disturbance_end: Option<u64>,
    last_bounce_end: Option<u64>,
}

impl Reading {
    fn new(trace: &Trace, gap: Gap) -> Self {
        Self {
            segmentation: Segmentation {
                gap,
                operations: Vec::new(),
                disturbances: Vec::new(),
                fragments: Vec::new(),
                recorded_ns: (trace.start_ns(), trace.end_ns()),
                resolution_ns: trace.resolution_ns(),
            },
            last_disturbance_end: None,
            last_bounce_end: None,
        }
    }

    fn take(&mut self, edges: &[u64], before: Position) {
        let burst = describe(edges);
        let gap_ns = self.segmentation.gap.ns;
        let (start_ns, end_ns) = self.segmentation.recorded_ns;
        let cut_by = if burst.first_ns - start_ns < gap_ns {
            Some(RecordingEnd::Start)
        } else if end_ns - burst.last_ns < gap_ns {
            Some(RecordingEnd::End)
        } else {
            None
        };
        if let Some(cut_by) = cut_by {
            self.segmentation.fragments.push(Fragment { cut_by, before, burst });
        } else if edges.len().is_multiple_of(2) {
            self.segmentation.disturbances.push(Disturbance {
                position: before,
                burst,
                since_disturbance_ns: self.last_disturbance_end.map(|end| burst.first_ns - end),
                since_bounce_ns: self.last_bounce_end.map(|end| burst.first_ns - end),
                ambiguity: ambiguity::inside_disturbance(edges, gap_ns),
            });
            self.last_disturbance_end = Some(burst.last_ns);
        } else {
            self.segmentation.operations.push(Operation {
                change: before.opposite().reached_by(),
                burst,
                // Set once the neighbours are known.
                dwell_before: Extent::AtLeast(0),
                dwell_after: Extent::AtLeast(0),
                ambiguity: ambiguity::inside_change(edges, gap_ns),
            });
            self.last_bounce_end = Some(burst.last_ns);
        }
    }
}

fn describe(edges: &[u64]) -> Burst {
    let runs = || edges.windows(2).map(|pair| pair[1] - pair[0]);
    Burst {
        first_ns: edges[0],
        last_ns: edges[edges.len() - 1],
        edges: edges.len(),
        longest_gap_ns: runs().max().unwrap_or(0),
        shortest_pulse_ns: runs().min(),
    }
}

/// Sets the dwell before and after each operation, from first edge to first edge.
fn set_dwells(segmentation: &mut Segmentation) {
    // A fragment may hide a change, so nothing on its far side is known.
    let mut known_from = segmentation.recorded_ns.0;
    let mut known_until = segmentation.recorded_ns.1;
    for fragment in &segmentation.fragments {
        match fragment.cut_by {
            RecordingEnd::Start => known_from = known_from.max(fragment.burst.last_ns),
            RecordingEnd::End => known_until = known_until.min(fragment.burst.first_ns),
        }
    }
    let firsts: Vec<u64> = segmentation.operations.iter().map(|o| o.burst.first_ns).collect();
    for (index, operation) in segmentation.operations.iter_mut().enumerate() {
        let first = operation.burst.first_ns;
        operation.dwell_before = match index.checked_sub(1) {
            Some(previous) => Extent::Exactly(first - firsts[previous]),
            None => Extent::AtLeast(first - known_from),
        };
        operation.dwell_after = match firsts.get(index + 1) {
            Some(next) => Extent::Exactly(next - first),
            None => Extent::AtLeast(known_until.saturating_sub(first)),
        };
    }
}

/// Marks what is in doubt because it is unlike the other operations of its kind.
fn mark_unusual(edges: &[u64], segmentation: &mut Segmentation) {
    let mut usual = PerChange { make: Usual::default(), break_: Usual::default() };
    for operation in &segmentation.operations {
        let burst = edges_of(edges, operation);
        match operation.change {
            Change::Make => usual.make.add(burst),
            Change::Break => usual.break_.add(burst),
        }
    }
    let (gap_ns, resolution_ns) = (segmentation.gap.ns, segmentation.resolution_ns);
    for operation in segmentation.operations.iter_mut().filter(|operation| operation.ambiguity.is_none()) {
        operation.ambiguity =
            usual.of(operation.change).judge(edges_of(edges, operation), gap_ns, resolution_ns);
    }
}

/// The edges of an operation's burst.
fn edges_of<'a>(edges: &'a [u64], operation: &Operation) -> &'a [u64] {
    let first = edges.partition_point(|&edge| edge < operation.burst.first_ns);
    &edges[first..first + operation.burst.edges]
}

/// Marks what is in doubt because of a neighbour.
fn mark_neighbours(segmentation: &mut Segmentation) {
    let gap_ns = segmentation.gap.ns;
    let longest_bounce = segmentation.operations.iter().map(Operation::bounce_ns).max().unwrap_or(0);
    let operations = &mut segmentation.operations;
    for index in 1..operations.len() {
        let settled_from = operations[index - 1].burst.last_ns;
        let run = operations[index].burst.first_ns - settled_from;
        if let Some(found) = ambiguity::between_changes(settled_from, run, gap_ns) {
            operations[index - 1].ambiguity.get_or_insert(found);
            operations[index].ambiguity.get_or_insert(found);
        }
    }
    for disturbance in &mut segmentation.disturbances {
        if disturbance.ambiguity.is_some() {
            continue;
        }
        let (first, last) = (disturbance.burst.first_ns, disturbance.burst.last_ns);
        let next = operations.partition_point(|o| o.burst.first_ns < first);
        let after = next.checked_sub(1).and_then(|previous| {
            let end = operations[previous].burst.last_ns;
            ambiguity::after_bounce(end, first - end, gap_ns, longest_bounce)
        });
        disturbance.ambiguity = after.or_else(|| {
            let change = operations.get(next)?.burst.first_ns;
            ambiguity::before_change(last, change - last, gap_ns)
        });
    }
}

#[cfg(test)]
mod tests;
