//! From time to samples and back, in one place, always rounding toward the safe side.

/// The time between two ticks, held exactly: a rate of 30 Hz is a period of 1/30 s, not of 33 333 us.
///
/// # Examples
/// ```
/// use debounce_core::Period;
/// assert_eq!(Period::from_hz(1_000), Period::from_ms(1));
/// assert_eq!(Period::try_from_ratio(100_000_000, 3), Some(Period::from_hz(30)));
/// ```
// Always in lowest terms, so that equal periods are equal field by field.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Period {
    numerator_ns: u64,
    denominator: u32,
}

impl Period {
    /// A period of `numerator_ns / denominator` nanoseconds, or `None` where either is 0.
    #[must_use]
    pub const fn try_from_ratio(numerator_ns: u64, denominator: u32) -> Option<Self> {
        if numerator_ns == 0 || denominator == 0 {
            return None;
        }
        let divisor = gcd(numerator_ns, denominator as u64);
        // The divisor divides the denominator, so the quotient fits its width again.
        Some(Self {
            numerator_ns: numerator_ns / divisor,
            denominator: (denominator as u64 / divisor) as u32,
        })
    }

    const fn from_ratio(numerator_ns: u64, denominator: u32) -> Self {
        match Self::try_from_ratio(numerator_ns, denominator) {
            Some(period) => period,
            None => panic!("a tick period must be longer than zero"),
        }
    }

    /// A period in nanoseconds.
    ///
    /// # Panics
    /// When it is 0; in a constant that is an error at compile time.
    #[must_use]
    pub const fn from_ns(ns: u64) -> Self {
        Self::from_ratio(ns, 1)
    }

    /// A period in microseconds.
    ///
    /// # Panics
    /// When it is 0; in a constant that is an error at compile time.
    #[must_use]
    pub const fn from_us(us: u32) -> Self {
        Self::from_ratio(us as u64 * 1_000, 1)
    }

    /// A period in milliseconds.
    ///
    /// # Panics
    /// When it is 0; in a constant that is an error at compile time.
    #[must_use]
    pub const fn from_ms(ms: u32) -> Self {
        Self::from_ratio(ms as u64 * 1_000_000, 1)
    }

    /// The period of a rate in hertz, exactly.
    ///
    /// # Panics
    /// When it is 0; in a constant that is an error at compile time.
    #[must_use]
    pub const fn from_hz(hz: u32) -> Self {
        Self::from_ratio(1_000_000_000, hz)
    }

    /// The numerator of the period in nanoseconds, in lowest terms.
    #[must_use]
    pub const fn numerator_ns(self) -> u64 {
        self.numerator_ns
    }

    /// The denominator of the period in nanoseconds, in lowest terms.
    #[must_use]
    pub const fn denominator(self) -> u32 {
        self.denominator
    }
}

const fn gcd(mut a: u64, mut b: u64) -> u64 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}

const MILLION: u128 = 1_000_000;

/// A sample clock as far as rounding is concerned: its period, how far that may be off, how far a sample
/// instant may wander, and how many ticks in a row may be lost.
///
/// # Method
/// Derived here. With Tmin and Tmax the shortest and longest period and J the peak-to-peak jitter, the k-th sample
/// is taken between `t_k` and `t_k + J`, where the `t_k` follow each other by Tmin to Tmax.
///
/// * A disturbance or bounce of time t touches at most `ceil((t + J) / Tmin)` samples: its `t_k` lie in a half-open
///   interval of length t + J, at least Tmin apart.
/// * A dwell, quiet or calm of time t is seen by at least `floor((t - J) / Tmax) - lost` samples: every `t_k` in a
///   half-open interval of length t - J is inside it for certain, and they are at most Tmax apart.
/// * A latency of k samples is a delay in `[(k - 1) * Tmin - J, (k + lost) * Tmax + J)`: the change may fall just
///   before its first sample or just after the sample before that one.
///
/// Put what a recorder adds to a measured time (its own sample period) into J.
///
/// # Units
/// Times in nanoseconds, tolerance in parts per million, everything else in ticks. Periods are exact fractions.
///
/// # Bounds
/// Each of the three is attained up to the open end; proofs: the tests of this module, against samples taken one by
/// one in exact arithmetic. They hold for J shorter than Tmin, where samples keep their order, and while no stretch
/// that is asked about holds more than one run of lost ticks. Results that do not fit stop at the largest number.
///
/// # Panics
/// Only [`tolerance_ppm`](Self::tolerance_ppm), and the constructors of [`Period`].
///
/// # Examples
/// ```
/// use debounce_core::{Period, TickClock};
/// const CLOCK: TickClock = TickClock::new(Period::from_ms(1)).tolerance_ppm(20_000).jitter_ns(50_000);
/// assert_eq!(CLOCK.samples_touched(5_000_000), 6); // 5.05 ms in periods of 0.98 ms, rounded up
/// assert_eq!(CLOCK.samples_seen(5_000_000), 4); // 4.95 ms in periods of 1.02 ms, rounded down
/// assert_eq!(CLOCK.delay_ns(4), (2_890_000, 4_130_000));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct TickClock {
    period: Period,
    tolerance_ppm: u32,
    jitter_ns: u64,
    lost: u32,
}

