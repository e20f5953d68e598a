//! Invented contacts: seeded, with the truth beside the recording, and the same bytes on every platform.
//!
//! Everything is integer arithmetic on nanoseconds, drawn from ChaCha8 with one stream per operation, so that a
//! change to one operation leaves all others as they were.

mod arithmetic;
pub mod contact;
mod dice;
pub mod disturbance;
mod kinds;
pub mod part;
pub mod preset;
pub mod scenario;
pub mod stage;

pub use contact::{Bounce, ContactModel, SecondBurst, flight_times};
pub use dice::{Between, Dice};
pub use disturbance::Disturbances;
pub use part::{Actuation, Chatter, Contact, SpeedEffect, Touch, Wear};
pub use preset::{Measured, Preset, Source, Standing};
pub use scenario::{Generated, Noise, Scenario};
pub use stage::InputStage;
