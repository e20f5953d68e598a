//! The tick period as a whole number of units, fine enough that no rounding is left.

use debounce_core::{Period, TickClock};
use serde::Serialize;

use super::SampleError;

const MILLION: u64 = 1_000_000;

/// A tick period of exactly `units / units_per_ns` nanoseconds, in lowest terms.
///
/// Everything that is compared with a sample instant is counted in these units, so that a rate such as
/// 30 Hz has no drift over hours.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Serialize)]
pub struct ExactPeriod {
    units_per_ns: u64,
    units: u64,
}

impl ExactPeriod {
    /// The nominal period of a clock.
    #[must_use]
    pub fn nominal(clock: &TickClock) -> Self {
        clock.period().into()
    }

    /// The shortest period that the clock's tolerance allows.
    ///
    /// # Errors
    /// When the exact period needs more than 64 bits, which takes a nominal period of hours.
    pub fn shortest(clock: &TickClock) -> Result<Self, SampleError> {
        Self::scaled(clock.period(), MILLION - u64::from(clock.ppm()))
    }

    /// The longest period that the clock's tolerance allows.
    ///
    /// # Errors
    /// When the exact period needs more than 64 bits, which takes a nominal period of hours.
    pub fn longest(clock: &TickClock) -> Result<Self, SampleError> {
        Self::scaled(clock.period(), MILLION + u64::from(clock.ppm()))
    }

    /// Units in one period.
    #[must_use]
    pub fn units(self) -> u64 {
        self.units
    }

    /// Units in one nanosecond.
    #[must_use]
    pub fn units_per_ns(self) -> u64 {
        self.units_per_ns
    }

    /// A time in nanoseconds in units.
    #[must_use]
    pub fn to_units(self, ns: u64) -> u128 {
        u128::from(ns) * u128::from(self.units_per_ns)
    }

    /// The period in nanoseconds, rounded to what an `f64` holds: for showing only.
    #[must_use]
    pub fn as_ns(self) -> f64 {
        self.units as f64 / self.units_per_ns as f64
    }

    /// A time in units in nanoseconds, rounded to what an `f64` holds: for showing only.
    #[must_use]
    pub fn units_as_ns(self, units: u64) -> f64 {
        units as f64 / self.units_per_ns as f64
    }

    fn scaled(period: Period, millionths: u64) -> Result<Self, SampleError> {
        let units = u128::from(period.numerator_ns()) * u128::from(millionths);
        // At most 2^32 * 10^6, far from overflow.
        let units_per_ns = u64::from(period.denominator()) * MILLION;
        let divisor = gcd(units, u128::from(units_per_ns));
        let units = u64::try_from(units / divisor)
            .map_err(|_| SampleError::PeriodTooLong { period_ns: period.numerator_ns() })?;
        let divisor = u64::try_from(divisor).expect("it divides a number of 64 bits");
        Ok(Self { units_per_ns: units_per_ns / divisor, units })
    }
}

impl From<Period> for ExactPeriod {
    fn from(period: Period) -> Self {
        Self { units_per_ns: period.denominator().into(), units: period.numerator_ns() }
    }
}

fn gcd(mut a: u128, mut b: u128) -> u128 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn exact_period_of_30_hz_with_tolerance_is_a_ratio_without_remainder() {
        let clock = TickClock::new(Period::from_hz(30)).tolerance_ppm(50);
        let ratio = |period: ExactPeriod| (period.units(), period.units_per_ns());
        assert_eq!(ratio(ExactPeriod::nominal(&clock)), (100_000_000, 3));
        // 10^8 / 3 * 0.999 950 = 99 995 000 / 3 and 10^8 / 3 * 1.000 050 = 33 335 000.
        assert_eq!(ratio(ExactPeriod::shortest(&clock).expect("fits")), (99_995_000, 3));
        assert_eq!(ratio(ExactPeriod::longest(&clock).expect("fits")), (33_335_000, 1));
    }

    #[test]
    fn exact_period_beyond_64_bits_is_refused() {
        let clock = TickClock::new(Period::from_ns(u64::MAX)).tolerance_ppm(1);
        assert_eq!(ExactPeriod::longest(&clock), Err(SampleError::PeriodTooLong { period_ns: u64::MAX }));
    }
}
