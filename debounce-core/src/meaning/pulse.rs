//! Pulses of a reed, a meter or a coin switch: [`PulseCounter`].

use core::fmt;

use crate::machine::{Machine, Position};

/// What a pulse must look like to be counted, in ticks of the settled position.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PulseLimits {
    /// The shortest closed time.
    pub shortest_closed: u16,
    /// The longest closed time; `u16::MAX` is no limit.
    pub longest_closed: u16,
    /// The shortest open time before a pulse.
    pub shortest_open: u16,
}

/// Why a [`PulseCounter`] cannot be made.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum PulseLimitsError {
    /// No pulse is both long and short enough.
    NoneFits {
        /// The shortest closed time given.
        shortest: u16,
        /// The longest closed time given.
        longest: u16,
    },
}

impl fmt::Display for PulseLimitsError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self::NoneFits { shortest, longest } = *self;
        write!(
            f,
            "a shortest pulse of {shortest} ticks does not fit a longest of {longest}; use at least 1 for the longest, and no more than it for the shortest"
        )
    }
}

impl core::error::Error for PulseLimitsError {}

/// Why a pulse is not counted.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum PulseFlaw {
    /// It opened before the shortest closed time.
    TooShort,
    /// It is still closed after the longest closed time: stuck, or tampered with.
    TooLong,
    /// It began before the shortest open time was over.
    TooClose,
    /// It was closed at power-up: nobody saw it begin.
    BegunBeforePowerUp,
}

/// The verdict on one pulse.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum PulseEvent {
    /// A pulse that counts; comes when it opens.
    Counted {
        /// How long it was closed.
        closed_ticks: u16,
        /// From the make of the last pulse that counted to the make of this one; `None` for the first, and where
        /// this and the closed time together reach `u16::MAX`.
        period_ticks: Option<u16>,
    },
    /// A pulse that does not count; comes as soon as that is certain.
    Refused(PulseFlaw),
}

/// Passes a verdict on each pulse of a settled contact, exactly one: counted, or refused and why.
///
/// # Method
/// Derived here: pulse width and gap compared with limits, as common practice is for meters and coin switches. A
/// pulse that is refused while it is closed is followed, silently, until it opens.
///
/// # Units
/// One call to [`step`](Machine::step) takes one settled position and is one tick: the output of a law, not samples.
///
/// # Bounds
///
/// | Quantity                                      | Value                      | Proof                              |
/// |-----------------------------------------------|----------------------------|------------------------------------|
/// | verdicts on a pulse that opens                | exactly 1                  | `pulse_counter_every_history_equals_run_lengths` |
/// | verdicts on the pulse that is still closed    | at most 1                  | same                               |
/// | delay of a count                              | the first open tick        | same                               |
/// | pulses counted that began before power-up     | none, and said so          | same                               |
///
/// A lost tick makes a width or a gap shorter by one; a pulse or a gap that lies in lost ticks altogether was never
/// there, and no logic can say so: watch the tick where pulses are worth money. For trade measurement local law may
/// ask for an approved instrument; this is none.
///
/// # State
/// 6 bytes; checked by a `const` assertion below the type. It measures time, so it comes to rest only 65535 ticks after
/// a pulse; where the tick is stopped before, periods are told too short by the time it stood still.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in `step`. [`new`](Self::new) panics on limits that are refused, in a constant at compile time.
///
/// # Examples
/// ```
/// use debounce_core::{Machine, Position::{Closed, Open}, PulseCounter, PulseEvent, PulseFlaw, PulseLimits, PulseTally};
/// const METER: PulseCounter =
///     PulseCounter::new(PulseLimits { shortest_closed: 3, longest_closed: 9, shortest_open: 2 });
/// let mut state = PulseCounter::POWER_UP;
/// let mut tally = PulseTally::default();
/// for (position, ticks) in [(Open, 5), (Closed, 3), (Open, 4), (Closed, 2), (Open, 4), (Closed, 20), (Open, 1)] {
///     for _ in 0..ticks {
///         if let Some(event) = METER.step(&mut state, position) {
///             tally.record(event)?;
///         }
///     }
/// }
/// assert_eq!((tally.counted(), tally.refused()), (1, 2)); // the second was too short, the third too long
/// # Ok::<(), debounce_core::TallyFull>(())
/// ```
/// ```compile_fail,E0080
/// use debounce_core::{PulseCounter, PulseLimits};
/// const METER: PulseCounter =
///     PulseCounter::new(PulseLimits { shortest_closed: 3, longest_closed: 2, shortest_open: 2 });
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PulseCounter {
    limits: PulseLimits,
}

