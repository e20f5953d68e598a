//! The three kinds of input that a tick is measured with.

use core::fmt;

use debounce_core::Position;

/// How many ticks a total is over.
pub(crate) const TICKS: usize = 8000;

/// What the samples look like.
#[derive(Clone, Copy)]
pub(crate) enum Kind {
    /// Open throughout, settled there.
    Constant,
    /// Either way with equal chance at every tick.
    Random,
    /// Held for 40 to 167 ticks, then 8 ticks of noise, then the other position.
    Contact,
}

impl Kind {
    pub(crate) const ALL: [Self; 3] = [Self::Constant, Self::Random, Self::Contact];

    /// Fills `samples` with this kind, the same every time.
    pub(crate) fn fill(self, samples: &mut [Position]) {
        let mut dice = Dice(0x9e37_79b9);
        match self {
            Self::Constant => samples.fill(Position::Open),
            Self::Random => samples.fill_with(|| dice.position()),
            Self::Contact => {
                let (mut held, mut left, mut noise) = (Position::Open, 40, 0);
                samples.fill_with(|| {
                    if noise > 0 {
                        noise -= 1;
                        return dice.position();
                    }
                    let sample = held;
                    left -= 1;
                    if left == 0 {
                        (held, left, noise) = (held.opposite(), 40 + dice.roll() % 128, 8);
                    }
                    sample
                });
            }
        }
    }
}

impl fmt::Display for Kind {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Constant => "constant",
            Self::Random => "random",
            Self::Contact => "contact",
        })
    }
}

/// Marsaglia's xorshift of 32 bits ("Xorshift RNGs", 2003), its high bits used.
struct Dice(u32);

impl Dice {
    fn roll(&mut self) -> u32 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 17;
        self.0 ^= self.0 << 5;
        self.0 >> 8
    }

    fn position(&mut self) -> Position {
        Position::closed_if(self.roll() & 1 == 1)
    }
}
