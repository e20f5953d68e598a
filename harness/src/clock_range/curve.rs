//! The best law of each kind at a tick period, and the pieces of its curve.

use debounce_core::{PerChange, TickClock, Verdict};

use super::{ClockQuestion, delays, majority, with_period};
use crate::choose::laws_to_try;
use crate::law_text::LawParameters;
use crate::logic::Logic;

/// A range of tick periods in nanoseconds, both ends in it.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Span {
    /// The shortest.
    pub from_ns: u64,
    /// The longest.
    pub until_ns: u64,
}

/// A stretch of tick periods with one best law, whose worst delay is a straight line.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Piece {
    /// The tick periods.
    pub span: Span,
    /// The law of this kind with the shortest worst delay, the longer of make and break.
    pub law: LawParameters,
    /// Its worst latency in samples.
    pub worst: PerChange<u32>,
    /// Every delay is less than this at the shortest tick period of the piece.
    pub below_from_ns: PerChange<u64>,
    /// Every delay is less than this at the longest.
    pub below_until_ns: PerChange<u64>,
    /// The longest tick period of the piece that is in time; `None` where none is.
    pub in_time_until_ns: Option<u64>,
}

impl Piece {
    /// Every delay is less than this at a tick period of the piece, by a clock with the tolerance, jitter and lost
    /// ticks of `clock`.
    ///
    /// # Panics
    /// When the period is 0.
    #[must_use]
    pub fn below_at(&self, clock: &TickClock, period_ns: u64) -> PerChange<u64> {
        delays(&with_period(clock, period_ns), self.worst)
    }
}

/// Worst delay against tick period, for one kind of law.
#[derive(Clone, PartialEq, Debug)]
pub struct Curve {
    /// The kind of law.
    pub family: &'static str,
    /// The pieces, by tick period. Where there is none, no law of this kind is known to work.
    pub pieces: Vec<Piece>,
    /// Whether that is known by exploring, within a memory that the shortest tick periods outgrow; else by closed form.
    pub is_explored: bool,
    /// Where some law of this kind is faithful.
    pub works: Vec<Span>,
    /// Where it is in time as well.
    pub holds: Vec<Span>,
}

impl Curve {
    /// The piece that holds at a tick period.
    #[must_use]
    pub fn at(&self, period_ns: u64) -> Option<&Piece> {
        let after = self.pieces.partition_point(|piece| piece.span.until_ns < period_ns);
        self.pieces.get(after).filter(|piece| piece.span.from_ns <= period_ns)
    }
}

/// The kinds of law: those whose closed form can say that they hold, and the one that must be explored for it.
const FAMILIES: [&str; 4] = ["state-machine", "integrator", "shift-register", majority::FAMILY];

/// The place of the one that is explored.
pub(super) const EXPLORED: usize = 3;

/// The best law of each kind.
pub(super) type Judged = [majority::Best; FAMILIES.len()];

/// The best laws at one tick period, of those with a closed form.
pub(super) fn judged(question: &ClockQuestion, period_ns: u64) -> Judged {
    let mut best: Judged = [None; FAMILIES.len()];
    let Some(envelope) = question.envelope_at(period_ns) else { return best };
    // Whoever needs longer than the contact stays is never faithful.
    let allowed = envelope.dwell.open.max(envelope.dwell.closed);
    for parameters in laws_to_try(&envelope, allowed) {
        let Some(family) = FAMILIES.iter().position(|family| *family == parameters.name()) else { continue };
        let Ok(logic) = Logic::try_new(&parameters) else { continue };
        let Verdict::Holds(bounds) = logic.verdict(&envelope) else { continue };
        let worst = PerChange { make: bounds.latency.make.worst, break_: bounds.latency.break_.worst };
        let merit = |worst: PerChange<u32>| (worst.make.max(worst.break_), worst.make.min(worst.break_));
        if best[family].is_none_or(|(_, least)| merit(worst) < merit(least)) {
            best[family] = Some((parameters, worst));
        }
    }
    best
}

/// One curve for each kind, from what was judged at the start of each stretch.
pub(super) fn curves(
    question: &ClockQuestion,
    starts: &[u64],
    until_ns: u64,
    judged: &[Judged],
) -> Vec<Curve> {
    let curve = |(family, name): (usize, &&'static str)| {
        let mut pieces: Vec<Piece> = Vec::new();
        for (index, &from_ns) in starts.iter().enumerate() {
            let Some((law, worst)) = judged[index][family] else { continue };
            let until_ns = starts.get(index + 1).map_or(until_ns, |next| next - 1);
            match pieces.last_mut() {
                Some(last) if (last.law, last.worst, last.span.until_ns + 1) == (law, worst, from_ns) => {
                    *last = piece(question, last.span.from_ns, until_ns, law, worst);
                }
                _ => pieces.push(piece(question, from_ns, until_ns, law, worst)),
            }
        }
        let works = joined(pieces.iter().map(|piece| piece.span));
        let holds = joined(pieces.iter().filter_map(|piece| {
            Some(Span { from_ns: piece.span.from_ns, until_ns: piece.in_time_until_ns? })
        }));
        Curve { family: name, pieces, is_explored: family == EXPLORED, works, holds }
    };
    FAMILIES.iter().enumerate().map(curve).collect()
}

fn piece(
    question: &ClockQuestion,
    from_ns: u64,
    until_ns: u64,
    law: LawParameters,
    worst: PerChange<u32>,
) -> Piece {
    Piece {
        span: Span { from_ns, until_ns },
        law,
        worst,
        below_from_ns: delays(&question.clock_at(from_ns), worst),
        below_until_ns: delays(&question.clock_at(until_ns), worst),
        in_time_until_ns: in_time_until(question, worst, from_ns, until_ns),
    }
}

/// The delay grows with the period, so the periods in time are a stretch from the shortest on.
fn in_time_until(
    question: &ClockQuestion,
    worst: PerChange<u32>,
    from_ns: u64,
    until_ns: u64,
) -> Option<u64> {
    if !question.in_time(worst, from_ns) {
        return None;
    }
    let (mut good, mut bad) = (from_ns, until_ns + 1);
    while bad - good > 1 {
        let middle = good + (bad - good) / 2;
        if question.in_time(worst, middle) { good = middle } else { bad = middle }
    }
    Some(good)
}

/// Spans that follow each other without a gap become one.
fn joined(spans: impl Iterator<Item = Span>) -> Vec<Span> {
    let mut joined: Vec<Span> = Vec::new();
    for span in spans {
        match joined.last_mut() {
            Some(last) if last.until_ns + 1 == span.from_ns => last.until_ns = span.until_ns,
            _ => joined.push(span),
        }
    }
    joined
}
