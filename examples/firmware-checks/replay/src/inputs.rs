//! The samples: random ones, contact-like ones, the recording, and the prover's waveforms.

use debounce_core::Position;

use crate::recording::Recording;
use crate::witnesses::Row;

/// Marsaglia's xorshift of 32 bits ("Xorshift RNGs", 2003).
#[derive(Clone)]
pub(crate) struct Dice(u32);

impl Dice {
    pub(crate) const fn new() -> Self {
        Self(0x9e37_79b9)
    }

    pub(crate) fn roll(&mut self) -> u32 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 17;
        self.0 ^= self.0 << 5;
        self.0
    }
}

/// One line.
#[derive(Clone)]
pub(crate) enum Line {
    /// Either way with equal chance.
    Random(Dice),
    /// Held for 40 to 167 samples, then 8 of noise, then the other position.
    Contact { dice: Dice, held: Position, left: u32 },
    /// The demo recording.
    Recorded(Recording),
    /// What the prover found.
    Proved(Row),
}

impl Line {
    pub(crate) fn sample(&mut self) -> Position {
        match self {
            Self::Random(dice) => Position::closed_if(dice.roll() >> 31 == 1),
            Self::Contact { dice, held, left } => {
                if *left == 0 {
                    (*held, *left) = (held.opposite(), 8 + 40 + dice.roll() % 128);
                }
                *left -= 1;
                // Noise first: it follows the change.
                if *left >= 40 && dice.roll() >> 30 == 0 { held.opposite() } else { *held }
            }
            Self::Recorded(recording) => recording.sample(),
            Self::Proved(row) => row.sample(),
        }
    }

    /// A word of `bits` samples: lines that go their own ways.
    pub(crate) fn word(&mut self, bits: u32) -> u32 {
        (0..bits).fold(0, |word, _| word << 1 | u32::from(self.sample().is_closed()))
    }
}
