//! Which level of the line means that the contact is closed: [`Polarity`], [`Level`].

use crate::machine::Position;

/// How the contact is wired: the one place where high and low are told from open and closed.
///
/// # Examples
/// A button to ground with a pull-up:
/// ```
/// use debounce_core::{Polarity, Position};
/// assert_eq!(Polarity::ClosedWhenLow.at_low(), Position::Closed);
/// assert_eq!(Polarity::ClosedWhenLow.at_high(), Position::Open);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Polarity {
    /// The closed contact pulls the line low, as a contact to ground with a pull-up does.
    ClosedWhenLow,
    /// The closed contact pulls the line high, as a contact to the supply with a pull-down does.
    ClosedWhenHigh,
}

impl Polarity {
    /// The position that a low line means.
    #[must_use]
    #[inline]
    pub const fn at_low(self) -> Position {
        match self {
            Self::ClosedWhenLow => Position::Closed,
            Self::ClosedWhenHigh => Position::Open,
        }
    }

    /// The position that a high line means.
    #[must_use]
    #[inline]
    pub const fn at_high(self) -> Position {
        self.at_low().opposite()
    }

    /// The level of the line while the contact is in `position`.
    #[must_use]
    #[inline]
    pub const fn level(self, position: Position) -> Level {
        match (self, position) {
            (Self::ClosedWhenLow, Position::Closed) | (Self::ClosedWhenHigh, Position::Open) => Level::Low,
            (Self::ClosedWhenLow, Position::Open) | (Self::ClosedWhenHigh, Position::Closed) => Level::High,
        }
    }
}

/// The level of a line, before polarity.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Level {
    /// Logic 0.
    Low,
    /// Logic 1.
    High,
}
