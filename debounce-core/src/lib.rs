//! Debouncing laws for mechanical contacts.
#![no_std]
#![forbid(unsafe_code)]

mod closed_form;
mod count;
mod envelope;
mod error;
mod integrator;
mod law;
mod machine;
mod majority_register;
mod shift_register;
mod state_machine;
mod table;
mod time;

pub use count::Count;
pub use envelope::{Bounds, Clause, Envelope, Latency, PerChange, PerPosition, Verdict};
pub use error::{Parameter, ParameterError};
pub use integrator::{Integrator, IntegratorState};
pub use law::{Law, is_settled};
pub use machine::{Change, Machine, Position};
pub use majority_register::{MajorityRegister, MajorityRegisterState, WindowWord};
pub use shift_register::{ShiftRegister, ShiftRegisterState};
pub use state_machine::{Phase, StateMachine, StateMachineParameters, StateMachineState};
pub use table::{TableLaw, TableLawError, TableState};
pub use time::{Period, TickClock};
