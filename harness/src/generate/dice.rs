//! Seeded random numbers in whole nanoseconds.

use rand::rngs::ChaCha8Rng;
use rand::{Rng, SeedableRng};

/// An inclusive range to draw from, every value alike.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Between(
    /// The least value.
    pub u64,
    /// The greatest value; where it lies below the least, the least is drawn.
    pub u64,
);

/// A stream of random numbers that is the same on every platform and in every release.
///
/// The generator's output is fixed by its definition (ChaCha with 8 rounds); everything after it is integer
/// arithmetic of this file, because the distributions of general crates may change between releases.
#[derive(Debug)]
pub struct Dice(ChaCha8Rng);

impl Dice {
    /// The stream number `stream` of the generator seeded with `seed`.
    #[must_use]
    pub fn new(seed: u64, stream: u64) -> Self {
        Self::of(seed, 0, stream)
    }

    /// The stream number `stream` for one of several contacts that share a seed; contact 0 is [`Self::new`].
    #[must_use]
    pub fn of(seed: u64, contact: u64, stream: u64) -> Self {
        let mut key = [0; 32];
        key[..8].copy_from_slice(&seed.to_le_bytes());
        key[8..16].copy_from_slice(&contact.to_le_bytes());
        let mut generator = ChaCha8Rng::from_seed(key);
        generator.set_stream(stream);
        Self(generator)
    }

    /// A number of `range`, both ends included.
    pub fn draw(&mut self, range: Between) -> u64 {
        let Between(least, greatest) = range;
        let count = u128::from(greatest.saturating_sub(least)) + 1;
        // The high half of the product is below `count`; its bias is below count / 2^64.
        let offset = (u128::from(self.0.next_u64()) * count) >> 64;
        least + offset as u64
    }

    /// Whether an event of the given chance in a thousand happens.
    pub fn chance(&mut self, permille: u32) -> bool {
        self.draw(Between(0, 999)) < u64::from(permille)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn dice_stream_is_pinned() {
        let mut dice = Dice::new(1, 0);
        let drawn: Vec<u64> = (0..4).map(|_| dice.draw(Between(0, 999_999))).collect();
        assert_eq!(drawn, PINNED);
        let mut again = Dice::new(1, 1);
        assert_ne!(again.draw(Between(0, 999_999)), PINNED[0]);
    }

    const PINNED: [u64; 4] = [381_489, 294_927, 798_254, 916_153];

    #[test]
    fn dice_range_is_inclusive_and_reaches_both_ends() {
        let mut dice = Dice::new(2, 0);
        let drawn: Vec<u64> = (0..200).map(|_| dice.draw(Between(5, 7))).collect();
        assert_eq!((drawn.iter().min(), drawn.iter().max()), (Some(&5), Some(&7)));
        assert_eq!(dice.draw(Between(9, 9)), 9);
        assert_eq!(dice.draw(Between(9, 3)), 9);
        dice.draw(Between(0, u64::MAX));
        assert!(!dice.chance(0) && dice.chance(1000));
    }
}
