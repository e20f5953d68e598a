//! From a trace to samples: [`SampleClock`] and the [`Train`] of samples it takes.
//!
//! Tick n of a trace that starts at s is at `s + phase + n * period`, for every n from 0 that falls before the
//! end of the trace. An edge exactly on a sample instant is seen by that sample.

mod draw;
mod loss;
mod period;

use debounce_core::{Position, TickClock};

use crate::trace::Trace;

pub use draw::{Drift, Spread};
pub use period::ExactPeriod;

/// Why a trace cannot be sampled by a clock.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum SampleError {
    /// The period with its tolerance needs more than 64 bits.
    #[error("a tick period of {period_ns} ns with tolerance cannot be held exactly; use a shorter period")]
    PeriodTooLong {
        /// The numerator of the nominal period.
        period_ns: u64,
    },
    /// Sample instants could pass one another.
    #[error(
        "a jitter of {jitter_ns} ns is not less than the shortest tick period of {shortest_ns} ns; use less jitter or a longer period"
    )]
    JitterTooWide {
        /// The peak-to-peak jitter.
        jitter_ns: u64,
        /// The shortest period, rounded down.
        shortest_ns: u64,
    },
    /// Ticks may be lost, but the distance between two such runs is not given.
    #[error(
        "up to {lost} ticks in a row may be lost, but the shortest dwell is 0; give the shortest dwell, which holds at most one such run"
    )]
    LossWithoutSpacing {
        /// The ticks that may be lost in a row.
        lost: u32,
    },
}

/// A clock that takes samples: its rounding (see [`TickClock`]) and its phase against the start of the trace.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct SampleClock {
    tick: TickClock,
    phase_units: u64,
}

impl SampleClock {
    /// A clock whose first sample falls on the start of the trace.
    #[must_use]
    pub fn new(tick: TickClock) -> Self {
        Self { tick, phase_units: 0 }
    }

    /// Sets the first sample to this time after the start of the trace, modulo the period.
    #[must_use]
    pub fn phase_ns(mut self, ns: u64) -> Self {
        let period = self.period();
        let phase = period.to_units(ns) % u128::from(period.units());
        self.phase_units = u64::try_from(phase).expect("a remainder is below its divisor");
        self
    }

    /// Sets the first sample to this time after the start of the trace, in units of [`Self::period`] and
    /// modulo it.
    #[must_use]
    pub fn phase_units(mut self, units: u64) -> Self {
        self.phase_units = units % self.period().units();
        self
    }

    /// The clock's rounding.
    #[must_use]
    pub fn tick(&self) -> &TickClock {
        &self.tick
    }

    /// The exact nominal period.
    #[must_use]
    pub fn period(&self) -> ExactPeriod {
        ExactPeriod::nominal(&self.tick)
    }

    /// The phase in units of [`Self::period`].
    #[must_use]
    pub fn phase(&self) -> u64 {
        self.phase_units
    }

    /// The samples that this clock takes of `trace` at its nominal period, without jitter or lost ticks.
    #[must_use]
    pub fn train(&self, trace: &Trace) -> Train {
        let period = self.period();
        let step = u128::from(period.units());
        let phase = u128::from(self.phase_units);
        // The first tick at or after an instant of the trace.
        let first_tick = |at_ns: u64| {
            let at = period.to_units(at_ns - trace.start_ns());
            u64::try_from(at.saturating_sub(phase).div_ceil(step)).unwrap_or(u64::MAX)
        };
        let stretches = trace
            .runs()
            .map(|run| (run.position, first_tick(run.from_ns), first_tick(run.until_ns)))
            .filter(|&(_, from, until)| from < until)
            .map(|(position, from, until)| Stretch {
                position,
                first_tick: from,
                ticks: until - from,
                at: phase + u128::from(from) * step,
                step,
            })
            .collect();
        Train {
            start_ns: trace.start_ns(),
            units_per_ns: period.units_per_ns().into(),
            last_position: trace.position_at(trace.end_ns()),
            displacement: draw::Displacement::NONE,
            stretches,
        }
    }
}

/// A number of samples in a row that read the same and are evenly spaced.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Stretch {
    /// What every sample of the stretch reads.
    pub position: Position,
    /// The number of its first tick, counted from 0 and including lost ones.
    pub first_tick: u64,
    /// How many samples, at least 1.
    pub ticks: u64,
    /// The undisplaced instant of the first tick, in units after the start of the trace.
    at: u128,
    /// From tick to tick, in units.
    step: u128,
}

/// The samples of one pass of a clock over a trace, in order.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Train {
    start_ns: u64,
    units_per_ns: u128,
    last_position: Position,
    displacement: draw::Displacement,
    stretches: Vec<Stretch>,
}

impl Train {
    /// The stretches, in order; neighbours may read the same.
    #[must_use]
    pub fn stretches(&self) -> &[Stretch] {
        &self.stretches
    }

    /// The samples as runs: what they read and how many, neighbours always different.
    #[must_use]
    pub fn word(&self) -> Vec<(Position, u64)> {
        let mut word: Vec<(Position, u64)> = Vec::new();
        for stretch in &self.stretches {
            match word.last_mut() {
                Some((position, ticks)) if *position == stretch.position => *ticks += stretch.ticks,
                _ => word.push((stretch.position, stretch.ticks)),
            }
        }
        word
    }

    /// How many samples are delivered.
    #[must_use]
    pub fn samples(&self) -> u64 {
        self.stretches.iter().map(|stretch| stretch.ticks).sum()
    }

    /// Where the line is at the end of the trace, sampled or not.
    #[must_use]
    pub fn last_position(&self) -> Position {
        self.last_position
    }

    /// The instant of the sample `offset` ticks into a stretch, in units after the start of the trace.
    pub(crate) fn instant(&self, stretch: &Stretch, offset: u64) -> u128 {
        let jitter = self.displacement.of(stretch.first_tick + offset);
        stretch.at + u128::from(offset) * stretch.step + u128::from(jitter)
    }

    /// How many samples of a stretch are taken before `at`, in units after the start of the trace.
    pub(crate) fn samples_before(&self, stretch: &Stretch, at: u128) -> u64 {
        let undisplaced = at.saturating_sub(stretch.at).div_ceil(stretch.step);
        let mut before = u64::try_from(undisplaced).unwrap_or(u64::MAX).min(stretch.ticks);
        // Jitter only delays, and by less than a period: at most the last one is moved to `at` or later.
        if before > 0 && self.instant(stretch, before - 1) >= at {
            before -= 1;
        }
        before
    }

    pub(crate) fn units_after_start(&self, at_ns: u64) -> u128 {
        u128::from(at_ns - self.start_ns) * self.units_per_ns
    }

    pub(crate) fn ns_rounded_down(&self, units: u128) -> u64 {
        let after_start = u64::try_from(units / self.units_per_ns).unwrap_or(u64::MAX);
        self.start_ns.saturating_add(after_start)
    }

    pub(crate) fn span_ns_rounded_up(&self, units: u128) -> u64 {
        u64::try_from(units.div_ceil(self.units_per_ns)).unwrap_or(u64::MAX)
    }
}

#[cfg(test)]
mod tests;
