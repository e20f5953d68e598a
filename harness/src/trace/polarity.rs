//! From the electrical level of a recorded line to the position of the contact.

use debounce_core::Position;

use crate::level::Level;

/// How the contact is wired: which level means that it conducts.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
pub enum Polarity {
    /// The contact pulls the line down when it closes (a pull-up holds it high when open).
    ClosedIsLow,
    /// The line is high when the contact is closed. The default, because it is how [`write_vcd`] writes.
    ///
    /// [`write_vcd`]: super::write_vcd
    #[default]
    ClosedIsHigh,
}

impl Polarity {
    /// The polarity of a contact whose line is at `level` while it is closed.
    #[must_use]
    pub const fn closed_is(level: Level) -> Self {
        match level {
            Level::Low => Self::ClosedIsLow,
            Level::High => Self::ClosedIsHigh,
        }
    }

    /// The position a level stands for.
    #[must_use]
    pub fn position(self, level: Level) -> Position {
        match (self, level) {
            (Self::ClosedIsLow, Level::Low) | (Self::ClosedIsHigh, Level::High) => Position::Closed,
            (Self::ClosedIsLow, Level::High) | (Self::ClosedIsHigh, Level::Low) => Position::Open,
        }
    }
}

/// What to make of a value that is neither 0 nor 1 (`x`, `z`, `u`, `w`, `-`).
///
/// The weak levels `l` and `h` are levels, not unknown ones.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
#[non_exhaustive]
pub enum Unknown {
    /// The line keeps the position it had; before the first known value it takes that value.
    #[default]
    Hold,
    /// The contact counts as open.
    Open,
    /// The contact counts as closed.
    Closed,
    /// The recording is refused.
    Refuse,
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn polarity_each_level_gives_its_position() {
        for (polarity, level, position) in [
            (Polarity::ClosedIsLow, Level::Low, Position::Closed),
            (Polarity::ClosedIsLow, Level::High, Position::Open),
            (Polarity::ClosedIsHigh, Level::Low, Position::Open),
            (Polarity::ClosedIsHigh, Level::High, Position::Closed),
        ] {
            assert_eq!(polarity.position(level), position, "{polarity:?} {level:?}");
            assert_eq!(
                Polarity::closed_is(level) == polarity,
                position.is_closed(),
                "{polarity:?} {level:?}"
            );
        }
    }
}