#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
enum Phase {
    PowerUp,
    BegunBefore,
    Open,
    Closed,
    Refused,
}

/// What a [`PulseCounter`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PulseState {
    phase: Phase,
    // In this position, and since the make of the last pulse that counted; both stay at the maximum.
    ticks: u16,
    since_make: u16,
}

const _: () = assert!(size_of::<PulseState>() == 6);

impl PulseCounter {
    /// The state at power-up.
    pub const POWER_UP: PulseState =
        PulseState { phase: Phase::PowerUp, ticks: u16::MAX, since_make: u16::MAX };

    /// A counter with these limits.
    ///
    /// # Panics
    /// When [`try_new`](Self::try_new) refuses; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(limits: PulseLimits) -> Self {
        match Self::try_new(limits) {
            Ok(counter) => counter,
            Err(_) => panic!("the shortest pulse is longer than the longest, or the longest is 0 ticks"),
        }
    }

    /// [`new`](Self::new) for values known at run time; links no panic.
    ///
    /// # Errors
    /// When the shortest closed time is more than the longest, or the longest is 0.
    pub const fn try_new(limits: PulseLimits) -> Result<Self, PulseLimitsError> {
        let (shortest, longest) = (limits.shortest_closed, limits.longest_closed);
        if shortest > longest || longest == 0 {
            return Err(PulseLimitsError::NoneFits { shortest, longest });
        }
        Ok(Self { limits })
    }

    /// Pulses per hour, rounded down, at a period and a rate of the tick; `None` for a period of 0.
    #[must_use]
    pub const fn per_hour(period_ticks: u16, ticks_per_second: u32) -> Option<u64> {
        (ticks_per_second as u64 * 3600).checked_div(period_ticks as u64)
    }

    #[inline]
    fn closed(&self, state: &mut PulseState) -> Option<PulseEvent> {
        match state.phase {
            Phase::PowerUp => state.phase = Phase::BegunBefore,
            Phase::Open => {
                let close = state.ticks < self.limits.shortest_open;
                state.ticks = 1;
                if close {
                    state.phase = Phase::Refused;
                    return Some(PulseEvent::Refused(PulseFlaw::TooClose));
                }
                state.phase = Phase::Closed;
            }
            Phase::Closed => {
                state.ticks = state.ticks.saturating_add(1);
                if state.ticks > self.limits.longest_closed {
                    state.phase = Phase::Refused;
                    return Some(PulseEvent::Refused(PulseFlaw::TooLong));
                }
            }
            Phase::BegunBefore | Phase::Refused => {}
        }
        None
    }

    #[inline]
    fn open(&self, state: &mut PulseState) -> Option<PulseEvent> {
        let closed_ticks = state.ticks;
        let phase = core::mem::replace(&mut state.phase, Phase::Open);
        match phase {
            Phase::Open => state.ticks = state.ticks.saturating_add(1),
            // Open before the first sample for who knows how long: taken as long enough.
            Phase::PowerUp => {}
            _ => state.ticks = 1,
        }
        match phase {
            Phase::Closed if closed_ticks < self.limits.shortest_closed => {
                Some(PulseEvent::Refused(PulseFlaw::TooShort))
            }
            Phase::Closed => {
                let period = state.since_make.saturating_sub(closed_ticks);
                let period_ticks = if state.since_make == u16::MAX { None } else { Some(period) };
                state.since_make = closed_ticks;
                Some(PulseEvent::Counted { closed_ticks, period_ticks })
            }
            Phase::BegunBefore => Some(PulseEvent::Refused(PulseFlaw::BegunBeforePowerUp)),
            Phase::PowerUp | Phase::Open | Phase::Refused => None,
        }
    }
}

