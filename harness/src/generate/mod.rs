//! Invented contacts: seeded, with the truth beside the recording, and the same bytes on every platform.
//!
//! Everything is integer arithmetic on nanoseconds, drawn from ChaCha8 with one stream per operation, so that a
//! change to one operation leaves all others as they were.

pub mod contact;
mod dice;
pub mod disturbance;
pub mod scenario;

pub use contact::{Bounce, ContactModel, SecondBurst, flight_times};
pub use dice::{Between, Dice};
pub use disturbance::Disturbances;
pub use scenario::{Generated, Noise, Scenario};
