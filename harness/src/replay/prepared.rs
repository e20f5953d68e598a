//! A trace made ready to be replayed at one tick period and every phase, shared by any number of laws.
//!
//! # Why every phase is finitely many
//! With the phase p in `[0, T)`, the first sample at or after an instant e = q T + r (q whole, 0 <= r < T) is tick
//! q when p >= r, else tick q + 1. So the samples depend on p only through which residues r lie at or below
//! it: between two neighbouring residues nothing changes, and the delay from e to a given tick rises linearly.
//!
//! # Why the cost does not grow with the square of the edges
//! The walk goes forward in time and carries *strands*: spans of phase in which the law is in one state and the same
//! changes wait. At each edge a strand is split at the two residues that the run before it depends on; after the run,
//! neighbours that have become alike are joined again. Wherever the law settles for every phase, one strand is left.
//! A law that never forgets keeps its strands, and the result is the same.

use debounce_core::{Law, Position};

use super::feed::{Motion, feed};
use super::matching::{Judgement, Waiting};
use super::outcome::{Outcome, PhaseSpan};
use crate::sample::ExactPeriod;
use crate::trace::Trace;
use crate::truth::{TruthChange, TruthError, check_truth};

/// Why a trace cannot be prepared.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum PrepareError {
    /// The truth does not fit the trace.
    #[error(transparent)]
    Truth(#[from] TruthError),
    /// Counted in units of the exact period, the trace is longer than 63 bits.
    #[error(
        "a trace of {span_ns} ns at {units_per_ns} units of the tick period in a nanosecond is too long to be replayed exactly; cut it into shorter traces"
    )]
    TooLong {
        /// Length of the trace.
        span_ns: u64,
        /// How fine the units of the period are.
        units_per_ns: u64,
    },
}

/// An instant on the grid of ticks: its first sample is tick `tick` for phases from `residue` on, else the next.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) struct GridPoint {
    pub(crate) tick: u64,
    pub(crate) residue: u64,
}

impl GridPoint {
    pub(crate) fn first_sample(self, phase: u64) -> u64 {
        self.tick + u64::from(self.residue > phase)
    }
}

/// Between two neighbouring instants at which the line or the contact changes.
#[derive(Clone, Copy, Debug)]
struct Segment {
    from: GridPoint,
    until: GridPoint,
    line: Position,
    contact: Position,
    /// The index of the change with which the segment begins, if it does.
    arriving: Option<u32>,
    /// Changes up to now.
    arrived: u32,
}

/// A trace and its truth on the grid of one tick period.
#[derive(Clone, Debug)]
pub struct PreparedTrace {
    period: ExactPeriod,
    start_ns: u64,
    initial: Position,
    truth: Vec<TruthChange>,
    truth_points: Vec<GridPoint>,
    segments: Vec<Segment>,
    last_line: Position,
    samples: GridPoint,
}

/// Whether strands that have become alike are joined; not joining them exists to test that it changes nothing.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Joining {
    Alike,
    #[cfg(test)]
    Never,
}

/// A span of phases in which everything is alike so far.
#[derive(Clone, Copy)]
struct Strand<S> {
    phase: PhaseSpan,
    state: S,
    waiting: Waiting,
}

impl PreparedTrace {
    /// Prepares `trace` for replay at `period`, with `truth` to measure against.
    ///
    /// # Errors
    /// When the truth does not fit the trace (see [`check_truth`]), or the trace is too long to be counted exactly.
    pub fn new(
        trace: &Trace,
        truth: &[TruthChange],
        period: impl Into<ExactPeriod>,
    ) -> Result<Self, PrepareError> {
        let period = period.into();
        check_truth(trace, truth)?;
        let span_ns = trace.end_ns() - trace.start_ns();
        // One bit is kept free for the sum of an instant and a period.
        if period.to_units(span_ns) + u128::from(period.units()) > u128::from(u64::MAX / 2) {
            return Err(PrepareError::TooLong { span_ns, units_per_ns: period.units_per_ns() });
        }
        let on_grid = |at_ns: u64| {
            let at = (at_ns - trace.start_ns()) * period.units_per_ns();
            GridPoint { tick: at / period.units(), residue: at % period.units() }
        };
        Ok(Self {
            period,
            start_ns: trace.start_ns(),
            initial: trace.initial(),
            truth: truth.to_vec(),
            truth_points: truth.iter().map(|change| on_grid(change.at_ns)).collect(),
            segments: segments(trace, truth, on_grid),
            last_line: trace.position_at(trace.end_ns()),
            samples: on_grid(trace.end_ns()),
        })
    }

    /// The tick period.
    #[must_use]
    pub fn period(&self) -> ExactPeriod {
        self.period
    }

    /// The changes of the contact.
    #[must_use]
    pub fn truth(&self) -> &[TruthChange] {
        &self.truth
    }

    /// How many samples the trace holds at the phase, in units of the period.
    #[must_use]
    pub fn samples(&self, phase: u64) -> u64 {
        self.samples.first_sample(phase)
    }

    pub(crate) fn start_ns(&self) -> u64 {
        self.start_ns
    }

    pub(crate) fn truth_point(&self, change: u32) -> GridPoint {
        self.truth_points[change as usize]
    }

