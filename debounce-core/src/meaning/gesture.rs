//! What a person did with one key: [`Gesture`].

use core::fmt;

use crate::machine::{Machine, Position};

/// The times of a [`Gesture`], in ticks.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct GestureTicks {
    /// Open ticks that end a row of taps; at least 1.
    pub gap: u16,
    /// Closed ticks that make a press a hold; 0 is no hold at all: every press is a tap.
    pub hold: u16,
    /// Ticks from hold to repeat and from repeat to repeat; 0 is no repeat.
    pub repeat: u16,
    /// Taps that end a row at once, without waiting for the gap; at least 1.
    pub most_taps: u8,
}

/// Why a [`Gesture`] cannot be made.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum GestureError {
    /// A gap of 0 ticks.
    NoGap,
    /// A row of 0 taps.
    NoTaps,
    /// A repeat without the hold that it starts from.
    RepeatWithoutHold {
        /// The repeat given, in ticks.
        repeat: u16,
    },
}

impl GestureError {
    const fn refusal(self) -> &'static str {
        match self {
            Self::NoGap => "a gap of 0 ticks ends no row of taps; use at least 1",
            Self::NoTaps => "a row of 0 taps is never reported; use at least 1",
            Self::RepeatWithoutHold { .. } => "a repeat needs a hold to start from; set hold, or repeat to 0",
        }
    }
}

impl fmt::Display for GestureError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match *self {
            Self::NoGap | Self::NoTaps => f.write_str(self.refusal()),
            Self::RepeatWithoutHold { repeat } => {
                write!(f, "a repeat of {repeat} ticks needs a hold to start from; set hold, or repeat to 0")
            }
        }
    }
}

impl core::error::Error for GestureError {}

/// What a person did.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum GestureEvent {
    /// So many short presses in a row, at least 1; comes when the row is over.
    Taps(u8),
    /// A press has lasted for the hold time.
    Hold {
        /// Short presses in the same row before it; they are not reported as taps any more.
        after_taps: u8,
    },
    /// The key is still held.
    Repeat,
    /// A key that was held is released.
    Release,
}

/// Turns the settled positions of one key into taps, hold, repeat and release, each exactly once.
///
/// # Method
/// Derived here: a machine of five phases (waiting for open, idle, pressed, between taps, held) with one tick count.
///
/// * A press shorter than `hold` is a tap. Taps with fewer than `gap` open ticks between them are one row.
/// * The row is reported as [`GestureEvent::Taps`] at its `gap`-th open tick, or at the release of its
///   `most_taps`-th tap: with `most_taps` 1 a tap is reported without any wait.
/// * At its `hold`-th closed tick a press becomes a [`GestureEvent::Hold`]. It takes the taps of its row with it.
///   [`GestureEvent::Repeat`] follows every `repeat` ticks, and [`GestureEvent::Release`] at the first open tick.
/// * [`cancel`](Self::cancel) drops whatever has begun: no taps, no release. The key must be open for a tick before
///   anything counts again. Power-up is the same, so a key held at boot means nothing until it is let go.
///
/// # Units
/// One call to [`step`](Machine::step) takes one settled position and is one tick: the output of a law, not samples.
///
/// # Bounds
///
/// | Quantity                                   | Value                             | Proof                                 |
/// |--------------------------------------------|-----------------------------------|---------------------------------------|
/// | events of one press that is no hold        | in exactly 1 `Taps` or `Hold`     | `gesture_every_history_equals_run_lengths` |
/// | events of one hold                         | 1 `Hold`, at most 1 `Release`     | same                                  |
/// | events in one tick                         | at most 1                         | the type                              |
/// | delay of `Taps` after the last release     | `gap` ticks, 1 at `most_taps`     | same                                  |
/// | delay of `Hold` after the press            | `hold` ticks                      | same                                  |
/// | events before the first open tick          | none                              | same                                  |
///
/// The ticks of a delay include the one that brings the event. A lost tick makes hold, gap and repeat that much
/// longer; a press or a gap that lies in lost ticks altogether was never there.
///
/// People: the fastest rate reported is 16 presses a second (T. Takahashi, in the press), so with a gap of 100 ms or
/// more no row of taps falls apart for speed; 0.1 s is felt as immediate (Miller, AFIPS FJCC 33, 1968), which is
/// what a wait for a second tap costs.
///
/// # State
/// 4 bytes; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in `step`. [`new`](Self::new) panics on times that are refused, in a constant at compile time.
///
/// # Examples
/// ```
/// use debounce_core::{Gesture, GestureEvent, GestureTicks, Machine, Position::{Closed, Open}};
/// const KEY: Gesture = Gesture::new(GestureTicks { gap: 3, hold: 5, repeat: 2, most_taps: 3 });
/// let mut state = Gesture::POWER_UP;
/// let mut run = |position, ticks| (0..ticks).filter_map(|_| KEY.step(&mut state, position)).last();
/// assert_eq!(run(Closed, 50), None); // held at boot
/// assert_eq!(run(Open, 50), None);
/// assert_eq!(run(Closed, 4), None);
/// assert_eq!(run(Open, 2), None);
/// assert_eq!(run(Closed, 1), None);
/// assert_eq!(run(Open, 3), Some(GestureEvent::Taps(2)));
/// assert_eq!(run(Closed, 5), Some(GestureEvent::Hold { after_taps: 0 }));
/// assert_eq!(run(Closed, 2), Some(GestureEvent::Repeat));
/// assert_eq!(run(Open, 1), Some(GestureEvent::Release));
/// ```
/// ```compile_fail,E0080
/// use debounce_core::{Gesture, GestureTicks};
/// const KEY: Gesture = Gesture::new(GestureTicks { gap: 0, hold: 5, repeat: 2, most_taps: 3 });
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Gesture {
    ticks: GestureTicks,
}

