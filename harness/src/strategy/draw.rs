//! Draws that favour the boundaries: a claim breaks at its ends far more often than in the middle.

use rand::{Rng, RngExt};

use super::shrink::less;

/// Where something begins that has a place of its own.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Begin {
    /// As soon as the envelope allows.
    Earliest,
    /// So much later.
    Later(u64),
    /// So much after a change of the contact, or before it; at the earliest where that is not allowed.
    NearChange(i64),
    /// From here on, counted from the start: what the others come to once a case has been built.
    At(u64),
}

impl Begin {
    /// `reach` is how far from a change things are drawn, `span` how far from the earliest.
    pub(super) fn draw<R: Rng>(rng: &mut R, reach: u64, span: u64) -> Self {
        match rng.random_range(0..4) {
            0 => Self::Earliest,
            1 => Self::Later(rng.random_range(0..=span)),
            _ => {
                let reach = i64::try_from(reach).unwrap_or(i64::MAX);
                Self::NearChange(rng.random_range(-reach..=reach))
            }
        }
    }

    /// The first place from `from` on that is meant, the changes being at `changes`.
    pub(super) fn place(self, from: u64, changes: &[u64]) -> u64 {
        match self {
            Self::Earliest => from,
            Self::Later(by) => from.saturating_add(by),
            Self::At(at) => from.max(at),
            Self::NearChange(by) => {
                let near = changes.iter().filter_map(|&change| change.checked_add_signed(by));
                near.into_iter().find(|&at| at >= from).unwrap_or(from)
            }
        }
    }

    /// Sooner ones.
    pub(super) fn simpler(self) -> Vec<Self> {
        less(self.weight(), 0).map(Self::At).collect()
    }

    /// The same moment when the stretch of `length` from `from` on is taken out before it.
    pub(super) fn without(self, from: u64, length: u64) -> Self {
        match self {
            Self::At(at) if at >= from => Self::At(at.saturating_sub(length).max(from)),
            other => other,
        }
    }

    /// For the measure of a plan.
    pub(super) fn weight(self) -> u64 {
        match self {
            Self::At(at) => at,
            // Only before the first build.
            Self::Earliest | Self::Later(_) | Self::NearChange(_) => 0,
        }
    }
}

/// From 0 to `most`: often 0, often one of the next few, else anything.
pub(super) fn extra<R: Rng>(rng: &mut R, few: u64, most: u64) -> u64 {
    match rng.random_range(0..5) {
        0 | 1 => 0,
        2 | 3 => rng.random_range(0..=few.min(most)),
        _ => rng.random_range(0..=most),
    }
}

/// From `least` to `most`, every other time the most.
pub(super) fn often_most<R: Rng>(rng: &mut R, least: u64, most: u64) -> u64 {
    if rng.random_bool(0.5) { most } else { rng.random_range(least..=most) }
}
