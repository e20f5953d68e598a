//! The figures of one law on one trace at one tick period, over a uniform phase.

use debounce_core::{Change, Law};
use serde::{Serialize, Serializer};

use super::latency::Latencies;
use super::outcome::{FalseEdge, Outcome, PhaseSpan, Unreported};
use super::prepared::PreparedTrace;
use crate::sample::ExactPeriod;

/// What was measured of a law on a trace. Phases are in units of `period`.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct Measurement {
    /// The tick period.
    pub period: ExactPeriod,
    /// The makes.
    pub make: ChangeFigures,
    /// The breaks.
    #[serde(rename = "break")]
    pub break_: ChangeFigures,
    /// Edges that no change of the contact stands behind.
    pub false_edges: FalseEdges,
    /// Changes that were not reported at some phase.
    pub missed: Vec<UnreportedChange>,
    /// Changes that the trace ends too early to judge at some phase.
    pub undecided: Vec<UnreportedChange>,
}

/// The figures of one direction of change.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct ChangeFigures {
    /// How many the trace holds.
    pub changes: u32,
    /// Those missed at some phase.
    pub missed_at_some_phase: u32,
    /// Mean number missed in one pass over the trace.
    pub missed: f64,
    /// The latencies of those that were reported; `None` when none was.
    pub latency: Option<Latencies>,
}

/// The false edges of all phases together.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct FalseEdges {
    /// The part of phases with at least one.
    pub probability: f64,
    /// Mean number in one pass over the trace.
    pub mean: f64,
    /// The places where they occur, in order of time.
    pub places: Vec<FalsePlace>,
}

/// A stretch of the trace in which an edge is false at some phase.
#[derive(Clone, Copy, PartialEq, Debug, Serialize)]
pub struct FalsePlace {
    /// What was reported.
    #[serde(serialize_with = "word")]
    pub change: Change,
    /// The earliest report, rounded down.
    pub from_ns: u64,
    /// All reports are before this, rounded up.
    pub until_ns: u64,
    /// Mean number in one pass over the trace.
    pub mean: f64,
    /// Phases at which the earliest report occurs.
    pub phase: PhaseSpan,
}

/// A change that was not reported at some phases.
#[derive(Clone, Copy, PartialEq, Debug, Serialize)]
pub struct UnreportedChange {
    /// What the contact did.
    #[serde(serialize_with = "word")]
    pub change: Change,
    /// Index of the change in the truth.
    pub index: u32,
    /// Its time in the trace.
    pub at_ns: u64,
    /// The part of phases at which it was not reported.
    pub probability: f64,
    /// The first span of phases at which it was not.
    pub phase: PhaseSpan,
}

pub(super) fn word<S: Serializer>(change: &Change, serializer: S) -> Result<S::Ok, S::Error> {
    serializer.serialize_str(match change {
        Change::Make => "make",
        Change::Break => "break",
    })
}

impl Measurement {
    /// The figures of one direction.
    #[must_use]
    pub fn at(&self, change: Change) -> &ChangeFigures {
        match change {
            Change::Make => &self.make,
            Change::Break => &self.break_,
        }
    }

    /// Whether every change was reported and no edge was false, at every phase; undecided changes do not count.
    #[must_use]
    pub fn is_faithful(&self) -> bool {
        self.missed.is_empty() && self.false_edges.places.is_empty()
    }
}

impl PreparedTrace {
    /// Replays `law` at every phase and sums up what it did.
    #[must_use]
    pub fn measure<L: Law>(&self, law: &L) -> Measurement {
        self.summarise(&self.outcome(law))
    }

    /// The figures of an outcome of this trace.
    #[must_use]
    pub fn summarise(&self, outcome: &Outcome) -> Measurement {
        let missed = self.unreported(&outcome.missed);
        Measurement {
            period: self.period(),
            make: self.figures(Change::Make, outcome, &missed),
            break_: self.figures(Change::Break, outcome, &missed),
            false_edges: self.false_edges(&outcome.false_edges),
            missed,
            undecided: self.unreported(&outcome.undecided),
        }
    }

    fn figures(&self, change: Change, outcome: &Outcome, missed: &[UnreportedChange]) -> ChangeFigures {
        let is_ours = |index: u32| self.truth()[index as usize].change == change;
        let ours = self.truth().iter().filter(|truth| truth.change == change).count();
        let missed = missed.iter().filter(|missed| missed.change == change);
        ChangeFigures {
            changes: u32::try_from(ours).expect("changes are numbered in 32 bits"),
            missed_at_some_phase: u32::try_from(missed.clone().count())
                .expect("no more than there are changes"),
            missed: missed.map(|missed| missed.probability).sum(),
            latency: Latencies::of(self, outcome.reported.iter().filter(|report| is_ours(report.change))),
        }
    }

    fn part(&self, width: u128) -> f64 {
        width as f64 / self.period().units() as f64
    }

    fn unreported(&self, list: &[Unreported]) -> Vec<UnreportedChange> {
        let mut sorted = list.to_vec();
        sorted.sort_unstable();
        let changes = sorted.chunk_by(|a, b| a.change == b.change);
        changes
            .map(|spans| {
                let first = spans[0];
                let truth = self.truth()[first.change as usize];
                UnreportedChange {
                    change: truth.change,
                    index: first.change,
                    at_ns: truth.at_ns,
                    probability: self.part(spans.iter().map(|span| u128::from(span.phase.width())).sum()),
                    phase: first.phase,
                }
            })
            .collect()
    }

    fn false_edges(&self, edges: &[FalseEdge]) -> FalseEdges {
        let mut spans: Vec<PhaseSpan> = edges.iter().map(|edge| edge.phase).collect();
        spans.sort_unstable();
        let (mut covered, mut reach) = (0_u128, 0);
        for span in &spans {
            covered += u128::from(span.until.saturating_sub(span.from.max(reach)));
            reach = reach.max(span.until);
        }
        FalseEdges {
            probability: self.part(covered),
            mean: self.part(spans.iter().map(|span| u128::from(span.width())).sum()),
            places: self.false_places(edges),
        }
    }

    /// False edges of the same change whose times touch are one place.
    fn false_places(&self, edges: &[FalseEdge]) -> Vec<FalsePlace> {
        let units = self.period().units();
        let mut timed: Vec<(Change, u64, u64, PhaseSpan)> = edges
            .iter()
            .map(|edge| {
                let tick = edge.tick * units;
                (edge.change, tick + edge.phase.from, tick + edge.phase.until, edge.phase)
            })
            .collect();
        timed.sort_unstable();
        let per_ns = self.period().units_per_ns();
        let mut places: Vec<FalsePlace> = Vec::new();
        let mut reach = 0;
        for (change, from, until, phase) in timed {
            let mean = self.part(u128::from(phase.width()));
            let until_ns = self.start_ns() + until.div_ceil(per_ns);
            match places.last_mut() {
                Some(place) if place.change == change && from <= reach => {
                    place.mean += mean;
                    place.until_ns = place.until_ns.max(until_ns);
                    reach = reach.max(until);
                }
                _ => {
                    let from_ns = self.start_ns() + from / per_ns;
                    places.push(FalsePlace { change, from_ns, until_ns, mean, phase });
                    reach = until;
                }
            }
        }
        places.sort_by_key(|place| place.from_ns);
        places
    }
}
