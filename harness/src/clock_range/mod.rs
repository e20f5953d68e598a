//! The sample clock: at which tick periods each kind of law works at all, and how late it then is.
//!
//! Between two tick periods at which a time of the envelope comes to one sample more or less, the envelope in samples
//! is the same, so the best law and its latency in samples are the same too, and the worst delay grows with the
//! period in a straight line. At such a *rounding step* it jumps. So the curve of worst delay against tick period is
//! known as a whole, and not at some points only: it is a list of [`Piece`]s, to the nanosecond of tick period.
//!
//! What a law does in an envelope is answered by its closed form; candidates are those of [`choose`](crate::choose).
//! The majority register has no closed form that says that it holds, so it is explored, once in each envelope in samples
//! that differs for it.

mod curve;
mod majority;
mod power;
mod recommend;
mod steps;

use debounce_core::{Envelope, PerChange, Period, TickClock};
use rayon::prelude::*;

use crate::envelope::PhysicalEnvelope;
use crate::requirement::Resolved;

pub use curve::{Curve, Piece, Span};
pub use power::{Activity, Asleep, asleep};
pub use recommend::Recommended;
pub use steps::{Figure, Step};

/// What is asked of a sample clock.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct ClockQuestion {
    /// The waveforms that must be served.
    pub physical: PhysicalEnvelope,
    /// Longest time from a change to its report.
    pub latency_ns: PerChange<u64>,
    /// Tolerance, jitter and lost ticks are those of this clock; its period says nothing.
    pub clock: TickClock,
    /// The shortest tick period to look at, in nanoseconds.
    pub from_ns: u64,
}

/// The whole range of tick periods.
#[derive(Clone, PartialEq, Debug)]
pub struct ClockRange {
    /// Tolerance, jitter and lost ticks.
    pub clock: TickClock,
    /// The tick periods looked at. Beyond the longest an operation can fall between two samples, or two disturbances
    /// can not be told apart.
    pub span: Span,
    /// Every rounding step, by tick period.
    pub steps: Vec<Step>,
    /// One curve for each kind of law.
    pub curves: Vec<Curve>,
    /// The clock to take, where any law holds at any.
    pub recommended: Option<Recommended>,
}

impl ClockQuestion {
    /// The question that a requirement asks, from the shortest of its tick periods on.
    #[must_use]
    pub fn of(resolved: &Resolved) -> Self {
        let latency = resolved.required.latency;
        let shortest = resolved.ticks.value.first().copied();
        let fallback = TickClock::new(Period::from_ms(1));
        Self {
            physical: resolved.physical(),
            latency_ns: PerChange { make: latency.make.value.ns(), break_: latency.break_.value.ns() },
            clock: shortest.map_or(fallback, |tick| resolved.clock(tick)),
            from_ns: shortest.map_or(1, |tick| tick.nearest_ns()),
        }
    }

    /// The same with another tolerance of the tick period, in parts per million either way.
    ///
    /// Returns `None` at 100 % or more.
    #[must_use]
    pub fn tolerance_ppm(mut self, ppm: u32) -> Option<Self> {
        self.clock = self.clock.try_tolerance_ppm(ppm)?;
        Some(self)
    }

    /// The clock of this question with a period of so many nanoseconds.
    ///
    /// # Panics
    /// When the period is 0.
    #[must_use]
    pub fn clock_at(&self, period_ns: u64) -> TickClock {
        with_period(&self.clock, period_ns)
    }

    /// The envelope in samples of that clock; `None` where two disturbances cannot be told apart.
    fn envelope_at(&self, period_ns: u64) -> Option<Envelope> {
        let mut physical = self.physical;
        let longest = SHORTER_DWELL * self.widest_ns();
        if longest > 0 {
            // A shorter dwell allows every waveform that the stated one does, and more; that a contact rests for
            // hours need not be counted tick by tick.
            physical.dwell_ns.open = physical.dwell_ns.open.min(longest);
            physical.dwell_ns.closed = physical.dwell_ns.closed.min(longest);
        }
        physical.in_ticks(&self.clock_at(period_ns)).ok()
    }

    fn widest_ns(&self) -> u64 {
        let PhysicalEnvelope { bounce_ns, glitch_ns, .. } = self.physical;
        bounce_ns.make.max(bounce_ns.break_).max(glitch_ns.open).max(glitch_ns.closed)
    }

