//! One law along one word: what it reports, how late, and the first promise it breaks.

use std::collections::VecDeque;

use debounce_core::{Change, Clause, Law, PerChange, Position, is_settled};

use crate::prove::WitnessTick;

/// What came of it.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Followed {
    /// The ticks that were taken, steady ones after the word among them as far as they were needed.
    pub(super) ticks: Vec<WitnessTick>,
    /// The first promise broken.
    pub(super) fault: Option<Clause>,
    /// The longest latency that was seen.
    pub(super) slowest: PerChange<Option<u32>>,
}

/// Gives `law`, at rest at `start`, one sample after the other, and then judges it by the contact behind them.
pub(super) struct Follower<'a, L: Law> {
    law: &'a L,
    state: L::State,
    contact: Position,
    /// Changes not yet reported, with the tick before which they happened.
    pending: VecDeque<(Change, usize)>,
    followed: Followed,
}

impl<'a, L: Law> Follower<'a, L> {
    pub(super) fn at_rest(law: &'a L, start: Position) -> Self {
        let slowest = PerChange { make: None, break_: None };
        Self {
            law,
            state: law.rest(start),
            contact: start,
            pending: VecDeque::new(),
            followed: Followed { ticks: Vec::new(), fault: None, slowest },
        }
    }

    pub(super) fn state(&self) -> L::State {
        self.state
    }

    pub(super) fn unreported(&self) -> usize {
        self.pending.len()
    }

    pub(super) fn miss(&mut self) {
        self.followed.fault.get_or_insert(Clause::Missed);
    }

    /// Takes one tick; `false` once a promise is broken.
    pub(super) fn take(&mut self, tick: WitnessTick) -> bool {
        let at = self.followed.ticks.len();
        if tick.contact != self.contact {
            self.contact = tick.contact;
            self.pending.push_back((tick.contact.reached_by(), at));
        }
        let edge = self.law.step(&mut self.state, tick.sample);
        self.followed.ticks.push(WitnessTick { output: self.law.output(&self.state), ..tick });
        match (edge, self.pending.front().copied()) {
            (Some(edge), Some((change, since))) if edge == change => {
                self.pending.pop_front();
                let latency = u32::try_from(at - since + 1).unwrap_or(u32::MAX);
                let slot = match change {
                    Change::Make => &mut self.followed.slowest.make,
                    Change::Break => &mut self.followed.slowest.break_,
                };
                *slot = Some(slot.map_or(latency, |so_far| so_far.max(latency)));
            }
            (Some(_), _) => self.followed.fault = Some(Clause::FalseEdge),
            // As for a proof: two whole operations out of sight are missed.
            (None, _) if self.pending.len() > 3 => self.miss(),
            (None, _) => {}
        }
        self.followed.fault.is_none()
    }

    /// Lets the contact stay where it is, undisturbed, until the law is settled, at most `most` ticks. A change that
    /// is then unreported is missed.
    pub(super) fn settle(mut self, most: usize) -> Followed {
        for _ in 0..most {
            if self.followed.fault.is_some() || is_settled(self.law, &self.state, self.contact) {
                break;
            }
            self.take(steady(self.contact));
        }
        if !self.pending.is_empty() {
            self.miss();
        }
        self.followed
    }

    pub(super) fn end(self) -> Followed {
        self.followed
    }
}

fn steady(contact: Position) -> WitnessTick {
    WitnessTick { contact, sample: contact, output: contact, bouncing: false, disturbed: false }
}
