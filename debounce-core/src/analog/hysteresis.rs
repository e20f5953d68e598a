//! One contact behind an ADC: [`Hysteresis`].

use core::fmt;

use crate::machine::{Machine, Position};

/// What one conversion says about the contact.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum AnalogSample {
    /// The position that the contact looks to be in.
    At(Position),
    /// Between the thresholds, and no threshold was passed since power-up: no sample.
    Undecided,
    /// Outside the range that the wiring can give: a broken wire, a short or a converter fault; no sample.
    OutOfRange,
}

impl AnalogSample {
    /// The sample for a debouncing law, where there is one.
    #[must_use]
    #[inline]
    pub const fn sample(self) -> Option<Position> {
        match self {
            Self::At(position) => Some(position),
            _ => None,
        }
    }
}

/// Why a [`Hysteresis`] cannot be made.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum HysteresisError {
    /// Both thresholds are the same count, so there is no hysteresis.
    NoGap {
        /// The count given for both.
        threshold: u16,
    },
    /// A threshold lies outside the valid counts.
    BeyondRange {
        /// The threshold.
        threshold: u16,
        /// The least valid count.
        least: u16,
        /// The greatest valid count.
        greatest: u16,
    },
}

impl HysteresisError {
    const fn refusal(self) -> &'static str {
        match self {
            Self::NoGap { .. } => "both thresholds are the same count; set them apart by more than the noise",
            Self::BeyondRange { .. } => "a threshold lies outside the valid counts; use one inside them",
        }
    }
}

impl fmt::Display for HysteresisError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match *self {
            Self::NoGap { threshold } => {
                write!(f, "both thresholds are {threshold} counts; set them apart by more than the noise")
            }
            Self::BeyondRange { threshold, least, greatest } => write!(
                f,
                "a threshold of {threshold} counts is outside the valid counts; use {least} to {greatest}"
            ),
        }
    }
}

impl core::error::Error for HysteresisError {}

/// Turns ADC counts into samples: closed at one threshold, open at the other, and what it was between them.
///
/// # Method
/// Schmitt trigger in numbers. Source: O. H. Schmitt, "A thermionic trigger", J. Sci. Instrum. 15, 1938 (from memory).
/// Differs from the circuit in having no position until a threshold was passed, and in refusing counts that the
/// wiring cannot give.
///
/// # Units
/// One call to [`step`](Machine::step) takes one conversion and is one tick. Thresholds are in ADC counts.
///
/// # Bounds
///
/// | Quantity                                           | Value                      | Proof                                     |
/// |----------------------------------------------------|----------------------------|-------------------------------------------|
/// | latency                                            | exactly 1                  | `hysteresis_every_count_and_state_equals_rule` |
/// | noise, peak to peak, that never turns the sample back | the gap less 1 count    | `hysteresis_noise_below_gap_never_turns_back`  |
/// | sample from a count out of range                   | none, state kept           | `hysteresis_every_count_and_state_equals_rule` |
///
/// It debounces nothing: feed its samples to a law. A lost tick loses a conversion and nothing else.
///
/// # State
/// 1 byte; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in `step`. [`new`](Self::new) panics on thresholds that are refused, in a constant at compile time.
///
/// # Examples
/// ```
/// use debounce_core::{AnalogSample, Hysteresis, Machine, Position::{Closed, Open}};
/// // Pull-up and contact to ground, 10 bits: closed reads low. A broken wire to the pull-up reads below 8.
/// const PEDAL: Hysteresis = Hysteresis::new(300, 700, 8, 1023);
/// let mut state = Hysteresis::POWER_UP;
/// assert_eq!(PEDAL.step(&mut state, 500), AnalogSample::Undecided);
/// assert_eq!(PEDAL.step(&mut state, 300), AnalogSample::At(Closed));
/// assert_eq!(PEDAL.step(&mut state, 699), AnalogSample::At(Closed));
/// assert_eq!(PEDAL.step(&mut state, 700), AnalogSample::At(Open));
/// assert_eq!(PEDAL.step(&mut state, 7), AnalogSample::OutOfRange);
/// ```
/// ```compile_fail,E0080
/// const NO_GAP: debounce_core::Hysteresis = debounce_core::Hysteresis::new(512, 512, 0, 1023);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Hysteresis {
    closed_at: u16,
    open_at: u16,
    least: u16,
    greatest: u16,
}

/// What a [`Hysteresis`] remembers: the position of the last threshold that was passed, if any.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct HysteresisState(Option<Position>);

const _: () = assert!(size_of::<HysteresisState>() == 1);

impl Hysteresis {
    /// The state at power-up: no threshold was passed.
    pub const POWER_UP: HysteresisState = HysteresisState(None);

