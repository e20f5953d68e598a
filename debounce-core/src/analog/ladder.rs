//! Several keys on one ADC pin: [`Ladder`].

use super::ladder_parts::{LadderError, LadderParts};
use crate::machine::Machine;

/// A stretch of ADC counts, both ends included.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Window {
    /// The least count.
    pub least: u16,
    /// The greatest count.
    pub greatest: u16,
}

impl Window {
    /// Whether `counts` lies inside.
    #[must_use]
    #[inline]
    pub const fn holds(self, counts: u16) -> bool {
        self.least <= counts && counts <= self.greatest
    }

    pub(super) const fn overlaps(self, other: Self) -> bool {
        self.least <= other.greatest && other.least <= self.greatest
    }
}

/// What one conversion of a ladder says.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum LadderReading {
    /// No key is pressed.
    Idle,
    /// This key is pressed, counted from 0.
    Key(u8),
    /// The counts belong to no key: under way, two keys at once, a worn contact or a wrong part; no sample.
    Between,
    /// More counts than the converter has; no sample.
    OutOfRange,
}

impl LadderReading {
    /// The reading as a port with one lane for each key, for a [`Bank`](crate::Bank); `None` is no sample.
    #[must_use]
    #[inline]
    pub const fn port(self) -> Option<u32> {
        match self {
            Self::Idle => Some(0),
            Self::Key(key) => Some(1u32.wrapping_shl(key as u32)),
            Self::Between | Self::OutOfRange => None,
        }
    }
}

/// Tells the keys on a resistor ladder apart by windows of ADC counts, computed from the parts.
///
/// # Method
/// Derived here. Key `i` makes a divider of its resistor `R` to ground and the pull-up `P`: `2^bits R / (R + P)`
/// counts. Its window reaches from `R` small and `P` large to the reverse, rounded outward, widened by the slack;
/// the line at rest reads the top of the scale less the slack. Windows that touch are refused at compile time.
///
/// # Units
/// One call to [`step`](Machine::step) takes one conversion and is one tick. Resistors are in ohms, tolerance in
/// parts per million, slack in counts.
///
/// # Bounds
///
/// | Quantity                                              | Value          | Proof                                        |
/// |-------------------------------------------------------|----------------|----------------------------------------------|
/// | counts of a key with parts inside the tolerance       | in its window  | `ladder_every_corner_of_tolerance_reads_its_key` |
/// | keys that a count can mean                            | at most 1      | `ladder_every_count_means_at_most_one_key`   |
/// | sample from a count out of range                      | none           | same                                         |
///
/// It debounces nothing, and on its way to the key's level the line passes the windows of other keys: feed
/// [`LadderReading::port`] to a [`Bank`](crate::Bank) that confirms for longer than the line takes to settle.
/// One key at a time: [`LadderParts::chord_alias`] says which two keys can be taken for one. A lost tick loses a
/// conversion and nothing else. A ladder stuck between windows gives no samples; count those to notice it.
///
/// # State
/// None: 0 bytes. The windows take `4 N + 4` bytes of flash; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in `step`. [`new`](Self::new) panics on parts that are refused, in a constant at compile time.
///
/// # Examples
/// ```
/// use debounce_core::{Bank, Ladder, LadderParts, LadderReading, Machine};
/// const MENU: Ladder<3> = Ladder::new(&LadderParts {
///     pull_up_ohms: 10_000,
///     key_ohms: [0, 3_300, 10_000],
///     tolerance_ppm: 50_000,
///     adc_bits: 10,
///     slack_counts: 8,
/// });
/// assert_eq!(MENU.step(&mut (), 254), LadderReading::Key(1)); // 1024 * 3.3 / 13.3
/// assert_eq!(MENU.step(&mut (), 400), LadderReading::Between);
/// assert_eq!(MENU.step(&mut (), 1020), LadderReading::Idle);
///
/// const KEYS: Bank<u32, 2> = Bank::new(0);
/// let mut state = KEYS.all_open();
/// for counts in [254, 400, 254, 254, 255] {
///     if let Some(port) = MENU.step(&mut (), counts).port() {
///         let _ = KEYS.step(&mut state, port);
///     }
/// }
/// assert_eq!(KEYS.closed(&state), 0b010);
/// ```
/// ```compile_fail,E0080
/// use debounce_core::{Ladder, LadderParts};
/// // 4.7 and 5.1 kilohms at 10 % cannot be told apart.
/// const MENU: Ladder<2> = Ladder::new(&LadderParts {
///     pull_up_ohms: 10_000,
///     key_ohms: [4_700, 5_100],
///     tolerance_ppm: 100_000,
///     adc_bits: 10,
///     slack_counts: 8,
/// });
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Ladder<const N: usize> {
    keys: [Window; N],
    idle: Window,
}