#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
enum Phase {
    AwaitOpen,
    Idle,
    Pressed,
    Between,
    Held,
}

/// What a [`Gesture`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct GestureState {
    phase: Phase,
    taps: u8,
    ticks: u16,
}

const _: () = assert!(size_of::<GestureState>() == 4);

impl GestureState {
    const fn at(phase: Phase, taps: u8, ticks: u16) -> Self {
        Self { phase, taps, ticks }
    }

    const IDLE: Self = Self::at(Phase::Idle, 0, 0);
}

impl Gesture {
    /// The state at power-up: nothing counts before the key was open for a tick.
    pub const POWER_UP: GestureState = GestureState::at(Phase::AwaitOpen, 0, 0);

    /// A key with these times.
    ///
    /// # Panics
    /// When [`try_new`](Self::try_new) refuses; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(ticks: GestureTicks) -> Self {
        match Self::try_new(ticks) {
            Ok(gesture) => gesture,
            Err(error) => panic!("{}", error.refusal()),
        }
    }

    /// [`new`](Self::new) for values known at run time; links no panic.
    ///
    /// # Errors
    /// When gap or most taps is 0, or there is a repeat without a hold.
    pub const fn try_new(ticks: GestureTicks) -> Result<Self, GestureError> {
        if ticks.gap == 0 {
            return Err(GestureError::NoGap);
        }
        if ticks.most_taps == 0 {
            return Err(GestureError::NoTaps);
        }
        if ticks.hold == 0 && ticks.repeat > 0 {
            return Err(GestureError::RepeatWithoutHold { repeat: ticks.repeat });
        }
        Ok(Self { ticks })
    }

    /// Drops whatever has begun; the key must be open for a tick before anything counts again.
    #[inline]
    pub const fn cancel(state: &mut GestureState) {
        *state = Self::POWER_UP;
    }

    /// Whether a tick with `position` would change nothing: the tick may be stopped while the key stays there.
    #[must_use]
    pub fn is_settled(&self, state: &GestureState, position: Position) -> bool {
        let mut next = *state;
        self.step(&mut next, position).is_none() && next == *state
    }

    #[inline]
    fn closed(&self, state: &mut GestureState) -> Option<GestureEvent> {
        match state.phase {
            Phase::AwaitOpen => None,
            Phase::Idle | Phase::Between => {
                *state = GestureState::at(Phase::Pressed, state.taps, 0);
                self.pressed(state)
            }
            Phase::Pressed => self.pressed(state),
            Phase::Held if self.ticks.repeat == 0 => None,
            Phase::Held => {
                state.ticks += 1;
                if state.ticks < self.ticks.repeat {
                    return None;
                }
                state.ticks = 0;
                Some(GestureEvent::Repeat)
            }
        }
    }

    #[inline]
    fn pressed(&self, state: &mut GestureState) -> Option<GestureEvent> {
        if self.ticks.hold == 0 {
            return None;
        }
        state.ticks += 1;
        if state.ticks < self.ticks.hold {
            return None;
        }
        let after_taps = state.taps;
        *state = GestureState::at(Phase::Held, 0, 0);
        Some(GestureEvent::Hold { after_taps })
    }

    #[inline]
    fn open(&self, state: &mut GestureState) -> Option<GestureEvent> {
        match state.phase {
            Phase::AwaitOpen => *state = GestureState::IDLE,
            Phase::Idle => {}
            Phase::Held => {
                *state = GestureState::IDLE;
                return Some(GestureEvent::Release);
            }
            Phase::Pressed => *state = GestureState::at(Phase::Between, state.taps.saturating_add(1), 1),
            Phase::Between => state.ticks += 1,
        }
        let over = state.ticks >= self.ticks.gap || state.taps >= self.ticks.most_taps;
        if state.phase == Phase::Between && over {
            let taps = state.taps;
            *state = GestureState::IDLE;
            return Some(GestureEvent::Taps(taps));
        }
        None
    }
}

