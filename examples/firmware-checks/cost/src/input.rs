//! The three kinds of input that a tick is measured with.

use core::fmt;

use debounce_core::{PairPositions, Phases, Position, QuadratureEvent, Throws, Turn};

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

/// An encoder that is turned forward, a quarter cycle at each change: one phase moves, and only it bounces.
impl Sample for Phases {
    fn draw(source: &mut Source) -> Self {
        if !matches!(source.kind, Kind::Contact) {
            return Self { a: source.sample(), b: source.sample() };
        }
        let bouncing = source.noise > 0;
        let line = source.sample();
        let at = |quarters: u32| Position::closed_if(quarters / 2 % 2 == 1);
        let (a, b) = (at(source.changes + 1), at(source.changes));
        match (bouncing, source.changes % 2) {
            (true, 1) => Self { a: line, b },
            (true, _) => Self { a, b: line },
            (false, _) => Self { a, b },
        }
    }
}

/// What such an encoder says.
impl Sample for Option<QuadratureEvent> {
    fn draw(source: &mut Source) -> Self {
        let before = source.changes;
        let line = source.sample();
        match source.kind {
            Kind::Constant => None,
            Kind::Random if line.is_closed() => Some(QuadratureEvent::Step(Turn::Backward)),
            Kind::Random => None,
            Kind::Contact => (source.changes > before).then_some(QuadratureEvent::Step(Turn::Forward)),
        }
    }
}

/// A throw that breaks before the other makes, and bounces there.
impl Sample for Throws {
    fn draw(source: &mut Source) -> Self {
        let bouncing = source.noise > 0;
        let line = source.sample();
        match source.kind {
            Kind::Random => Self { resting: line, working: source.sample() },
            _ if bouncing => match source.held {
                Position::Closed => Self { resting: Position::Open, working: line },
                Position::Open => Self { resting: line, working: Position::Open },
            },
            _ => Self { resting: line.opposite(), working: line },
        }
    }
}

/// Two contacts that are operated together, one of which bounces.
impl Sample for PairPositions {
    fn draw(source: &mut Source) -> Self {
        let first = source.sample();
        let second = if matches!(source.kind, Kind::Random) { source.sample() } else { source.held };
        Self { first, second }
    }
}

/// Counts of a converter of 12 bits, near one end or the other.
impl Sample for u16 {
    fn draw(source: &mut Source) -> Self {
        if matches!(source.kind, Kind::Random) {
            return (source.dice.roll() & 0xfff) as Self;
        }
        let counts = if source.sample().is_closed() { 60 } else { 4000 };
        counts + (source.dice.roll() & 15) as Self
    }
}

/// A scan of four rows, with one key that is pressed now and then.
impl Sample for [u8; 4] {
    fn draw(source: &mut Source) -> Self {
        if matches!(source.kind, Kind::Random) {
            return source.dice.roll().to_le_bytes();
        }
        [u8::from(source.sample().is_closed()), 0, 0, 0]
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
    /// Changes of position so far.
    changes: u32,
}

impl Source {
    pub(crate) fn new(kind: Kind) -> Self {
        Self { kind, dice: Dice(0x9e37_79b9), held: Position::Open, left: 40, noise: 0, changes: 0 }
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
                    self.changes += 1;
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
