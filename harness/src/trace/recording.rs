//! A trace with where it came from and what the reader had to decide.

use std::fmt;

use debounce_core::Position;

use super::{Trace, Unknown};
use crate::quantity::{Time, counted};

/// One channel of a file, as a trace.
#[derive(Clone, PartialEq, Eq, Debug)]
#[non_exhaustive]
pub struct Recording {
    /// The full name of the channel in the file.
    pub channel: String,
    /// What was recorded, polarity turned.
    pub trace: Trace,
    /// Where the sample period of the trace comes from.
    pub period: SamplePeriod,
    /// What the reader decided or left out, for the user to know; empty when there was nothing to decide.
    pub notes: Vec<Note>,
}

/// Where the sample period of a recording comes from.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[non_exhaustive]
pub enum SamplePeriod {
    /// An option, or the recorder itself, says it.
    Stated,
    /// The rows are that far apart.
    Spacing,
    /// Taken for one unit of the time scale of a VCD; the recorder may have been coarser.
    TimeScale,
    /// Taken for one of the last digit of the times of a CSV; the recorder may have been coarser.
    Digits,
}

/// Something that a reader decided on its own.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[non_exhaustive]
pub enum Note {
    /// The times began below zero and were moved up.
    Shifted {
        /// By how much.
        by_ns: u64,
    },
    /// Times finer than a nanosecond were rounded down to it.
    RoundedTimes,
    /// Edges fell into one nanosecond with others and are not in the trace: of all the levels in one
    /// nanosecond the last counts.
    MergedEdges {
        /// How many edges are missing.
        edges: u64,
    },
    /// Values that are neither 0 nor 1 were replaced.
    UnknownValues {
        /// How many stretches of such values.
        stretches: u64,
        /// When the first began.
        first_ns: u64,
        /// What was made of them.
        policy: Unknown,
    },
    /// The channel had no known value at the start; the first known one was taken.
    StartAssumed {
        /// When the first known value came.
        until_ns: u64,
        /// What it was.
        position: Position,
    },
    /// Neither the file nor the options gave the unit of the times; seconds were taken.
    SecondsAssumed,
    /// The recorder's ring had dropped runs before the first.
    RunsForgotten {
        /// How many runs; at 4294967295 that or more.
        runs: u64,
    },
    /// The recorder was full: what the line did later is not in the recording.
    RecorderStopped,
    /// Voltages were marked as beyond the recorder's range; they count as beyond the threshold on their side.
    Clipped {
        /// How many readings.
        readings: u64,
    },
    /// Lines before the data were left out.
    PreambleSkipped {
        /// How many lines.
        lines: u64,
    },
}

/// Every digit, so that the place can be found again in the file.
fn exact(ns: u64) -> String {
    format!("{:.20}", Time::from_ns(ns))
}

impl fmt::Display for Note {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match *self {
            Self::Shifted { by_ns } => {
                write!(f, "times began below zero; all were moved up by {}", exact(by_ns))
            }
            Self::RoundedTimes => f.write_str("times finer than 1 ns were rounded down to whole nanoseconds"),
            Self::MergedEdges { edges } => write!(
                f,
                "merged {} that shared a nanosecond with another (the last level in it counts)",
                counted(edges, "edge")
            ),
            Self::UnknownValues { stretches, first_ns, policy } => {
                let made = match policy {
                    Unknown::Hold => "the position before was held",
                    Unknown::Open => "taken as open",
                    Unknown::Closed => "taken as closed",
                    Unknown::Refuse => "refused",
                };
                let places = counted(stretches, "place");
                write!(f, "unknown values in {places}, the first at {}: {made}", exact(first_ns))
            }
            Self::StartAssumed { until_ns, position } => {
                let position = match position {
                    Position::Open => "open",
                    Position::Closed => "closed",
                };
                write!(f, "no known value before {}; taken as {position} from the start", exact(until_ns))
            }
            Self::SecondsAssumed => f.write_str("no unit was given for the times; taken as seconds"),
            Self::RunsForgotten { runs } => {
                write!(
                    f,
                    "the recorder keeps the last runs, and dropped {} before the first",
                    counted(runs, "run")
                )
            }
            Self::RecorderStopped => {
                f.write_str("the recorder was full and stopped; what the line did later is not here")
            }
            Self::Clipped { readings } => write!(
                f,
                "{} beyond the recorder's range, taken as beyond the threshold on the same side",
                counted(readings, "reading")
            ),
            Self::PreambleSkipped { lines } => {
                write!(f, "skipped {} before the data", counted(lines, "line"))
            }
        }
    }
}