impl TickClock {
    /// A clock without tolerance, jitter or lost ticks.
    #[must_use]
    pub const fn new(period: Period) -> Self {
        Self { period, tolerance_ppm: 0, jitter_ns: 0, lost: 0 }
    }

    /// Sets how far the period may be off either way, in parts per million of the nominal period.
    ///
    /// # Panics
    /// At 1 000 000 (100 %) or more; in a constant that is an error at compile time.
    #[must_use]
    pub const fn tolerance_ppm(self, ppm: u32) -> Self {
        match self.try_tolerance_ppm(ppm) {
            Some(clock) => clock,
            None => panic!("a clock tolerance must be less than 1 000 000 ppm (100 %)"),
        }
    }

    /// [`tolerance_ppm`](Self::tolerance_ppm) for a value known at run time: `None` at 1 000 000 or more.
    #[must_use]
    pub const fn try_tolerance_ppm(mut self, ppm: u32) -> Option<Self> {
        if ppm >= 1_000_000 {
            return None;
        }
        self.tolerance_ppm = ppm;
        Some(self)
    }

    /// Sets the peak-to-peak jitter of a sample instant plus the sampling aperture.
    #[must_use]
    pub const fn jitter_ns(mut self, ns: u64) -> Self {
        self.jitter_ns = ns;
        self
    }

    /// Sets how many ticks in a row may be lost.
    #[must_use]
    pub const fn lost(mut self, ticks: u32) -> Self {
        self.lost = ticks;
        self
    }

    /// The nominal period.
    #[must_use]
    pub const fn period(&self) -> Period {
        self.period
    }

    /// The tolerance in parts per million.
    #[must_use]
    pub const fn ppm(&self) -> u32 {
        self.tolerance_ppm
    }

    /// The peak-to-peak jitter in nanoseconds.
    #[must_use]
    pub const fn jitter(&self) -> u64 {
        self.jitter_ns
    }

    /// The ticks that may be lost in a row.
    #[must_use]
    pub const fn lost_ticks(&self) -> u32 {
        self.lost
    }

    /// Most samples that a disturbance or bounce of `time_ns` can touch; `u32::MAX` stands for that or more.
    ///
    /// A time of 0 is no disturbance at all and touches none.
    #[must_use]
    pub const fn samples_touched(&self, time_ns: u64) -> u32 {
        if time_ns == 0 {
            return 0;
        }
        // (t + J) / (n/d * (1 - ppm/1e6)) with every factor an integer.
        let above = (time_ns as u128 + self.jitter_ns as u128) * self.period.denominator as u128 * MILLION;
        saturate(rounded_up(above, self.shortest()))
    }

    /// Fewest samples that see a dwell, quiet or calm of `time_ns`.
    #[must_use]
    pub const fn samples_seen(&self, time_ns: u64) -> u32 {
        let time = time_ns.saturating_sub(self.jitter_ns) as u128;
        let seen = rounded_down(time * self.period.denominator as u128 * MILLION, self.longest());
        saturate(seen).saturating_sub(self.lost)
    }

    /// The delay that a latency of `samples` means: at least the first number of nanoseconds, less than the second.
    #[must_use]
    pub const fn delay_ns(&self, samples: u32) -> (u64, u64) {
        let unit = self.period.denominator as u128 * MILLION;
        let least = rounded_down(samples.saturating_sub(1) as u128 * self.shortest(), unit);
        let below = rounded_up((samples as u128 + self.lost as u128) * self.longest(), unit);
        (saturate_ns(least).saturating_sub(self.jitter_ns), saturate_ns(below).saturating_add(self.jitter_ns))
    }

    /// The shortest period times denominator times a million.
    const fn shortest(&self) -> u128 {
        self.period.numerator_ns as u128 * (MILLION - self.tolerance_ppm as u128)
    }

    /// The longest period times denominator times a million.
    const fn longest(&self) -> u128 {
        self.period.numerator_ns as u128 * (MILLION + self.tolerance_ppm as u128)
    }
}

// The widest product here is of 118 bits: 33 of ticks, 64 of the numerator and 21 of a million and the tolerance.
// No divisor is ever 0, but the compiler cannot know that; asking it this way links no panic.

const fn rounded_down(a: u128, b: u128) -> u128 {
    match a.checked_div(b) {
        Some(quotient) => quotient,
        None => u128::MAX,
    }
}

const fn rounded_up(a: u128, b: u128) -> u128 {
    rounded_down(a + (b - 1), b)
}

const fn saturate(samples: u128) -> u32 {
    if samples > u32::MAX as u128 { u32::MAX } else { samples as u32 }
}

const fn saturate_ns(ns: u128) -> u64 {
    if ns > u64::MAX as u128 { u64::MAX } else { ns as u64 }
}

#[cfg(test)]
mod tests;
