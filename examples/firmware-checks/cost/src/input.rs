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
}

/// What a tick takes.
pub(crate) trait Sample {
    /// The next of its kind.
    fn draw(source: &mut Source) -> Self;
}

impl Sample for Position {
    fn draw(source: &mut Source) -> Self {
        source.sample()
    }
}

/// A port of 32 contacts that are operated together and bounce apart.
impl Sample for u32 {
    fn draw(source: &mut Source) -> Self {
        if matches!(source.kind, Kind::Random) || source.noise > 0 {
            source.noise = source.noise.saturating_sub(1);
            return source.dice.roll() << 16 ^ source.dice.roll();
        }
        if source.sample().is_closed() { Self::MAX } else { 0 }
    }
}

/// Samples of one kind, the same ones every time.
pub(crate) struct Source {
    kind: Kind,
    dice: Dice,
    held: Position,
    /// Ticks until the noise.
    left: u32,
    /// Ticks of noise before it is held.
    noise: u32,
}

impl Source {
    pub(crate) fn new(kind: Kind) -> Self {
        Self { kind, dice: Dice(0x9e37_79b9), held: Position::Open, left: 40, noise: 0 }
    }

    pub(crate) fn sample(&mut self) -> Position {
        match self.kind {
            Kind::Constant => Position::Open,
            Kind::Random => self.dice.position(),
            Kind::Contact if self.noise > 0 => {
                self.noise -= 1;
                self.dice.position()
            }
            Kind::Contact => {
                let sample = self.held;
                self.left -= 1;
                if self.left == 0 {
                    (self.held, self.left, self.noise) =
                        (self.held.opposite(), 40 + self.dice.roll() % 128, 8);
                }
                sample
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