const _: () = assert!(size_of::<Ladder<5>>() == 24);

impl<const N: usize> Ladder<N> {
    /// The ladder made of `parts`.
    ///
    /// # Panics
    /// When [`try_new`](Self::try_new) refuses; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(parts: &LadderParts<N>) -> Self {
        match Self::try_new(parts) {
            Ok(ladder) => ladder,
            Err(error) => panic!("{}", error.refusal()),
        }
    }

    /// [`new`](Self::new) for values known at run time; links no panic.
    ///
    /// # Errors
    /// When two windows touch, or a part is out of its range.
    pub const fn try_new(parts: &LadderParts<N>) -> Result<Self, LadderError> {
        const { assert!(N >= 1 && N <= 32, "a ladder has 1 to 32 keys") };
        match parts.windows() {
            Ok((keys, idle)) => Ok(Self { keys, idle }),
            Err(error) => Err(error),
        }
    }

    /// The windows of the keys, in the order of the parts.
    #[must_use]
    pub const fn windows(&self) -> &[Window; N] {
        &self.keys
    }

    /// The window of the line at rest.
    #[must_use]
    pub const fn idle(&self) -> Window {
        self.idle
    }
}

impl<const N: usize> Machine for Ladder<N> {
    type Input = u16;
    type Output = LadderReading;
    type State = ();

