//! The logic that reports as soon as the samples leave no doubt, as a table: the subset construction.

use std::rc::Rc;

use debounce_core::{Envelope, Position};
use rustc_hash::FxHashMap;

use super::super::Limits;
use super::super::environment::Environment;
use super::MOST_BELIEFS;
use super::belief::{Belief, Knowledge, Reach};

/// A next-state table whose states are beliefs.
pub(super) struct Subsets {
    pub(super) next: Vec<[u32; 2]>,
    pub(super) outputs: Vec<Position>,
    pub(super) rests: [u32; 2],
    /// Beliefs looked at.
    pub(super) beliefs: usize,
}

/// How far a construction got that did not fit.
#[derive(Clone, Copy, Debug)]
pub(super) struct Unfinished {
    pub(super) beliefs: usize,
    pub(super) bytes: u64,
}

/// Which beliefs are told apart.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Memory {
    /// All of them: the table reports at the earliest sample in every waveform.
    Everything,
    /// A belief is forgotten for a vaguer one where that is known to be won too: the worst waveform is served as
    /// well, others later, and the table is much smaller.
    WhatMatters,
}

/// No number of a belief: no waveform of the envelope has that sample.
const NOWHERE: u32 = u32::MAX;

/// Enumerates the beliefs that samples can lead to, from rest at either position.
pub(super) fn subsets(
    environment: &Environment,
    envelope: &Envelope,
    limits: &Limits,
    memory: Memory,
) -> Result<Subsets, Unfinished> {
    let mut known = Known::empty(Knowledge::new(environment, envelope), memory);
    let rests = Position::BOTH.map(|position| {
        let belief = at_rest(&mut known.knowledge, Belief::settled(environment, position));
        known.add(belief)
    });
    // Rests are compared with nothing, so that each stays what it is.
    known.apart.extend(rests);
    let mut next: Vec<[u32; 2]> = Vec::new();
    while next.len() < known.beliefs.len() {
        let belief = Rc::clone(&known.beliefs[next.len()]);
        if known.stand_in[next.len()] as usize != next.len() {
            next.push([NOWHERE; 2]);
            continue;
        }
        let after = known.knowledge.after(&belief);
        next.push(after.map(|belief| belief.map_or(NOWHERE, |belief| known.number(belief))));
        if known.bytes > limits.memory_bytes || known.beliefs.len() > MOST_BELIEFS {
            return Err(Unfinished { beliefs: known.beliefs.len(), bytes: known.bytes });
        }
    }
    Ok(known.table(&next, rests))
}

/// What is known after ever so many samples of the position at which everything was `settled`.
///
/// The contact may always stay as it is, so every step only adds members, and an end is reached.
fn at_rest(knowledge: &mut Knowledge<'_>, settled: Belief) -> Belief {
    let mut belief = settled;
    loop {
        let [open, closed] = knowledge.after(&belief);
        let after = if belief.output.is_closed() { closed } else { open };
        let after = after.expect("a settled contact reads as it is");
        if after == belief {
            return belief;
        }
        belief = after;
    }
}

/// The beliefs found so far.
struct Known<'a> {
    knowledge: Knowledge<'a>,
    memory: Memory,
    beliefs: Vec<Rc<Belief>>,
    reaches: Vec<Reach>,
    numbers: FxHashMap<Rc<Belief>, u32>,
    /// For each belief the one that was put in its place, or itself.
    stand_in: Vec<u32>,
    /// Those that none stands in for, and of which none may stand in for another.
    apart: Vec<u32>,
    bytes: u64,
}

impl<'a> Known<'a> {
    fn empty(knowledge: Knowledge<'a>, memory: Memory) -> Self {
        Self {
            knowledge,
            memory,
            beliefs: Vec::new(),
            reaches: Vec::new(),
            numbers: FxHashMap::default(),
            stand_in: Vec::new(),
            apart: Vec::new(),
            bytes: 0,
        }
    }

    fn add(&mut self, belief: Belief) -> u32 {
        let belief = Rc::new(belief);
        // `MOST_BELIEFS` keeps the numbers far below the width.
        let number = self.beliefs.len() as u32;
        self.bytes += belief.bytes();
        self.reaches.push(self.knowledge.reach(&belief));
        self.beliefs.push(Rc::clone(&belief));
        self.numbers.insert(belief, number);
        self.stand_in.push(number);
        number
    }

    fn number(&mut self, belief: Belief) -> u32 {
        if let Some(&number) = self.numbers.get(&belief) {
            return number;
        }
        if self.memory == Memory::Everything {
            return self.add(belief);
        }
        let reach = self.knowledge.reach(&belief);
        let vaguer = self.apart.iter().copied().find(|&other| {
            self.reaches[other as usize].at_least(&reach)
                && self.knowledge.may_stand_for(&self.beliefs[other as usize], &belief)
        });
        if let Some(vaguer) = vaguer {
            return vaguer;
        }
        let number = self.add(belief);
        let belief = &self.beliefs[number as usize];
        let (knowledge, beliefs, reaches, stand_in) =
            (&self.knowledge, &self.beliefs, &self.reaches, &mut self.stand_in);
        self.apart.retain(|&other| {
            let at = other as usize;
            // The first two beliefs are the rests.
            let replaced =
                other > 1 && reach.at_least(&reaches[at]) && knowledge.may_stand_for(belief, &beliefs[at]);
            if replaced {
                stand_in[at] = number;
            }
            !replaced
        });
        self.apart.push(number);
        number
    }

    /// The table of the beliefs that are left, as far as samples lead to them from the rests.
    fn table(&self, next: &[[u32; 2]], rests: [u32; 2]) -> Subsets {
        let resolve = |mut number: u32| {
            while self.stand_in[number as usize] != number {
                number = self.stand_in[number as usize];
            }
            number
        };
        let step = |state: u32, sample: usize| {
            let target = next[state as usize][sample];
            // Outside the envelope nothing is promised; the logic then takes the sample as if it had been at rest.
            let rest = rests[self.beliefs[state as usize].output as usize];
            resolve(if target == NOWHERE { next[rest as usize][sample] } else { target })
        };
        let mut kept = rests.to_vec();
        let mut place: FxHashMap<u32, u32> = FxHashMap::from_iter([(rests[0], 0), (rests[1], 1)]);
        let mut table = Vec::new();
        while let Some(&state) = kept.get(table.len()) {
            table.push([0, 1].map(|sample| {
                let target = step(state, sample);
                *place.entry(target).or_insert_with(|| {
                    kept.push(target);
                    (kept.len() - 1) as u32
                })
            }));
        }
        let outputs = kept.iter().map(|&state| self.beliefs[state as usize].output).collect();
        Subsets { next: table, outputs, rests: [0, 1], beliefs: self.beliefs.len() }
    }
}
