//! What a reader is told about a file beyond what the file says itself.

use super::{Level, Polarity, Unknown};

/// Two voltages with hysteresis: high from the upper one up, low from the lower one down, else as before.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Thresholds {
    falling_v: f64,
    rising_v: f64,
}

/// Why two voltages are no pair of thresholds.
#[derive(Clone, Copy, PartialEq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum ThresholdError {
    /// One of them is not a finite number.
    #[error("thresholds of {falling_v} V and {rising_v} V are not both finite")]
    NotFinite {
        /// The given falling threshold.
        falling_v: f64,
        /// The given rising threshold.
        rising_v: f64,
    },
    /// There is no hysteresis between them.
    #[error("falling threshold of {falling_v} V must lie below the rising threshold of {rising_v} V")]
    OutOfOrder {
        /// The given falling threshold.
        falling_v: f64,
        /// The given rising threshold.
        rising_v: f64,
    },
}

impl Thresholds {
    /// Thresholds in volts.
    ///
    /// # Errors
    /// Both must be finite, and `falling_v` below `rising_v`.
    pub fn try_new(falling_v: f64, rising_v: f64) -> Result<Self, ThresholdError> {
        if !(falling_v.is_finite() && rising_v.is_finite()) {
            return Err(ThresholdError::NotFinite { falling_v, rising_v });
        }
        if falling_v >= rising_v {
            return Err(ThresholdError::OutOfOrder { falling_v, rising_v });
        }
        Ok(Self { falling_v, rising_v })
    }

    /// At or below this voltage the line is low.
    #[must_use]
    pub fn falling_v(&self) -> f64 {
        self.falling_v
    }

    /// At or above this voltage the line is high.
    #[must_use]
    pub fn rising_v(&self) -> f64 {
        self.rising_v
    }

    /// The level a voltage forces, or none between the thresholds, where the line keeps its level.
    #[must_use]
    pub fn level(&self, volts: f64) -> Option<Level> {
        if volts >= self.rising_v {
            Some(Level::High)
        } else if volts <= self.falling_v {
            Some(Level::Low)
        } else {
            None
        }
    }
}

/// The unit of a column of times, or of the time marks of a VCD that does not state its own.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[non_exhaustive]
pub enum TimeUnit {
    /// s
    Seconds,
    /// ms
    Milliseconds,
    /// us
    Microseconds,
    /// ns
    Nanoseconds,
    /// ps
    Picoseconds,
    /// fs
    Femtoseconds,
}

impl TimeUnit {
    /// The power of ten of a second: 0 for s, −3 for ms, and so on.
    #[must_use]
    pub fn power_of_ten(self) -> i32 {
        match self {
            Self::Seconds => 0,
            Self::Milliseconds => -3,
            Self::Microseconds => -6,
            Self::Nanoseconds => -9,
            Self::Picoseconds => -12,
            Self::Femtoseconds => -15,
        }
    }

    /// Reads a unit in the spellings that recorders use: `ms`, `msec`, `milliseconds`, `µs`.
    #[must_use]
    pub fn parse(text: &str) -> Option<Self> {
        // The upper-case spellings are left out on purpose: "MS" may well be mega-samples.
        let unit = match text.trim().trim_end_matches('.') {
            "s" | "S" | "sec" | "secs" | "Sec" | "SEC" => Self::Seconds,
            "ms" | "msec" | "mSec" => Self::Milliseconds,
            "us" | "usec" | "uSec" | "\u{b5}s" | "\u{3bc}s" | "\u{b5}sec" | "\u{3bc}sec" => {
                Self::Microseconds
            }
            "ns" | "nsec" | "nSec" => Self::Nanoseconds,
            "ps" | "psec" => Self::Picoseconds,
            "fs" => Self::Femtoseconds,
            long => match long.to_ascii_lowercase().trim_end_matches('s') {
                "second" => Self::Seconds,
                "millisecond" => Self::Milliseconds,
                "microsecond" => Self::Microseconds,
                "nanosecond" => Self::Nanoseconds,
                "picosecond" => Self::Picoseconds,
                "femtosecond" => Self::Femtoseconds,
                _ => return None,
            },
        };
        Some(unit)
    }
}

/// What stands between the fields of a row.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[non_exhaustive]
pub enum Delimiter {
    /// `,`
    Comma,
    /// `;`
    Semicolon,
    /// A tabulator.
    Tab,
    /// Any run of spaces or tabulators.
    Space,
}

/// What stands between the whole and the fraction of a number.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[non_exhaustive]
pub enum DecimalMark {
    /// `1.5`
    Point,
    /// `1,5`
    Comma,
}

/// How to read a recording. [`Default`] lets the file speak for itself.
#[derive(Clone, PartialEq, Debug, Default)]
#[non_exhaustive]
pub struct ReadOptions {
    /// The channel: a hierarchical name, a unique ending of one, or a column name or number (from 1).
    /// May be left out where the file has just one.
    pub channel: Option<String>,
    /// How the contact is wired.
    pub polarity: Polarity,
    /// What to make of values that are neither 0 nor 1.
    pub unknown: Unknown,
    /// For a channel in volts: where it turns into levels.
    pub thresholds: Option<Thresholds>,
    /// CSV: the column of times, by name or number (from 1).
    pub time_column: Option<String>,
    /// The unit of the times, where the file does not say or says it wrong.
    pub time_unit: Option<TimeUnit>,
    /// CSV: the column of times holds the numbers of samples that lie so far apart.
    pub sample_period_ns: Option<u64>,
    /// The recorder's sample period, where the file does not show it: a VCD shows only its time scale.
    pub resolution_ns: Option<u64>,
    /// CSV: the delimiter.
    pub delimiter: Option<Delimiter>,
    /// CSV: the decimal mark.
    pub decimal_mark: Option<DecimalMark>,
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn thresholds_levels_change_exactly_on_the_threshold() {
        let pair = Thresholds::try_new(0.8, 2.0).expect("in order");
        assert_eq!(pair.level(2.0), Some(Level::High));
        assert_eq!(pair.level(2.0_f64.next_down()), None);
        assert_eq!(pair.level(0.8_f64.next_up()), None);
        assert_eq!(pair.level(0.8), Some(Level::Low));
    }

    #[test]
    fn thresholds_without_hysteresis_are_refused() {
        assert_eq!(
            Thresholds::try_new(2.0, 2.0).expect_err("equal").to_string(),
            "falling threshold of 2 V must lie below the rising threshold of 2 V"
        );
        assert!(Thresholds::try_new(f64::NAN, 2.0).is_err());
        assert!(Thresholds::try_new(0.0, f64::INFINITY).is_err());
    }

    #[test]
    fn time_unit_spellings_are_understood() {
        for (text, unit) in [
            ("s", Some(TimeUnit::Seconds)),
            ("Second", Some(TimeUnit::Seconds)),
            ("msec", Some(TimeUnit::Milliseconds)),
            ("\u{b5}s", Some(TimeUnit::Microseconds)),
            ("\u{3bc}s", Some(TimeUnit::Microseconds)),
            ("Nanoseconds", Some(TimeUnit::Nanoseconds)),
            ("ps", Some(TimeUnit::Picoseconds)),
            ("fs", Some(TimeUnit::Femtoseconds)),
            ("MS", None),
            ("V", None),
            ("", None),
        ] {
            assert_eq!(TimeUnit::parse(text), unit, "{text:?}");
        }
    }
}
