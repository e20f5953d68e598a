//! Invented contacts: seeded, with the truth beside the recording, and the same bytes on every platform.
//!
//! Everything is integer arithmetic on nanoseconds, drawn from ChaCha8 with one stream per operation, so that a
//! change to one operation leaves all others as they were.

mod arithmetic;
pub mod contact;
mod dice;
pub mod disturbance;
pub mod file;
mod kinds;
mod line;
pub mod panel;
pub mod part;
pub mod pickup;
pub mod preset;
pub mod routine;
pub mod scenario;
pub mod stage;
pub mod truth_file;
mod write;

pub use contact::{Bounce, ContactModel, SecondBurst, flight_times};
pub use dice::{Between, Dice};
pub use disturbance::Disturbances;
pub use panel::{Made, MadeLine, MadeTurn, Panel, PanelContact};
pub use part::{Actuation, Chatter, Contact, SpeedEffect, Touch, Wear};
pub use pickup::{BurstRate, Disturber, Pickup, Timing};
pub use preset::{Measured, Preset, Source, Standing};
pub use routine::{Habit, Routine};
pub use scenario::{Generated, Noise, Scenario};
pub use stage::InputStage;
pub use truth_file::{TruthRow, changes_of, parse_truth, read_truth, write_truth};
pub use write::{write_levels_csv, write_volts_csv};
