//! Everything that is measured.

use debounce_core::{
    Bank, BankState, Chain, Change, Config, ConstLaw, EdgeRule, Integrator, Law, Machine, MajorityRegister,
    PatientBank, PatientState, Position, ShiftRegister, StateMachine, StateMachineParameters, TableLaw,
};
use rig::Counter;

use crate::measure::{Feed, measure, next, report, report_lanes};

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
            pub(super) unsafe extern "C" fn inlined(feed: *mut Feed, state: *mut State) {
                // SAFETY: the caller gives a feed with room for the notes, and a state.
                while let Some(place) = unsafe { next(feed) } {
                    // SAFETY: the same.
                    let change = unsafe { LAW.step(&mut *state, *place) };
                    if let Some(change) = change {
                        report(change);
                    }
                }
            }

            #[inline(never)]
            pub(super) unsafe extern "C" fn called(feed: *mut Feed, state: *mut State) {
                // SAFETY: the caller gives a feed with room for the notes, and a state.
                while let Some(place) = unsafe { next(feed) } {
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
        measure::<Position, _>(counter, format_args!("{} rust inlined", stringify!($name)), || start, $name::inlined);
        measure::<Position, _>(counter, format_args!("{} rust called", stringify!($name)), || start, $name::called);
    )*}};
}

laws! {
    integrator: Integrator = Integrator::<u8>::new(16);
    shift_register: ShiftRegister = ShiftRegister::new(16);
    majority_register: MajorityRegister = MajorityRegister::<u8>::new(5, 8);
    state_machine: StateMachine = StateMachine::<u8>::new(StateMachineParameters::confirm(16, 16));
    patient_state_machine: StateMachine =
        StateMachine::<u8>::new(StateMachineParameters::confirm(3, 3).patience(3, 3).lockout(4, 4));
    chain: Chain<MajorityRegister, StateMachine> = Chain::new(
        MajorityRegister::<u8>::new(2, 3),
        StateMachine::<u8>::new(StateMachineParameters::confirm(3, 3)),
    );
    table: TableLaw<'static> = TableLaw::new(&ROWS, 2, [0, 2]);
}

/// A logic of three states as a table: two closed samples in a row make, one open sample breaks.
static ROWS: [[u8; 2]; 3] = [[0, 1], [0, 2], [0, 2]];

/// A bank of 32 inputs: stepped only, its output being in its state; and the lanes that changed looked at.
macro_rules! banks {
    ($($name:ident: $bank:ty, $state:ty = $value:expr;)*) => {$(
        mod $name {
            use super::*;

            const BANK: $bank = $value;

            #[unsafe(export_name = concat!("cost_rust_", stringify!($name), "_step"))]
            #[inline(never)]
            fn step(state: &mut $state, port: u32) {
                let _ = BANK.step(state, port);
            }

            #[inline(never)]
            unsafe extern "C" fn inlined(feed: *mut Feed, state: *mut $state) {
                // SAFETY: the caller gives a feed with room for the notes, and a state.
                while let Some(place) = unsafe { next(feed) } {
                    // SAFETY: the same.
                    let _ = unsafe { BANK.step(&mut *state, *place) };
                }
            }

            #[inline(never)]
            unsafe extern "C" fn looked_at(feed: *mut Feed, state: *mut $state) {
                // SAFETY: the caller gives a feed with room for the notes, and a state.
                while let Some(place) = unsafe { next(feed) } {
                    // SAFETY: the same.
                    let changes = unsafe { BANK.step(&mut *state, *place) };
                    if !changes.is_none() {
                        report_lanes(changes.make, changes.break_);
                    }
                }
            }

            #[inline(never)]
            unsafe extern "C" fn called(feed: *mut Feed, state: *mut $state) {
                // SAFETY: the caller gives a feed with room for the notes, and a state.
                while let Some(place) = unsafe { next(feed) } {
                    // SAFETY: the same.
                    unsafe { step(&mut *state, *place) };
                }
            }

            pub(super) fn measured(counter: &Counter) {
                let (name, start) = (stringify!($name), BANK.all_open());
                measure::<u32, _>(counter, format_args!("{name} rust inlined"), || start, inlined);
                measure::<u32, _>(counter, format_args!("{name} rust looked-at"), || start, looked_at);
                measure::<u32, _>(counter, format_args!("{name} rust called"), || start, called);
            }
        }
    )*

    fn banks(counter: &Counter) {$(
        $name::measured(counter);
    )*}};
}

// Pull-ups throughout: every lane inverted.
banks! {
    bank_of_2_bits: Bank<u32, 2>, BankState<u32, 2> = Bank::new(u32::MAX);
    bank_of_3_bits: Bank<u32, 3>, BankState<u32, 3> = Bank::new(u32::MAX);
    patient_bank: PatientBank<u32, 2, 2, 3>, PatientState<u32, 2, 2, 3> = {
        let rule = EdgeRule::new(3).patience(3).lockout(4);
        PatientBank::new(u32::MAX, rule, rule)
    };
}

/// The same methods in plain C; the state begins as zeroes, which is settled open.
#[cfg(with_c)]
macro_rules! plain_c {
    ($($name:ident: $sample:ty, $state:ty, $inlined:ident, $called:ident;)*) => {
        unsafe extern "C" {$(
            fn $inlined(feed: *mut Feed, state: *mut $state);
            fn $called(feed: *mut Feed, state: *mut $state);
        )*}

        fn plain_c(counter: &Counter) {$(
            measure::<$sample, _>(counter, format_args!("{} c inlined", stringify!($name)), <$state>::default, $inlined);
            measure::<$sample, _>(counter, format_args!("{} c called", stringify!($name)), <$state>::default, $called);
        )*}
    };
}

#[cfg(with_c)]
plain_c! {
    integrator: Position, [u8; 2], cost_c_integrator_inlined, cost_c_integrator_called;
    shift_register: Position, [u8; 4], cost_c_shift_register_inlined, cost_c_shift_register_called;
    majority_register: Position, [u8; 2], cost_c_majority_register_inlined, cost_c_majority_register_called;
    state_machine: Position, [u8; 2], cost_c_state_machine_inlined, cost_c_state_machine_called;
    patient_state_machine: Position, [u8; 4], cost_c_patient_state_machine_inlined, cost_c_patient_state_machine_called;
    bank_of_2_bits: u32, [u32; 3], cost_c_bank_of_2_bits_inlined, cost_c_bank_of_2_bits_called;
    bank_of_3_bits: u32, [u32; 4], cost_c_bank_of_3_bits_inlined, cost_c_bank_of_3_bits_called;
}

/// Measures all, one row each.
pub(crate) fn all(counter: &Counter) {
    laws(counter);
    banks(counter);
    #[cfg(with_c)]
    plain_c(counter);
}
