//! The last n samples, all of one mind: [`ShiftRegister`].

use crate::closed_form::Counting;
use crate::envelope::{Envelope, PerChange, Verdict};
use crate::error::{Parameter, ParameterError};
use crate::law::Law;
use crate::machine::{Change, Machine, Position};

/// Settles a contact by its last `window` samples: the output changes when they all read the other position.
///
/// # Method
/// Unanimous window of the last samples. Source: a thread on a debounce state machine in the newsgroup
/// comp.arch.fpga, whose vector of inputs and outputs is a test here. Differs from the source in holding no window:
/// how many samples in a row have read otherwise is all that matters of it, which is proved by
/// `shift_register_every_word_equals_a_window` and, for 64 samples, by
/// `shift_register_long_runs_equal_a_64_bit_word`.
///
/// # Units
/// One step takes one sample and is one tick. The window is in samples.
///
/// # Bounds
/// From a settled start, counting the first sample of the new position as 1:
///
/// | quantity                          | value, in ticks    | proof                                                         |
/// |-----------------------------------|--------------------|---------------------------------------------------------------|
/// | latency of a clean make or break  | exactly the window | `shift_register_pulse_of_the_window_makes_and_one_less_does_not` |
/// | longest lone disturbance rejected | the window less 1  | the same                                                      |
///
/// Not promised: a line that reads the old position at least once in every window is never followed.
///
/// # State
/// [`ShiftRegisterState`]: 2 bytes, held by an assertion beside it.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in a step. Of the constructors, [`new`](Self::new) does, which is meant for constants: there a bad value
/// does not compile.
///
/// # Examples
/// ```
/// use debounce_core::{Change, Position::{Closed, Open}, Running, ShiftRegister};
/// const LAW: ShiftRegister = ShiftRegister::new(3);
/// let mut key = Running::new(LAW, Open);
/// assert_eq!([Closed, Closed, Open, Closed, Closed].map(|sample| key.tick(sample)), [None; 5]);
/// assert_eq!(key.tick(Closed), Some(Change::Make));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct ShiftRegister {
    window: u8,
}

/// What a [`ShiftRegister`] remembers: the output, and how many samples in a row have read otherwise.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct ShiftRegisterState {
    contrary: u8,
    output: Position,
}

const _: () = assert!(size_of::<ShiftRegisterState>() == 2);

impl ShiftRegisterState {
    /// Settled at `position`; what [`Law::rest`] returns, for constants.
    #[must_use]
    #[inline]
    pub const fn at_rest(position: Position) -> Self {
        Self { contrary: 0, output: position }
    }
}

impl ShiftRegister {
    /// The longest window.
    pub const LONGEST: u8 = 64;

    /// A register of `window` samples.
    ///
    /// # Panics
    /// When [`try_new`](Self::try_new) refuses; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(window: u8) -> Self {
        match Self::try_new(window) {
            Ok(law) => law,
            Err(error) => panic!("{}", error.refusal()),
        }
    }

    /// [`new`](Self::new) for a value known at run time; links no panic.
    ///
    /// # Errors
    /// When `window` is 0 or more than [`LONGEST`](Self::LONGEST).
    pub const fn try_new(window: u8) -> Result<Self, ParameterError> {
        if window == 0 {
            return Err(ParameterError::Zero(Parameter::Window));
        }
        if window > Self::LONGEST {
            return Err(ParameterError::WindowTooLong { window, most: Self::LONGEST });
        }
        Ok(Self { window })
    }

    /// What the register guarantees inside `envelope`.
    #[must_use]
    pub const fn verdict(&self, envelope: &Envelope) -> Verdict {
        let window = self.window as u32;
        Counting {
            confirm: PerChange { make: window, break_: window },
            patience: PerChange { make: 1, break_: 1 },
            lockout: PerChange { make: 0, break_: 0 },
        }
        .verdict(envelope)
    }

    /// The number of samples that must agree.
    #[must_use]
    pub const fn window(&self) -> u8 {
        self.window
    }
}

impl Machine for ShiftRegister {
    type Input = Position;
    type Output = Option<Change>;
    type State = ShiftRegisterState;

    #[inline]
    fn step(&self, state: &mut Self::State, sample: Position) -> Option<Change> {
        if sample == state.output {
            state.contrary = 0;
            return None;
        }
        // The window is 1 or more, and a count below it has room for one more.
        if state.contrary < self.window.wrapping_sub(1) {
            state.contrary = state.contrary.wrapping_add(1);
            return None;
        }
        *state = self.rest(sample);
        Some(sample.reached_by())
    }
}

