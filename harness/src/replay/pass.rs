//! One pass of a law over a train of samples: its edges, and what they are worth.

use debounce_core::{Change, Law, Position};

use super::feed::{Motion, feed};
use super::matching::{Judgement, Waiting};
use crate::sample::{SampleClock, Train};
use crate::trace::Trace;
use crate::truth::TruthChange;

/// An edge that a law reports.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct ReportedEdge {
    /// What it reports.
    pub change: Change,
    /// The tick that reports it, counted from 0 and including lost ones.
    pub tick: u64,
    /// The instant of that tick, rounded down.
    pub at_ns: u64,
}

/// A law and the clock that steps it.
#[derive(Clone, Copy, Debug)]
pub struct Replay<'a, L> {
    law: &'a L,
    clock: SampleClock,
}

impl<'a, L: Law> Replay<'a, L> {
    /// Pairs a law with a clock at one phase.
    #[must_use]
    pub fn new(law: &'a L, clock: SampleClock) -> Self {
        Self { law, clock }
    }

    /// The edges that the law reports on `trace` when it starts settled at `start`.
    #[must_use]
    pub fn run(&self, trace: &Trace, start: Position) -> Vec<ReportedEdge> {
        follow(self.law, &self.clock.train(trace), start)
    }
}

/// The edges that `law` reports on a train of samples when it starts settled at `start`.
#[must_use]
pub fn follow<L: Law>(law: &L, train: &Train, start: Position) -> Vec<ReportedEdge> {
    let mut state = law.rest(start);
    let mut edges = Vec::new();
    for stretch in train.stretches() {
        feed(law, &mut state, stretch.position, stretch.ticks, |offset, change| {
            let at_ns = train.ns_rounded_down(train.instant(stretch, offset));
            edges.push(ReportedEdge { change, tick: stretch.first_tick + offset, at_ns });
        });
    }
    edges
}

/// A change of the contact that one pass reported.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct PassReport {
    /// Index of the change in the truth.
    pub change: usize,
    /// The tick that reports it.
    pub tick: u64,
    /// Delivered samples from the first that could see the change to the one that reports it, both counted.
    pub samples: u64,
    /// Time from the change to the report, rounded up.
    pub delay_ns: u64,
}

/// Every edge and every change of the contact in one pass.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Pass {
    /// Changes that were reported.
    pub reported: Vec<PassReport>,
    /// Indices of the changes that were missed.
    pub missed: Vec<usize>,
    /// Indices of the changes so near the end of the trace that the law had not settled.
    pub undecided: Vec<usize>,
    /// Edges without a change.
    pub false_edges: Vec<ReportedEdge>,
}

/// Follows `law` along a train, settled at `start`, and matches its edges with the contact's changes.
///
/// `truth` must alternate, begin away from `start` and rise; see [`check_truth`](crate::truth::check_truth).
#[must_use]
pub fn judge<L: Law>(law: &L, train: &Train, start: Position, truth: &[TruthChange]) -> Pass {
    let mut judge = Judge {
        train,
        truth,
        waiting: Waiting::default(),
        seen_from: Vec::new(),
        contact: start,
        pass: Pass::default(),
    };
    let mut state = law.rest(start);
    let mut delivered = 0;
    for stretch in train.stretches() {
        let mut done = 0;
        while done < stretch.ticks {
            // Changes that come before the next sample wait from it on; the next one ends this part.
            let mut until = stretch.ticks;
            while let Some(next) = truth.get(judge.seen_from.len()) {
                let before = train.samples_before(stretch, train.units_after_start(next.at_ns));
                if before > done {
                    until = before;
                    break;
                }
                judge.arrive(delivered + done);
            }
            let motion = feed(law, &mut state, stretch.position, until - done, |offset, change| {
                let offset = done + offset;
                let edge = ReportedEdge { change, tick: stretch.first_tick + offset, at_ns: 0 };
                judge.edge(edge, delivered + offset, train.instant(stretch, offset));
            });
            if motion == Motion::Settled
                && stretch.position == judge.contact
                && law.output(&state) == judge.contact
            {
                judge.settle();
            }
            done = until;
        }
        delivered += stretch.ticks;
    }
    while judge.seen_from.len() < truth.len() {
        judge.arrive(delivered);
    }
    if debounce_core::is_settled(law, &state, train.last_position()) {
        judge.settle();
    }
    let arrived = judge.seen_from.len();
    judge.pass.undecided.extend(arrived - usize::from(judge.waiting.count())..arrived);
    judge.pass
}

struct Judge<'a> {
    train: &'a Train,
    truth: &'a [TruthChange],
    waiting: Waiting,
    /// For each change so far, the first delivered sample that could see it.
    seen_from: Vec<u64>,
    contact: Position,
    pass: Pass,
}

impl Judge<'_> {
    fn arrive(&mut self, sample: u64) {
        let index = self.seen_from.len();
        if self.waiting.arrive() {
            self.pass.missed.push(index - 2);
        }
        self.contact = self.truth[index].change.to();
        self.seen_from.push(sample);
    }

    fn edge(&mut self, edge: ReportedEdge, sample: u64, instant: u128) {
        let latest = self.seen_from.len().wrapping_sub(1);
        match self.waiting.edge(edge.change, self.contact) {
            Judgement::False => {
                let at_ns = self.train.ns_rounded_down(instant);
                self.pass.false_edges.push(ReportedEdge { at_ns, ..edge });
            }
            Judgement::ReportsLatest => self.report(latest, edge.tick, sample, instant),
            Judgement::ReportsPrevious => self.report(latest - 1, edge.tick, sample, instant),
            Judgement::ReportsLatestMissesPrevious => {
                self.pass.missed.push(latest - 1);
                self.report(latest, edge.tick, sample, instant);
            }
        }
    }

    fn report(&mut self, change: usize, tick: u64, sample: u64, instant: u128) {
        let delay = instant - self.train.units_after_start(self.truth[change].at_ns);
        self.pass.reported.push(PassReport {
            change,
            tick,
            samples: sample - self.seen_from[change] + 1,
            delay_ns: self.train.span_ns_rounded_up(delay),
        });
    }

    fn settle(&mut self) {
        let arrived = self.seen_from.len();
        self.pass.missed.extend(arrived - usize::from(self.waiting.clear())..arrived);
    }
}
