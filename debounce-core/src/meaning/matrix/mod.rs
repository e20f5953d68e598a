//! Keys in rows and columns: [`Matrix`], and with the feature `embedded-hal` the pins that scan it.

#[cfg(feature = "embedded-hal")]
mod pins;
#[cfg(test)]
mod tests;

#[cfg(feature = "embedded-hal")]
pub use pins::{MatrixPins, ScanError};

use crate::bank::{Bank, BankState, LanesStarted, PortLaw, StartingBank, StartingBankState, Word};
use crate::machine::Machine;

/// What keeps the keys of a matrix apart.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum KeyDiodes {
    /// A diode at every key: any number of keys may be pressed at once.
    Everywhere,
    /// No diodes: three keys at the corners of a rectangle show the fourth, which is then not believed.
    None,
}

/// What one scan of a [`Matrix`] brought; lane `c` of row `r` is the key in that row and column.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[must_use]
pub struct MatrixReport<W, const R: usize> {
    /// Initial positions and changes of the keys of each row.
    pub rows: [LanesStarted<W>; R],
    /// Keys that may be ghosts in this scan: their sample was not taken and they keep their position.
    pub doubtful: [W; R],
}

/// Settles a scanned key matrix: a bank for each row, ghosts held back by the rectangle rule.
///
/// # Method
/// Rows are driven one after the other and all columns read. Without diodes current also flows backward through pressed
/// keys, so that three pressed corners of a rectangle show the fourth; diodes prevent it. Source: D. Dribin, "Keyboard
/// Matrix Help", 2000, section 6. Where two rows have two columns or more in common, each of those keys is *doubtful*:
/// it may be a ghost, so its sample is not taken, and it keeps its settled position until the doubt is over.
/// Longer ways round need no rule of their own: rows joined by a pressed key read alike, and show rectangles.
/// Each row is a [`StartingBank`] around a [`Bank`], so that keys held at power-up are no operations.
///
/// # Units
/// One call to [`step`](Machine::step) takes one scan of all rows and is one tick. A key changes at its `2^K`-th
/// contrary sample in a row.
///
/// # Bounds
///
/// | Quantity                                                 | Value         | Proof                                    |
/// |----------------------------------------------------------|---------------|------------------------------------------|
/// | ghosts believed                                          | none          | `matrix_every_set_of_keys_shows_no_ghost`    |
/// | true keys doubted while no two rows share two columns    | none          | same                                     |
/// | true keys doubted with diodes                            | none          | same                                     |
/// | latency of a key that is not doubtful                    | exactly `2^K` | `matrix_two_keys_in_any_places_roll_over`    |
/// | operations of keys held at power-up                      | none          | `matrix_keys_held_at_power_up_are_initial`   |
///
/// Any two keys at once are told apart without diodes, in either order of release. With more, keys in doubt stay as
/// they are. A *stuck key* is one pressed key for good: it makes rectangles likelier and is never reported otherwise
/// (`matrix_stuck_key_leaves_others_alone`). *Two rows shorted* read alike, so one press is reported as two keys in
/// that column at once, and two as doubtful (`matrix_shorted_rows_report_twin_keys`): twins at the same tick, always
/// in the same two rows, are that fault. A lost tick is a scan that was never taken, and delays.
///
/// # State
/// `2 K + 2` bits a key; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never. `K` outside 1 to 16 does not compile.
///
/// # Examples
/// ```
/// use debounce_core::{KeyDiodes, Machine, Matrix};
/// const PAD: Matrix<u8, 4, 1> = Matrix::new(KeyDiodes::None);
/// let mut state = PAD.power_up();
/// for _ in 0..2 {
///     let _ = PAD.step(&mut state, [0, 0, 0, 0]);
/// }
/// // Three corners of a rectangle read as four.
/// for _ in 0..9 {
///     let report = PAD.step(&mut state, [0b011, 0, 0b011, 0b100]);
///     assert_eq!(report.doubtful, [0b011, 0, 0b011, 0]);
/// }
/// assert_eq!(PAD.closed(&state), [0, 0, 0, 0b100]);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Matrix<W, const R: usize, const K: usize> {
    diodes: KeyDiodes,
    row: StartingBank<Bank<W, K>, K>,
}

/// What a [`Matrix`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct MatrixState<W, const R: usize, const K: usize> {
    rows: [StartingBankState<W, BankState<W, K>, K>; R],
}

const _: () = assert!(size_of::<MatrixState<u8, 4, 2>>() == 4 * 6);

impl<W: Word, const R: usize, const K: usize> Matrix<W, R, K> {
    // Polarity was turned by whoever scanned.
    const ROW: Bank<W, K> = Bank::new(W::NONE);

    /// A matrix with or without diodes.
    #[must_use]
    pub const fn new(diodes: KeyDiodes) -> Self {
        Self { diodes, row: StartingBank::new(Self::ROW) }
    }

    /// The state at power-up: no key has a position.
    #[must_use]
    pub fn power_up(&self) -> MatrixState<W, R, K> {
        MatrixState { rows: [self.row.power_up(); R] }
    }

    /// The keys that are settled closed; a key that has no position yet is not.
    #[must_use]
    pub fn closed(&self, state: &MatrixState<W, R, K>) -> [W; R] {
        state.rows.map(|row| Self::ROW.closed(row.inner()) & !row.waiting())
    }

    /// Whether a scan that reads `rows` would change nothing: scanning may stop while the keys stay so.
    #[must_use]
    pub fn is_settled(&self, state: &MatrixState<W, R, K>, rows: [W; R]) -> bool {
        let mut next = *state;
        let _ = self.step(&mut next, rows);
        next == *state
    }
}

/// The keys that may be ghosts: those in the columns that two rows have in common, where these are two or more.
#[inline]
fn doubtful<W: Word, const R: usize>(rows: &[W; R]) -> [W; R] {
    let mut doubtful = [W::NONE; R];
    for (one, doubt) in rows.iter().zip(&mut doubtful) {
        for other in rows {
            let common = *one & *other;
            // A row compared with itself is left out by where it lies, not by what it reads.
            if !core::ptr::eq(one, other) && common.count() >= 2 {
                *doubt |= common;
            }
        }
    }
    doubtful
}

impl<W: Word, const R: usize, const K: usize> Machine for Matrix<W, R, K> {
    type Input = [W; R];
    type Output = MatrixReport<W, R>;
    type State = MatrixState<W, R, K>;

    #[inline]
    fn step(&self, state: &mut Self::State, rows: [W; R]) -> MatrixReport<W, R> {
        let doubtful = match self.diodes {
            KeyDiodes::Everywhere => [W::NONE; R],
            KeyDiodes::None => doubtful(&rows),
        };
        let nothing = LanesStarted { initial: W::NONE, changes: crate::Changes::NONE };
        let mut report = MatrixReport { rows: [nothing; R], doubtful };
        for (((row, out), read), doubt) in state.rows.iter_mut().zip(&mut report.rows).zip(rows).zip(doubtful)
        {
            // A doubtful key is told what it is settled at, which clears a count that has begun. One that waits for
            // its first position is told the reverse of its last sample: its row of like samples starts anew.
            let kept = Self::ROW.outputs(row.inner()) ^ row.waiting();
            *out = self.row.step(row, (read & !doubt) | (kept & doubt));
        }
        report
    }
}
