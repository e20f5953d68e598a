//! A law as a table: every state it can reach, numbered, with the obligations checked on the way.

use core::hash::Hash;

use debounce_core::{Law, Position};
use rustc_hash::FxHashMap;

use super::ProveError;

/// Where one sample leads: the next state, and whether an edge was reported.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Entry(u32);

impl Entry {
    const EDGE: u32 = 1 << 31;

    /// Index of the next state.
    #[inline]
    pub fn next(self) -> usize {
        (self.0 & !Self::EDGE) as usize
    }

    /// 1 when the step reports an edge.
    #[inline]
    pub fn edges(self) -> u32 {
        self.0 >> 31
    }
}

/// The reachable states of a law under all inputs, from rest at either position.
#[derive(Clone, Debug)]
pub struct LawTable {
    entries: Vec<Entry>,
    outputs: Vec<Position>,
    /// Bit p: a step with position p leaves the state as it is.
    settled: Vec<u8>,
    rests: [u32; 2],
}

impl LawTable {
    /// Most states a law may have.
    pub const MOST_STATES: usize = 1 << 26;

    /// Explores `law` and checks its obligations.
    ///
    /// # Errors
    /// When an obligation is broken, a step is not a function of its arguments (each is computed twice), or the
    /// law has more than [`MOST_STATES`](Self::MOST_STATES) states.
    pub fn of<L: Law>(law: &L) -> Result<Self, ProveError>
    where
        L::State: Hash,
    {
        let (table, _) = Self::with_states(law)?;
        Ok(table)
    }

    /// As [`of`](Self::of), and the states themselves in the order of their numbers.
    ///
    /// # Errors
    /// As [`of`](Self::of).
    pub fn with_states<L: Law>(law: &L) -> Result<(Self, Vec<L::State>), ProveError>
    where
        L::State: Hash,
    {
        let mut states: Vec<L::State> = Vec::new();
        let mut numbers: FxHashMap<L::State, u32> = FxHashMap::default();
        let mut number = |state: L::State, states: &mut Vec<L::State>| {
            *numbers.entry(state).or_insert_with(|| {
                states.push(state);
                // `MOST_STATES` keeps the number within its 31 bits.
                (states.len() - 1) as u32
            })
        };
        let mut rests = [0; 2];
        for position in Position::BOTH {
            let rest = law.rest(position);
            if law.output(&rest) != position {
                return Err(ProveError::RestOutput { position });
            }
            let mut next = rest;
            if law.step(&mut next, position).is_some() || next != rest {
                return Err(ProveError::RestMoves { position });
            }
            rests[position as usize] = number(rest, &mut states);
        }
        let mut entries = Vec::new();
        let mut outputs = Vec::new();
        let mut settled = Vec::new();
        let mut index = 0;
        while index < states.len() {
            let state = states[index];
            let output = law.output(&state);
            let mut mask = 0;
            for sample in Position::BOTH {
                let (mut next, mut again) = (state, state);
                let edge = law.step(&mut next, sample);
                if law.step(&mut again, sample) != edge || again != next {
                    return Err(ProveError::NotAFunction { state: index, sample });
                }
                let moved = law.output(&next);
                let expected = (moved != output).then(|| moved.reached_by());
                if edge != expected {
                    return Err(ProveError::EdgeOutput { state: index, sample });
                }
                if edge.is_none() && next == state {
                    mask |= 1 << sample as u8;
                }
                let target = number(next, &mut states);
                entries.push(Entry(target | if edge.is_some() { Entry::EDGE } else { 0 }));
            }
            outputs.push(output);
            settled.push(mask);
            if states.len() > Self::MOST_STATES {
                return Err(ProveError::LawTooLarge { states: states.len() });
            }
            index += 1;
        }
        Ok((Self { entries, outputs, settled, rests }, states))
    }

    /// Number of states.
    #[must_use]
    pub fn len(&self) -> usize {
        self.outputs.len()
    }

    /// Whether there is no state; there always is one.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.outputs.is_empty()
    }

    /// The state settled at `position`.
    #[must_use]
    pub fn rest(&self, position: Position) -> usize {
        self.rests[position as usize] as usize
    }

    /// Where a sample leads (0 open, 1 closed).
    #[must_use]
    #[inline]
    pub fn entry(&self, state: usize, sample: usize) -> Entry {
        self.entries[state * 2 + sample]
    }

    /// The debounced position in a state.
    #[must_use]
    #[inline]
    pub fn output(&self, state: usize) -> Position {
        self.outputs[state]
    }

    /// Whether a sample of `position` leaves the state as it is.
    #[must_use]
    #[inline]
    pub fn is_settled(&self, state: usize, position: Position) -> bool {
        self.settled[state] >> position as u8 & 1 != 0
    }
}
