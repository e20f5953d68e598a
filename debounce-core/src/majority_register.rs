//! The last n samples, by majority: [`MajorityRegister`].

use core::fmt::Debug;
use core::hash::Hash;

use crate::closed_form;
use crate::envelope::{Envelope, Verdict};
use crate::error::{Parameter, ParameterError};
use crate::law::Law;
use crate::machine::{Change, Machine, Position};

mod sealed {
    pub trait Sealed {}
    impl Sealed for u8 {}
    impl Sealed for u16 {}
    impl Sealed for u32 {}
}

/// An unsigned integer that holds a window of samples, one bit each: `u8`, `u16` or `u32`.
pub trait WindowWord: sealed::Sealed + Copy + Eq + Hash + Debug + Send + Sync + 'static {
    /// No bit set.
    const NONE: Self;

    /// The word with every bit moved up by one and `newest` below them, cut to the bits of `mask`.
    #[must_use]
    fn shifted(self, newest: bool, mask: Self) -> Self;

    /// The bits of `mask` that are not set here.
    #[must_use]
    fn flipped(self, mask: Self) -> Self;

    /// The number of bits set.
    #[must_use]
    fn ones(self) -> u8;
}

/// Settles a contact by its last `window` samples: the output changes when a majority reads the other position.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct MajorityRegister<W = u8> {
    // One bit for each sample of the window.
    mask: W,
    majority: u8,
}

/// What a [`MajorityRegister`] remembers: the output, and which samples of the window read otherwise.
// The bits are relative to the output, so that both positions rest at 0 and one comparison serves both changes.
// They are counted anew in each disturbed tick: a running count would be as small, but one upset of it would
// stay wrong for good.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct MajorityRegisterState<W = u8> {
    contrary: W,
    output: Position,
}

const _: () = assert!(size_of::<MajorityRegisterState<u8>>() == 2);
const _: () = assert!(size_of::<MajorityRegisterState<u16>>() == 4);
const _: () = assert!(size_of::<MajorityRegisterState<u32>>() == 8);

macro_rules! widths {
    ($($width:ty),*) => {$(
        impl WindowWord for $width {
            const NONE: Self = 0;

            #[inline]
            fn shifted(self, newest: bool, mask: Self) -> Self {
                ((self << 1) | Self::from(newest)) & mask
            }

            #[inline]
            fn flipped(self, mask: Self) -> Self {
                !self & mask
            }

            #[inline]
            fn ones(self) -> u8 {
                // At most 32.
                self.count_ones() as u8
            }
        }

        impl MajorityRegister<$width> {
            /// The longest window.
            pub const LONGEST: u8 = <$width>::BITS as u8;

            /// A register that decides by `majority` of its last `window` samples.
            ///
            /// # Panics
            /// When [`try_new`](Self::try_new) refuses; in a constant that is an error at compile time.
            #[must_use]
            pub const fn new(majority: u8, window: u8) -> Self {
                match Self::try_new(majority, window) {
                    Ok(law) => law,
                    Err(error) => panic!("{}", error.refusal()),
                }
            }

            /// [`new`](Self::new) for values known at run time; links no panic.
            ///
            /// # Errors
            /// When `window` is 0 or more than [`LONGEST`](Self::LONGEST), or `majority` is not more than half of
            /// it or more than all of it.
            pub const fn try_new(majority: u8, window: u8) -> Result<Self, ParameterError> {
                if window == 0 {
                    return Err(ParameterError::Zero(Parameter::Window));
                }
                if window > Self::LONGEST {
                    return Err(ParameterError::WindowTooLong { window, most: Self::LONGEST });
                }
                if majority == 0 {
                    return Err(ParameterError::Zero(Parameter::Majority));
                }
                if majority <= window / 2 {
                    return Err(ParameterError::NotAMajority { majority, window });
                }
                if majority > window {
                    return Err(ParameterError::MajorityBeyondWindow { majority, window });
                }
                Ok(Self { mask: <$width>::MAX >> (Self::LONGEST - window), majority })
            }
        }
    )*};
}

widths!(u8, u16, u32);

impl<W: WindowWord> MajorityRegister<W> {
    /// The number of samples held.
    #[must_use]
    pub fn window(&self) -> u8 {
        self.mask.ones()
    }

    /// What the register guarantees inside `envelope`; beyond the certain failure, the harness explores it.
    #[must_use]
    pub const fn verdict(&self, envelope: &Envelope) -> Verdict {
        closed_form::majority(self.majority as u32, envelope)
    }

    /// The number of samples that decide.
    #[must_use]
    pub const fn majority(&self) -> u8 {
        self.majority
    }
}

impl<W: WindowWord> Machine for MajorityRegister<W> {
    type Input = Position;
    type Output = Option<Change>;
    type State = MajorityRegisterState<W>;

    #[inline]
    fn step(&self, state: &mut Self::State, sample: Position) -> Option<Change> {
        let is_contrary = sample != state.output;
        if !is_contrary && state.contrary == W::NONE {
            return None;
        }
        state.contrary = state.contrary.shifted(is_contrary, self.mask);
        if state.contrary.ones() < self.majority {
            return None;
        }
        state.contrary = state.contrary.flipped(self.mask);
        state.output = state.output.opposite();
        Some(state.output.reached_by())
    }
}

impl<W: WindowWord> Law for MajorityRegister<W> {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        MajorityRegisterState { contrary: W::NONE, output: position }
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        state.output
    }
}
