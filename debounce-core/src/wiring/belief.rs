//! Which positions of the contact the samples so far allow, each with the most favourable account of it.

use crate::envelope::{Envelope, PerChange, PerPosition};
use crate::error::{Parameter, ParameterError};
use crate::machine::Position;

/// An envelope in delivered samples, in the width that the monitor counts in.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub(super) struct Limits {
    dwell: PerPosition<u16>,
    bounce: PerChange<u16>,
    glitch: PerPosition<u16>,
    quiet: u16,
    calm: u16,
}

/// The most favourable account of one position: each count at least that of every explanation of the samples.
///
/// That order is what makes it right: whatever the envelope allows to follow an explanation, it allows to follow one
/// whose counts are at least as high, and leads to counts at least as high again. (With one exception, which the maximum
/// covers: inside a disturbance quiet is 0.)
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
struct Account {
    held: u16,
    bounce_left: u16,
    window_left: u16,
    quiet: u16,
    calm: u16,
}

impl Account {
    fn max(self, other: Self) -> Self {
        Self {
            held: self.held.max(other.held),
            bounce_left: self.bounce_left.max(other.bounce_left),
            window_left: self.window_left.max(other.window_left),
            quiet: self.quiet.max(other.quiet),
            calm: self.calm.max(other.calm),
        }
    }
}

/// An account of each position that is still possible.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub(super) struct Belief(PerPosition<Option<Account>>);

impl Belief {
    /// Nothing is possible, or nothing is known.
    pub(super) const NONE: Self = Self(PerPosition { open: None, closed: None });

    pub(super) fn allows(&self, position: Position) -> bool {
        self.0.of(position).is_some()
    }

    pub(super) fn is_empty(&self) -> bool {
        self.only().is_none() && !self.allows(Position::Open)
    }

    /// The position, where only one is possible.
    pub(super) fn only(&self) -> Option<Position> {
        match (self.allows(Position::Open), self.allows(Position::Closed)) {
            (true, false) => Some(Position::Open),
            (false, true) => Some(Position::Closed),
            _ => None,
        }
    }

    /// Whether, were the contact at `position`, the last sample was disturbed for certain.
    pub(super) fn is_right_behind_a_disturbance(&self, position: Position) -> bool {
        self.0.of(position).is_some_and(|account| account.quiet == 0)
    }
}

impl Limits {
    /// The limits of an envelope, or the number in it that cannot be counted.
    pub(super) const fn of(envelope: &Envelope) -> Result<Self, ParameterError> {
        let e = envelope.delivered();
        if e.dwell.open == 0 {
            return Err(ParameterError::Zero(Parameter::DwellOpen));
        }
        if e.dwell.closed == 0 {
            return Err(ParameterError::Zero(Parameter::DwellClosed));
        }
        let numbers = [
            (Parameter::DwellOpen, e.dwell.open),
            (Parameter::DwellClosed, e.dwell.closed),
            (Parameter::BounceMake, e.bounce.make),
            (Parameter::BounceBreak, e.bounce.break_),
            (Parameter::GlitchOpen, e.glitch.open),
            (Parameter::GlitchClosed, e.glitch.closed),
            (Parameter::Quiet, e.quiet),
            (Parameter::Calm, e.calm),
        ];
        let mut left: &[_] = &numbers;
        while let [(parameter, ticks), rest @ ..] = left {
            if *ticks > u16::MAX as u32 {
                let (parameter, ticks) = (*parameter, *ticks);
                return Err(ParameterError::CountTooNarrow { parameter, ticks, most: u16::MAX });
            }
            left = rest;
        }
        // Nothing is cut off: all of them were looked at just now.
        Ok(Self {
            dwell: PerPosition { open: e.dwell.open as u16, closed: e.dwell.closed as u16 },
            bounce: PerChange { make: e.bounce.make as u16, break_: e.bounce.break_ as u16 },
            glitch: PerPosition { open: e.glitch.open as u16, closed: e.glitch.closed as u16 },
            quiet: e.quiet as u16,
            calm: e.calm as u16,
        })
    }

