//! Debouncing laws for mechanical contacts.
#![no_std]
#![forbid(unsafe_code)]

mod closed_form;
mod const_law;
mod count;
mod envelope;
mod error;
mod integrator;
mod law;
mod machine;
mod majority_register;
mod running;
mod shift_register;
mod starting;
mod state_machine;
mod time;
mod wiring;
#[cfg(test)]
mod words;

pub use const_law::{Config, ConstLaw};
pub use count::Count;
pub use envelope::{Bounds, Clause, Envelope, Latency, PerChange, PerPosition, Verdict};
pub use error::{Parameter, ParameterError};
pub use integrator::{Integrator, IntegratorState};
pub use law::{Law, is_settled};
pub use machine::{Change, Machine, Position};
pub use majority_register::{MajorityRegister, MajorityRegisterState, WindowWord};
pub use running::Running;
pub use shift_register::{ShiftRegister, ShiftRegisterState};
pub use starting::{Started, Starting, StartingState};
pub use state_machine::{Phase, StateMachine, StateMachineParameters, StateMachineState};
pub use time::{Period, TickClock};
#[cfg(feature = "embedded-hal")]
pub use wiring::DebouncedPin;
pub use wiring::Polarity;
