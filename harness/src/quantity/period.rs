//! A tick period, written as a time or as a rate, held exactly.

use std::cmp::Ordering;
use std::fmt;
use std::str::FromStr;

use debounce_core::Period;

use super::decimal::{Manner, Unit, split};
use super::time::{self, Time};
use super::{Quantity, QuantityError};

/// A tick period, written "1 ms" or "30 Hz".
///
/// # Examples
/// ```
/// use debounce_core::Period;
/// use harness::quantity::TickPeriod;
/// let tick: TickPeriod = "30 Hz".parse().unwrap();
/// assert_eq!(tick.period(), Period::from_hz(30));
/// assert_eq!(tick.to_string(), "30 Hz");
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct TickPeriod(Period);

const MANNER: Manner = Manner { name: "a tick period", units: &["ms", "Hz", "us", "ns", "s", "kHz", "MHz"] };
const RATES: &[Unit] = &[("Hz", 1), ("kHz", 1_000), ("MHz", 1_000_000)];
const NS_PER_S: u128 = 1_000_000_000;

impl TickPeriod {
    /// A period of whole nanoseconds, or `None` for 0.
    #[must_use]
    pub fn try_from_ns(ns: u64) -> Option<Self> {
        Period::try_from_ratio(ns, 1).map(Self)
    }

    /// The same period as the core crate holds it.
    #[must_use]
    pub const fn period(self) -> Period {
        self.0
    }

    /// The period to the nearest nanosecond.
    #[must_use]
    pub fn nearest_ns(self) -> u64 {
        let denominator = u64::from(self.0.denominator());
        let (whole, rest) = (self.0.numerator_ns() / denominator, self.0.numerator_ns() % denominator);
        whole + u64::from(rest >= denominator.div_ceil(2) && rest > 0)
    }

    /// Ticks in a second, for display and ranking.
    #[must_use]
    pub fn ticks_per_second(self) -> f64 {
        // Both conversions round to 53 bits, far finer than anything shown.
        1e9 * f64::from(self.0.denominator()) / self.0.numerator_ns() as f64
    }
}

impl From<Period> for TickPeriod {
    fn from(period: Period) -> Self {
        Self(period)
    }
}

impl PartialOrd for TickPeriod {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for TickPeriod {
    fn cmp(&self, other: &Self) -> Ordering {
        let cross = |a: Period, b: Period| u128::from(a.numerator_ns()) * u128::from(b.denominator());
        cross(self.0, other.0).cmp(&cross(other.0, self.0))
    }
}

impl Quantity for TickPeriod {
    const NAME: &'static str = MANNER.name;
    const EXAMPLE: &'static str = "1 ms";
}

impl FromStr for TickPeriod {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        let written = split(text, &MANNER)?;
        if written.number.digits == 0 {
            return Err(QuantityError::new(
                format!("\"{}\" is no tick period", written.text),
                "write a period or a rate above zero, \"1 ms\" or \"1 kHz\"",
            ));
        }
        let rate = RATES.iter().find(|(name, _)| *name == written.unit);
        let Some((_, per_second)) = rate else {
            let all: Vec<Unit> = time::UNITS.iter().chain(RATES).copied().collect();
            let size = written.unit_size(&all, &MANNER)?;
            let ns = written.whole(size, "1 ns", &MANNER)?;
            return Period::try_from_ratio(ns, 1).map(Self).ok_or_else(|| out_of_reach(written.text));
        };
        written.whole(*per_second * NS_PER_S as u64, "1 nHz", &MANNER)?;
        // 1 s / (digits / 10^scale * unit) = 10^(9 + scale) / (digits * unit) ns.
        let numerator = NS_PER_S * 10_u128.pow(written.number.scale);
        let denominator = u128::from(written.number.digits) * u128::from(*per_second);
        let divisor = gcd(numerator, denominator);
        let ratio = u64::try_from(numerator / divisor).ok().zip(u32::try_from(denominator / divisor).ok());
        ratio
            .and_then(|(numerator, denominator)| Period::try_from_ratio(numerator, denominator))
            .map(Self)
            .ok_or_else(|| out_of_reach(written.text))
    }
}