impl Machine for Gesture {
    type Input = Position;
    type Output = Option<GestureEvent>;
    type State = GestureState;

    #[inline]
    fn step(&self, state: &mut GestureState, position: Position) -> Option<GestureEvent> {
        match position {
            Position::Closed => self.closed(state),
            Position::Open => self.open(state),
        }
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use std::string::ToString;
    use std::vec::Vec;

    /// The events of a whole history, from the lengths of its runs.
    fn from_runs(history: &[bool], t: GestureTicks) -> Vec<(usize, GestureEvent)> {
        let mut events = Vec::new();
        let mut taps = 0;
        let mut begin = history.iter().position(|closed| !closed).unwrap_or(history.len());
        while begin < history.len() {
            let closed = history[begin];
            let length = history[begin..].iter().take_while(|&&c| c == closed).count();
            let end = begin + length;
            let (hold, repeat, gap) = (usize::from(t.hold), usize::from(t.repeat), usize::from(t.gap));
            if closed && hold > 0 && length >= hold {
                events.push((begin + hold - 1, GestureEvent::Hold { after_taps: taps }));
                taps = 0;
                let repeats = (length - hold).checked_div(repeat).unwrap_or(0);
                events.extend((1..=repeats).map(|n| (begin + hold - 1 + n * repeat, GestureEvent::Repeat)));
                if end < history.len() {
                    events.push((end, GestureEvent::Release));
                }
            } else if closed && end < history.len() {
                taps += 1;
                if taps == t.most_taps {
                    events.push((end, GestureEvent::Taps(taps)));
                    taps = 0;
                }
            } else if !closed && taps > 0 && length >= gap {
                events.push((begin + gap - 1, GestureEvent::Taps(taps)));
                taps = 0;
            }
            begin = end;
        }
        events
    }

    fn run(gesture: Gesture, history: &[bool]) -> Vec<(usize, GestureEvent)> {
        let mut state = Gesture::POWER_UP;
        let step = |(tick, &closed)| Some((tick, gesture.step(&mut state, Position::closed_if(closed))?));
        history.iter().enumerate().filter_map(step).collect()
    }

    #[test]
    fn gesture_every_history_equals_run_lengths() {
        for (gap, hold, repeat, most_taps) in [
            (1, 1, 1, 1),
            (1, 2, 0, 2),
            (2, 3, 1, 1),
            (2, 3, 2, 2),
            (3, 0, 0, 2),
            (3, 4, 3, 255),
            (1, 0, 0, 255),
        ] {
            let ticks = GestureTicks { gap, hold, repeat, most_taps };
            let gesture = Gesture::new(ticks);
            for bits in 0..1u32 << 15 {
                let history: Vec<_> = (0..15).map(|i| bits >> i & 1 == 1).collect();
                assert_eq!(run(gesture, &history), from_runs(&history, ticks), "{ticks:?} {history:?}");
            }
        }
    }

    #[test]
    fn gesture_cancel_leaves_no_event_behind() {
        let gesture = Gesture::new(GestureTicks { gap: 2, hold: 3, repeat: 2, most_taps: 2 });
        for bits in 0..1u32 << 8 {
            let mut state = Gesture::POWER_UP;
            for i in 0..8 {
                let _ = gesture.step(&mut state, Position::closed_if(bits >> i & 1 == 1));
            }
            Gesture::cancel(&mut state);
            for _ in 0..20 {
                assert_eq!(gesture.step(&mut state, Position::Closed), None);
            }
            assert!(gesture.is_settled(&state, Position::Closed));
            for _ in 0..20 {
                assert_eq!(gesture.step(&mut state, Position::Open), None);
            }
            assert_eq!(gesture.step(&mut state, Position::Closed), None);
            assert_eq!(gesture.step(&mut state, Position::Open), None);
            assert_eq!(gesture.step(&mut state, Position::Open), Some(GestureEvent::Taps(1)));
        }
    }

    /// Outside check: 16 presses a second, the fastest reported (T. Takahashi, in the press), at 1 ms ticks.
    #[test]
    fn gesture_fastest_reported_taps_are_one_row() {
        let gesture = Gesture::new(GestureTicks { gap: 100, hold: 400, repeat: 0, most_taps: 255 });
        let mut history = std::vec![false; 10];
        for _ in 0..16 {
            history.extend([[true; 31], [false; 31]].concat());
        }
        history.extend([false; 200]);
        let events = run(gesture, &history);
        assert_eq!(events.iter().map(|e| e.1).collect::<Vec<_>>(), [GestureEvent::Taps(16)]);
    }

    #[test]
    fn gesture_hold_at_count_maximum_is_reached_once() {
        let gesture =
            Gesture::new(GestureTicks { gap: u16::MAX, hold: u16::MAX, repeat: u16::MAX, most_taps: 1 });
        let mut history = std::vec![false];
        history.extend(std::vec![true; 3 * 65_535]);
        let events = run(gesture, &history);
        let expected = [
            (65_535, GestureEvent::Hold { after_taps: 0 }),
            (2 * 65_535, GestureEvent::Repeat),
            (3 * 65_535, GestureEvent::Repeat),
        ];
        assert_eq!(events, expected);
    }

    #[test]
    fn gesture_taps_beyond_count_are_reported_at_most_taps() {
        let gesture = Gesture::new(GestureTicks { gap: 3, hold: 0, repeat: 0, most_taps: 255 });
        let mut history = std::vec![false];
        for _ in 0..300 {
            history.extend([true, false]);
        }
        history.extend([false; 3]);
        let taps: Vec<_> = run(gesture, &history).into_iter().map(|e| e.1).collect();
        assert_eq!(taps, [GestureEvent::Taps(255), GestureEvent::Taps(45)]);
    }

    #[test]
    fn gesture_lost_ticks_stretch_times_but_keep_events() {
        let gesture = Gesture::new(GestureTicks { gap: 4, hold: 6, repeat: 0, most_taps: 3 });
        let history: Vec<_> =
            [(false, 3), (true, 3), (false, 2), (true, 3), (false, 7), (true, 9), (false, 8)]
                .iter()
                .flat_map(|&(closed, n)| std::iter::repeat_n(closed, n))
                .collect();
        let whole: Vec<_> = run(gesture, &history).into_iter().map(|e| e.1).collect();
        assert_eq!(whole.len(), 3);
        for lost in 0..history.len() {
            let mut rest = history.clone();
            rest.remove(lost);
            assert_eq!(run(gesture, &rest).into_iter().map(|e| e.1).collect::<Vec<_>>(), whole, "{lost}");
        }
    }

    #[test]
    fn gesture_bad_times_are_refused() {
        let good = GestureTicks { gap: 1, hold: 1, repeat: 1, most_taps: 1 };
        assert!(Gesture::try_new(good).is_ok());
        for (ticks, text) in [
            (GestureTicks { gap: 0, ..good }, "a gap of 0 ticks ends no row of taps; use at least 1"),
            (GestureTicks { most_taps: 0, ..good }, "a row of 0 taps is never reported; use at least 1"),
            (
                GestureTicks { hold: 0, repeat: 9, ..good },
                "a repeat of 9 ticks needs a hold to start from; set hold, or repeat to 0",
            ),
        ] {
            assert_eq!(Gesture::try_new(ticks).map_err(|e| e.to_string()), Err(text.to_string()));
        }
    }
}