    /// Closed from `closed_at` on and open from `open_at` on, whichever way round; valid from `least` to `greatest`.
    ///
    /// # Panics
    /// When [`try_new`](Self::try_new) refuses; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(closed_at: u16, open_at: u16, least: u16, greatest: u16) -> Self {
        match Self::try_new(closed_at, open_at, least, greatest) {
            Ok(hysteresis) => hysteresis,
            Err(error) => panic!("{}", error.refusal()),
        }
    }

    /// [`new`](Self::new) for values known at run time; links no panic.
    ///
    /// # Errors
    /// When the thresholds are equal, or one lies outside the valid counts.
    pub const fn try_new(
        closed_at: u16,
        open_at: u16,
        least: u16,
        greatest: u16,
    ) -> Result<Self, HysteresisError> {
        if closed_at == open_at {
            return Err(HysteresisError::NoGap { threshold: closed_at });
        }
        if closed_at < least || closed_at > greatest {
            return Err(HysteresisError::BeyondRange { threshold: closed_at, least, greatest });
        }
        if open_at < least || open_at > greatest {
            return Err(HysteresisError::BeyondRange { threshold: open_at, least, greatest });
        }
        Ok(Self { closed_at, open_at, least, greatest })
    }
}

impl Machine for Hysteresis {
    type Input = u16;
    type Output = AnalogSample;
    type State = HysteresisState;

    #[inline]
    fn step(&self, state: &mut HysteresisState, counts: u16) -> AnalogSample {
        if counts < self.least || counts > self.greatest {
            return AnalogSample::OutOfRange;
        }
        let (low, high) = if self.closed_at < self.open_at {
            (Position::Closed, Position::Open)
        } else {
            (Position::Open, Position::Closed)
        };
        if counts <= self.closed_at.min(self.open_at) {
            state.0 = Some(low);
        } else if counts >= self.closed_at.max(self.open_at) {
            state.0 = Some(high);
        }
        state.0.map_or(AnalogSample::Undecided, AnalogSample::At)
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use std::string::ToString;

    const STATES: [HysteresisState; 3] = [
        HysteresisState(None),
        HysteresisState(Some(Position::Open)),
        HysteresisState(Some(Position::Closed)),
    ];

    #[test]
    fn hysteresis_every_count_and_state_equals_rule() {
        for (closed_at, open_at) in [(300, 700), (700, 300), (8, 1000), (1000, 8), (499, 500), (500, 499)] {
            let front = Hysteresis::new(closed_at, open_at, 8, 1000);
            for counts in 0..=u16::MAX {
                for before in STATES {
                    let mut state = before;
                    let output = front.step(&mut state, counts);
                    let expected = if closed_at < open_at && counts <= closed_at
                        || closed_at > open_at && counts >= closed_at
                    {
                        Some(Position::Closed)
                    } else if closed_at < open_at && counts >= open_at
                        || closed_at > open_at && counts <= open_at
                    {
                        Some(Position::Open)
                    } else {
                        before.0
                    };
                    if (8..=1000).contains(&counts) {
                        assert_eq!(state.0, expected, "{counts}");
                        assert_eq!(output.sample(), expected);
                    } else {
                        assert_eq!((state, output), (before, AnalogSample::OutOfRange), "{counts}");
                    }
                }
            }
        }
    }

    #[test]
    fn hysteresis_noise_below_gap_never_turns_back() {
        let turns = |swing: u16| {
            let front = Hysteresis::new(300, 320, 0, 1023);
            (0..=1023 - swing).any(|base| {
                let mut state = Hysteresis::POWER_UP;
                let seen = [base, base + swing, base].map(|c| front.step(&mut state, c).sample());
                seen[0].is_some() && seen[1].is_some() && seen[0] != seen[1]
            })
        };
        assert!(!turns(19));
        assert!(turns(20));
    }

    #[test]
    fn hysteresis_bad_thresholds_are_refused_with_both_numbers() {
        #[track_caller]
        fn refuses(thresholds: (u16, u16), text: &str) {
            let refused = Hysteresis::try_new(thresholds.0, thresholds.1, 8, 1000);
            assert_eq!(refused.map_err(|e| e.to_string()), Err(text.to_string()));
        }
        refuses((512, 512), "both thresholds are 512 counts; set them apart by more than the noise");
        refuses((7, 512), "a threshold of 7 counts is outside the valid counts; use 8 to 1000");
        refuses((512, 1001), "a threshold of 1001 counts is outside the valid counts; use 8 to 1000");
        assert!(Hysteresis::try_new(8, 1000, 8, 1000).is_ok());
    }
}
