//! A share of a whole, in parts per million.

use std::fmt;
use std::str::FromStr;

use super::decimal::{Manner, Unit, split};
use super::{Quantity, QuantityError};

/// A share in whole parts per million, written "10 %" or "500 ppm".
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
pub struct Share(u32);

const MANNER: Manner = Manner { name: "a share", units: &["%", "ppm"] };
const UNITS: &[Unit] = &[("%", 10_000), ("ppm", 1)];

impl Share {
    /// A share of `ppm` parts per million.
    #[must_use]
    pub const fn from_ppm(ppm: u32) -> Self {
        Self(ppm)
    }

    /// A share of `percent` hundredths.
    #[must_use]
    pub const fn from_percent(percent: u16) -> Self {
        Self(percent as u32 * 10_000)
    }

    /// Parts per million.
    #[must_use]
    pub const fn ppm(self) -> u32 {
        self.0
    }

    /// The share as a number: 10 % is 0.1.
    #[must_use]
    pub fn fraction(self) -> f64 {
        f64::from(self.0) / 1e6
    }
}

impl Quantity for Share {
    const NAME: &'static str = MANNER.name;
    const EXAMPLE: &'static str = "10 %";
}

impl FromStr for Share {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        let written = split(text, &MANNER)?;
        let size = written.unit_size(UNITS, &MANNER)?;
        let ppm = written.whole(size, "1 ppm", &MANNER)?;
        u32::try_from(ppm).map(Self).map_err(|_| {
            QuantityError::new(format!("\"{}\" is too large", written.text), "write a share such as \"10 %\"")
        })
    }
}

impl fmt::Display for Share {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.0 != 0 && self.0 < 1_000 {
            return write!(f, "{} ppm", self.0);
        }
        let (whole, part) = (self.0 / 10_000, self.0 % 10_000);
        if part == 0 {
            return write!(f, "{whole} %");
        }
        write!(f, "{whole}.{} %", format!("{part:04}").trim_end_matches('0'))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn reads(text: &str, ppm: u32, shown: &str) {
        assert_eq!(text.parse(), Ok(Share(ppm)), "for {text}");
        assert_eq!(Share(ppm).to_string(), shown);
    }

    #[test]
    fn share_in_percent_or_ppm_is_exact() {
        reads("10 %", 100_000, "10 %");
        reads("10%", 100_000, "10 %");
        reads("99.99 %", 999_900, "99.99 %");
        reads("500 ppm", 500, "500 ppm");
        reads("1000 ppm", 1_000, "0.1 %");
        reads("0 %", 0, "0 %");
    }

    #[test]
    fn share_without_unit_or_too_fine_is_refused() {
        let refuses = |text: &str| text.parse::<Share>().expect_err(text).to_string();
        assert_eq!(refuses("0.95"), "\"0.95\" has no unit; write \"0.95 %\" or \"0.95 ppm\"");
        assert_eq!(refuses("0.00001 %"), "\"0.00001 %\" is finer than 1 ppm; write a multiple of 1 ppm");
        assert_eq!(refuses("1000000 %"), "\"1000000 %\" is too large; write a share such as \"10 %\"");
    }
}
