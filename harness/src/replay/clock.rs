//! A law on a real clock: both ends of the tolerance exactly, jitter and lost ticks by seeded draws.

use debounce_core::{Change, Law, Position, TickClock};
use serde::Serialize;

use super::measurement::Measurement;
use super::pass::{Pass, judge};
use super::prepared::{PrepareError, PreparedTrace};
use crate::sample::{Drift, ExactPeriod, SampleClock, SampleError, Spread, Train};
use crate::trace::Trace;
use crate::truth::TruthChange;

/// How many passes are drawn, and from which seed.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize)]
pub struct Draws {
    /// How many passes over the trace; half of them with a constant, half with a wandering period.
    pub count: u32,
    /// The seed of the first; the next ones count up from it.
    pub seed: u64,
    /// No stretch of this length, the shortest dwell, holds more than one run of lost ticks.
    pub shortest_dwell_ns: u64,
}

/// A trace prepared at the nominal, shortest and longest period of a clock, with drawn trains of samples.
#[derive(Clone, Debug)]
pub struct PreparedClock {
    nominal: PreparedTrace,
    shortest: Option<PreparedTrace>,
    longest: Option<PreparedTrace>,
    draws: Draws,
    trains: Vec<Train>,
    initial: Position,
}

/// Everything measured of one law on one trace with one clock.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct ClockMeasurement {
    /// Exact, at the nominal period.
    pub nominal: Measurement,
    /// Exact, at the shortest period; `None` without tolerance.
    pub shortest: Option<Measurement>,
    /// Exact, at the longest period; `None` without tolerance.
    pub longest: Option<Measurement>,
    /// What the draws gave; `None` when none were asked for.
    pub drawn: Option<Drawn>,
}

/// Sums over drawn passes. A draw finds faults, it does not prove their absence.
#[derive(Clone, PartialEq, Eq, Debug, Serialize)]
pub struct Drawn {
    /// How many passes, and their seeds.
    pub draws: Draws,
    /// Passes with a false edge or a missed change.
    pub unfaithful: u32,
    /// The seed of the first such pass.
    pub first_unfaithful_seed: Option<u64>,
    /// False edges of all passes.
    pub false_edges: u64,
    /// Missed changes of all passes.
    pub missed: u64,
    /// The slowest make of all passes.
    pub make: Option<DrawnWorst>,
    /// The slowest break of all passes.
    #[serde(rename = "break")]
    pub break_: Option<DrawnWorst>,
}

/// The longest latency that was drawn.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize)]
pub struct DrawnWorst {
    /// The longest, in delivered samples.
    pub samples: u64,
    /// The longest, in time, rounded up.
    pub delay_ns: u64,
    /// The seed of the pass with the longest time.
    pub seed: u64,
    /// Time in the trace of the change that took it.
    pub at_ns: u64,
}

