//! Which tick period to take: the slowest that a person would write down, and how far it may then be off.

use debounce_core::{Envelope, PerChange, Verdict};
use rustc_hash::FxHashMap;

use super::curve::{Curve, Span};
use super::{ClockQuestion, delays, majority};
use crate::law_text::LawParameters;
use crate::logic::Logic;

/// A tick period and the law for it.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Recommended {
    /// The slowest tick period at which any law holds, to the nanosecond.
    pub slowest_ns: u64,
    /// The slowest with at most two digits at which one holds, or that of above where there is none.
    pub period_ns: u64,
    /// The law with the shortest worst delay there.
    pub law: LawParameters,
    /// Its worst latency in samples.
    pub worst: PerChange<u32>,
    /// Every delay is less than this.
    pub below_ns: PerChange<u64>,
    /// The tick periods around it at which this very law holds, on top of the tolerance of the clock.
    pub same_law: Span,
}

pub(super) fn recommend(question: &ClockQuestion, curves: &[Curve]) -> Option<Recommended> {
    let slowest_ns = curves.iter().filter_map(|curve| Some(curve.holds.last()?.until_ns)).max()?;
    let shortest = curves.iter().filter_map(|curve| Some(curve.holds.first()?.from_ns)).min()?;
    let holding = |period_ns: u64| {
        let pieces = curves.iter().filter_map(|curve| curve.at(period_ns));
        pieces
            .filter(|piece| piece.in_time_until_ns.is_some_and(|until_ns| period_ns <= until_ns))
            .min_by_key(|piece| piece.worst.make.max(piece.worst.break_))
    };
    let round = two_digits_down_from(slowest_ns).take_while(|&ns| ns >= shortest);
    let period_ns = round.into_iter().find(|&ns| holding(ns).is_some()).unwrap_or(slowest_ns);
    let piece = holding(period_ns)?;
    let starts = || curves.iter().flat_map(|curve| &curve.pieces).map(|piece| piece.span.from_ns);
    Some(Recommended {
        slowest_ns,
        period_ns,
        law: piece.law,
        worst: piece.worst,
        below_ns: delays(&question.clock_at(period_ns), piece.worst),
        same_law: same_law(question, piece.law, period_ns, starts().min()?, slowest_ns),
    })
}

/// Numbers with at most two digits and then zeros, from the greatest that is not above `ns` down.
fn two_digits_down_from(ns: u64) -> impl Iterator<Item = u64> {
    let scale = |ns: u64| {
        let mut scale = 1;
        while ns / scale >= 100 {
            scale *= 10;
        }
        scale
    };
    let first = ns / scale(ns) * scale(ns);
    core::iter::successors(Some(first), move |&at| {
        let next = at - scale(at - 1).min(at);
        (next > 0).then_some(next)
    })
}

/// The longest stretch around `period_ns` in which the law holds without a gap, from rounding step to rounding step.
fn same_law(
    question: &ClockQuestion,
    law: LawParameters,
    period_ns: u64,
    from_ns: u64,
    until_ns: u64,
) -> Span {
    let Ok(logic) = Logic::try_new(&law) else { return Span { from_ns: period_ns, until_ns: period_ns } };
    let mut known = FxHashMap::default();
    let mut holds = |ns: u64| {
        let Some(envelope) = question.envelope_at(ns) else { return false };
        let worst = *known.entry(envelope).or_insert_with(|| worst_in(law, &logic, &envelope));
        worst.is_some_and(|worst| question.in_time(worst, ns))
    };
    let steps = super::steps::steps(question, Span { from_ns, until_ns });
    let mut span = Span { from_ns: period_ns, until_ns: period_ns };
    // Within a stretch the law is faithful or not as a whole, and in time up to some period.
    let mut starts: Vec<u64> = core::iter::once(from_ns).chain(steps.iter().map(|step| step.at_ns)).collect();
    starts.dedup();
    let here = starts.partition_point(|&start| start <= period_ns) - 1;
    let end_of = |index: usize| starts.get(index + 1).map_or(until_ns, |next| next - 1);
    for index in (0..=here).rev() {
        if !holds(end_of(index).min(period_ns)) {
            break;
        }
        span.from_ns = starts[index];
    }
    for (index, &start) in starts.iter().enumerate().skip(here) {
        let end = end_of(index);
        if !holds(start.max(period_ns)) {
            break;
        }
        let (mut good, mut bad) = (start.max(period_ns), end + 1);
        while bad - good > 1 {
            let middle = good + (bad - good) / 2;
            if holds(middle) { good = middle } else { bad = middle }
        }
        span.until_ns = good;
        if good < end {
            break;
        }
    }
    span
}

/// The worst latency by closed form; of a majority register, by exploring it.
fn worst_in(law: LawParameters, logic: &Logic, envelope: &Envelope) -> Option<PerChange<u32>> {
    match logic.verdict(envelope) {
        Verdict::Holds(bounds) => {
            Some(PerChange { make: bounds.latency.make.worst, break_: bounds.latency.break_.worst })
        }
        Verdict::Unknown if law.name() == majority::FAMILY => majority::worst_of(logic, envelope),
        _ => None,
    }
}
