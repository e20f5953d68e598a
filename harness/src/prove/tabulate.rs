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
    /// Most states a law may have. So many take about 1 GB while they are found.
    pub const MOST_STATES: usize = 1 << 24;

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
        Self::tabulated(law, Self::MOST_STATES)
    }

    fn tabulated<L: Law>(law: &L, most_states: usize) -> Result<(Self, Vec<L::State>), ProveError>
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
            if states.len() > most_states {
                return Err(ProveError::LawTooLarge { states: states.len() });
            }
            index += 1;
        }
        Ok((Self { entries, outputs, settled, rests }, states))
    }

    /// A table from its parts: for each state where an open and a closed sample lead, and the output; and the
    /// states settled at open and at closed. An edge is reported exactly where the output changes.
    ///
    /// Every state is kept, also one that no samples lead to from rest.
    ///
    /// # Errors
    /// When there are not as many outputs as states, a state named does not exist, an obligation at rest is
    /// broken, or there are more than [`MOST_STATES`](Self::MOST_STATES) states.
    pub fn from_parts(
        next: &[[u32; 2]],
        outputs: Vec<Position>,
        rests: [u32; 2],
    ) -> Result<Self, ProveError> {
        let states = next.len();
        if states == 0 {
            return Err(ProveError::NoStates);
        }
        if states > Self::MOST_STATES {
            return Err(ProveError::LawTooLarge { states });
        }
        if outputs.len() != states {
            return Err(ProveError::OutputsMismatch { states, outputs: outputs.len() });
        }
        let checked = |from: Option<usize>, sample: Position, target: u32| {
            // Usize is at least as wide as u32 on every host.
            if (target as usize) < states {
                return Ok(target as usize);
            }
            Err(match from {
                Some(state) => ProveError::NoSuchState { state, sample, target, states },
                None => ProveError::NoSuchRest { position: sample, target, states },
            })
        };
        for position in Position::BOTH {
            let rest = checked(None, position, rests[position as usize])?;
            if outputs[rest] != position {
                return Err(ProveError::RestOutput { position });
            }
            if next[rest][position as usize] as usize != rest {
                return Err(ProveError::RestMoves { position });
            }
        }
        let mut entries = Vec::with_capacity(states * 2);
        let mut settled = Vec::with_capacity(states);
        for (state, targets) in next.iter().enumerate() {
            let mut mask = 0;
            for sample in Position::BOTH {
                let target = targets[sample as usize];
                let edge = outputs[checked(Some(state), sample, target)?] != outputs[state];
                if target as usize == state {
                    mask |= 1 << sample as u8;
                }
                entries.push(Entry(target | if edge { Entry::EDGE } else { 0 }));
            }
            settled.push(mask);
        }
        Ok(Self { entries, outputs, settled, rests })
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

#[cfg(test)]
mod tests {
    use core::cell::Cell;

    use debounce_core::{Change, Law, Machine, Position, ShiftRegister};

    use super::{LawTable, ProveError};

    /// A law of three states and a hidden one, with one thing wrong.
    #[derive(Clone, Copy, PartialEq, Eq, Debug)]
    enum Wrong {
        Nothing,
        RestSaysTheOther,
        RestMoves,
        NoEdge,
        Remembers,
        CountsForEver,
    }

    struct Broken {
        wrong: Wrong,
        /// What no state holds, so a step must not depend on it.
        hidden: Cell<u32>,
    }

    impl Machine for Broken {
        type Input = Position;
        type Output = Option<Change>;
        type State = (Position, u32);

        fn step(&self, (output, count): &mut (Position, u32), sample: Position) -> Option<Change> {
            self.hidden.set(self.hidden.get() + 1);
            match self.wrong {
                Wrong::RestMoves if sample == *output => *count = 1,
                Wrong::Remembers if sample != *output => *count = self.hidden.get() % 2,
                Wrong::CountsForEver if sample != *output => *count += 1,
                _ => {}
            }
            if sample == *output || self.wrong == Wrong::CountsForEver {
                return None;
            }
            *output = sample;
            (self.wrong != Wrong::NoEdge).then(|| sample.reached_by())
        }
    }

    impl Law for Broken {
        fn rest(&self, position: Position) -> (Position, u32) {
            let says = self.wrong == Wrong::RestSaysTheOther;
            (if says { position.opposite() } else { position }, 0)
        }

        fn output(&self, state: &(Position, u32)) -> Position {
            state.0
        }
    }

    #[track_caller]
    fn tabulated(wrong: Wrong) -> Result<usize, ProveError> {
        let law = Broken { wrong, hidden: Cell::new(0) };
        LawTable::tabulated(&law, 100).map(|(_, states)| states.len())
    }

    #[test]
    fn law_that_breaks_an_obligation_is_refused() {
        assert_eq!(tabulated(Wrong::Nothing), Ok(2));
        assert_eq!(tabulated(Wrong::RestSaysTheOther), Err(ProveError::RestOutput { position: OPEN }));
        assert_eq!(tabulated(Wrong::RestMoves), Err(ProveError::RestMoves { position: OPEN }));
        assert_eq!(tabulated(Wrong::NoEdge), Err(ProveError::EdgeOutput { state: 0, sample: CLOSED }));
    }

    #[test]
    fn law_whose_step_is_no_function_of_its_arguments_is_refused() {
        let error = tabulated(Wrong::Remembers).expect_err("it remembers");
        assert_eq!(error, ProveError::NotAFunction { state: 0, sample: CLOSED });
        assert!(error.to_string().contains("must depend on nothing but law, state and sample"), "{error}");
    }

    #[test]
    fn law_with_more_states_than_allowed_is_unfinished() {
        let error = tabulated(Wrong::CountsForEver).expect_err("it counts for ever");
        assert!(matches!(error, ProveError::LawTooLarge { states: 101..=104 }), "{error:?}");
        assert!(error.to_string().starts_with("unfinished: the law has more than"), "{error}");
    }

    const OPEN: Position = Position::Open;
    const CLOSED: Position = Position::Closed;

    #[track_caller]
    fn refused(next: &[[u32; 2]], outputs: &[Position], rests: [u32; 2], message: &str) {
        let error = LawTable::from_parts(next, outputs.to_vec(), rests).expect_err("a bad table");
        assert_eq!(error.to_string(), message);
    }

    #[test]
    fn table_parts_of_a_law_make_the_same_table() {
        let law = LawTable::of(&ShiftRegister::new(3)).expect("a law");
        let next: Vec<[u32; 2]> =
            (0..law.len()).map(|state| [0, 1].map(|sample| law.entry(state, sample).next() as u32)).collect();
        let outputs: Vec<Position> = (0..law.len()).map(|state| law.output(state)).collect();
        let rests = Position::BOTH.map(|position| law.rest(position) as u32);
        let again = LawTable::from_parts(&next, outputs, rests).expect("the same law");
        assert_eq!(again.entries, law.entries);
        assert_eq!(again.outputs, law.outputs);
        assert_eq!(again.settled, law.settled);
        assert_eq!(again.rests, law.rests);
    }

    #[test]
    fn table_parts_that_are_no_law_are_refused() {
        assert!(LawTable::from_parts(&[[0, 1], [0, 1]], vec![OPEN, CLOSED], [0, 1]).is_ok());
        refused(&[[0, 1], [0, 1]], &[OPEN], [0, 1], "the table is no law: it has 2 states but 1 outputs");
        refused(
            &[[0, 1], [2, 1]],
            &[OPEN, CLOSED],
            [0, 1],
            "the table is no law: from state 1 an open sample leads to state 2; the states are 0 to 1",
        );
        refused(
            &[[0, 1], [0, 1]],
            &[OPEN, CLOSED],
            [0, 2],
            "the table is no law: it rests closed in state 2; the states are 0 to 1",
        );
        refused(&[], &[], [0, 0], "the table is no law: it has no states");
        refused(
            &[[0, 1], [0, 1]],
            &[OPEN, CLOSED],
            [1, 0],
            &ProveError::RestOutput { position: OPEN }.to_string(),
        );
        refused(
            &[[0, 1], [0, 0]],
            &[OPEN, CLOSED],
            [0, 1],
            &ProveError::RestMoves { position: CLOSED }.to_string(),
        );
    }
}
