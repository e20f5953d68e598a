//! Stretches in which a line was not at rest: [`Bursts`].

use crate::error::{Parameter, ParameterError};
use crate::machine::{Change, Machine, Position};

/// A stretch of a line that was not at rest, from its first change to its last.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Burst {
    /// Where the line was at rest before.
    pub from: Position,
    /// Where it came to rest.
    pub to: Position,
    /// Ticks from the first change to the last; 0 is a single clean change. At its maximum, that or more.
    pub ticks: u16,
    /// How often the line changed, at least 1. At its maximum, that or more.
    pub changes: u16,
}

impl Burst {
    /// The contact's change, where the line came to rest at the other position; else it was a disturbance.
    #[must_use]
    pub const fn operation(&self) -> Option<Change> {
        match (self.from, self.to) {
            (Position::Open, Position::Closed) => Some(Change::Make),
            (Position::Closed, Position::Open) => Some(Change::Break),
            _ => None,
        }
    }
}

/// Finds the bursts of a line in its samples, and reports each once it has come to rest.
///
/// # Method
/// Derived here: changes less than `rest` ticks apart belong to one burst. No law is asked: the line alone decides.
///
/// # Units
/// One call to [`step`](Machine::step) takes one raw sample and is one tick. Rest and widths are in ticks.
///
/// # Bounds
///
/// | Quantity                              | Value                           | Proof                              |
/// |---------------------------------------|---------------------------------|------------------------------------|
/// | bursts that a change belongs to       | exactly 1                       | `bursts_every_history_equals_changes`  |
/// | report                                | at the `rest`-th sample from the last change on | same               |
/// | reports of the sample at power-up     | none                            | same                               |
///
/// A bounce of `B` samples makes a burst of at most `B` ticks. What follows a bounce by less than `rest` ticks is counted
/// in with it: choose `rest` shorter than the quiet between disturbances and longer than the longest gap inside a
/// bounce. Lost ticks make bursts narrower.
///
/// # State
/// 8 bytes; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in `step`. A rest of 0 panics in [`new`](Self::new), in a constant at compile time.
///
/// # Examples
/// ```
/// use debounce_core::{Burst, Bursts, Machine, Position::{Closed, Open}};
/// const LINE: Bursts = Bursts::new(3);
/// let mut state = Bursts::POWER_UP;
/// let samples = [Open, Closed, Open, Closed, Closed, Closed];
/// let seen = samples.map(|sample| LINE.step(&mut state, sample));
/// assert_eq!(seen[5], Some(Burst { from: Open, to: Closed, ticks: 2, changes: 3 }));
/// assert_eq!(seen[..5], [None; 5]);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Bursts {
    rest: u16,
}

/// What a [`Bursts`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct BurstsState {
    line: Option<Position>,
    from: Position,
    // Changes of the burst that runs, 0 while the line is at rest; ticks to its last change, and since then.
    changes: u16,
    ticks: u16,
    still: u16,
}

const _: () = assert!(size_of::<BurstsState>() == 8);

impl BurstsState {
    /// Whether the line is at rest.
    #[must_use]
    pub const fn at_rest(&self) -> bool {
        self.changes == 0
    }
}

impl Bursts {
    /// The state at power-up: no sample was taken.
    pub const POWER_UP: BurstsState =
        BurstsState { line: None, from: Position::Open, changes: 0, ticks: 0, still: 0 };

    /// A line that is at rest when it has read alike for `rest_ticks` samples.
    ///
    /// # Panics
    /// When it is 0; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(rest_ticks: u16) -> Self {
        match Self::try_new(rest_ticks) {
            Ok(bursts) => bursts,
            Err(_) => panic!("a line is at rest after at least 1 sample"),
        }
    }

    /// [`new`](Self::new) for values known at run time; links no panic.
    ///
    /// # Errors
    /// [`ParameterError::Zero`] where it is 0.
    pub const fn try_new(rest_ticks: u16) -> Result<Self, ParameterError> {
        if rest_ticks == 0 {
            Err(ParameterError::Zero(Parameter::Rest))
        } else {
            Ok(Self { rest: rest_ticks })
        }
    }
}

impl Machine for Bursts {
    type Input = Position;
    type Output = Option<Burst>;
    type State = BurstsState;

    #[inline]
    fn step(&self, state: &mut BurstsState, sample: Position) -> Option<Burst> {
        let line = state.line.replace(sample)?;
        if sample != line {
            if state.changes == 0 {
                state.from = line;
                state.ticks = 0;
            } else {
                state.ticks = state.ticks.saturating_add(state.still);
            }
            state.changes = state.changes.saturating_add(1);
            state.still = 0;
        } else if state.changes == 0 {
            return None;
        }
        state.still = state.still.saturating_add(1);
        if state.still < self.rest {
            return None;
        }
        let burst = Burst { from: state.from, to: sample, ticks: state.ticks, changes: state.changes };
        // At rest everything but the line is as at power-up, so that the state comes to rest as well.
        *state = BurstsState { line: Some(sample), ..Self::POWER_UP };
        Some(burst)
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use std::vec::Vec;

    #[test]
    fn bursts_every_history_equals_changes() {
        for rest in 1..=4usize {
            let bursts = Bursts::new(u16::try_from(rest).unwrap());
            for bits in 0..1u32 << 14 {
                let history: Vec<_> = (0..14).map(|i| Position::closed_if(bits >> i & 1 == 1)).collect();
                let changes: Vec<_> = (1..14).filter(|&t| history[t] != history[t - 1]).collect();
                let mut expected = Vec::new();
                for group in changes.chunk_by(|a, b| b - a < rest) {
                    let (first, last) = (group[0], group[group.len() - 1]);
                    if last + rest <= 14 {
                        let burst = Burst {
                            from: history[first - 1],
                            to: history[last],
                            ticks: u16::try_from(last - first).unwrap(),
                            changes: u16::try_from(group.len()).unwrap(),
                        };
                        expected.push((last + rest - 1, burst));
                    }
                }
                let mut state = Bursts::POWER_UP;
                let step = |(tick, &sample)| Some((tick, bursts.step(&mut state, sample)?));
                assert_eq!(
                    history.iter().enumerate().filter_map(step).collect::<Vec<_>>(),
                    expected,
                    "{bits:b}"
                );
            }
        }
    }

    #[test]
    fn bursts_longer_than_count_stay_at_its_end() {
        let bursts = Bursts::new(3);
        let mut state = Bursts::POWER_UP;
        for tick in 0..200_000u32 {
            assert_eq!(bursts.step(&mut state, Position::closed_if(tick & 1 == 1)), None);
        }
        let last = (0..3).filter_map(|_| bursts.step(&mut state, Position::Closed)).last();
        let expected =
            Burst { from: Position::Open, to: Position::Closed, ticks: u16::MAX, changes: u16::MAX };
        assert_eq!(last, Some(expected));
        assert_eq!(Bursts::try_new(0), Err(ParameterError::Zero(Parameter::Rest)));
        assert!(state.at_rest());
    }
}
