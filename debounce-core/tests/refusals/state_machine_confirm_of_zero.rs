use debounce_core::{StateMachine, StateMachineParameters};

pub const LAW: StateMachine = StateMachine::<u8>::new(StateMachineParameters::confirm(0, 4));
