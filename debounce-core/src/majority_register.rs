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
///
/// # Method
/// m-of-n window; common practice. It makes when at least `majority` of the last `window` samples are closed,
/// breaks when at least as many are open, and otherwise keeps its output.
///
/// # Units
/// One step takes one sample and is one tick. Window and majority are in samples.
///
/// # Bounds
/// From a settled start, counting the first sample of the new position as 1:
///
/// | quantity                          | value, in ticks      | proof                                                        |
/// |-----------------------------------|----------------------|--------------------------------------------------------------|
/// | latency of a clean make or break  | exactly the majority | `majority_register_pulse_of_the_majority_makes_and_one_less_does_not` |
/// | longest lone disturbance rejected | the majority less 1  | the same                                                     |
///
/// Not promised: disturbances within one window add up. With 3 of 5, closed, open, closed, open, closed makes at
/// tick 5.
///
/// # State
/// [`MajorityRegisterState`]: 2, 4 or 8 bytes for windows in `u8`, `u16` and `u32`, held by assertions beside it.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in a step. Of the constructors, [`new`](Self::new) does, which is meant for constants: there a bad value
/// does not compile.
///
/// # Examples
/// ```
/// use debounce_core::{Change, MajorityRegister, Position::{Closed, Open}, Running};
/// const LAW: MajorityRegister = MajorityRegister::<u8>::new(3, 5);
/// let mut key = Running::new(LAW, Open);
/// assert_eq!([Closed, Open, Closed, Open].map(|sample| key.tick(sample)), [None; 4]);
/// assert_eq!(key.tick(Closed), Some(Change::Make));
/// ```
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

impl<W: WindowWord> MajorityRegisterState<W> {
    /// Settled at `position`; what [`Law::rest`] returns, for constants.
    #[must_use]
    #[inline]
    pub const fn at_rest(position: Position) -> Self {
        Self { contrary: W::NONE, output: position }
    }
}

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
        MajorityRegisterState::at_rest(position)
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        state.output
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use std::collections::VecDeque;

    use proptest::prelude::*;

    use super::{MajorityRegister, MajorityRegisterState, WindowWord};
    use crate::words::assert_same;
    use crate::{Change, Law, Machine, Parameter, ParameterError, Position, Running, ShiftRegister};

    /// The window itself, filled with the start; closed and open samples are counted each by itself.
    fn windowed(start: Position, majority: u8, window: u8) -> impl FnMut(Position) -> Position + Clone {
        let mut output = start;
        let mut held: VecDeque<_> = (0..window).map(|_| start).collect();
        move |sample| {
            held.pop_front();
            held.push_back(sample);
            for position in Position::BOTH {
                if held.iter().filter(|&&one| one == position).count() >= majority.into() {
                    output = position;
                }
            }
            output
        }
    }

    #[test]
    fn majority_register_every_word_equals_a_window() {
        for window in 1..=8 {
            for majority in window / 2 + 1..=window {
                let model = |start| windowed(start, majority, window);
                assert_same(&MajorityRegister::<u8>::new(majority, window), 12, model);
                assert_same(&MajorityRegister::<u16>::new(majority, window), 12, model);
                assert_same(&MajorityRegister::<u32>::new(majority, window), 12, model);
            }
        }
    }

    fn equals_window<W: WindowWord>(law: MajorityRegister<W>, samples: &[bool]) -> Result<(), TestCaseError> {
        let mut model = windowed(Position::Open, law.majority(), law.window());
        let mut state = law.rest(Position::Open);
        for &bit in samples {
            let sample = Position::closed_if(bit);
            let _ = law.step(&mut state, sample);
            prop_assert_eq!(law.output(&state), model(sample));
        }
        Ok(())
    }

    proptest! {
        #[test]
        fn majority_register_full_word_equals_a_window(samples in prop::collection::vec(any::<bool>(), 1..400)) {
            equals_window(MajorityRegister::<u8>::new(5, 8), &samples)?;
            equals_window(MajorityRegister::<u16>::new(9, 16), &samples)?;
            equals_window(MajorityRegister::<u32>::new(17, 32), &samples)?;
        }
    }

    #[test]
    fn majority_register_of_all_samples_equals_the_unanimous_one() {
        for window in 1..=6 {
            let unanimous = ShiftRegister::new(window);
            assert_same(&MajorityRegister::<u8>::new(window, window), 13, |start| {
                let mut state = unanimous.rest(start);
                move |sample| {
                    let _ = unanimous.step(&mut state, sample);
                    unanimous.output(&state)
                }
            });
        }
    }

    #[test]
    fn majority_register_any_state_whatever_finds_the_line_again() {
        let law = MajorityRegister::<u8>::new(3, 5);
        for contrary in 0..=u8::MAX {
            for output in Position::BOTH {
                for line in Position::BOTH {
                    let mut state = MajorityRegisterState { contrary, output };
                    for _ in 0..6 {
                        let _ = law.step(&mut state, line);
                    }
                    assert_eq!(state, MajorityRegisterState::at_rest(line), "{contrary:08b} {output:?}");
                }
            }
        }
    }

    #[track_caller]
    fn pulse(law: MajorityRegister, length: u8, expected: Option<u8>) {
        let mut running = Running::new(law, Position::Open);
        let made = (1..=length).find(|_| running.tick(Position::Closed) == Some(Change::Make));
        assert_eq!(made, expected);
    }

    #[test]
    fn majority_register_pulse_of_the_majority_makes_and_one_less_does_not() {
        for (majority, window) in [(1, 1), (2, 3), (3, 5), (5, 8), (8, 8)] {
            let law = MajorityRegister::<u8>::new(majority, window);
            pulse(law, majority - 1, None);
            pulse(law, majority, Some(majority));
            pulse(law, majority + 1, Some(majority));
        }
    }

    #[track_caller]
    fn answer(majority: u8, window: u8, expected: Result<(u8, u8), ParameterError>) {
        let law = MajorityRegister::<u8>::try_new(majority, window);
        assert_eq!(law.map(|law| (law.majority(), law.window())), expected);
    }

    #[test]
    fn majority_register_parameters_at_their_limits_are_taken_or_refused() {
        answer(1, 0, Err(ParameterError::Zero(Parameter::Window)));
        answer(0, 1, Err(ParameterError::Zero(Parameter::Majority)));
        answer(1, 1, Ok((1, 1)));
        answer(2, 1, Err(ParameterError::MajorityBeyondWindow { majority: 2, window: 1 }));
        answer(2, 4, Err(ParameterError::NotAMajority { majority: 2, window: 4 }));
        answer(3, 4, Ok((3, 4)));
        answer(2, 5, Err(ParameterError::NotAMajority { majority: 2, window: 5 }));
        answer(3, 5, Ok((3, 5)));
        answer(8, 8, Ok((8, 8)));
        answer(9, 9, Err(ParameterError::WindowTooLong { window: 9, most: 8 }));
        let wide = MajorityRegister::<u32>::new(32, 32);
        assert_eq!((wide.majority(), wide.window()), (32, 32));
        assert_eq!(
            MajorityRegister::<u32>::try_new(17, 33),
            Err(ParameterError::WindowTooLong { window: 33, most: 32 })
        );
        assert_eq!(
            MajorityRegister::<u16>::try_new(9, 17),
            Err(ParameterError::WindowTooLong { window: 17, most: 16 })
        );
    }
}
