//! The tick periods at which a time of the envelope comes to one sample more or less.

use super::{ClockQuestion, SHORTER_DWELL, Span};

/// Which time of the envelope steps.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub enum Figure {
    /// Longest bounce after a make.
    BounceMake,
    /// Longest bounce after a break.
    BounceBreak,
    /// Widest disturbance begun at open.
    DisturbanceOpen,
    /// Widest disturbance begun at closed.
    DisturbanceClosed,
    /// Shortest time between disturbances.
    Quiet,
    /// Shortest settled time after a bounce.
    Calm,
    /// Shortest time open.
    ShortestOpen,
    /// Shortest time closed.
    ShortestClosed,
}

impl Figure {
    /// Its name, as in the requirement.
    #[must_use]
    pub const fn name(self) -> &'static str {
        match self {
            Self::BounceMake => "bounce at make",
            Self::BounceBreak => "bounce at break",
            Self::DisturbanceOpen => "disturbance while open",
            Self::DisturbanceClosed => "disturbance while closed",
            Self::Quiet => "quiet",
            Self::Calm => "calm",
            Self::ShortestOpen => "shortest open",
            Self::ShortestClosed => "shortest closed",
        }
    }
}

/// A rounding step.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub struct Step {
    /// From this tick period on, in nanoseconds.
    pub at_ns: u64,
    /// This time of the envelope
    pub figure: Figure,
    /// comes to so many samples, one fewer than just below. Lost ticks are not taken off here.
    pub samples: u32,
}

const MILLION: u128 = 1_000_000;

/// The most steps that are looked at.
const MOST: u64 = 10_000;

/// Four times of an envelope, in nanoseconds.
type Times = [(Figure, u64); 4];

/// The times that may touch samples, rounded up, and those that must be seen, rounded down.
fn times(question: &ClockQuestion) -> (Times, Times) {
    let physical = &question.physical;
    let longest = SHORTER_DWELL * question.widest_ns();
    let dwell = |ns: u64| if longest > 0 { ns.min(longest) } else { ns };
    let apart = |ns: u64| if physical.has_disturbances() { ns } else { 0 };
    (
        [
            (Figure::BounceMake, physical.bounce_ns.make),
            (Figure::BounceBreak, physical.bounce_ns.break_),
            (Figure::DisturbanceOpen, physical.glitch_ns.open),
            (Figure::DisturbanceClosed, physical.glitch_ns.closed),
        ],
        [
            (Figure::Quiet, apart(physical.quiet_ns)),
            (Figure::Calm, apart(physical.calm_ns)),
            (Figure::ShortestOpen, dwell(physical.dwell_ns.open)),
            (Figure::ShortestClosed, dwell(physical.dwell_ns.closed)),
        ],
    )
}

/// A shortest period above which there are no more steps than anyone could draw.
pub(super) fn fewest(question: &ClockQuestion) -> u64 {
    let (touched, seen) = times(question);
    touched.iter().chain(&seen).map(|(_, ns)| ns.div_ceil(MOST)).sum()
}

/// Every step in `span`, by tick period.
pub(super) fn steps(question: &ClockQuestion, span: Span) -> Vec<Step> {
    let (touched, seen) = times(question);
    let (ppm, jitter) = (u128::from(question.clock.ppm()), u128::from(question.clock.jitter()));
    let mut steps = Vec::new();
    for (figure, ns) in touched.into_iter().filter(|(_, ns)| *ns > 0) {
        // ceil((t + J) / Tmin) is k from T = (t + J) / (k (1 - tolerance)) on.
        let above = (u128::from(ns) + jitter) * MILLION;
        let at = |k: u128| above.div_ceil(k * (MILLION - ppm));
        collect(&mut steps, span, figure, at, |k| k);
    }
    for (figure, ns) in seen {
        // floor((t - J) / Tmax) is k up to T = (t - J) / (k (1 + tolerance)), and k - 1 from the next nanosecond on.
        let above = u128::from(ns).saturating_sub(jitter) * MILLION;
        let at = |k: u128| above / (k * (MILLION + ppm)) + 1;
        collect(&mut steps, span, figure, at, |k| k - 1);
    }
    steps.sort_unstable();
    steps
}

fn collect(
    steps: &mut Vec<Step>,
    span: Span,
    figure: Figure,
    at: impl Fn(u128) -> u128,
    samples: impl Fn(u128) -> u128,
) {
    // The steps lie closer and closer towards short periods.
    for k in 1.. {
        let at_ns = at(k);
        if at_ns <= u128::from(span.from_ns) {
            return;
        }
        if at_ns <= u128::from(span.until_ns) {
            // At most `MOST` steps lie in the span, and the period is below its end.
            steps.push(Step { at_ns: at_ns as u64, figure, samples: samples(k) as u32 });
        }
    }
}
