//! What a law did with a trace at every phase, exactly.

use debounce_core::Change;
use serde::Serialize;

/// Phases from `from` to just before `until`, in the units of the tick period.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug, Serialize)]
pub struct PhaseSpan {
    /// The first phase.
    pub from: u64,
    /// The first phase after the span.
    pub until: u64,
}

impl PhaseSpan {
    /// How wide the span is; divided by the period that is its probability.
    #[must_use]
    pub fn width(self) -> u64 {
        self.until - self.from
    }

    /// Whether the span holds a phase.
    #[must_use]
    pub fn contains(self, phase: u64) -> bool {
        self.from <= phase && phase < self.until
    }
}

/// A change of the contact that was reported.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub struct Reported {
    /// Index of the change in the truth.
    pub change: u32,
    /// The tick that reports it, counted from 0 at the start of the trace.
    pub tick: u64,
    /// The phases at which that is so.
    pub phase: PhaseSpan,
}

/// A change of the contact that was not reported.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub struct Unreported {
    /// Index of the change in the truth.
    pub change: u32,
    /// The phases at which that is so.
    pub phase: PhaseSpan,
}

/// An edge that no change of the contact stands behind.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub struct FalseEdge {
    /// The tick that reports it, counted from 0 at the start of the trace.
    pub tick: u64,
    /// What was reported.
    pub change: Change,
    /// The phases at which that is so.
    pub phase: PhaseSpan,
}

/// Every edge and every change of the contact at every phase: for each change, the spans of `reported`, `missed`
/// and `undecided` make up the whole period.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Outcome {
    /// Changes that were reported.
    pub reported: Vec<Reported>,
    /// Changes that were missed.
    pub missed: Vec<Unreported>,
    /// Changes so near the end of the trace that the law had not settled.
    pub undecided: Vec<Unreported>,
    /// Edges without a change.
    pub false_edges: Vec<FalseEdge>,
}

impl Outcome {
    // Neighbouring spans often tell the same; joining them here keeps everything after this small.

    pub(crate) fn report(&mut self, change: u32, tick: u64, phase: PhaseSpan) {
        match self.reported.last_mut() {
            Some(last) if (last.change, last.tick, last.phase.until) == (change, tick, phase.from) => {
                last.phase.until = phase.until;
            }
            _ => self.reported.push(Reported { change, tick, phase }),
        }
    }

    pub(crate) fn miss(&mut self, change: u32, phase: PhaseSpan) {
        extend(&mut self.missed, change, phase);
    }

    pub(crate) fn leave_undecided(&mut self, change: u32, phase: PhaseSpan) {
        extend(&mut self.undecided, change, phase);
    }

    pub(crate) fn report_falsely(&mut self, change: Change, tick: u64, phase: PhaseSpan) {
        match self.false_edges.last_mut() {
            Some(last) if (last.change, last.tick, last.phase.until) == (change, tick, phase.from) => {
                last.phase.until = phase.until;
            }
            _ => self.false_edges.push(FalseEdge { tick, change, phase }),
        }
    }
}

fn extend(list: &mut Vec<Unreported>, change: u32, phase: PhaseSpan) {
    match list.last_mut() {
        Some(last) if (last.change, last.phase.until) == (change, phase.from) => {
            last.phase.until = phase.until
        }
        _ => list.push(Unreported { change, phase }),
    }
}
