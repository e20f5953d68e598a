//! The raw line around each operation, aligned at the first touch, for drawing many operations over each other.

use debounce_core::Position;

use super::operations::Segmentation;
use crate::trace::Trace;

/// What the line did around one operation.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Aligned {
    /// Index of the operation in [`Segmentation::operations`].
    pub operation: usize,
    /// The runs, in order; the first begins with the window and the last ends with it, unless the recording does.
    pub runs: Vec<AlignedRun>,
}

/// A run of the line, in nanoseconds from the first edge of the operation.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct AlignedRun {
    /// Where the line looks to be.
    pub position: Position,
    /// First instant; negative before the first edge.
    pub from_ns: i64,
    /// First instant after the run.
    pub until_ns: i64,
}

/// The runs of `trace` from `before_ns` before the first edge of an operation to `after_ns` behind it; `None` where
/// there is no such operation.
#[must_use]
pub fn aligned(
    trace: &Trace,
    segmentation: &Segmentation,
    operation: usize,
    before_ns: u64,
    after_ns: u64,
) -> Option<Aligned> {
    let first_ns = segmentation.operations.get(operation)?.burst.first_ns;
    let from_ns = first_ns.saturating_sub(before_ns).max(trace.start_ns());
    let until_ns = first_ns.saturating_add(after_ns).min(trace.end_ns());
    let edges = trace.edges();
    let before = edges.partition_point(|&edge| edge <= from_ns);
    let inside = edges[before..].iter().copied().take_while(|&edge| edge < until_ns);
    let mut starts: Vec<u64> = vec![from_ns];
    starts.extend(inside);
    // Both differences are within a window of at most 2^63 ns around the edge.
    let offset = |ns: u64| i64::try_from(i128::from(ns) - i128::from(first_ns)).unwrap_or(i64::MAX);
    let runs = starts.iter().enumerate().map(|(index, &start)| AlignedRun {
        position: trace.position_after(before + index),
        from_ns: offset(start),
        until_ns: offset(starts.get(index + 1).copied().unwrap_or(until_ns)),
    });
    Some(Aligned { operation, runs: runs.collect() })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::characterise::{SegmentOptions, segment};
    use Position::{Closed, Open};

    const MS: u64 = 1_000_000;

    fn recording() -> Trace {
        let edges = [100, 101, 103, 300, 301, 302].map(|ms| ms * MS).to_vec();
        Trace::new(Open, 0, 400 * MS, edges, 1).unwrap()
    }

    #[test]
    fn aligned_runs_begin_and_end_with_the_window() {
        let trace = recording();
        let segmentation = segment(&trace, &SegmentOptions::default()).unwrap();
        let found = aligned(&trace, &segmentation, 1, 2 * MS, 5 * MS).unwrap();
        let runs: Vec<(Position, i64, i64)> = found
            .runs
            .iter()
            .map(|run| (run.position, run.from_ns / 1_000_000, run.until_ns / 1_000_000))
            .collect();
        assert_eq!(runs, [(Closed, -2, 0), (Open, 0, 1), (Closed, 1, 2), (Open, 2, 5)]);
        // The recording ends before a window that is too wide.
        let wide = aligned(&trace, &segmentation, 0, u64::MAX, u64::MAX).unwrap();
        assert_eq!(wide.runs.len(), 7);
        assert_eq!(wide.runs[0].from_ns, -100_000_000);
        assert_eq!(wide.runs[6].until_ns, 300_000_000);
        assert_eq!(aligned(&trace, &segmentation, 2, 0, 0), None);
    }
}
