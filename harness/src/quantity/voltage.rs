//! A voltage, for the thresholds of an analogue recording.

use std::fmt;
use std::str::FromStr;

use super::decimal::{Manner, Unit, split};
use super::{Quantity, QuantityError};

/// A voltage in whole microvolts, written "0.8 V" or "800 mV"; it may be below zero.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
pub struct Voltage(i64);

const MANNER: Manner = Manner { name: "a voltage", units: &["V", "mV", "uV"] };
const UNITS: &[Unit] =
    &[("V", 1_000_000), ("mV", 1_000), ("uV", 1), ("µV", 1), ("μV", 1), ("kV", 1_000_000_000)];

impl Voltage {
    /// A voltage of `microvolts`.
    #[must_use]
    pub const fn from_microvolts(microvolts: i64) -> Self {
        Self(microvolts)
    }

    /// The microvolts.
    #[must_use]
    pub const fn microvolts(self) -> i64 {
        self.0
    }

    /// The voltage in volts.
    #[must_use]
    pub fn volts(self) -> f64 {
        // A threshold of more than 2^53 microvolts (9 GV) does not occur.
        self.0 as f64 / 1e6
    }
}

impl Quantity for Voltage {
    const NAME: &'static str = MANNER.name;
    const EXAMPLE: &'static str = "0.8 V";
}

impl FromStr for Voltage {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        let written = split(text, &MANNER)?;
        let size = written.unit_size(UNITS, &MANNER)?;
        let magnitude = i64::try_from(written.magnitude(size, "1 uV")?).map_err(|_| {
            QuantityError::new(
                format!("\"{}\" is too large", written.text),
                "write a voltage such as \"0.8 V\"",
            )
        })?;
        Ok(Self(if written.number.negative { -magnitude } else { magnitude }))
    }
}

impl fmt::Display for Voltage {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let sign = if self.0 < 0 { "-" } else { "" };
        let (whole, part) = (self.0.unsigned_abs() / 1_000_000, self.0.unsigned_abs() % 1_000_000);
        if part == 0 {
            return write!(f, "{sign}{whole} V");
        }
        write!(f, "{sign}{whole}.{} V", format!("{part:06}").trim_end_matches('0'))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn reads(text: &str, microvolts: i64, shown: &str) {
        assert_eq!(text.parse(), Ok(Voltage(microvolts)), "for {text}");
        assert_eq!(Voltage(microvolts).to_string(), shown);
    }

    #[test]
    fn voltage_of_either_sign_is_read_exactly() {
        reads("0.8 V", 800_000, "0.8 V");
        reads("800 mV", 800_000, "0.8 V");
        reads("-1.25 V", -1_250_000, "-1.25 V");
        reads("2 V", 2_000_000, "2 V");
        reads("0 V", 0, "0 V");
    }

    #[test]
    fn voltage_without_unit_is_refused() {
        let error = "2.0".parse::<Voltage>().expect_err("no unit");
        assert_eq!(error.to_string(), "\"2.0\" has no unit; write \"2.0 V\" or \"2.0 mV\"");
    }
}
