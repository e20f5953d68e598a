//! The last n samples, all of one mind: [`ShiftRegister`].

use crate::closed_form::Counting;
use crate::envelope::{Envelope, PerChange, Verdict};
use crate::error::{Parameter, ParameterError};
use crate::law::Law;
use crate::machine::{Change, Machine, Position};

/// Settles a contact by its last `window` samples: the output changes when they all read the other position.
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
        let contrary = state.contrary.saturating_add(1);
        if contrary < self.window {
            state.contrary = contrary;
            return None;
        }
        *state = self.rest(sample);
        Some(sample.reached_by())
    }
}

impl Law for ShiftRegister {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        ShiftRegisterState { contrary: 0, output: position }
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        state.output
    }
}
