//! Everything that is measured.

use debounce_core::{
    Change, Config, ConstLaw, Integrator, Law, Machine, MajorityRegister, Position, ShiftRegister,
    StateMachine, StateMachineParameters,
};
use rig::Counter;

use crate::measure::{Feed, measure, next, report};

/// A law with constant parameters: inlined into the loop, and as a function that the loop calls.
macro_rules! laws {
    ($($name:ident: $law:ty = $value:expr;)*) => {$(
        mod $name {
            use super::*;

            pub(super) struct Parameters;

            impl Config for Parameters {
                type Law = $law;
                const LAW: $law = $value;
            }

            pub(super) type State = <$law as Machine>::State;

            const LAW: ConstLaw<Parameters> = ConstLaw::new();

            // Its size is the flash that the law takes; the name is how it is found.
            #[unsafe(export_name = concat!("cost_rust_", stringify!($name), "_step"))]
            #[inline(never)]
            fn step(state: &mut State, sample: Position) -> Option<Change> {
                LAW.step(state, sample)
            }

            #[inline(never)]
            pub(super) unsafe extern "C" fn inlined(feed: *mut Feed, end: *const Position, state: *mut State) {
                loop {
                    // SAFETY: the caller gives a feed with room for the notes, and a state.
                    let place = unsafe { next(feed) };
                    if place == end {
                        break;
                    }
                    // SAFETY: the same.
                    let change = unsafe { LAW.step(&mut *state, *place) };
                    if let Some(change) = change {
                        report(change);
                    }
                }
            }

            #[inline(never)]
            pub(super) unsafe extern "C" fn called(feed: *mut Feed, end: *const Position, state: *mut State) {
                loop {
                    // SAFETY: the caller gives a feed with room for the notes, and a state.
                    let place = unsafe { next(feed) };
                    if place == end {
                        break;
                    }
                    // SAFETY: the same.
                    let change = unsafe { step(&mut *state, *place) };
                    if let Some(change) = change {
                        report(change);
                    }
                }
            }
        }
    )*

    fn laws(counter: &Counter) {$(
        let start = ConstLaw::<$name::Parameters>::new().rest(Position::Open);
        measure(counter, format_args!("{} rust inlined", stringify!($name)), start, $name::inlined);
        measure(counter, format_args!("{} rust called", stringify!($name)), start, $name::called);
    )*}};
}

laws! {
    integrator: Integrator = Integrator::<u8>::new(16);
    shift_register: ShiftRegister = ShiftRegister::new(16);
    majority_register: MajorityRegister = MajorityRegister::<u8>::new(5, 8);
    state_machine: StateMachine = StateMachine::<u8>::new(StateMachineParameters::confirm(16, 16));
    patient_state_machine: StateMachine =
        StateMachine::<u8>::new(StateMachineParameters::confirm(3, 3).patience(3, 3).lockout(4, 4));
}

/// The same methods in plain C; the state begins as zeroes, which is settled open.
#[cfg(with_c)]
macro_rules! plain_c {
    ($($name:ident: $bytes:literal, $inlined:ident, $called:ident;)*) => {
        unsafe extern "C" {$(
            fn $inlined(feed: *mut Feed, end: *const Position, state: *mut [u8; $bytes]);
            fn $called(feed: *mut Feed, end: *const Position, state: *mut [u8; $bytes]);
        )*}

        fn plain_c(counter: &Counter) {$(
            measure(counter, format_args!("{} c inlined", stringify!($name)), [0; $bytes], $inlined);
            measure(counter, format_args!("{} c called", stringify!($name)), [0; $bytes], $called);
        )*}
    };
}

#[cfg(with_c)]
plain_c! {
    integrator: 2, cost_c_integrator_inlined, cost_c_integrator_called;
    shift_register: 4, cost_c_shift_register_inlined, cost_c_shift_register_called;
    majority_register: 2, cost_c_majority_register_inlined, cost_c_majority_register_called;
    state_machine: 2, cost_c_state_machine_inlined, cost_c_state_machine_called;
    patient_state_machine: 4, cost_c_patient_state_machine_inlined, cost_c_patient_state_machine_called;
}

/// Measures all, one row each.
pub(crate) fn all(counter: &Counter) {
    laws(counter);
    #[cfg(with_c)]
    plain_c(counter);
}
