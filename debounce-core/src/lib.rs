//! Debouncing laws for mechanical contacts.
#![no_std]
#![forbid(unsafe_code)]

mod bank;
mod envelope;
mod law;
mod machine;
mod time;

pub use bank::{
    Bank, BankState, Changes, EdgeRule, Lane, PatientBank, PatientState, PortLaw, Started, StartingBank,
    StartingState, Word,
};
pub use envelope::{Bounds, Clause, Envelope, Latency, PerChange, PerPosition, Verdict};
pub use law::{Law, is_settled};
pub use machine::{Change, Machine, Position};
pub use time::{Period, TickClock};
