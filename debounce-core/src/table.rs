//! A logic given as a next-state table in flash: [`TableLaw`].

use core::fmt;

use crate::law::Law;
use crate::machine::{Change, Machine, Position};

/// Settles a contact by looking up, at every sample, which state comes next.
///
/// For a logic that was drawn rather than programmed: a state diagram, or the machine that a search found.
///
/// # Method
/// A Mealy machine as a table of one row a state: the number of the next state at an open sample and at a closed
/// one. States are numbered so that those with the output open come first; the output is then one comparison,
/// and an edge is reported exactly when a step crosses that border. The numbering is our own; next-state tables
/// are common practice.
///
/// # Units
/// One step takes one sample and is one tick.
///
/// # Bounds
/// Those of the machine that the table describes. No closed form: the harness explores the table as it stands.
///
/// # State
/// 1 byte, whatever the table; checked by a `const` assertion on `size_of` below the type. The table takes 2 bytes
/// of flash a state and has at most 256 states.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never. A table that is no law does not compile.
///
/// # Examples
/// Two closed samples in a row make, one open sample breaks:
/// ```
/// use debounce_core::{Change, Law, Machine, Position::{Closed, Open}, TableLaw};
///
/// static ROWS: [[u8; 2]; 3] = [
///     [0, 1], // open, at rest
///     [0, 2], // open, one closed sample seen
///     [0, 2], // closed, at rest
/// ];
/// static LAW: TableLaw<'static> = TableLaw::new(&ROWS, 2, [0, 2]);
///
/// let mut state = LAW.rest(Open);
/// assert_eq!(LAW.step(&mut state, Closed), None); // the last sample that may still be a glitch
/// assert_eq!(LAW.step(&mut state, Closed), Some(Change::Make));
/// assert_eq!(LAW.step(&mut state, Open), Some(Change::Break));
/// ```
///
/// A row that leads out of the table is refused by the compiler:
/// ```compile_fail,E0080
/// use debounce_core::TableLaw;
/// const LAW: TableLaw<'static> = TableLaw::new(&[[0, 2], [0, 1]], 1, [0, 1]);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct TableLaw<'a> {
    rows: &'a [[u8; 2]],
    closed_from: u8,
    rests: [u8; 2],
}

/// What a [`TableLaw`] remembers: the number of a state.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct TableState(u8);

const _: () = assert!(size_of::<TableState>() == 1);

impl TableState {
    /// The number of the state: its row in the table.
    #[must_use]
    #[inline]
    pub const fn number(self) -> u8 {
        self.0
    }
}

impl<'a> TableLaw<'a> {
    /// The most states a table may have.
    pub const MOST_STATES: usize = 256;

    /// A law from its rows: next state at an open sample, next state at a closed one.
    ///
    /// The output is open in the states before `closed_from` and closed in the others; `rests` are the states in
    /// which the law is settled, at open and at closed.
    ///
    /// # Panics
    /// When [`try_new`](Self::try_new) refuses; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(rows: &'a [[u8; 2]], closed_from: u8, rests: [u8; 2]) -> Self {
        match Self::try_new(rows, closed_from, rests) {
            Ok(law) => law,
            Err(error) => panic!("{}", error.refusal()),
        }
    }

    /// [`new`](Self::new) for a table known at run time; links no panic.
    ///
    /// # Errors
    /// When a number leads out of the table, or a rest has the wrong output or does not rest.
    pub const fn try_new(
        rows: &'a [[u8; 2]],
        closed_from: u8,
        rests: [u8; 2],
    ) -> Result<Self, TableLawError> {
        if rows.len() > Self::MOST_STATES {
            return Err(TableLawError::TooManyStates { states: rows.len() });
        }
        let mut at = 0;
        while at < rows.len() {
            let [open, closed] = rows[at];
            if open as usize >= rows.len() {
                return Err(TableLawError::NextOutside {
                    state: at as u8,
                    sample: Position::Open,
                    next: open,
                });
            }
            if closed as usize >= rows.len() {
                let sample = Position::Closed;
                return Err(TableLawError::NextOutside { state: at as u8, sample, next: closed });
            }
            at += 1;
        }
        if rests[0] as usize >= rows.len() || rests[0] >= closed_from {
            return Err(TableLawError::NotARest { position: Position::Open, state: rests[0] });
        }
        if rests[1] as usize >= rows.len() || rests[1] < closed_from {
            return Err(TableLawError::NotARest { position: Position::Closed, state: rests[1] });
        }
        if rows[rests[0] as usize][0] != rests[0] {
            return Err(TableLawError::RestMoves { position: Position::Open, state: rests[0] });
        }
        if rows[rests[1] as usize][1] != rests[1] {
            return Err(TableLawError::RestMoves { position: Position::Closed, state: rests[1] });
        }
        Ok(Self { rows, closed_from, rests })
    }

    /// The rows: next state at an open sample, next state at a closed one.
    #[must_use]
    pub const fn rows(&self) -> &'a [[u8; 2]] {
        self.rows
    }
}

impl Machine for TableLaw<'_> {
    type Input = Position;
    type Output = Option<Change>;
    type State = TableState;

    #[inline]
    fn step(&self, state: &mut TableState, sample: Position) -> Option<Change> {
        let before = self.output(state);
        *state = match (self.rows.get(usize::from(state.0)), sample) {
            (Some(&[next, _]), Position::Open) | (Some(&[_, next]), Position::Closed) => TableState(next),
            // Only a state of another, larger table gets here; without a row to follow, the sample decides.
            (None, _) => self.rest(sample),
        };
        let after = self.output(state);
        if before == after { None } else { Some(after.reached_by()) }
    }
}