/// Why a trace cannot be prepared for a clock.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum ClockError {
    /// It cannot be sampled so.
    #[error(transparent)]
    Sample(#[from] SampleError),
    /// It cannot be prepared.
    #[error(transparent)]
    Prepare(#[from] PrepareError),
}

impl PreparedClock {
    /// Prepares `trace` for `clock`.
    ///
    /// # Errors
    /// See [`PreparedTrace::new`] and [`SampleClock::draw`].
    pub fn new(
        trace: &Trace,
        truth: &[TruthChange],
        clock: &TickClock,
        draws: Draws,
    ) -> Result<Self, ClockError> {
        let at_end = |period| -> Result<_, ClockError> {
            Ok(if clock.ppm() == 0 { None } else { Some(PreparedTrace::new(trace, truth, period)?) })
        };
        let sampler = SampleClock::new(*clock);
        let trains = (0..draws.count).map(|draw| {
            let drift = if draw % 2 == 0 { Drift::Constant } else { Drift::Wandering };
            let spread = Spread { drift, shortest_dwell_ns: draws.shortest_dwell_ns };
            sampler.draw(trace, spread, draws.seed_of(draw))
        });
        Ok(Self {
            nominal: PreparedTrace::new(trace, truth, ExactPeriod::nominal(clock))?,
            shortest: at_end(ExactPeriod::shortest(clock)?)?,
            longest: at_end(ExactPeriod::longest(clock)?)?,
            draws,
            trains: trains.collect::<Result<_, _>>()?,
            initial: trace.initial(),
        })
    }

    /// The trace at the nominal period.
    #[must_use]
    pub fn nominal(&self) -> &PreparedTrace {
        &self.nominal
    }

    /// Measures `law` at every prepared period and on every drawn train.
    #[must_use]
    pub fn measure<L: Law>(&self, law: &L) -> ClockMeasurement {
        ClockMeasurement {
            nominal: self.nominal.measure(law),
            shortest: self.shortest.as_ref().map(|prepared| prepared.measure(law)),
            longest: self.longest.as_ref().map(|prepared| prepared.measure(law)),
            drawn: (self.draws.count > 0).then(|| self.drawn(law)),
        }
    }

    fn drawn<L: Law>(&self, law: &L) -> Drawn {
        let truth = self.nominal.truth();
        let mut drawn = Drawn {
            draws: self.draws,
            unfaithful: 0,
            first_unfaithful_seed: None,
            false_edges: 0,
            missed: 0,
            make: None,
            break_: None,
        };
        for (draw, train) in (0..).zip(&self.trains) {
            drawn.add(&judge(law, train, self.initial, truth), truth, self.draws.seed_of(draw));
        }
        drawn
    }
}

impl Draws {
    /// The seed of one draw, counted from 0.
    fn seed_of(&self, draw: u32) -> u64 {
        self.seed.wrapping_add(draw.into())
    }
}

impl Drawn {
    fn add(&mut self, pass: &Pass, truth: &[TruthChange], seed: u64) {
        if !(pass.false_edges.is_empty() && pass.missed.is_empty()) {
            self.unfaithful += 1;
            self.first_unfaithful_seed.get_or_insert(seed);
        }
        self.false_edges += pass.false_edges.len() as u64;
        self.missed += pass.missed.len() as u64;
        for report in &pass.reported {
            let TruthChange { change, at_ns } = truth[report.change];
            let worst = match change {
                Change::Make => &mut self.make,
                Change::Break => &mut self.break_,
            };
            let new = DrawnWorst { samples: report.samples, delay_ns: report.delay_ns, seed, at_ns };
            let slot = worst.get_or_insert(new);
            let samples = slot.samples.max(report.samples);
            if report.delay_ns > slot.delay_ns {
                *slot = new;
            }
            slot.samples = samples;
        }
    }
}

impl ClockMeasurement {
    /// The exact measurements: nominal, then the ends of the tolerance.
    pub fn exact(&self) -> impl Iterator<Item = &Measurement> {
        [Some(&self.nominal), self.shortest.as_ref(), self.longest.as_ref()].into_iter().flatten()
    }

    /// Whether every change was reported and no edge was false, at every phase of every period and in every draw.
    #[must_use]
    pub fn is_faithful(&self) -> bool {
        self.exact().all(Measurement::is_faithful)
            && self.drawn.as_ref().is_none_or(|drawn| drawn.unfaithful == 0)
    }

    /// The least time that every delay of `change` stayed below, or was drawn at, over everything measured.
    #[must_use]
    pub fn worst_delay_ns(&self, change: Change) -> Option<u64> {
        let exact = self.exact().filter_map(|at| Some(at.at(change).latency.as_ref()?.delay.below_ns));
        let drawn = self.drawn.as_ref().and_then(|drawn| match change {
            Change::Make => drawn.make,
            Change::Break => drawn.break_,
        });
        exact.chain(drawn.map(|worst| worst.delay_ns)).max()
    }
}
