//! The machine behind everything in this crate, and the two words it speaks about a contact.

use core::ops::Not;

/// Where a contact is, or looks to be in one sample.
///
/// Polarity is turned once, at the pin; from there on nothing in this crate speaks of high or low.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[repr(u8)]
pub enum Position {
    /// The contact does not conduct.
    Open = 0,
    /// The contact conducts.
    Closed = 1,
}

impl Position {
    /// Both positions, open first.
    pub const BOTH: [Self; 2] = [Self::Open, Self::Closed];

    /// The other position.
    #[must_use]
    #[inline]
    pub const fn opposite(self) -> Self {
        match self {
            Self::Open => Self::Closed,
            Self::Closed => Self::Open,
        }
    }

    /// `true` when closed.
    #[must_use]
    #[inline]
    pub const fn is_closed(self) -> bool {
        matches!(self, Self::Closed)
    }

    /// Closed when `closed` is true, else open.
    #[must_use]
    #[inline]
    pub const fn closed_if(closed: bool) -> Self {
        if closed { Self::Closed } else { Self::Open }
    }

    /// The change that leads to this position.
    #[must_use]
    #[inline]
    pub const fn reached_by(self) -> Change {
        match self {
            Self::Open => Change::Break,
            Self::Closed => Change::Make,
        }
    }
}

impl Not for Position {
    type Output = Self;

    #[inline]
    fn not(self) -> Self {
        self.opposite()
    }
}

/// A contact's change from one position to the other; also the edge that a debouncer reports.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[repr(u8)]
pub enum Change {
    /// From closed to open.
    Break = 0,
    /// From open to closed.
    Make = 1,
}

impl Change {
    /// The position after the change.
    #[must_use]
    #[inline]
    pub const fn to(self) -> Position {
        match self {
            Self::Break => Position::Open,
            Self::Make => Position::Closed,
        }
    }
}

/// A finite machine, stepped once a tick.
///
/// `step` is pure: its result depends on the machine, the state and the input, and on nothing else.
/// That is what lets the same type run in an interrupt handler and be explored exhaustively.
pub trait Machine {
    /// What one tick brings.
    type Input: Copy;
    /// What one tick gives back.
    type Output;
    /// Everything the machine remembers from tick to tick.
    type State: Copy + Eq;

    /// Takes the input of one tick, updates `state` in place and returns the output of that tick.
    fn step(&self, state: &mut Self::State, input: Self::Input) -> Self::Output;
}

impl<M: Machine + ?Sized> Machine for &M {
    type Input = M::Input;
    type Output = M::Output;
    type State = M::State;

    #[inline]
    fn step(&self, state: &mut Self::State, input: Self::Input) -> Self::Output {
        (**self).step(state, input)
    }
}

impl<M: Machine + ?Sized> Machine for &mut M {
    type Input = M::Input;
    type Output = M::Output;
    type State = M::State;

    #[inline]
    fn step(&self, state: &mut Self::State, input: Self::Input) -> Self::Output {
        (**self).step(state, input)
    }
}
