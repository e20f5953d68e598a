use debounce_core::{
    Config, Integrator, MajorityRegister, Period, ShiftRegister, StateMachine, StateMachineParameters, TickClock,
};

pub const ONE: Integrator = Integrator::<u8>::new(1);
pub const WHOLE: Integrator<u16> = Integrator::<u16>::with_steps(300, 1, 300);
pub const SHORT: ShiftRegister = ShiftRegister::new(1);
pub const LONG: ShiftRegister = ShiftRegister::new(64);
pub const HALF: MajorityRegister<u16> = MajorityRegister::<u16>::new(7, 12);
pub const ALL: MajorityRegister = MajorityRegister::<u8>::new(5, 5);
pub const FULL: MajorityRegister<u32> = MajorityRegister::<u32>::new(17, 32);
pub const FIRST: StateMachine = StateMachine::<u8>::new(StateMachineParameters::confirm(1, 4));
pub const TICK: Period = Period::from_hz(1);
pub const CLOCK: TickClock = TickClock::new(TICK).tolerance_ppm(999_999);

pub struct Door;

impl Config for Door {
    type Law = StateMachine;
    const LAW: StateMachine = StateMachine::<u8>::new(StateMachineParameters::confirm(2, 2).patience(1, 1));
}