    /// The longest period at which the shortest operation is still seen, and two disturbances are told apart.
    fn until_ns(&self) -> u64 {
        let dwell = self.physical.dwell_ns.open.min(self.physical.dwell_ns.closed);
        if self.physical.has_disturbances() { dwell.min(self.physical.quiet_ns) } else { dwell }
    }

    /// Whether a law that needs so many samples is in time at that period.
    fn in_time(&self, worst: PerChange<u32>, period_ns: u64) -> bool {
        let below = delays(&self.clock_at(period_ns), worst);
        below.make <= self.latency_ns.make && below.break_ <= self.latency_ns.break_
    }
}

/// A dwell is taken as no longer than so many times the longest bounce or the widest disturbance.
const SHORTER_DWELL: u64 = 64;

fn with_period(clock: &TickClock, period_ns: u64) -> TickClock {
    let period = Period::try_from_ratio(period_ns, 1).expect("a tick period is longer than zero");
    let clock_at = TickClock::new(period).jitter_ns(clock.jitter()).lost(clock.lost_ticks());
    clock_at.try_tolerance_ppm(clock.ppm()).expect("a tolerance that a clock has already")
}

/// Every delay is less than this.
fn delays(clock: &TickClock, worst: PerChange<u32>) -> PerChange<u64> {
    PerChange { make: clock.delay_ns(worst.make).1, break_: clock.delay_ns(worst.break_).1 }
}

/// Looks at every tick period.
#[must_use]
pub fn clock_range(question: &ClockQuestion) -> ClockRange {
    let found = Stretches::of(question);
    let judged = found.explored(question, &majority::Explored::default(), 0);
    let curves = curve::curves(question, &found.starts, found.span.until_ns, &judged);
    let recommended = recommend::recommend(question, &curves);
    ClockRange { clock: question.clock, span: found.span, steps: found.steps, curves, recommended }
}

/// The tick periods between rounding steps, and the best laws with a closed form at each.
struct Stretches {
    span: Span,
    steps: Vec<Step>,
    starts: Vec<u64>,
    judged: Vec<curve::Judged>,
}

impl Stretches {
    fn of(question: &ClockQuestion) -> Self {
        let until_ns = question.until_ns();
        let from_ns = question.from_ns.max(steps::fewest(question)).min(until_ns.max(1));
        let span = Span { from_ns, until_ns: until_ns.max(from_ns) };
        let steps = steps::steps(question, span);
        let mut starts: Vec<u64> =
            core::iter::once(from_ns).chain(steps.iter().map(|step| step.at_ns)).collect();
        starts.dedup();
        let judged = starts.par_iter().map(|&at_ns| curve::judged(question, at_ns)).collect();
        Self { span, steps, starts, judged }
    }

    /// The same with the laws that must be explored, where a stretch ends beyond `above_ns`.
    fn explored(
        &self,
        question: &ClockQuestion,
        explored: &majority::Explored,
        above_ns: u64,
    ) -> Vec<curve::Judged> {
        let ends = self.starts.iter().skip(1).map(|next| next - 1).chain([self.span.until_ns]);
        let envelope = |(&start, end): (&u64, u64)| {
            if end > above_ns { question.envelope_at(start) } else { None }
        };
        let envelopes: Vec<_> = self.starts.iter().zip(ends).map(envelope).collect();
        let mut judged = self.judged.clone();
        for (judged, best) in judged.iter_mut().zip(explored.best(&envelopes)) {
            judged[curve::EXPLORED] = best;
        }
        judged
    }
}

/// The slowest tick period at which any law holds, for each tolerance of the clock in parts per million; `None` where
/// none holds at any.
#[must_use]
pub fn slowest_by_tolerance(question: &ClockQuestion, ppm: &[u32]) -> Vec<(u32, Option<u64>)> {
    let explored = majority::Explored::default();
    let slowest = |&ppm: &u32| {
        let question = question.tolerance_ppm(ppm)?;
        let found = Stretches::of(&question);
        let slowest = |judged: &[curve::Judged]| {
            let curves = curve::curves(&question, &found.starts, found.span.until_ns, judged);
            curves.iter().filter_map(|curve| Some(curve.holds.last()?.until_ns)).max()
        };
        // What must be explored counts only where nothing else holds.
        let closed_form = slowest(&found.judged);
        slowest(&found.explored(&question, &explored, closed_form.unwrap_or(0)))
    };
    ppm.iter().map(|ppm| (*ppm, slowest(ppm))).collect()
}

#[cfg(test)]
mod tests;
