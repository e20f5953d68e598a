//! Change-over contact (SPDT), both throws read: [`Changeover`].

use crate::machine::{Change, Machine, Position};

/// One sample of both throws of a change-over contact.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Throws {
    /// The throw that the contact touches while it is not operated (normally closed).
    pub resting: Position,
    /// The throw that it touches while it is operated (normally open).
    pub working: Position,
}

impl Throws {
    /// All four samples.
    pub const ALL: [Self; 4] = [
        Self { resting: Position::Open, working: Position::Open },
        Self { resting: Position::Closed, working: Position::Open },
        Self { resting: Position::Open, working: Position::Closed },
        Self { resting: Position::Closed, working: Position::Closed },
    ];

    /// The position this sample says, where it says one: closed on the working throw, open on the resting throw.
    #[must_use]
    #[inline]
    pub const fn position(self) -> Option<Position> {
        match (self.resting, self.working) {
            (Position::Closed, Position::Open) => Some(Position::Open),
            (Position::Open, Position::Closed) => Some(Position::Closed),
            _ => None,
        }
    }
}

/// What is wrong with a change-over contact.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum ChangeoverFault {
    /// Both throws read made for longer than allowed: impossible, so a short or a wiring fault.
    BothMade,
    /// Neither throw was reached in time: stuck between them, a broken wire, or a throw that never arrives.
    NoThrow,
}

/// What one tick of a [`Changeover`] brought; all `None` in most ticks.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[must_use]
pub struct ChangeoverReport {
    /// The first position after power-up; it is no operation.
    pub initial: Option<Position>,
    /// An operation.
    pub edge: Option<Change>,
    /// A fault that begins at this tick.
    pub fault: Option<ChangeoverFault>,
    /// A fault that ends at this tick.
    pub cleared: Option<ChangeoverFault>,
}

/// Latches a change-over contact: reports the other position at the first sample of the other throw, bounce or not.
///
/// # Method
/// The set-reset latch on a break-before-make contact: the output follows the first touch of the other throw and
/// ignores the rest, for a contact that bounces off a throw never reaches back to the other. Sources: D. Gingrich,
/// Phys 395 notes, University of Alberta; Sheffield PHY107 notes. Added here: a throw that never arrives, and both
/// throws made, are told apart by counting such samples in a row.
///
/// # Units
/// One call to [`step`](Machine::step) takes one sample of both throws and is one tick. Limits are in ticks.
///
/// # Bounds
///
/// | Quantity                                                | Value              | Proof                                        |
/// |---------------------------------------------------------|--------------------|----------------------------------------------|
/// | latency from the first sample of the other throw        | exactly 1          | `changeover_every_history_equals_look_back`  |
/// | bounce on the throw that was reached                    | any, no edge       | `changeover_bounce_on_either_throw_is_no_edge` |
/// | disturbance of one line at a time, from rest            | any, no edge       | same                                         |
/// | tick that reports a fault                               | the first over its limit, once | `changeover_every_history_equals_look_back` |
///
/// Not promised: a disturbance that hits both lines in the same sample looks like an operation. A contact that is
/// make-before-break is outside the method: it reads both made in passing, and needs `both_ticks` above that time.
/// A lost tick makes both times longer by itself, and never makes an edge.
///
/// # State
/// 6 bytes or less; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never.
///
/// # Examples
/// ```
/// use debounce_core::{Change, Changeover, ChangeoverFault, Machine, Position::{Closed, Open}, Throws};
/// // At most 20 ticks under way, and not one sample with both throws made.
/// const LEVER: Changeover = Changeover::new(20, 0);
/// let mut state = Changeover::POWER_UP;
/// let resting = Throws { resting: Closed, working: Open };
/// let between = Throws { resting: Open, working: Open };
/// let working = Throws { resting: Open, working: Closed };
/// assert_eq!(LEVER.step(&mut state, resting).initial, Some(Open));
/// assert_eq!(LEVER.step(&mut state, between).edge, None);
/// assert_eq!(LEVER.step(&mut state, working).edge, Some(Change::Make)); // the first touch
/// assert_eq!(LEVER.step(&mut state, between).edge, None);               // bounces off, and is still closed
/// assert_eq!(state.position(), Some(Closed));
/// let both = Throws { resting: Closed, working: Closed };
/// assert_eq!(LEVER.step(&mut state, both).fault, Some(ChangeoverFault::BothMade));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Changeover {
    travel: u16,
    both: u16,
}

/// What a [`Changeover`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct ChangeoverState {
    position: Option<Position>,
    // Samples in a row that name no throw, and whether they read both made.
    unclear: u16,
    both: bool,
    fault: Option<ChangeoverFault>,
}

const _: () = assert!(size_of::<ChangeoverState>() <= 6);

impl ChangeoverState {
    /// The latched position; `None` before the first throw was seen.
    #[must_use]
    pub const fn position(&self) -> Option<Position> {
        self.position
    }

    /// The fault that is present.
    #[must_use]
    pub const fn fault(&self) -> Option<ChangeoverFault> {
        self.fault
    }
}

impl Changeover {
    /// The state at power-up: no position.
    pub const POWER_UP: ChangeoverState =
        ChangeoverState { position: None, unclear: 0, both: false, fault: None };

    /// A contact that may read neither throw for `travel_ticks` samples in a row, and both for `both_ticks`.
    ///
    /// A travel of `u16::MAX` is no limit.
    #[must_use]
    pub const fn new(travel_ticks: u16, both_ticks: u16) -> Self {
        Self { travel: travel_ticks, both: both_ticks }
    }

