//! Debouncing laws for mechanical contacts.
#![no_std]
#![forbid(unsafe_code)]

mod envelope;
mod law;
mod machine;
mod time;

pub use envelope::{Bounds, Clause, Envelope, Latency, PerChange, PerPosition, Verdict};
pub use law::{Law, is_settled};
pub use machine::{Change, Machine, Position};
pub use time::{Period, TickClock};