impl Machine for PulseCounter {
    type Input = Position;
    type Output = Option<PulseEvent>;
    type State = PulseState;

    #[inline]
    fn step(&self, state: &mut PulseState, position: Position) -> Option<PulseEvent> {
        state.since_make = state.since_make.saturating_add(1);
        match position {
            Position::Closed => self.closed(state),
            Position::Open => self.open(state),
        }
    }
}

/// The tally of a [`PulseCounter`]; it stops at its end and says so, and never wraps round.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PulseTally {
    counted: u32,
    refused: u32,
}

/// A pulse that found its tally full and was not added.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct TallyFull(
    /// The verdict that was not added.
    pub PulseEvent,
);

impl fmt::Display for TallyFull {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "the tally of pulses is full at {}; take the numbers and begin anew", u32::MAX)
    }
}

impl core::error::Error for TallyFull {}

impl PulseTally {
    /// A tally that begins at these numbers: those of the last power-down.
    #[must_use]
    pub const fn from_parts(counted: u32, refused: u32) -> Self {
        Self { counted, refused }
    }

    /// Adds one verdict.
    ///
    /// # Errors
    /// When the number it belongs to is at its end; the verdict is given back and nothing is changed.
    pub const fn record(&mut self, event: PulseEvent) -> Result<(), TallyFull> {
        let number = match event {
            PulseEvent::Counted { .. } => &mut self.counted,
            PulseEvent::Refused(_) => &mut self.refused,
        };
        match number.checked_add(1) {
            Some(more) => *number = more,
            None => return Err(TallyFull(event)),
        }
        Ok(())
    }

    /// Pulses counted.
    #[must_use]
    pub const fn counted(&self) -> u32 {
        self.counted
    }

