//! The words a port may come in: `u8`, `u16`, `u32`, `u64`.

use core::fmt::Debug;
use core::hash::Hash;
use core::ops::{BitAnd, BitAndAssign, BitOr, BitOrAssign, BitXor, BitXorAssign, Not};

mod sealed {
    pub trait Sealed {}
}

/// A port word: one bit, and so one lane, for each input. Implemented for `u8`, `u16`, `u32` and `u64` only.
pub trait Word:
    sealed::Sealed
    + Copy
    + Eq
    + Hash
    + Debug
    + BitAnd<Output = Self>
    + BitOr<Output = Self>
    + BitXor<Output = Self>
    + Not<Output = Self>
    + BitAndAssign
    + BitOrAssign
    + BitXorAssign
{
    /// No lane.
    const NONE: Self;
    /// Every lane.
    const ALL: Self;
    /// How many lanes there are.
    const LANES: u32;

    /// The word with only `lane` set; no lane at all where the word is not that wide.
    #[must_use]
    fn lane(lane: u32) -> Self;

    /// How many lanes are set.
    #[must_use]
    fn count(self) -> u32;

    /// Every lane where `bit` is the lowest bit of a 1, else none: a constant spread over all lanes.
    #[must_use]
    #[inline]
    fn spread(bit: u32) -> Self {
        if bit & 1 == 1 { Self::ALL } else { Self::NONE }
    }
}

macro_rules! word {
    ($($ty:ty),+) => {$(
        impl sealed::Sealed for $ty {}

        impl Word for $ty {
            const NONE: Self = 0;
            const ALL: Self = <$ty>::MAX;
            const LANES: u32 = <$ty>::BITS;

            #[inline]
            fn lane(lane: u32) -> Self {
                <$ty>::checked_shl(1, lane).unwrap_or(0)
            }

            #[inline]
            fn count(self) -> u32 {
                self.count_ones()
            }
        }
    )+};
}

word!(u8, u16, u32, u64);
