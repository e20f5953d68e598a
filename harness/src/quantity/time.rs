//! A time in whole nanoseconds.

use std::fmt;
use std::str::FromStr;

use super::decimal::{Manner, Unit, split};
use super::{Quantity, QuantityError};

/// A time in whole nanoseconds, written "12 ms".
///
/// Shown with three significant digits, or as many as the precision asks for. A figure that had to be rounded
/// keeps its trailing zeros and one that is exact loses them: "8 ms" is exact, "8.00 ms" is not.
///
/// # Examples
/// ```
/// use harness::quantity::Time;
/// let time: Time = "8.0404 ms".parse().unwrap();
/// assert_eq!(time.ns(), 8_040_400);
/// assert_eq!(time.to_string(), "8.04 ms");
/// assert_eq!(format!("{time:.5}"), "8.0404 ms");
/// ```
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
pub struct Time(u64);

pub(super) const UNITS: &[Unit] = &[
    ("ns", 1),
    ("us", 1_000),
    ("µs", 1_000),
    // The Greek letter, which looks the same as the micro sign above.
    ("μs", 1_000),
    ("ms", 1_000_000),
    ("s", 1_000_000_000),
    ("min", 60_000_000_000),
];

const MANNER: Manner = Manner { name: "a time", units: &["ms", "us", "ns", "s", "min"] };

impl Time {
    /// No time at all.
    pub const ZERO: Self = Self(0);

    /// A time of `ns` nanoseconds.
    #[must_use]
    pub const fn from_ns(ns: u64) -> Self {
        Self(ns)
    }

    /// A time of `us` microseconds.
    #[must_use]
    pub const fn from_us(us: u32) -> Self {
        Self(us as u64 * 1_000)
    }

    /// A time of `ms` milliseconds.
    #[must_use]
    pub const fn from_ms(ms: u32) -> Self {
        Self(ms as u64 * 1_000_000)
    }

    /// The nanoseconds.
    #[must_use]
    pub const fn ns(self) -> u64 {
        self.0
    }

    /// The time for display, rounded only in the given direction: an upper bound goes up, a lower one down.
    #[must_use]
    pub const fn shown(self, rounding: Rounding) -> ShownTime {
        ShownTime { time: self, rounding }
    }
}

impl Quantity for Time {
    const NAME: &'static str = MANNER.name;
    const EXAMPLE: &'static str = "12 ms";
}

impl FromStr for Time {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        let written = split(text, &MANNER)?;
        let size = written.unit_size(UNITS, &MANNER)?;
        written.whole(size, "1 ns", &MANNER).map(Self)
    }
}

impl fmt::Display for Time {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.shown(Rounding::Nearest).fmt(f)
    }
}

/// Which way the digits that are not shown are rounded.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Rounding {
    /// To the nearest, halves up.
    Nearest,
    /// Up, so that the figure is never less than the time.
    Up,
    /// Down, so that the figure is never more than the time.
    Down,
}

/// A time with the direction in which it is rounded for display.
#[derive(Clone, Copy, Debug)]
pub struct ShownTime {
    time: Time,
    rounding: Rounding,
}

impl fmt::Display for ShownTime {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let digits = u32::try_from(f.precision().unwrap_or(3)).unwrap_or(u32::MAX).clamp(1, 20);
        f.pad_integral(true, "", &format_time(self.time.0, digits, self.rounding))
    }
}