    /// The samples alike after which a line is at rest: one more than a contact that has changed can hide, under its
    /// bounce and one disturbance behind it.
    pub(super) const fn rest(&self) -> u16 {
        self.hidden().saturating_add(1)
    }

    const fn hidden(&self) -> u16 {
        self.longest_bounce().saturating_add(self.widest())
    }

    /// Whether every line inside the envelope comes to rest in every dwell.
    pub(super) const fn always_rests(&self) -> bool {
        let rest = self.rest() as u32;
        let needed = self.longest_bounce() as u32 + self.widest() as u32 + 2 * rest;
        let undisturbed = self.widest() == 0 || self.quiet >= self.rest();
        undisturbed && self.dwell.open as u32 >= needed && self.dwell.closed as u32 >= needed
    }

    /// Whether there are disturbances that begin at `position`.
    pub(super) const fn disturbs(&self, position: Position) -> bool {
        self.glitch.at(position) > 0
    }

    const fn longest_bounce(&self) -> u16 {
        max(self.bounce.make, self.bounce.break_)
    }

    const fn widest(&self) -> u16 {
        max(self.glitch.open, self.glitch.closed)
    }

    /// The line is at rest at `position`, and nothing else is known.
    pub(super) const fn at_rest(&self, position: Position) -> Belief {
        let account = Account {
            held: self.dwell.at(position),
            bounce_left: self.longest_bounce(),
            window_left: self.widest(),
            quiet: self.quiet,
            calm: self.calm,
        };
        match position {
            Position::Open => Belief(PerPosition { open: Some(account), closed: None }),
            Position::Closed => Belief(PerPosition { open: None, closed: Some(account) }),
        }
    }

    pub(super) fn step(&self, belief: &Belief, sample: Position) -> Belief {
        let contrary = sample.opposite();
        let stayed = belief.0.at(sample).and_then(|account| self.account(account, sample, sample));
        // A change is taken into account by the first sample that shows it. One that came before, hidden by its bounce
        // and a disturbance, has its age on top, and in all else is no better off: what hid it is spent.
        let changed =
            belief.0.at(contrary).filter(|account| account.held >= self.dwell.at(contrary)).and_then(
                |account| {
                    // A bounce that is cut short by the next change may still ring on under it.
                    let bounce_left = account.bounce_left.max(self.bounce.at(sample.reached_by()));
                    let held = self.hidden().min(self.dwell.at(sample));
                    self.account(Account { held, bounce_left, calm: 0, ..account }, sample, sample)
                },
            );
        let shown = match (stayed, changed) {
            (Some(stayed), Some(changed)) => Some(stayed.max(changed)),
            (one, other) => one.or(other),
        };
        let other = belief.0.at(contrary).and_then(|account| self.account(account, contrary, sample));
        Belief(match sample {
            Position::Open => PerPosition { open: shown, closed: other },
            Position::Closed => PerPosition { open: other, closed: shown },
        })
    }

    /// The account after a sample with the contact at `position`; `None` where nothing explains it.
    fn account(&self, before: Account, position: Position, sample: Position) -> Option<Account> {
        let bouncing = before.bounce_left > 0;
        // A disturbance may begin with a sample that reads the contact's position, just before the contact changes.
        let begins = before.quiet >= self.quiet && before.calm >= self.calm;
        let window =
            if begins { before.window_left.max(self.glitch.at(position)) } else { before.window_left };
        let agrees = sample == position;
        if !agrees && !bouncing && window == 0 {
            return None;
        }
        let one_more = |count: u16, most: u16| count.saturating_add(1).min(most);
        Some(Account {
            held: one_more(before.held, self.dwell.at(position)),
            bounce_left: before.bounce_left.saturating_sub(1),
            window_left: window.saturating_sub(1),
            quiet: if agrees || bouncing { one_more(before.quiet, self.quiet) } else { 0 },
            calm: match (agrees, window) {
                (true, _) => one_more(before.calm, self.calm),
                (false, 0) => 0,
                (false, _) => before.calm,
            },
        })
    }
}

const fn max(a: u16, b: u16) -> u16 {
    if a > b { a } else { b }
}
