//! A built-in law chosen at run time: one value that can be proved, replayed, costed and shown.

use debounce_core::{
    Change, Envelope, Integrator, Law, Machine, MajorityRegister, ParameterError, Position, ShiftRegister,
    StateMachine, StateMachineParameters, Verdict,
};

use crate::law_text::LawParameters;
use crate::prove::{LawTable, ProveError};

/// A built-in law in the narrowest width that holds its parameters.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Logic {
    /// Counts up to 255.
    Integrator8(Integrator<u8>),
    /// Counts up to 65 535.
    Integrator16(Integrator<u16>),
    /// A unanimous window.
    ShiftRegister(ShiftRegister),
    /// A window of up to 8 samples.
    Majority8(MajorityRegister<u8>),
    /// A window of up to 16 samples.
    Majority16(MajorityRegister<u16>),
    /// A window of up to 32 samples.
    Majority32(MajorityRegister<u32>),
    /// Counts up to 255.
    StateMachine8(StateMachine<u8>),
    /// Counts up to 65 535.
    StateMachine16(StateMachine<u16>),
}

/// The same expression for the law in whatever variant it is.
#[macro_export]
macro_rules! with_law {
    ($logic:expr, $law:ident => $body:expr) => {
        match $logic {
            $crate::logic::Logic::Integrator8($law) => $body,
            $crate::logic::Logic::Integrator16($law) => $body,
            $crate::logic::Logic::ShiftRegister($law) => $body,
            $crate::logic::Logic::Majority8($law) => $body,
            $crate::logic::Logic::Majority16($law) => $body,
            $crate::logic::Logic::Majority32($law) => $body,
            $crate::logic::Logic::StateMachine8($law) => $body,
            $crate::logic::Logic::StateMachine16($law) => $body,
        }
    };
}

impl Logic {
    /// The law with these parameters.
    ///
    /// # Errors
    /// When the law refuses them.
    pub fn try_new(parameters: &LawParameters) -> Result<Self, ParameterError> {
        match *parameters {
            LawParameters::Integrator { full_scale, up, down } => {
                let narrow = |n| u8::try_from(n).ok();
                match (narrow(full_scale), narrow(up), narrow(down)) {
                    (Some(full_scale), Some(up), Some(down)) => {
                        Integrator::<u8>::try_with_steps(full_scale, up, down).map(Self::Integrator8)
                    }
                    _ => Integrator::<u16>::try_with_steps(full_scale, up, down).map(Self::Integrator16),
                }
            }
            LawParameters::ShiftRegister { window } => {
                ShiftRegister::try_new(window).map(Self::ShiftRegister)
            }
            LawParameters::MajorityRegister { majority, window } => match window {
                0..=8 => MajorityRegister::<u8>::try_new(majority, window).map(Self::Majority8),
                9..=16 => MajorityRegister::<u16>::try_new(majority, window).map(Self::Majority16),
                _ => MajorityRegister::<u32>::try_new(majority, window).map(Self::Majority32),
            },
            LawParameters::StateMachine { confirm, patience, lockout } => {
                let all = [confirm, patience, lockout];
                let narrow = all.iter().all(|p| p.make <= 255 && p.break_ <= 255);
                if narrow {
                    // Each was just compared with the width.
                    let [confirm, patience, lockout] = all.map(|p| (p.make as u8, p.break_ as u8));
                    let narrowed = StateMachineParameters::<u8>::confirm(confirm.0, confirm.1)
                        .patience(patience.0, patience.1)
                        .lockout(lockout.0, lockout.1);
                    StateMachine::<u8>::try_new(narrowed).map(Self::StateMachine8)
                } else {
                    let wide = StateMachineParameters { confirm, patience, lockout };
                    StateMachine::<u16>::try_new(wide).map(Self::StateMachine16)
                }
            }
        }
    }

    /// What the closed form says of it.
    #[must_use]
    pub fn verdict(&self, envelope: &Envelope) -> Verdict {
        with_law!(self, law => law.verdict(envelope))
    }

    /// Its table of states.
    ///
    /// # Errors
    /// When it has too many states.
    pub fn table(&self) -> Result<LawTable, ProveError> {
        with_law!(self, law => LawTable::of(law))
    }

    /// RAM for each input, in bytes, with the parameters in flash.
    #[must_use]
    pub fn state_bytes(&self) -> u32 {
        // A state is a handful of bytes.
        with_law!(self, law => size_of_state(law) as u32)
    }

    /// What the law reports for samples one after the other, begun settled at `start`: the output after each.
    #[must_use]
    pub fn outputs(&self, start: Position, samples: &[Position]) -> Vec<Position> {
        with_law!(self, law => outputs(law, start, samples))
    }
}

fn size_of_state<L: Machine>(_: &L) -> usize {
    size_of::<L::State>()
}

fn outputs<L: Law>(law: &L, start: Position, samples: &[Position]) -> Vec<Position> {
    let mut state = law.rest(start);
    let one = |&sample: &Position| {
        let _edge: Option<Change> = law.step(&mut state, sample);
        law.output(&state)
    };
    samples.iter().map(one).collect()
}
