//! Seeded draws of what a real clock does: jitter, a period off its nominal value, lost ticks.

use rand::rngs::ChaCha8Rng;
use rand::{Rng, RngExt, SeedableRng};

use debounce_core::Position;

use super::{ExactPeriod, SampleClock, SampleError, Stretch, Train, loss};
use crate::trace::Trace;

/// Units of a drawn train in one nanosecond, for each unit of the nominal period.
const MILLION: u128 = 1_000_000;
/// A wandering clock draws every period anew for this many ticks before and after a change of the line.
const NEAR_TICKS: u128 = 64;
/// The stream of the jitter; every other number comes from stream 0.
const JITTER_STREAM: u64 = 1;

/// How the period of a drawn clock leaves its nominal value, within the tolerance.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Drift {
    /// One period, drawn once, for the whole trace.
    Constant,
    /// A new period for every tick near a change of the line, and one for each quiet stretch between.
    Wandering,
}

/// What is drawn beside the clock's own figures.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Spread {
    /// How the period drifts.
    pub drift: Drift,
    /// No stretch of this length, the shortest dwell, holds more than one run of lost ticks.
    pub shortest_dwell_ns: u64,
}

/// How far each tick is displaced: a function of its number, so that skipped ticks cost nothing.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Displacement {
    seed: u64,
    peak: u64,
}

impl Displacement {
    pub(super) const NONE: Self = Self { seed: 0, peak: 0 };

    /// From 0 to the peak, both reached.
    pub(super) fn of(self, tick: u64) -> u64 {
        if self.peak == 0 {
            return 0;
        }
        let mut rng = ChaCha8Rng::seed_from_u64(self.seed);
        rng.set_stream(JITTER_STREAM);
        rng.set_word_pos(u128::from(tick) * 2);
        // 64 random bits scaled to the range: uneven by less than one part in 2^64 / peak.
        let scaled = u128::from(rng.next_u64()) * (u128::from(self.peak) + 1);
        u64::try_from(scaled >> 64).expect("at most the peak")
    }
}

impl SampleClock {
    /// One seeded draw of the samples that this clock takes of `trace`.
    ///
    /// * The phase is drawn uniformly; the clock's own is not used.
    /// * The period is drawn uniformly within the tolerance, see [`Drift`].
    /// * Every sample is taken late by a uniform draw from 0 to the jitter, both reached.
    /// * Runs of 1 to `lost` ticks are lost near about half of the line's changes, never two in a stretch of the
    ///   shortest dwell.
    ///
    /// The same trace, clock and seed give the same samples.
    ///
    /// # Errors
    /// When the jitter reaches the shortest period, ticks may be lost at a shortest dwell of 0, or the period
    /// cannot be held exactly.
    pub fn draw(&self, trace: &Trace, spread: Spread, seed: u64) -> Result<Train, SampleError> {
        let tick = self.tick();
        let shortest = ExactPeriod::shortest(tick)?;
        ExactPeriod::longest(tick)?;
        let shortest_ns = shortest.units() / shortest.units_per_ns();
        if shortest.to_units(tick.jitter()) >= u128::from(shortest.units()) {
            return Err(SampleError::JitterTooWide { jitter_ns: tick.jitter(), shortest_ns });
        }
        if tick.lost_ticks() > 0 && spread.shortest_dwell_ns == 0 {
            return Err(SampleError::LossWithoutSpacing { lost: tick.lost_ticks() });
        }

        let nominal = self.period();
        let units_per_ns = u128::from(nominal.units_per_ns()) * MILLION;
        let ppm = u128::from(tick.ppm());
        let range =
            (u128::from(nominal.units()) * (MILLION - ppm), u128::from(nominal.units()) * (MILLION + ppm));
        // Below the shortest period, but in finer units than that; it only fails at periods of hours.
        let peak = u64::try_from(u128::from(tick.jitter()) * units_per_ns)
            .map_err(|_| SampleError::PeriodTooLong { period_ns: tick.period().numerator_ns() })?;
        let mut rng = ChaCha8Rng::seed_from_u64(seed);
        let displacement = Displacement { seed, peak };
        let mut walk = Walk {
            trace,
            units_per_ns,
            displacement,
            at: rng.random_range(0..range.0),
            tick: 0,
            passed: 0,
            changed_at_tick: None,
            stretches: Vec::new(),
        };
        walk.run(|rng| rng.random_range(range.0..=range.1), spread.drift, &mut rng);
        let mut stretches = walk.stretches;
        if tick.lost_ticks() > 0 {
            let spacing = u128::from(spread.shortest_dwell_ns) * units_per_ns;
            let spacing_ticks = u64::try_from(spacing.div_ceil(range.0)).unwrap_or(u64::MAX);
            stretches = loss::lose(&stretches, tick.lost_ticks(), spacing_ticks, &mut rng);
        }
        Ok(Train {
            start_ns: trace.start_ns(),
            units_per_ns,
            last_position: trace.position_at(trace.end_ns()),
            displacement,
            stretches,
        })
    }
}