    /// Whether a tick that reads `throws` would change nothing: the tick may be stopped while they read so.
    #[must_use]
    pub fn is_settled(&self, state: &ChangeoverState, throws: Throws) -> bool {
        let mut next = *state;
        self.step(&mut next, throws) == ChangeoverReport::default() && next == *state
    }
}

impl Machine for Changeover {
    type Input = Throws;
    type Output = ChangeoverReport;
    type State = ChangeoverState;

    #[inline]
    fn step(&self, state: &mut ChangeoverState, throws: Throws) -> ChangeoverReport {
        let mut report = ChangeoverReport::default();
        if let Some(position) = throws.position() {
            match state.position {
                None => report.initial = Some(position),
                Some(old) if old != position => report.edge = Some(position.reached_by()),
                Some(_) => {}
            }
            report.cleared = state.fault;
            *state = ChangeoverState { position: Some(position), ..Self::POWER_UP };
            return report;
        }
        let both = throws.working.is_closed();
        if both != state.both {
            state.unclear = 0;
            state.both = both;
        }
        let (limit, fault) = if both {
            (self.both, ChangeoverFault::BothMade)
        } else {
            (self.travel, ChangeoverFault::NoThrow)
        };
        // Never counts past the limit, so the state of a stuck contact comes to rest.
        if state.unclear < limit {
            state.unclear += 1;
        } else if state.fault != Some(fault) && (both || limit < u16::MAX) {
            report.cleared = state.fault;
            report.fault = Some(fault);
            state.fault = Some(fault);
        }
        report
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use std::vec::Vec;

    const BETWEEN: Throws = Throws::ALL[0];
    const RESTING: Throws = Throws::ALL[1];
    const WORKING: Throws = Throws::ALL[2];
    const BOTH: Throws = Throws::ALL[3];

    /// Position and fault after a history, by looking back over it.
    fn look_back(
        history: &[Throws],
        travel: usize,
        both: usize,
    ) -> (Option<Position>, Option<ChangeoverFault>) {
        let last = history.iter().rposition(|t| t.position().is_some());
        let position = last.and_then(|i| history[i].position());
        // The latest stretch of like unclear samples since then that was too long decides.
        let mut fault = None;
        let mut run = 0;
        let mut before = None;
        for &throws in &history[last.map_or(0, |i| i + 1)..] {
            run = if before == Some(throws) { run + 1 } else { 1 };
            before = Some(throws);
            if throws == BOTH && run > both {
                fault = Some(ChangeoverFault::BothMade);
            } else if throws == BETWEEN && run > travel {
                fault = Some(ChangeoverFault::NoThrow);
            }
        }
        (position, fault)
    }

    #[test]
    fn changeover_every_history_equals_look_back() {
        for (travel, both) in [(0, 0), (1, 0), (2, 1), (3, 2)] {
            let contact = Changeover::new(travel, both);
            for length in 0..=8u32 {
                for code in 0..4usize.pow(length) {
                    let history: Vec<_> =
                        (0..length).map(|i| Throws::ALL[code / 4usize.pow(i) % 4]).collect();
                    let mut state = Changeover::POWER_UP;
                    let mut before = (None, None);
                    for end in 1..=history.len() {
                        let report = contact.step(&mut state, history[end - 1]);
                        let (position, fault) =
                            look_back(&history[..end], usize::from(travel), usize::from(both));
                        assert_eq!((state.position(), state.fault()), (position, fault), "{history:?}");
                        let expected = ChangeoverReport {
                            initial: if before.0.is_none() { position } else { None },
                            edge: before
                                .0
                                .and(position)
                                .filter(|_| before.0 != position)
                                .map(Position::reached_by),
                            fault: fault.filter(|_| fault != before.1),
                            cleared: before.1.filter(|_| fault != before.1),
                        };
                        assert_eq!(report, expected, "{history:?} at {end}");
                        before = (position, fault);
                    }
                }
            }
        }
    }

    #[test]
    fn changeover_bounce_on_either_throw_is_no_edge() {
        let contact = Changeover::new(2, 1);
        for (rest, line) in [(RESTING, BETWEEN), (RESTING, BOTH), (WORKING, BETWEEN), (WORKING, BOTH)] {
            for pattern in 0..1u32 << 12 {
                let mut state = Changeover::POWER_UP;
                let _ = contact.step(&mut state, rest);
                for tick in 0..12 {
                    let sample = if pattern >> tick & 1 == 1 { line } else { rest };
                    assert_eq!(contact.step(&mut state, sample).edge, None);
                }
            }
        }
    }

    #[test]
    fn changeover_travel_limit_is_exact_and_reported_once() {
        let contact = Changeover::new(3, 0);
        let mut state = Changeover::POWER_UP;
        let _ = contact.step(&mut state, RESTING);
        let faults: Vec<_> = (0..70_000).map(|_| contact.step(&mut state, BETWEEN).fault).collect();
        assert_eq!(faults.iter().position(Option::is_some), Some(3));
        assert_eq!(faults.iter().flatten().count(), 1);
        assert!(contact.is_settled(&state, BETWEEN));
        assert_eq!(contact.step(&mut state, WORKING).cleared, Some(ChangeoverFault::NoThrow));
    }

    #[test]
    fn changeover_travel_without_limit_never_faults() {
        let contact = Changeover::new(u16::MAX, 0);
        let mut state = Changeover::POWER_UP;
        for _ in 0..200_000 {
            assert_eq!(contact.step(&mut state, BETWEEN), ChangeoverReport::default());
        }
    }
}
