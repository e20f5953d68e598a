//! The width of a count of ticks: [`Count`].

use core::fmt::Debug;
use core::hash::Hash;

mod sealed {
    use core::fmt::Debug;
    use core::hash::Hash;

    /// What a width has for the laws only.
    pub trait Sealed: Sized {
        /// Twice as wide: holds any sum of two counts, and a bit beside it.
        type Packed: Copy + Eq + Hash + Debug + Send + Sync + 'static;

        /// No bit set.
        const BLANK: Self::Packed;
        /// Only the lowest bit set.
        const LOWEST: Self::Packed;

        /// The same number.
        fn widened(self) -> u32;
        /// The low bits of `word`.
        fn narrowed(word: u32) -> Self;
        /// The low bits of `word`.
        fn pack(word: u32) -> Self::Packed;
        /// The same word.
        fn unpack(packed: Self::Packed) -> u32;
    }
}
pub(crate) use sealed::Sealed;

/// An unsigned integer that laws count ticks in: `u8` or `u16`.
///
/// A count never wraps: every operation stops at [`ZERO`](Self::ZERO) or [`MAX`](Self::MAX). The trait is sealed,
/// because the constructors, being `const fn`, exist once for each width.
pub trait Count: Sealed + Copy + Ord + Hash + Debug + Default + Send + Sync + 'static {
    /// No ticks.
    const ZERO: Self;
    /// One tick.
    const ONE: Self;
    /// The most ticks that can be counted.
    const MAX: Self;

    /// The sum, or [`MAX`](Self::MAX) where it would be greater.
    #[must_use]
    fn plus(self, ticks: Self) -> Self;

    /// The difference, or [`ZERO`](Self::ZERO) where it would be less.
    #[must_use]
    fn minus(self, ticks: Self) -> Self;
}

macro_rules! count {
    ($($width:ty => $packed:ty),*) => {$(
        impl Sealed for $width {
            type Packed = $packed;

            const BLANK: $packed = 0;
            const LOWEST: $packed = 1;

            #[inline]
            fn widened(self) -> u32 {
                self.into()
            }

            #[inline]
            fn narrowed(word: u32) -> Self {
                // Cut off on purpose, as the trait says.
                word as Self
            }

            #[inline]
            fn pack(word: u32) -> $packed {
                // Cut off on purpose, as the trait says.
                word as $packed
            }

            #[inline]
            fn unpack(packed: $packed) -> u32 {
                packed.into()
            }
        }

        impl Count for $width {
            const ZERO: Self = 0;
            const ONE: Self = 1;
            const MAX: Self = <$width>::MAX;

            #[inline]
            fn plus(self, ticks: Self) -> Self {
                self.saturating_add(ticks)
            }

            #[inline]
            fn minus(self, ticks: Self) -> Self {
                self.saturating_sub(ticks)
            }
        }
    )*};
}

count!(u8 => u16, u16 => u32);

#[cfg(test)]
mod tests {
    use super::Count;

    #[track_caller]
    fn stops_at_both_ends<C: Count>(before_last: C) {
        assert_eq!(before_last.plus(C::ONE), C::MAX);
        assert_eq!(C::MAX.plus(C::ONE), C::MAX);
        assert_eq!(C::MAX.plus(C::MAX), C::MAX);
        assert_eq!(C::ONE.minus(C::ONE), C::ZERO);
        assert_eq!(C::ZERO.minus(C::ONE), C::ZERO);
        assert_eq!(C::ONE.minus(C::MAX), C::ZERO);
        assert_eq!(C::MAX.minus(C::ONE), before_last);
    }

    #[test]
    fn count_at_its_ends_saturates() {
        stops_at_both_ends(254_u8);
        stops_at_both_ends(65_534_u16);
    }
}