impl Law for ShiftRegister {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        ShiftRegisterState::at_rest(position)
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

    use super::{ShiftRegister, ShiftRegisterState};
    use crate::words::assert_same;
    use crate::{Change, Law, Machine, Parameter, ParameterError, Position, Running};

    /// The window itself, filled with the start.
    fn windowed(start: Position, window: u8) -> impl FnMut(Position) -> Position + Clone {
        let mut output = start;
        let mut held: VecDeque<_> = (0..window).map(|_| start).collect();
        move |sample| {
            held.pop_front();
            held.push_back(sample);
            if held.iter().all(|&one| one == sample) {
                output = sample;
            }
            output
        }
    }

    #[test]
    fn shift_register_every_word_equals_a_window() {
        for window in 1..=9 {
            assert_same(&ShiftRegister::new(window), 13, |start| windowed(start, window));
        }
    }

    proptest! {
        /// Runs of samples, so that a window of 64 fills now and then.
        #[test]
        fn shift_register_long_runs_equal_a_64_bit_word(
            window in 60_u8..=64,
            runs in prop::collection::vec((any::<bool>(), 1_usize..90), 1..40),
        ) {
            let law = ShiftRegister::new(window);
            let mask = u64::MAX >> (64 - window);
            let (mut word, mut output, mut state) = (0_u64, Position::Open, law.rest(Position::Open));
            for (bit, length) in runs {
                for _ in 0..length {
                    word = word << 1 | u64::from(bit);
                    let before = output;
                    if word & mask == mask {
                        output = Position::Closed;
                    } else if word & mask == 0 {
                        output = Position::Open;
                    }
                    let edge = (output != before).then(|| output.reached_by());
                    prop_assert_eq!(law.step(&mut state, Position::closed_if(bit)), edge);
                    prop_assert_eq!(law.output(&state), output);
                }
            }
        }
    }

    /// Source: a thread on a debounce state machine in the newsgroup comp.arch.fpga, window of 3, reset output 1.
    #[test]
    fn shift_register_published_vector_gives_the_published_output() {
        let input = [1, 0, 0, 1, 0, 1, 0, 0, 0, 1, 0, 1, 1, 1];
        let output = [1, 1, 1, 1, 1, 1, 1, 1, 0, 0, 0, 0, 0, 1];
        let mut running = Running::new(ShiftRegister::new(3), Position::Closed);
        let seen = input.map(|bit| {
            let _ = running.tick(Position::closed_if(bit == 1));
            u8::from(running.position().is_closed())
        });
        assert_eq!(seen, output);
    }

    #[track_caller]
    fn pulse(window: u8, length: u8, expected: Option<u8>) {
        let mut running = Running::new(ShiftRegister::new(window), Position::Open);
        let made = (1..=length).find(|_| running.tick(Position::Closed) == Some(Change::Make));
        assert_eq!(made, expected);
        let broken = expected.map(|_| Change::Break);
        let after = (0..window).filter_map(|_| running.tick(Position::Open)).last();
        assert_eq!(after, broken);
    }

    #[test]
    fn shift_register_pulse_of_the_window_makes_and_one_less_does_not() {
        pulse(1, 1, Some(1));
        pulse(3, 2, None);
        pulse(3, 3, Some(3));
        pulse(3, 4, Some(3));
        pulse(64, 63, None);
        pulse(64, 64, Some(64));
    }

    #[test]
    fn shift_register_any_state_whatever_finds_the_line_again() {
        let law = ShiftRegister::new(5);
        for contrary in 0..=u8::MAX {
            for output in Position::BOTH {
                for line in Position::BOTH {
                    let mut state = ShiftRegisterState { contrary, output };
                    for _ in 0..5 {
                        let _ = law.step(&mut state, line);
                    }
                    assert_eq!(state, ShiftRegisterState::at_rest(line));
                }
            }
        }
    }

    #[test]
    fn shift_register_window_at_its_limits_is_taken_or_refused() {
        assert_eq!(ShiftRegister::try_new(0), Err(ParameterError::Zero(Parameter::Window)));
        assert_eq!(ShiftRegister::try_new(1).unwrap().window(), 1);
        assert_eq!(ShiftRegister::try_new(64).unwrap().window(), 64);
        assert_eq!(ShiftRegister::try_new(65), Err(ParameterError::WindowTooLong { window: 65, most: 64 }));
        assert_eq!(ShiftRegister::try_new(255), Err(ParameterError::WindowTooLong { window: 255, most: 64 }));
    }
}
