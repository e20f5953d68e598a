//! From time to samples and back, in one place, always rounding toward the safe side.

/// The time between two ticks, held exactly: a rate of 30 Hz is a period of 1/30 s, not of 33 333 us.
#[derive(Clone, Copy, Debug)]
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

impl PartialEq for Period {
    fn eq(&self, other: &Self) -> bool {
        // Both are in lowest terms.
        self.numerator_ns == other.numerator_ns && self.denominator == other.denominator
    }
}

impl Eq for Period {}

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
/// With Tmin and Tmax the shortest and longest period, and J the peak-to-peak jitter:
///
/// * a disturbance or bounce of time t touches at most `ceil((t + J) / Tmin)` samples;
/// * a dwell, quiet or calm of time t is seen by at least `floor((t - J) / Tmax) - lost` samples;
/// * a latency of k samples is a delay in `[(k - 1) * Tmin - J, (k + lost) * Tmax + J)`.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
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
    pub const fn tolerance_ppm(mut self, ppm: u32) -> Self {
        assert!(ppm < 1_000_000, "a clock tolerance must be less than 1 000 000 ppm (100 %)");
        self.tolerance_ppm = ppm;
        self
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
        saturate(above.div_ceil(self.shortest()))
    }

    /// Fewest samples that see a dwell, quiet or calm of `time_ns`.
    #[must_use]
    pub const fn samples_seen(&self, time_ns: u64) -> u32 {
        let time = time_ns.saturating_sub(self.jitter_ns) as u128;
        let seen = time * self.period.denominator as u128 * MILLION / self.longest();
        saturate(seen).saturating_sub(self.lost)
    }

    /// The delay that a latency of `samples` means: at least the first number of nanoseconds, less than the second.
    #[must_use]
    pub const fn delay_ns(&self, samples: u32) -> (u64, u64) {
        let unit = self.period.denominator as u128 * MILLION;
        let least = samples.saturating_sub(1) as u128 * self.shortest() / unit;
        let below = ((samples as u128 + self.lost as u128) * self.longest()).div_ceil(unit);
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

const fn saturate(samples: u128) -> u32 {
    if samples > u32::MAX as u128 { u32::MAX } else { samples as u32 }
}

const fn saturate_ns(ns: u128) -> u64 {
    if ns > u64::MAX as u128 { u64::MAX } else { ns as u64 }
}