fn out_of_reach(text: &str) -> QuantityError {
    QuantityError::new(
        format!("\"{text}\" cannot be held exactly"),
        "write the rate with fewer digits, or the period in whole nanoseconds",
    )
}

const fn gcd(mut a: u128, mut b: u128) -> u128 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}

impl fmt::Display for TickPeriod {
    /// A period of whole nanoseconds as a time, any other as the rate it was.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (numerator, denominator) = (self.0.numerator_ns(), u128::from(self.0.denominator()));
        if denominator == 1 {
            return write!(f, "{:.20}", Time::from_ns(numerator));
        }
        let millihertz = NS_PER_S * 1_000 * denominator;
        if !millihertz.is_multiple_of(u128::from(numerator)) {
            return write!(f, "{:.6}", Time::from_ns(self.nearest_ns()));
        }
        let millihertz = millihertz / u128::from(numerator);
        let (name, unit) = if millihertz >= 1_000_000 { ("kHz", 1_000_000) } else { ("Hz", 1_000) };
        let (whole, part) = (millihertz / unit, millihertz % unit);
        if part == 0 {
            return write!(f, "{whole} {name}");
        }
        let width = if unit == 1_000 { 3 } else { 6 };
        let part = format!("{part:0width$}");
        write!(f, "{whole}.{} {name}", part.trim_end_matches('0'))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn reads(text: &str, numerator_ns: u64, denominator: u32, shown: &str) {
        let tick: TickPeriod = text.parse().unwrap_or_else(|error| panic!("{text}: {error}"));
        assert_eq!(Some(tick.0), Period::try_from_ratio(numerator_ns, denominator), "for {text}");
        assert_eq!(tick.to_string(), shown, "for {text}");
        assert_eq!(shown.parse::<TickPeriod>(), Ok(tick), "{shown} must read back");
    }

    #[test]
    fn tick_period_as_time_or_rate_is_exact_and_reads_back() {
        reads("1 ms", 1_000_000, 1, "1 ms");
        reads("1 kHz", 1_000_000, 1, "1 ms");
        reads("30 Hz", 1_000_000_000, 30, "30 Hz");
        reads("59.94 Hz", 100_000_000_000, 5_994, "59.94 Hz");
        reads("32.768 kHz", 1_000_000_000, 32_768, "32.768 kHz");
        reads("0.5 Hz", 2_000_000_000, 1, "2 s");
        reads("3 MHz", 1_000, 3, "3000 kHz");
        reads("1.234567 ms", 1_234_567, 1, "1.234567 ms");
    }

    #[test]
    fn tick_period_that_is_none_is_refused() {
        let refuses = |text: &str| text.parse::<TickPeriod>().expect_err(text).to_string();
        assert_eq!(refuses("30"), "\"30\" has no unit; write \"30 ms\" or \"30 Hz\"");
        assert_eq!(
            refuses("0 Hz"),
            "\"0 Hz\" is no tick period; write a period or a rate above zero, \"1 ms\" or \"1 kHz\""
        );
        assert_eq!(refuses("30 hz"), "\"30 hz\" has an unknown unit \"hz\"; write \"30 Hz\"");
        assert_eq!(refuses("-1 Hz"), "\"-1 Hz\" is below zero; a tick period is zero or more");
    }

    #[test]
    fn tick_periods_compare_by_length() {
        let tick = |text: &str| text.parse::<TickPeriod>().unwrap();
        assert!(tick("30 Hz") < tick("33.333334 ms"));
        assert!(tick("30 Hz") > tick("33.333333 ms"));
        assert_eq!(tick("1 kHz").cmp(&tick("1 ms")), Ordering::Equal);
    }

    #[test]
    fn tick_period_to_nearest_nanosecond_rounds_both_ways() {
        assert_eq!("30 Hz".parse::<TickPeriod>().unwrap().nearest_ns(), 33_333_333);
        assert_eq!("60 Hz".parse::<TickPeriod>().unwrap().nearest_ns(), 16_666_667);
        assert_eq!("1 ms".parse::<TickPeriod>().unwrap().nearest_ns(), 1_000_000);
    }
}
