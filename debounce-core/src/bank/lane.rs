//! What the banks have in common, and one lane of a bank as a law of its own.

use super::{Bank, BankState, Changes, PatientBank, PatientState, Word};
use crate::law::Law;
use crate::machine::{Change, Machine, Position};

/// A machine that settles every lane of a port by itself.
///
/// # Obligations
/// For every lane those of a [`Law`], and: no lane's state or output depends on another lane.
pub trait PortLaw<W: Word>: Machine<Input = W, Output = Changes<W>> {
    /// The state in which the lanes in `closed` are settled closed and all others open.
    fn at_rest(&self, closed: W) -> Self::State;

    /// The lanes settled closed in `state`.
    fn outputs(&self, state: &Self::State) -> W;

    /// Puts `lanes`, and no other, to rest at the positions in `closed`.
    fn seat(&self, state: &mut Self::State, lanes: W, closed: W);

    /// The lanes that look closed in a reading of the port: polarity turned.
    fn looks_closed(&self, port: W) -> W;
}

impl<W: Word, const K: usize> PortLaw<W> for Bank<W, K> {
    #[inline]
    fn at_rest(&self, closed: W) -> BankState<W, K> {
        self.rest(closed)
    }

    #[inline]
    fn outputs(&self, state: &BankState<W, K>) -> W {
        self.closed(state)
    }

    #[inline]
    fn seat(&self, state: &mut BankState<W, K>, lanes: W, closed: W) {
        state.settled = (state.settled & !lanes) | ((closed ^ self.inverted) & lanes);
        for plane in &mut state.planes {
            *plane &= !lanes;
        }
    }

    #[inline]
    fn looks_closed(&self, port: W) -> W {
        port ^ self.inverted
    }
}

impl<W: Word, const C: usize, const P: usize, const L: usize> PortLaw<W> for PatientBank<W, C, P, L> {
    #[inline]
    fn at_rest(&self, closed: W) -> PatientState<W, C, P, L> {
        self.rest(closed)
    }

    #[inline]
    fn outputs(&self, state: &PatientState<W, C, P, L>) -> W {
        self.closed(state)
    }

    #[inline]
    fn seat(&self, state: &mut PatientState<W, C, P, L>, lanes: W, closed: W) {
        state.seat(lanes, Self::looks_closed(self, closed));
    }

    #[inline]
    fn looks_closed(&self, port: W) -> W {
        Self::looks_closed(self, port)
    }
}

/// The lowest lane of a bank as a [`Law`], the other lanes settled: for proofs and comparisons.
///
/// # Examples
/// ```
/// use debounce_core::{Bank, Change, Lane, Law, Machine, Position};
/// let lane = Lane::new(Bank::<u8, 1>::new(0));
/// let mut state = lane.rest(Position::Open);
/// assert_eq!(lane.step(&mut state, Position::Closed), None);
/// assert_eq!(lane.step(&mut state, Position::Closed), Some(Change::Make));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Lane<B> {
    bank: B,
}

impl<B> Lane<B> {
    /// The lowest lane of `bank`.
    #[must_use]
    pub const fn new(bank: B) -> Self {
        Self { bank }
    }
}

// The word is fixed at u8: a lane does not depend on how many others there are.
impl<B: PortLaw<u8>> Machine for Lane<B> {
    type Input = Position;
    type Output = Option<Change>;
    type State = B::State;

    #[inline]
    fn step(&self, state: &mut Self::State, sample: Position) -> Option<Change> {
        // What the port reads while every lane is open, with the lowest lane turned to the sample.
        let port = self.bank.looks_closed(0) ^ u8::from(sample.is_closed());
        let changes = self.bank.step(state, port);
        if changes.make & 1 == 1 {
            Some(Change::Make)
        } else if changes.break_ & 1 == 1 {
            Some(Change::Break)
        } else {
            None
        }
    }
}

impl<B: PortLaw<u8>> Law for Lane<B> {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        self.bank.at_rest(u8::from(position.is_closed()))
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        Position::closed_if(self.bank.outputs(state) & 1 == 1)
    }
}
