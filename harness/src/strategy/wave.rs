//! A contact in time, and the samples that a clock takes of it.

use std::fmt;

use debounce_core::Position;

use super::row;
use crate::sample::SampleClock;
use crate::trace::Trace;
use crate::truth::TruthChange;

/// One tick of a clock over a [`Wave`].
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct WaveSample {
    /// When the sample is taken, in units after the start of the trace; see [`Wave::units_per_ns`].
    pub at_units: u128,
    /// Where the contact is.
    pub contact: Position,
    /// What is read.
    pub sample: Position,
    /// Whether the tick is lost, so that the logic never sees the sample.
    pub lost: bool,
}

/// A trace inside an envelope in time, what the contact really did, and one pass of a clock over it.
#[derive(Clone, PartialEq, Eq)]
pub struct Wave {
    /// What the line shows.
    pub trace: Trace,
    /// What the contact did.
    pub truth: Vec<TruthChange>,
    /// The clock, with its phase; for taking other samples of the same trace.
    pub clock: SampleClock,
    /// The samples of one pass: a period within the tolerance, which may wander, jitter, lost ticks.
    pub samples: Vec<WaveSample>,
    pub(super) units_per_ns: u128,
}

impl Wave {
    /// Units of time in one nanosecond, fine enough that no rounding is left.
    #[must_use]
    pub fn units_per_ns(&self) -> u128 {
        self.units_per_ns
    }

    /// The samples that are not lost.
    pub fn delivered(&self) -> impl Iterator<Item = &WaveSample> {
        self.samples.iter().filter(|sample| !sample.lost)
    }

    /// From a change of the contact to a sample, in units; `None` where the sample is the earlier one.
    #[must_use]
    pub fn delay_units(&self, change: &TruthChange, sample: &WaveSample) -> Option<u128> {
        let changed = u128::from(change.at_ns - self.trace.start_ns()) * self.units_per_ns;
        sample.at_units.checked_sub(changed)
    }
}

/// Edges and changes in nanoseconds, samples as rows of 0 and 1, the way a failing property test shows it.
impl fmt::Debug for Wave {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let lost: Vec<usize> = (0..self.samples.len()).filter(|&at| self.samples[at].lost).collect();
        let mut shown = f.debug_struct("Wave");
        shown.field("start", &self.trace.initial());
        shown.field("end_ns", &self.trace.end_ns());
        shown.field("changes_ns", &self.truth.iter().map(|change| change.at_ns).collect::<Vec<_>>());
        shown.field("edges_ns", &self.trace.edges());
        let instants = self.samples.iter().map(|sample| sample.at_units / self.units_per_ns);
        shown.field("samples_ns", &instants.collect::<Vec<_>>());
        shown.field("contact", &row(self.samples.iter().map(|sample| sample.contact)));
        shown.field("reads", &row(self.samples.iter().map(|sample| sample.sample)));
        if !lost.is_empty() {
            shown.field("lost_ticks", &lost);
        }
        shown.finish()
    }
}