impl Law for TableLaw<'_> {
    #[inline]
    fn rest(&self, position: Position) -> TableState {
        let [open, closed] = self.rests;
        TableState(if position.is_closed() { closed } else { open })
    }

    #[inline]
    fn output(&self, state: &TableState) -> Position {
        Position::closed_if(state.0 >= self.closed_from)
    }
}

/// Why a table is no law.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum TableLawError {
    /// A state number is one byte.
    TooManyStates {
        /// The number of rows given.
        states: usize,
    },
    /// A row leads to a state that has no row.
    NextOutside {
        /// The row.
        state: u8,
        /// The sample at which it does so.
        sample: Position,
        /// The state it leads to.
        next: u8,
    },
    /// A rest is outside the table, or its output is not the position at which it should rest.
    NotARest {
        /// Where it should rest.
        position: Position,
        /// The state given.
        state: u8,
    },
    /// A sample of its own position leads out of a rest.
    RestMoves {
        /// Where it should rest.
        position: Position,
        /// The state given.
        state: u8,
    },
}

impl TableLawError {
    /// The text a constant is refused with at compile time, where numbers cannot be printed.
    const fn refusal(self) -> &'static str {
        match self {
            Self::TooManyStates { .. } => "the table has more than 256 states; minimise it",
            Self::NextOutside { .. } => "a row of the table leads to a state that has no row",
            Self::NotARest { position: Position::Open, .. } => {
                "the open rest is not a state with the output open"
            }
            Self::NotARest { position: Position::Closed, .. } => {
                "the closed rest is not a state with the output closed"
            }
            Self::RestMoves { position: Position::Open, .. } => "an open sample leads out of the open rest",
            Self::RestMoves { position: Position::Closed, .. } => {
                "a closed sample leads out of the closed rest"
            }
        }
    }
}

impl fmt::Display for TableLawError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let word = |position| match position {
            Position::Open => "open",
            Position::Closed => "closed",
        };
        match *self {
            Self::TooManyStates { states } => {
                write!(
                    f,
                    "a table of {states} states is more than the 256 that a byte can number; minimise it"
                )
            }
            Self::NextOutside { state, sample, next } => {
                let sample = word(sample);
                write!(
                    f,
                    "state {state} leads to state {next} at a {sample} sample, but there is no such row"
                )
            }
            Self::NotARest { position, state } => {
                let position = word(position);
                write!(f, "the {position} rest, state {state}, is not a state with the output {position}")
            }
            Self::RestMoves { position, state } => {
                let position = word(position);
                write!(f, "a sample of {position} leads out of the {position} rest, state {state}")
            }
        }
    }
}

impl core::error::Error for TableLawError {}

#[cfg(test)]
mod tests {
    use super::*;
    use Position::{Closed, Open};

    const RESTS: [u8; 2] = [0, 1];

    #[test]
    fn table_law_whose_numbers_fit_is_accepted_and_others_are_refused() {
        let refused =
            |rows: &[[u8; 2]], closed_from, rests| TableLaw::try_new(rows, closed_from, rests).err();
        assert_eq!(refused(&[[0, 1], [0, 1]], 1, RESTS), None);
        assert_eq!(
            refused(&[[0, 2], [0, 1]], 1, RESTS),
            Some(TableLawError::NextOutside { state: 0, sample: Closed, next: 2 })
        );
        assert_eq!(
            refused(&[[0, 1], [2, 1]], 1, RESTS),
            Some(TableLawError::NextOutside { state: 1, sample: Open, next: 2 })
        );
        let not_a_rest = |position, state| Some(TableLawError::NotARest { position, state });
        assert_eq!(refused(&[], 1, RESTS), not_a_rest(Open, 0));
        assert_eq!(refused(&[[0, 1], [0, 1]], 0, RESTS), not_a_rest(Open, 0));
        assert_eq!(refused(&[[0, 1], [0, 1]], 2, RESTS), not_a_rest(Closed, 1));
        assert_eq!(refused(&[[0, 0]], 1, RESTS), not_a_rest(Closed, 1));
        let moves = |position, state| Some(TableLawError::RestMoves { position, state });
        assert_eq!(refused(&[[1, 1], [0, 1]], 1, RESTS), moves(Open, 0));
        assert_eq!(refused(&[[0, 1], [0, 0]], 1, RESTS), moves(Closed, 1));
    }

    #[test]
    fn table_law_of_256_states_is_accepted_and_of_257_refused() {
        let mut rows = [[0, 1]; 257];
        assert!(TableLaw::try_new(&rows[..256], 1, RESTS).is_ok());
        let states = TableLawError::TooManyStates { states: 257 };
        assert_eq!(TableLaw::try_new(&rows, 1, RESTS), Err(states));
        rows[255] = [255, 255];
        assert!(TableLaw::try_new(&rows[..256], 1, RESTS).is_ok());
    }

    #[test]
    fn table_law_given_a_state_of_a_larger_table_follows_the_sample() {
        let law = TableLaw::new(&[[0, 1], [0, 1]], 1, RESTS);
        for (foreign, sample, edge) in [(9, Open, Some(Change::Break)), (9, Closed, None)] {
            let mut state = TableState(foreign);
            assert_eq!(law.step(&mut state, sample), edge);
            assert_eq!(state, law.rest(sample));
        }
    }
}
