use debounce_core::{Config, StateMachine, StateMachineParameters};

pub struct Door;

impl Config for Door {
    type Law = StateMachine;
    const LAW: StateMachine = StateMachine::<u8>::new(StateMachineParameters::confirm(2, 2).patience(1, 0));
}

pub fn law() -> StateMachine {
    Door::LAW
}
