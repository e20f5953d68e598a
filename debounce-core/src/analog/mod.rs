//! From ADC counts to samples: [`Hysteresis`] for one contact, [`Ladder`] for keys on a resistor ladder.

mod hysteresis;
mod ladder;
mod ladder_parts;

pub use hysteresis::{AnalogSample, Hysteresis, HysteresisError, HysteresisState};
pub use ladder::{Ladder, LadderReading, Window};
pub use ladder_parts::{Chord, LadderError, LadderParts};
