//! Quantities as people write them, "12 ms", "30 Hz", "500 ppm", read exactly and written back readably.
//!
//! No floating point takes part: a quantity is a decimal number and a unit, and either it is a whole number
//! of the finest unit or it is an error. A rate stays a ratio, so 30 Hz is 1/30 s.

mod count;
mod decimal;
mod electrical;
mod part;
mod period;
mod share;
mod time;
mod voltage;

use std::str::FromStr;

pub use count::{Bytes, Instructions, Ticks, counted};
pub use electrical::{Capacitance, Current, Resistance, ShortTime};
pub use part::{Part, Spread, TemperatureCode, VoltageRange};
pub use period::TickPeriod;
pub use share::Share;
pub use time::{Rounding, ShownTime, Time};
pub use voltage::Voltage;

/// A kind of quantity that can be read from text.
pub trait Quantity: FromStr<Err = QuantityError> + Clone + PartialEq {
    /// What it is called in messages, with its article: "a time".
    const NAME: &'static str;
    /// One way to write it: "12 ms".
    const EXAMPLE: &'static str;
}

/// Why a text is not the quantity it should be.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[error("{message}; {help}")]
pub struct QuantityError {
    message: String,
    help: String,
}

impl QuantityError {
    fn new(message: impl Into<String>, help: impl Into<String>) -> Self {
        Self { message: message.into(), help: help.into() }
    }

    /// What is wrong, with the value.
    #[must_use]
    pub fn message(&self) -> &str {
        &self.message
    }

    /// What to write instead.
    #[must_use]
    pub fn help(&self) -> &str {
        &self.help
    }
}