fn format_time(ns: u64, digits: u32, rounding: Rounding) -> String {
    const SHOWN: [(&str, u32); 4] = [("ns", 0), ("us", 3), ("ms", 6), ("s", 9)];
    for (index, &(name, exponent)) in SHOWN.iter().enumerate() {
        let unit = 10_u64.pow(exponent);
        let last = index + 1 == SHOWN.len();
        if !last && ns >= unit * 1_000 {
            continue;
        }
        let whole_digits = (ns / unit).checked_ilog10().map_or(1, |log| log + 1);
        let decimals = digits.saturating_sub(whole_digits).min(exponent);
        let step = 10_u64.pow(exponent - decimals);
        let exact = ns.is_multiple_of(step);
        let steps = match rounding {
            Rounding::Down => ns / step,
            Rounding::Up => ns.div_ceil(step),
            Rounding::Nearest => ns / step + u64::from(ns % step >= step.div_ceil(2) && !exact),
        };
        // Rounding may have carried it into the next unit: 999.9996 us is 1.00 ms.
        if !last && steps >= 1_000 * 10_u64.pow(decimals) {
            continue;
        }
        let (whole, part) = (steps / 10_u64.pow(decimals), steps % 10_u64.pow(decimals));
        if decimals == 0 || (exact && part == 0) {
            return format!("{whole} {name}");
        }
        let part = format!("{part:0width$}", width = decimals as usize);
        let part = if exact { part.trim_end_matches('0') } else { &part };
        return format!("{whole}.{part} {name}");
    }
    unreachable!("seconds hold every time")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn reads(text: &str, ns: u64) {
        assert_eq!(text.parse(), Ok(Time(ns)), "for {text}");
    }

    #[track_caller]
    fn refuses(text: &str, expected: &str) {
        match text.parse::<Time>() {
            Ok(time) => panic!("{text} was read as {time}"),
            Err(error) => assert_eq!(error.to_string(), expected, "for {text}"),
        }
    }

    #[track_caller]
    fn shows(ns: u64, expected: &str) {
        assert_eq!(Time(ns).to_string(), expected, "for {ns} ns");
    }

    #[test]
    fn time_with_each_unit_is_read_exactly() {
        reads("12 ms", 12_000_000);
        reads("12ms", 12_000_000);
        reads(" 1.5 us ", 1_500);
        reads("1.5 µs", 1_500);
        reads("1.5 μs", 1_500);
        reads("0 ns", 0);
        reads("-0 ns", 0);
        reads("2 min", 120_000_000_000);
        reads("0.000000001 s", 1);
        reads("0.10 ms", 100_000);
        reads("18446744073.709551 s", 18_446_744_073_709_551_000);
    }

    #[test]
    fn time_that_is_none_is_refused_with_what_to_write() {
        refuses("12", "\"12\" has no unit; write \"12 ms\" or \"12 us\"");
        refuses("1.5", "\"1.5\" has no unit; write \"1.5 ms\" or \"1.5 us\"");
        refuses("", "\"\" is not a time; write a number and a unit, \"12 ms\" or \"12 us\"");
        refuses("soon", "\"soon\" is not a time; write a number and a unit, \"12 ms\" or \"12 us\"");
        refuses("12 MS", "\"12 MS\" has an unknown unit \"MS\"; write \"12 ms\"");
        refuses("12 V", "\"12 V\" has an unknown unit \"V\"; the unit of a time is ms, us, ns, s or min");
        refuses("1,5 ms", "\"1,5 ms\" has a comma in its number; write a point, \"1.5 ms\" or \"1.5 us\"");
        refuses("-3 ms", "\"-3 ms\" is below zero; a time is zero or more");
        refuses("0.5 ns", "\"0.5 ns\" is finer than 1 ns; write a multiple of 1 ns");
        refuses(
            "1.2.3 ms",
            "\"1.2.3\" is not a number; write up to 18 digits with one point, \"1.5 ms\" or \"1.5 us\"",
        );
        refuses(
            "18446744073.709552 s",
            "\"18446744073.709552 s\" is too large; the most is 18446744073709551615 times 1 ns",
        );
    }

    #[test]
    fn time_shown_keeps_three_digits_and_says_what_is_exact() {
        shows(0, "0 ns");
        shows(999, "999 ns");
        shows(1_000, "1 us");
        shows(1_234, "1.23 us");
        shows(8_040_000, "8.04 ms");
        shows(8_000_000, "8 ms");
        shows(8_000_400, "8.00 ms");
        shows(8_045_000, "8.05 ms");
        shows(12_500_000, "12.5 ms");
        shows(999_499, "999 us");
        shows(999_500, "1.00 ms");
        shows(1_000_000_000, "1 s");
        shows(12_345_600_000_000, "12346 s");
        shows(u64::MAX, "18446744074 s");
    }

    #[test]
    fn time_rounded_one_way_stays_on_the_safe_side() {
        assert_eq!(Time(8_041_001).shown(Rounding::Up).to_string(), "8.05 ms");
        assert_eq!(Time(8_049_999).shown(Rounding::Down).to_string(), "8.04 ms");
        assert_eq!(Time(8_040_000).shown(Rounding::Up).to_string(), "8.04 ms");
        assert_eq!(Time(999_001).shown(Rounding::Up).to_string(), "1.00 ms");
    }
}