    #[inline]
    fn step(&self, (): &mut (), counts: u16) -> LadderReading {
        if counts > self.idle.greatest {
            return LadderReading::OutOfRange;
        }
        if self.idle.holds(counts) {
            return LadderReading::Idle;
        }
        for (key, window) in (0u8..).zip(&self.keys) {
            if window.holds(counts) {
                return LadderReading::Key(key);
            }
        }
        LadderReading::Between
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::super::ladder_parts::Chord;
    use super::*;
    use std::string::ToString;

    const PARTS: LadderParts<5> = LadderParts {
        pull_up_ohms: 4_700,
        key_ohms: [0, 820, 2_200, 4_700, 12_000],
        tolerance_ppm: 50_000,
        adc_bits: 12,
        slack_counts: 12,
    };

    #[test]
    fn ladder_every_corner_of_tolerance_reads_its_key() {
        for adc_bits in [8, 10, 12, 16] {
            let slack_counts = if adc_bits == 8 { 2 } else { 12 };
            let ladder = Ladder::new(&LadderParts { adc_bits, slack_counts, ..PARTS });
            let scale = f64::from(1u32 << adc_bits);
            for (key, &ohms) in PARTS.key_ohms.iter().enumerate() {
                for (k, p) in [(0.95, 0.95), (0.95, 1.05), (1.0, 1.0), (1.05, 0.95), (1.05, 1.05)] {
                    let (key_ohms, pull) = (f64::from(ohms) * k, 4_700.0 * p);
                    let exact = scale * key_ohms / (key_ohms + pull);
                    for error in [-f64::from(slack_counts), 0.0, f64::from(slack_counts)] {
                        let counts = (exact + error).floor().clamp(0.0, scale - 1.0) as u16;
                        assert_eq!(
                            ladder.step(&mut (), counts),
                            LadderReading::Key(key as u8),
                            "{adc_bits} {ohms}"
                        );
                    }
                }
            }
        }
    }

    #[test]
    fn ladder_every_count_means_at_most_one_key() {
        let ladder = Ladder::new(&PARTS);
        for counts in 0..=u16::MAX {
            let holders = ladder.windows().iter().filter(|w| w.holds(counts)).count();
            let reading = ladder.step(&mut (), counts);
            match reading {
                LadderReading::OutOfRange => assert!(counts > 4095),
                LadderReading::Idle => assert!((4083..=4095).contains(&counts) && holders == 0),
                LadderReading::Key(key) => {
                    assert!(holders == 1 && ladder.windows()[usize::from(key)].holds(counts));
                }
                LadderReading::Between => assert!(holders == 0 && counts < 4083),
            }
            assert_eq!(reading.port().is_none(), holders == 0 && !(4083..=4095).contains(&counts));
        }
    }

    #[test]
    fn ladder_bad_parts_are_refused_with_the_numbers() {
        #[track_caller]
        fn refuses(parts: &LadderParts<5>, text: &str) {
            assert_eq!(Ladder::try_new(parts).map_err(|e| e.to_string()), Err(text.to_string()));
        }
        refuses(&LadderParts { adc_bits: 3, ..PARTS }, "a converter of 3 bits is not supported; use 4 to 16");
        refuses(
            &LadderParts { adc_bits: 17, ..PARTS },
            "a converter of 17 bits is not supported; use 4 to 16",
        );
        refuses(
            &LadderParts { tolerance_ppm: 1_000_000, ..PARTS },
            "a tolerance of 1000000 ppm is not less than 100 %; use less than 1000000",
        );
        refuses(
            &LadderParts { pull_up_ohms: 0, ..PARTS },
            "a pull-up of 0 ohms lets every key read alike; use at least 1 ohm",
        );
        refuses(
            &LadderParts { key_ohms: [0, 820, 2_200, 4_700, 10_000_000], ..PARTS },
            "key 4 reads up to 4095 counts and the line at rest from 4083; use a smaller resistor",
        );
        refuses(
            &LadderParts { key_ohms: [0, 4_700, 820, 4_300, 12_000], ..PARTS },
            "key 3 reads up to 2072 counts and key 1 from 1933; spread the resistors or use a tighter tolerance",
        );
    }

    #[test]
    fn ladder_windows_just_apart_pass_and_just_touching_do_not() {
        // Without tolerance and slack: 4 bits, pull-up 100 ohms; 100 ohms read exactly 8 of 16.
        let parts = |a, b| LadderParts {
            pull_up_ohms: 100,
            key_ohms: [a, b],
            tolerance_ppm: 0,
            adc_bits: 4,
            slack_counts: 0,
        };
        assert_eq!(
            Ladder::new(&parts(100, 60)).windows(),
            &[Window { least: 8, greatest: 8 }, Window { least: 6, greatest: 6 }]
        );
        // 77 ohms read 6.96 counts, at most 7; 78 ohms read 7.01, rounded outward 8, which 100 ohms read as well.
        assert!(Ladder::try_new(&parts(100, 77)).is_ok());
        assert!(Ladder::try_new(&parts(100, 78)).is_err());
    }

    #[test]
    fn ladder_two_keys_at_once_are_foretold() {
        // A plain contact to ground wins over any other key.
        assert_eq!(PARTS.chord_alias(), Some(Chord { pressed: (0, 1), reads_as: 0 }));
        // 1 k and 3 k in parallel are 750 ohms, far from both.
        let clear = LadderParts {
            pull_up_ohms: 1_000,
            key_ohms: [1_000, 3_000],
            tolerance_ppm: 10_000,
            adc_bits: 12,
            slack_counts: 8,
        };
        assert_eq!(clear.chord_alias(), None);
    }
}
