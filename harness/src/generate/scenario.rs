//! A whole recording: a contact, what a person or a mechanism does with it, and what the line picks up.

use debounce_core::{Change, Position};

use super::contact::ContactModel;
use super::dice::{Between, Dice};
use super::disturbance::Disturbances;
use crate::trace::{Trace, TraceError};
use crate::truth::TruthChange;

/// A disturbance that really was none of the contact's doing.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Noise {
    /// Where the contact was when it began.
    pub position: Position,
    /// First edge.
    pub from_ns: u64,
    /// Last edge.
    pub until_ns: u64,
}

/// A recording to be invented. The contact begins open; every operation is a make and a break.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Scenario {
    /// The seed of everything random.
    pub seed: u64,
    /// How the contact bounces.
    pub contact: ContactModel,
    /// How many operations.
    pub operations: u32,
    /// How long the contact stays closed, from first edge to first edge, in nanoseconds.
    pub closed_ns: Between,
    /// How long it stays open between two operations, from first edge to first edge, in nanoseconds.
    pub open_ns: Between,
    /// Operations, counted from 0, after which the contact stays open only this long: (operation, nanoseconds).
    pub quick_after: Vec<(u32, u64)>,
    /// What the line picks up while the contact rests.
    pub disturbances: Option<Disturbances>,
    /// How often a dwell holds one, in thousandths.
    pub resting_permille: u32,
    /// How often one strikes soon after a bounce has ended, in thousandths.
    pub after_bounce_permille: u32,
    /// How soon after the end of the bounce, in nanoseconds, at least 1.
    pub after_bounce_ns: Between,
    /// Least rest between a disturbance in mid-dwell and any bounce or other disturbance, in nanoseconds.
    pub clear_ns: u64,
    /// The recorder's own sample period, in nanoseconds; every edge is seen at its next sample.
    pub resolution_ns: u64,
}

/// An invented recording with its truth.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Generated {
    /// What a recorder would have shown.
    pub trace: Trace,
    /// What the contact did, in order.
    pub truth: Vec<TruthChange>,
    /// Last edge of the bounce of each change of `truth`.
    pub bounce_ends_ns: Vec<u64>,
    /// What was not the contact's doing, in order.
    pub noise: Vec<Noise>,
}

impl Scenario {
    /// Invents the recording.
    ///
    /// A dwell is lengthened where its bounce or a disturbance would not fit. Pulses that the recorder's sample
    /// period swallows leave no edge.
    ///
    /// # Errors
    /// Only when a scenario of more than about 500 years overflows the clock of the trace.
    pub fn generate(&self) -> Result<Generated, TraceError> {
        let mut made = Making {
            scenario: self,
            now: 0,
            edges: Vec::new(),
            truth: vec![],
            bounce_ends: vec![],
            noise: vec![],
        };
        let mut start = Dice::new(self.seed, 0);
        made.now = self.clear_ns.max(start.draw(self.open_ns));
        for operation in 0..self.operations {
            let mut dice = Dice::new(self.seed, u64::from(operation) + 1);
            let closed = dice.draw(self.closed_ns);
            made.change(Change::Make, closed, &mut dice);
            let quick = self.quick_after.iter().find(|&&(after, _)| after == operation);
            let open = dice.draw(self.open_ns);
            made.change(Change::Break, quick.map_or(open, |&(_, ns)| ns), &mut dice);
        }
        let resolution = self.resolution_ns.max(1);
        let end = made.now.next_multiple_of(resolution);
        let seen = record(made.edges, resolution);
        let at_sample = |ns: u64| ns.next_multiple_of(resolution);
        Ok(Generated {
            trace: Trace::new(Position::Open, 0, end, seen, self.resolution_ns)?,
            truth: made.truth.iter().map(|t| TruthChange { at_ns: at_sample(t.at_ns), ..*t }).collect(),
            bounce_ends_ns: made.bounce_ends.iter().map(|&ns| at_sample(ns)).collect(),
            noise: made
                .noise
                .iter()
                .map(|n| Noise { from_ns: at_sample(n.from_ns), until_ns: at_sample(n.until_ns), ..*n })
                .collect(),
        })
    }
}

/// The recording as it grows; `now` is where the next change falls.
struct Making<'a> {
    scenario: &'a Scenario,
    now: u64,
    edges: Vec<u64>,
    truth: Vec<TruthChange>,
    bounce_ends: Vec<u64>,
    noise: Vec<Noise>,
}

impl Making<'_> {
    fn change(&mut self, change: Change, dwell: u64, dice: &mut Dice) {
        let at_ns = self.now;
        let edges = self.scenario.contact.edges(change, at_ns, dice);
        // The contact model always gives the edge at `at_ns`.
        let bounce_end = edges.last().copied().unwrap_or(at_ns);
        self.edges.extend(edges);
        self.truth.push(TruthChange { change, at_ns });
        self.bounce_ends.push(bounce_end);
        let mut clear_from = bounce_end;
        let mut until = at_ns + dwell;
        if let Some(kind) = self.scenario.disturbances {
            if dice.chance(self.scenario.after_bounce_permille) {
                let from = bounce_end + dice.draw(self.scenario.after_bounce_ns).max(1);
                clear_from = self.disturb(&kind, change.to(), from, dice);
            }
            let least = clear_from + self.scenario.clear_ns;
            let latest = until.saturating_sub(self.scenario.clear_ns + kind.widest_ns());
            if dice.chance(self.scenario.resting_permille) && least < latest {
                let from = dice.draw(Between(least, latest));
                clear_from = self.disturb(&kind, change.to(), from, dice);
            }
        }
        until = until.max(clear_from + self.scenario.clear_ns);
        self.now = until;
    }

    fn disturb(&mut self, kind: &Disturbances, position: Position, from_ns: u64, dice: &mut Dice) -> u64 {
        let edges = kind.edges(from_ns, dice);
        let until_ns = edges.last().copied().unwrap_or(from_ns);
        self.edges.extend(edges);
        self.noise.push(Noise { position, from_ns, until_ns });
        until_ns
    }
}

/// What a recorder with this sample period shows: each edge at its next sample, pairs within one sample lost.
pub(super) fn record(edges: Vec<u64>, resolution: u64) -> Vec<u64> {
    let mut seen: Vec<u64> = Vec::with_capacity(edges.len());
    for edge in edges {
        let at = edge.next_multiple_of(resolution);
        if seen.last() == Some(&at) {
            seen.pop();
        } else {
            seen.push(at);
        }
    }
    seen
}