struct Walk<'a> {
    trace: &'a Trace,
    units_per_ns: u128,
    displacement: Displacement,
    /// The undisplaced instant of the next tick, in units after the start.
    at: u128,
    tick: u64,
    /// Edges of the trace at or before `at`.
    passed: usize,
    /// The last tick that read otherwise than the one before it.
    changed_at_tick: Option<u64>,
    stretches: Vec<Stretch>,
}

impl Walk<'_> {
    fn edge(&self, index: usize) -> Option<u128> {
        let edge = self.trace.edges().get(index)?;
        Some(u128::from(edge - self.trace.start_ns()) * self.units_per_ns)
    }

    fn run<R: Rng>(&mut self, period: impl Fn(&mut R) -> u128, drift: Drift, rng: &mut R) {
        let end = u128::from(self.trace.end_ns() - self.trace.start_ns()) * self.units_per_ns;
        let fixed = period(rng);
        while self.at < end {
            while self.edge(self.passed).is_some_and(|edge| edge <= self.at) {
                self.passed += 1;
            }
            let step = match drift {
                Drift::Constant => fixed,
                Drift::Wandering => period(rng),
            };
            let quiet = self.quiet_ticks(end, step);
            let bulk = match drift {
                Drift::Constant => quiet,
                Drift::Wandering if self.is_near_a_change() => 0,
                Drift::Wandering => quiet.saturating_sub(NEAR_TICKS),
            };
            if bulk > 1 {
                self.push(self.trace.position_after(self.passed), bulk, step);
            } else {
                self.push(self.displaced_position(), 1, step);
            }
        }
    }

    /// Ticks from here that no edge can reach, whatever their jitter.
    fn quiet_ticks(&self, end: u128, step: u128) -> u128 {
        let until_end = (end - self.at).div_ceil(step);
        match self.edge(self.passed) {
            None => until_end,
            Some(edge) => {
                let reach = edge.saturating_sub(self.at + u128::from(self.displacement.peak));
                reach.div_ceil(step).min(until_end)
            }
        }
    }

    fn is_near_a_change(&self) -> bool {
        self.changed_at_tick.is_some_and(|tick| u128::from(self.tick - tick) < NEAR_TICKS)
    }

    fn displaced_position(&self) -> Position {
        let instant = self.at + u128::from(self.displacement.of(self.tick));
        let mut passed = self.passed;
        while self.edge(passed).is_some_and(|edge| edge <= instant) {
            passed += 1;
        }
        self.trace.position_after(passed)
    }

    fn push(&mut self, position: Position, ticks: u128, step: u128) {
        if self.stretches.last().is_some_and(|last| last.position != position) {
            self.changed_at_tick = Some(self.tick);
        }
        // A trace of 2^64 ns holds at most that many ticks of 1 ns or more; shorter periods end here.
        let ticks = u64::try_from(ticks).unwrap_or(u64::MAX);
        self.stretches.push(Stretch { position, first_tick: self.tick, ticks, at: self.at, step });
        self.at += u128::from(ticks) * step;
        self.tick += ticks;
    }
}
