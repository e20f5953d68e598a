//! Contacts by kind: the numbers behind each, and where they come from.

use debounce_core::{Change, PerChange};

use super::contact::{Bounce, ContactModel};
use super::dice::{Between, Dice};
use super::part::{Actuation, Chatter, Contact, SpeedEffect, Wear};

/// How much a number can be leaned on.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Standing {
    /// Read in the source.
    Read,
    /// Read as a quotation of the source.
    SecondHand,
    /// From memory.
    Memory,
    /// Common practice of the trade.
    Practice,
}

impl Standing {
    /// In words, for a list.
    #[must_use]
    pub const fn words(self) -> &'static str {
        match self {
            Self::Read => "as published",
            Self::SecondHand => "second-hand",
            Self::Memory => "from memory",
            Self::Practice => "common practice",
        }
    }
}

/// A number that stands behind a preset.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Source {
    /// What it says.
    pub says: &'static str,
    /// Who says so.
    pub by: &'static str,
    /// How much it can be leaned on.
    pub standing: Standing,
}

/// The longest bounce of 32 operations of a real part, as somebody measured it.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Measured {
    /// The part.
    pub part: &'static str,
    /// The longest after a make and after a break, in nanoseconds.
    pub longest_ns: PerChange<u64>,
}

/// A kind of contact.
///
/// The ranges of `part` hold over parts of that kind. One part differs little from operation to operation: its
/// first flight lies within a tenth of its own middle ([`SCATTER_PERMILLE`]), after J. McBride, IEEE Trans. CHMT 12
/// (1989) 82-90, who finds it nearly constant.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Preset {
    /// What it is called: one word, as it is typed.
    pub name: &'static str,
    /// What it stands for.
    pub about: &'static str,
    /// What parts of this kind do, from the mildest to the worst.
    pub part: Contact,
    /// No part of it bounces for longer while new, in nanoseconds, however fast it is moved.
    pub longest_ns: PerChange<u64>,
    /// No part of it bounces for longer at the end of its life, in nanoseconds.
    pub longest_worn_ns: PerChange<u64>,
    /// For an encoder: how long one detent takes, in nanoseconds. It has two phases.
    pub detent_ns: Option<Between>,
    /// Real parts of that kind, measured.
    pub measured: &'static [Measured],
    /// Where the numbers come from.
    pub sources: &'static [Source],
}

/// How far the first flight of one part scatters about its own middle, either way, in thousandths (our choice).
pub const SCATTER_PERMILLE: u64 = 100;

impl Preset {
    /// Every preset.
    #[must_use]
    pub fn all() -> &'static [Self] {
        &super::kinds::KINDS
    }

    /// The preset of this name.
    #[must_use]
    pub fn find(name: &str) -> Option<&'static Self> {
        Self::all().iter().find(|preset| preset.name == name)
    }

    /// One part of this kind, drawn by its seed: where in the range of all parts it lies, and whether it
    /// shows second bursts and chatter at all.
    #[must_use]
    pub fn specimen(&self, seed: u64) -> Contact {
        let mut dice = Dice::new(seed, u64::MAX);
        let mut bounce = |change: Change| {
            let mut bounce = self.part.model.bounce.at(change);
            bounce.first_flight_ns = own(bounce.first_flight_ns, &mut dice);
            let shows = dice.chance(500);
            bounce.second = bounce.second.filter(|_| shows).map(|mut second| {
                second.first_flight_ns = own(second.first_flight_ns, &mut dice);
                second
            });
            bounce
        };
        let bounce = PerChange { make: bounce(Change::Make), break_: bounce(Change::Break) };
        let chatter = |change: Change| self.part.chatter.at(change);
        let chatter = PerChange {
            make: chatter(Change::Make).filter(|_| dice.chance(500)),
            break_: chatter(Change::Break).filter(|_| dice.chance(500)),
        };
        Contact { model: ContactModel { bounce }, chatter, ..self.part }
    }

    /// The longest that the model can make a bounce, in nanoseconds, at any speed of actuation.
    #[must_use]
    pub fn bound_ns(&self, change: Change, done: u64) -> u64 {
        let bound = |actuation| self.part.longest_ns(change, actuation, done);
        [Actuation::Slow, Actuation::Usual, Actuation::Fast].into_iter().map(bound).max().unwrap_or(0)
    }
}

/// The range of one part around a middle that is drawn, inside the range of all parts.
///
/// The middle is the cube of an even draw, because mild parts are more common than bad ones (our choice).
fn own(parts: Between, dice: &mut Dice) -> Between {
    let even = u128::from(dice.draw(Between(0, 1_000)));
    let above = u128::from(parts.1.saturating_sub(parts.0)) * (even * even * even) / 1_000_000_000;
    // At most the upper end of the range.
    let middle = parts.0 + above as u64;
    let scatter = middle / 1000 * SCATTER_PERMILLE + middle % 1000 * SCATTER_PERMILLE / 1000;
    Between(middle.saturating_sub(scatter).max(parts.0), middle.saturating_add(scatter).min(parts.1))
}

/// A bounce without second bursts, in microseconds.
pub(super) const fn bounce(
    first: (u64, u64),
    restitution: (u64, u64),
    touch: (u64, u64),
    shortest: u64,
) -> Bounce {
    Bounce {
        first_flight_ns: us(first),
        restitution_permille: Between(restitution.0, restitution.1),
        touch_ns: us(touch),
        shortest_flight_ns: shortest * 1_000,
        second: None,
    }
}

/// Chatter in microseconds.
pub(super) const fn chatter(
    permille: u32,
    lasts: (u64, u64),
    step: (u64, u64),
    apart: (u64, u64),
) -> Chatter {
    Chatter { permille, lasts_ns: us(lasts), step_ns: us(step), apart_permille: Between(apart.0, apart.1) }
}

/// A contact whose flights grow to `worn` thousandths over `life` operations.
pub(super) const fn part(
    bounce: [Bounce; 2],
    chatter: [Option<Chatter>; 2],
    (slow_permille, fast_permille): (u64, u64),
    (life, worn_permille): (u64, u64),
) -> Contact {
    let ([make, break_], [after_make, after_break]) = (bounce, chatter);
    Contact {
        model: ContactModel { bounce: PerChange { make, break_ } },
        chatter: PerChange { make: after_make, break_: after_break },
        speed: SpeedEffect { slow_permille, fast_permille },
        wear: Wear { life, worn_permille },
    }
}

pub(super) const fn us(range: (u64, u64)) -> Between {
    Between(range.0 * 1_000, range.1 * 1_000)
}
