//! The built-in demonstration. Everything in it is invented.
//!
//! The vent push-button on the control panel of a greenhouse that does not exist: a hand presses it 60 times; a
//! pump relay in the same cable disturbs the line now and then, sometimes just after a bounce; once the hand
//! presses twice in quick succession.

pub mod vent_button;

/// The recording as a file: a VCD with one channel, `1` is closed. Made by [`vent_button::file`].
pub const RECORDING: &[u8] = include_bytes!("vent_button.vcd");

/// The sample period of the recorder in the story; a VCD does not carry it.
pub const RESOLUTION_NS: u64 = 1_000;

/// What the messages call the recording.
pub const RECORDING_NAME: &str = "vent_button.vcd (built-in, invented)";

/// The requirement, as a requirement file.
pub const REQUIREMENT: &str = include_str!("contact.toml");

/// What the messages call the requirement.
pub const REQUIREMENT_NAME: &str = "contact.toml (built-in, invented)";
