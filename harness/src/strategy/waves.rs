//! The source of waves: [`Waves`].

use debounce_core::TickClock;
use rand::Rng;

use super::shrink::Plan;
use super::{Wave, WavePlan};
use crate::envelope::{PhysicalEnvelope, TickError};
use crate::sample::{ExactPeriod, SampleError};

/// Draws traces from exactly one envelope in time, each with one pass of a clock over it.
///
/// With the feature `proptest` this is a strategy.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Waves {
    envelope: PhysicalEnvelope,
    clock: TickClock,
    most_changes: usize,
}

/// Why nothing can be drawn.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum WavesError {
    /// The envelope has no counterpart at this clock.
    #[error(transparent)]
    Ticks(#[from] TickError),
    /// The clock is none that keeps its samples in order.
    #[error(transparent)]
    Clock(#[from] SampleError),
}

impl Waves {
    /// Traces of `envelope` with up to 5 changes, sampled by `clock`.
    ///
    /// # Errors
    /// When the envelope has no counterpart at this clock, or the jitter reaches the shortest period.
    pub fn of(envelope: &PhysicalEnvelope, clock: &TickClock) -> Result<Self, WavesError> {
        envelope.in_ticks(clock)?;
        let shortest = ExactPeriod::shortest(clock)?;
        ExactPeriod::longest(clock)?;
        if shortest.to_units(clock.jitter()) >= u128::from(shortest.units()) {
            let shortest_ns = shortest.units() / shortest.units_per_ns();
            return Err(SampleError::JitterTooWide { jitter_ns: clock.jitter(), shortest_ns }.into());
        }
        Ok(Self { envelope: *envelope, clock: *clock, most_changes: 5 })
    }

    /// Sets the most changes of the contact in one trace.
    #[must_use]
    pub fn most_changes(mut self, changes: usize) -> Self {
        self.most_changes = changes;
        self
    }

    /// Draws one trace with its samples.
    pub fn draw<R: Rng>(&self, rng: &mut R) -> Wave {
        self.plan(rng).value()
    }

    pub(crate) fn plan<R: Rng>(&self, rng: &mut R) -> WavePlan {
        WavePlan::draw(&self.envelope, &self.clock, self.most_changes, rng)
    }
}