    /// Pulses refused.
    #[must_use]
    pub const fn refused(&self) -> u32 {
        self.refused
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use std::string::ToString;
    use std::vec::Vec;

    /// The verdicts of a whole history, from the lengths of its runs.
    fn from_runs(history: &[bool], l: PulseLimits) -> Vec<(usize, PulseEvent)> {
        let mut events = Vec::new();
        let (mut begin, mut gap, mut last_make) = (0, usize::MAX, None);
        while begin < history.len() {
            let closed = history[begin];
            let length = history[begin..].iter().take_while(|&&c| c == closed).count();
            let end = begin + length;
            let opens = end < history.len();
            if !closed {
                gap = if begin == 0 { usize::MAX } else { length };
            } else if begin == 0 {
                if opens {
                    events.push((end, PulseEvent::Refused(PulseFlaw::BegunBeforePowerUp)));
                }
            } else if gap < usize::from(l.shortest_open) {
                events.push((begin, PulseEvent::Refused(PulseFlaw::TooClose)));
            } else if length > usize::from(l.longest_closed) {
                events.push((begin + usize::from(l.longest_closed), PulseEvent::Refused(PulseFlaw::TooLong)));
            } else if opens && length < usize::from(l.shortest_closed) {
                events.push((end, PulseEvent::Refused(PulseFlaw::TooShort)));
            } else if opens {
                let closed_ticks = u16::try_from(length).unwrap();
                let period_ticks = last_make.map(|make| u16::try_from(begin - make).unwrap());
                events.push((end, PulseEvent::Counted { closed_ticks, period_ticks }));
                last_make = Some(begin);
            }
            begin = end;
        }
        events
    }

    fn run(counter: PulseCounter, history: &[bool]) -> Vec<(usize, PulseEvent)> {
        let mut state = PulseCounter::POWER_UP;
        let step = |(tick, &closed)| Some((tick, counter.step(&mut state, Position::closed_if(closed))?));
        history.iter().enumerate().filter_map(step).collect()
    }

    #[test]
    fn pulse_counter_every_history_equals_run_lengths() {
        for (shortest_closed, longest_closed, shortest_open) in
            [(0, 1, 0), (1, 1, 1), (2, 3, 2), (3, 4, 1), (2, u16::MAX, 3)]
        {
            let limits = PulseLimits { shortest_closed, longest_closed, shortest_open };
            let counter = PulseCounter::new(limits);
            for bits in 0..1u32 << 15 {
                let history: Vec<_> = (0..15).map(|i| bits >> i & 1 == 1).collect();
                assert_eq!(run(counter, &history), from_runs(&history, limits), "{limits:?} {history:?}");
            }
        }
    }

    #[test]
    fn pulse_counter_period_at_count_maximum_is_not_told() {
        let counter =
            PulseCounter::new(PulseLimits { shortest_closed: 1, longest_closed: 9, shortest_open: 1 });
        let period_after = |open: usize| {
            let mut history = std::vec![false, true];
            history.extend(std::vec![false; open]);
            history.extend([true, false]);
            match run(counter, &history).last() {
                Some((_, PulseEvent::Counted { period_ticks, .. })) => *period_ticks,
                other => panic!("{other:?}"),
            }
        };
        assert_eq!(period_after(65_532), Some(65_533));
        assert_eq!(period_after(65_533), None);
        assert_eq!(period_after(200_000), None);
    }

    #[test]
    fn pulse_counter_without_limit_is_never_too_long() {
        let limits = PulseLimits { shortest_closed: 1, longest_closed: u16::MAX, shortest_open: 1 };
        let mut history = std::vec![false];
        history.extend(std::vec![true; 200_000]);
        history.push(false);
        let expected = PulseEvent::Counted { closed_ticks: u16::MAX, period_ticks: None };
        assert_eq!(run(PulseCounter::new(limits), &history), [(200_001, expected)]);
    }

    #[test]
    fn pulse_tally_at_its_end_gives_the_verdict_back() {
        let counted = PulseEvent::Counted { closed_ticks: 1, period_ticks: None };
        let refused = PulseEvent::Refused(PulseFlaw::TooShort);
        let mut tally = PulseTally::from_parts(u32::MAX - 1, u32::MAX);
        assert_eq!(tally.record(counted), Ok(()));
        assert_eq!(tally.record(counted), Err(TallyFull(counted)));
        assert_eq!(tally.record(refused), Err(TallyFull(refused)));
        assert_eq!((tally.counted(), tally.refused()), (u32::MAX, u32::MAX));
    }

    #[test]
    fn pulse_counter_bad_limits_are_refused() {
        let limits = |shortest_closed, longest_closed| PulseLimits {
            shortest_closed,
            longest_closed,
            shortest_open: 0,
        };
        assert!(PulseCounter::try_new(limits(5, 5)).is_ok());
        let refused = PulseCounter::try_new(limits(6, 5)).map_err(|e| e.to_string());
        assert!(
            refused.is_err_and(
                |text| text.starts_with("a shortest pulse of 6 ticks does not fit a longest of 5")
            )
        );
        assert!(PulseCounter::try_new(limits(0, 0)).is_err());
    }

    #[test]
    fn pulse_rate_per_hour_is_exact_arithmetic() {
        assert_eq!(PulseCounter::per_hour(500, 1000), Some(7200));
        assert_eq!(PulseCounter::per_hour(u16::MAX, u32::MAX), Some(u64::from(u32::MAX) * 3600 / 65_535));
        assert_eq!(PulseCounter::per_hour(0, 1000), None);
    }
}
