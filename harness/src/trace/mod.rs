//! A recorded line as runs of position, in integer nanoseconds; and the files such a recording comes from.
//!
//! [`read_path`] tells a VCD, a CSV and the text of the firmware's own recorder apart by their content and turns one
//! channel into a [`Recording`];
//! [`write_vcd`] goes the other way. What the readers had to decide on their own comes back as [`Note`]s.

use debounce_core::Position;

mod builder;
mod channel;
mod csv;
mod error;
mod open;
mod options;
#[cfg(test)]
mod oracle_tests;
mod polarity;
mod range;
mod recorder;
mod recording;
#[cfg(test)]
mod round_trip_tests;
mod vcd;
mod write;

pub use crate::level::Level;
pub use channel::{Channel, ChannelKind};
pub use error::{Fault, Lack, MAX_FAULTS, ReadError};
pub use open::{list_channels, read_bytes, read_channels, read_path, read_path_through, read_stream};
pub use options::{DecimalMark, Delimiter, ReadOptions, ThresholdError, Thresholds, TimeUnit};
pub use polarity::{Polarity, Unknown};
pub use recording::{Note, Recording, SamplePeriod};
pub use write::write_vcd;

/// A recorded line: which position it looked to be in, from `start_ns` to `end_ns`.
///
/// Polarity has been turned already, by whoever made the trace.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Trace {
    initial: Position,
    start_ns: u64,
    end_ns: u64,
    edges: Vec<u64>,
    resolution_ns: u64,
}

/// One stretch of a trace in which the line does not change.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Run {
    /// Where the line looks to be.
    pub position: Position,
    /// First instant of the run.
    pub from_ns: u64,
    /// First instant after the run.
    pub until_ns: u64,
}

/// Why a list of edges is no trace.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum TraceError {
    /// The end lies before the start.
    #[error("the trace ends at {end_ns} ns, before its start at {start_ns} ns")]
    EndBeforeStart {
        /// The given start.
        start_ns: u64,
        /// The given end.
        end_ns: u64,
    },
    /// An edge is not later than the one before it, or lies outside the trace.
    #[error("edge {index} at {at_ns} ns must lie after {after_ns} ns and not after {end_ns} ns")]
    EdgeOutOfOrder {
        /// Index of the edge, from 0.
        index: usize,
        /// Its time.
        at_ns: u64,
        /// The edge before it, or the start.
        after_ns: u64,
        /// The end of the trace.
        end_ns: u64,
    },
}

impl Trace {
    /// A trace that begins in `initial` and turns over at each of `edges`.
    ///
    /// `resolution_ns` is the recorder's own sample period: two edges closer than that may be one instant.
    ///
    /// # Errors
    /// Edges must rise strictly and lie in `start_ns < edge <= end_ns`.
    pub fn new(
        initial: Position,
        start_ns: u64,
        end_ns: u64,
        edges: Vec<u64>,
        resolution_ns: u64,
    ) -> Result<Self, TraceError> {
        if end_ns < start_ns {
            return Err(TraceError::EndBeforeStart { start_ns, end_ns });
        }
        let mut after_ns = start_ns;
        for (index, &at_ns) in edges.iter().enumerate() {
            if at_ns <= after_ns || at_ns > end_ns {
                return Err(TraceError::EdgeOutOfOrder { index, at_ns, after_ns, end_ns });
            }
            after_ns = at_ns;
        }
        Ok(Self { initial, start_ns, end_ns, edges, resolution_ns })
    }

    /// The position before the first edge.
    #[must_use]
    pub fn initial(&self) -> Position {
        self.initial
    }

    /// First recorded instant.
    #[must_use]
    pub fn start_ns(&self) -> u64 {
        self.start_ns
    }

    /// First instant after the recording.
    #[must_use]
    pub fn end_ns(&self) -> u64 {
        self.end_ns
    }

    /// The instants at which the line turns over, rising strictly; the new position holds from that instant on.
    #[must_use]
    pub fn edges(&self) -> &[u64] {
        &self.edges
    }

    /// The recorder's own sample period.
    #[must_use]
    pub fn resolution_ns(&self) -> u64 {
        self.resolution_ns
    }

    /// The position after the first `edges` edges.
    #[must_use]
    pub fn position_after(&self, edges: usize) -> Position {
        if edges.is_multiple_of(2) { self.initial } else { self.initial.opposite() }
    }

    /// The position at an instant, or the nearest recorded one outside the recording.
    #[must_use]
    pub fn position_at(&self, at_ns: u64) -> Position {
        self.position_after(self.edges.partition_point(|&edge| edge <= at_ns))
    }

    /// The runs of the trace, in order; an empty run at the very end is left out.
    pub fn runs(&self) -> impl Iterator<Item = Run> + '_ {
        (0..=self.edges.len()).filter_map(|index| {
            let from_ns = if index == 0 { self.start_ns } else { self.edges[index - 1] };
            let until_ns = self.edges.get(index).copied().unwrap_or(self.end_ns);
            (from_ns < until_ns || self.edges.is_empty()).then(|| Run {
                position: self.position_after(index),
                from_ns,
                until_ns,
            })
        })
    }
}
