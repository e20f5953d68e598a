//! The parts of a resistor ladder, and the windows that follow from them: [`LadderParts`].

use core::fmt;

use super::ladder::Window;

/// The parts of a resistor ladder: a pull-up to the reference, and keys that each join the line to ground.
///
/// The converter is taken to be ratiometric: its reference is the supply of the pull-up.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct LadderParts<const N: usize> {
    /// The resistor from the line to the reference, in ohms; at least 1.
    pub pull_up_ohms: u32,
    /// What lies between line and ground while only this key is pressed, in ohms; 0 is a plain contact.
    pub key_ohms: [u32; N],
    /// How far any resistor may be off, in parts per million (1 % is 10 000).
    pub tolerance_ppm: u32,
    /// The width of the converter, 4 to 16 bits.
    pub adc_bits: u8,
    /// Counts of converter error, noise and leakage to allow for, either way.
    pub slack_counts: u16,
}

/// Why a [`Ladder`](super::Ladder) cannot be made. Keys are numbered from 0.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum LadderError {
    /// The converter is narrower than 4 or wider than 16 bits.
    AdcBits {
        /// The bits given.
        bits: u8,
    },
    /// The tolerance is 100 % or more.
    Tolerance {
        /// The parts per million given.
        ppm: u32,
    },
    /// The pull-up is 0 ohms: every key reads alike.
    NoPullUp,
    /// The counts of two keys overlap.
    Overlap {
        /// The key that reads lower.
        low: u8,
        /// The greatest count of that key.
        low_greatest: u16,
        /// The key that reads higher.
        high: u8,
        /// The least count of that key.
        high_least: u16,
    },
    /// The counts of a key reach into those of the line at rest.
    ReadsIdle {
        /// The key.
        key: u8,
        /// The greatest count of that key.
        greatest: u16,
        /// The least count of the line at rest.
        idle_least: u16,
    },
}

impl LadderError {
    pub(super) const fn refusal(self) -> &'static str {
        match self {
            Self::AdcBits { .. } => "the converter must have 4 to 16 bits",
            Self::Tolerance { .. } => "a tolerance must be less than 1 000 000 ppm (100 %)",
            Self::NoPullUp => "a pull-up of 0 ohms lets every key read alike; use at least 1 ohm",
            Self::Overlap { .. } => {
                "the counts of two keys overlap; spread the resistors or use a tighter tolerance"
            }
            Self::ReadsIdle { .. } => {
                "the counts of a key reach into the line at rest; use a smaller resistor"
            }
        }
    }
}

impl fmt::Display for LadderError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match *self {
            Self::AdcBits { bits } => write!(f, "a converter of {bits} bits is not supported; use 4 to 16"),
            Self::Tolerance { ppm } => {
                write!(f, "a tolerance of {ppm} ppm is not less than 100 %; use less than 1000000")
            }
            Self::NoPullUp => f.write_str(self.refusal()),
            Self::Overlap { low, low_greatest, high, high_least } => write!(
                f,
                "key {low} reads up to {low_greatest} counts and key {high} from {high_least}; \
                 spread the resistors or use a tighter tolerance"
            ),
            Self::ReadsIdle { key, greatest, idle_least } => write!(
                f,
                "key {key} reads up to {greatest} counts and the line at rest from {idle_least}; \
                 use a smaller resistor"
            ),
        }
    }
}

impl core::error::Error for LadderError {}

/// Two keys pressed at once that can read as one.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Chord {
    /// The two keys that are pressed.
    pub pressed: (u8, u8),
    /// The key that is read.
    pub reads_as: u8,
}

const MILLION: u128 = 1_000_000;

impl<const N: usize> LadderParts<N> {
    /// The window of one key, from the nominal ohms to ground.
    const fn window(&self, ohms: u32) -> Window {
        let scale = 1u128 << self.adc_bits;
        let (less, more) = (MILLION - self.tolerance_ppm as u128, MILLION + self.tolerance_ppm as u128);
        let (key, pull) = (ohms as u128, self.pull_up_ohms as u128);
        // The least count has a small key resistor below a large pull-up, rounded down; the greatest the reverse.
        let least = scale * key * less / (key * less + pull * more);
        let greatest = (scale * key * more).div_ceil(key * more + pull * less);
        let slack = self.slack_counts as u128;
        Window {
            least: least.saturating_sub(slack) as u16,
            greatest: if greatest + slack < scale { (greatest + slack) as u16 } else { (scale - 1) as u16 },
        }
    }

    const fn idle(&self) -> Window {
        let top = ((1u32 << self.adc_bits) - 1) as u16;
        Window { least: top.saturating_sub(self.slack_counts), greatest: top }
    }

    /// The windows of the keys and of the line at rest, or the first thing that is wrong.
    pub(super) const fn windows(&self) -> Result<([Window; N], Window), LadderError> {
        if self.adc_bits < 4 || self.adc_bits > 16 {
            return Err(LadderError::AdcBits { bits: self.adc_bits });
        }
        if self.tolerance_ppm as u128 >= MILLION {
            return Err(LadderError::Tolerance { ppm: self.tolerance_ppm });
        }
        if self.pull_up_ohms == 0 {
            return Err(LadderError::NoPullUp);
        }
        let idle = self.idle();
        let mut keys = [idle; N];
        let mut key = 0;
        while key < N {
            keys[key] = self.window(self.key_ohms[key]);
            if keys[key].greatest >= idle.least {
                return Err(LadderError::ReadsIdle {
                    key: key as u8,
                    greatest: keys[key].greatest,
                    idle_least: idle.least,
                });
            }
            let mut other = 0;
            while other < key {
                // Both by value: indexing again below would link a bounds check.
                let (this, that) = (keys[key], keys[other]);
                if this.overlaps(that) {
                    let (this, that) = ((key as u8, this), (other as u8, that));
                    let (low, high) =
                        if that.1.greatest > this.1.greatest { (this, that) } else { (that, this) };
                    return Err(LadderError::Overlap {
                        low: low.0,
                        low_greatest: low.1.greatest,
                        high: high.0,
                        high_least: high.1.least,
                    });
                }
                other += 1;
            }
            key += 1;
        }
        Ok((keys, idle))
    }

    /// The first two keys that, pressed at once, can read as a third key or as only one of the two.
    ///
    /// Taken to be in parallel, each with its own resistor to ground. Nearly every ladder has one; `None` means
    /// that two keys at once always read as [`Between`](super::LadderReading::Between).
    #[must_use]
    pub const fn chord_alias(&self) -> Option<Chord> {
        let Ok((windows, _)) = self.windows() else { return None };
        let mut a = 0;
        while a < N {
            let mut b = 0;
            while b < a {
                let (one, two) = (self.key_ohms[a] as u64, self.key_ohms[b] as u64);
                // Rounding to whole ohms either way only moves the ends, so both are looked at.
                let sum = if one + two == 0 { 1 } else { one + two };
                let down = self.window((one * two / sum) as u32);
                let up = self.window((one * two).div_ceil(sum) as u32);
                let reach = Window { least: down.least, greatest: up.greatest };
                let mut key = 0;
                while key < N {
                    if reach.overlaps(windows[key]) {
                        return Some(Chord { pressed: (b as u8, a as u8), reads_as: key as u8 });
                    }
                    key += 1;
                }
                b += 1;
            }
            a += 1;
        }
        None
    }
}