    /// Everything that `law` does at every phase. The law starts settled at the trace's first position.
    #[must_use]
    pub fn outcome<L: Law>(&self, law: &L) -> Outcome {
        self.walk(law, Joining::Alike)
    }

    pub(crate) fn walk<L: Law>(&self, law: &L, joining: Joining) -> Outcome {
        let mut outcome = Outcome::default();
        let whole = PhaseSpan { from: 0, until: self.period.units() };
        let mut strands =
            vec![Strand { phase: whole, state: law.rest(self.initial), waiting: Waiting::default() }];
        let mut walked: Vec<Strand<L::State>> = Vec::new();
        for segment in &self.segments {
            let (a, b) = (segment.from.residue, segment.until.residue);
            let (low, high) = (a.min(b), a.max(b));
            for strand in strands.drain(..) {
                let PhaseSpan { mut from, until: end } = strand.phase;
                while from < end {
                    let cut = if from < low {
                        low
                    } else if from < high {
                        high
                    } else {
                        end
                    };
                    let until = cut.min(end);
                    let mut part = Strand { phase: PhaseSpan { from, until }, ..strand };
                    // Most bounces fall between two samples: nothing to do then but to carry the strand on.
                    if segment.arriving.is_some() || segment.ticks(from) > 0 {
                        segment.pass(law, &mut part, &mut outcome);
                    }
                    push(&mut walked, part, joining);
                    from = until;
                }
            }
            std::mem::swap(&mut strands, &mut walked);
        }
        for strand in &strands {
            self.close(law, strand, &mut outcome);
        }
        outcome
    }

    /// What still waits at the end of the trace.
    fn close<L: Law>(&self, law: &L, strand: &Strand<L::State>, outcome: &mut Outcome) {
        let waiting = u32::from(strand.waiting.count());
        if waiting == 0 {
            return;
        }
        let arrived = self.segments.last().map_or(0, |segment| segment.arrived);
        let settled = debounce_core::is_settled(law, &strand.state, self.last_line);
        for change in arrived - waiting..arrived {
            if settled {
                outcome.miss(change, strand.phase);
            } else {
                outcome.leave_undecided(change, strand.phase);
            }
        }
    }
}

impl Segment {
    fn ticks(&self, phase: u64) -> u64 {
        self.until.first_sample(phase) - self.from.first_sample(phase)
    }

    fn pass<L: Law>(&self, law: &L, strand: &mut Strand<L::State>, outcome: &mut Outcome) {
        let Strand { phase, state, waiting } = strand;
        let phase = *phase;
        if let Some(change) = self.arriving
            && waiting.arrive()
        {
            outcome.miss(change - 2, phase);
        }
        let first = self.from.first_sample(phase.from);
        let motion = feed(law, state, self.line, self.ticks(phase.from), |offset, change| {
            let tick = first + offset;
            match waiting.edge(change, self.contact) {
                Judgement::False => outcome.report_falsely(change, tick, phase),
                Judgement::ReportsLatest => outcome.report(self.arrived - 1, tick, phase),
                Judgement::ReportsPrevious => outcome.report(self.arrived - 2, tick, phase),
                Judgement::ReportsLatestMissesPrevious => {
                    outcome.miss(self.arrived - 2, phase);
                    outcome.report(self.arrived - 1, tick, phase);
                }
            }
        });
        if motion == Motion::Settled && self.line == self.contact && law.output(state) == self.contact {
            let missed = u32::from(waiting.clear());
            for change in self.arrived - missed..self.arrived {
                outcome.miss(change, phase);
            }
        }
    }
}

fn push<S: Copy + Eq>(walked: &mut Vec<Strand<S>>, part: Strand<S>, joining: Joining) {
    match walked.last_mut() {
        Some(last)
            if joining == Joining::Alike && last.waiting == part.waiting && last.state == part.state =>
        {
            last.phase.until = part.phase.until;
        }
        _ => walked.push(part),
    }
}

/// Cuts the trace at every edge and every change, and once more at its end.
fn segments(trace: &Trace, truth: &[TruthChange], on_grid: impl Fn(u64) -> GridPoint) -> Vec<Segment> {
    let mut segments = Vec::with_capacity(trace.edges().len() + truth.len() + 1);
    let (mut edges, mut changes) = (trace.edges().iter().peekable(), truth.iter().peekable());
    let mut at_ns = trace.start_ns();
    let mut from = on_grid(at_ns);
    let (mut line, mut contact, mut arrived) = (trace.initial(), trace.initial(), 0);
    loop {
        let mut arriving = None;
        if edges.next_if(|&&edge| edge == at_ns).is_some() {
            line = line.opposite();
        }
        if let Some(change) = changes.next_if(|change| change.at_ns == at_ns) {
            contact = change.change.to();
            arriving = Some(arrived);
            arrived += 1;
        }
        let next = [edges.peek().map(|&&edge| edge), changes.peek().map(|change| change.at_ns)];
        let until_ns = next.into_iter().flatten().min().unwrap_or(trace.end_ns());
        let until = on_grid(until_ns);
        segments.push(Segment { from, until, line, contact, arriving, arrived });
        if until_ns == at_ns
            || (edges.peek().is_none() && changes.peek().is_none() && until_ns == trace.end_ns())
        {
            return segments;
        }
        (at_ns, from) = (until_ns, until);
    }
}
