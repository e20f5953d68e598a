//! Two contacts that say the same thing: [`ContactPair`].

use crate::machine::{Change, Machine, Position};

/// How the two channels of a pair belong together.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum PairKind {
    /// Both closed is active, both open is inactive.
    Equivalent,
    /// The first closed and the second open is active, the reverse inactive.
    Antivalent,
}

/// The settled positions of both channels at one tick.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PairPositions {
    /// The first channel.
    pub first: Position,
    /// The second channel.
    pub second: Position,
}

/// What is wrong with a pair.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum PairFault {
    /// The channels disagreed for longer than allowed, and the pair had not been active.
    NotJoined,
    /// The pair was active and did not become inactive in time: one channel stayed, or came back.
    NotLeft,
}

/// What one tick of a [`ContactPair`] brought; all `None` in most ticks.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[must_use]
pub struct PairReport {
    /// The first position after power-up, closed for active; it is no operation.
    pub initial: Option<Position>,
    /// The pair became active (a make) or ceased to be (a break).
    pub edge: Option<Change>,
    /// A fault that begins at this tick.
    pub fault: Option<PairFault>,
    /// A fault that ends at this tick.
    pub cleared: Option<PairFault>,
}

/// Joins two settled contacts into one: active only while both say so, with a limit on how long they may disagree.
///
/// **This is not a safety function.** Where a contact can hurt someone, use certified parts, assessed by qualified people
/// under the local code (ISO 13849, IEC 61508 and others may apply); nothing here meets them.
///
/// # Method
/// Two-channel evaluation with a discrepancy time. Sources: the equivalent and antivalent function blocks of PLCopen
/// Safety, as a controller manual gives them; the truth table of Rockwell 1734-UM013. Equivalent: 00 inactive, 11
/// active, else a fault after the set time; antivalent: 10 active, 01 inactive. A pair that was active must pass
/// through inactive, within the same time, before it can be active again; a fault clears only at the inactive state.
///
/// # Units
/// One call to [`step`](Machine::step) takes the settled positions of both channels and is one tick. The limit is in
/// ticks; do not set it longer than the pair needs.
///
/// # Bounds
///
/// | Quantity                                                | Value                   | Proof                             |
/// |---------------------------------------------------------|-------------------------|-----------------------------------|
/// | active while a channel is not                           | never                   | `pair_every_history_keeps_its_promises` |
/// | latency of either edge                                  | exactly 1               | same                              |
/// | ticks of disagreement without a fault                   | at most the limit       | same                              |
/// | samples that clear a fault, or let a pair be active again | both channels inactive | same                              |
/// | operations at power-up                                  | none; `initial` instead | same                              |
///
/// A pair that is active at power-up is reported as initially closed: whether that may start anything is for the
/// program to say. A lost tick makes the limit longer in time.
///
/// # State
/// 4 bytes; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never.
///
/// # Examples
/// ```
/// use debounce_core::{Change, ContactPair, Machine, PairFault, PairKind, PairPositions, Position::{Closed, Open}};
/// const LID: ContactPair = ContactPair::new(PairKind::Equivalent, 2);
/// let mut state = ContactPair::POWER_UP;
/// let mut tick = |first, second| LID.step(&mut state, PairPositions { first, second });
/// assert_eq!(tick(Open, Open).initial, Some(Open));
/// assert_eq!(tick(Closed, Open).edge, None);
/// assert_eq!(tick(Closed, Closed).edge, Some(Change::Make));
/// assert_eq!(tick(Open, Closed).edge, Some(Change::Break)); // the first channel that leaves
/// assert_eq!(tick(Closed, Closed).edge, None);              // and coming back is not enough
/// assert_eq!(tick(Closed, Closed).fault, Some(PairFault::NotLeft));
/// assert_eq!(tick(Open, Open).cleared, Some(PairFault::NotLeft));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct ContactPair {
    kind: PairKind,
    discrepancy: u16,
}

#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
enum Phase {
    PowerUp,
    Inactive,
    Active,
    /// Was active, and has not been inactive since.
    Leaving,
    Fault(PairFault),
}

/// What a [`ContactPair`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PairState {
    phase: Phase,
    ticks: u16,
}

const _: () = assert!(size_of::<PairState>() == 4);

impl PairState {
    /// Closed while the pair is active; `None` before the first position after power-up.
    #[must_use]
    pub const fn position(&self) -> Option<Position> {
        match self.phase {
            Phase::PowerUp => None,
            Phase::Active => Some(Position::Closed),
            _ => Some(Position::Open),
        }
    }

    /// The fault that is present.
    #[must_use]
    pub const fn fault(&self) -> Option<PairFault> {
        match self.phase {
            Phase::Fault(fault) => Some(fault),
            _ => None,
        }
    }
}

impl ContactPair {
    /// The state at power-up: no position.
    pub const POWER_UP: PairState = PairState { phase: Phase::PowerUp, ticks: 0 };

    /// A pair that may disagree for `discrepancy_ticks` in a row.
    #[must_use]
    pub const fn new(kind: PairKind, discrepancy_ticks: u16) -> Self {
        Self { kind, discrepancy: discrepancy_ticks }
    }

    /// The position of the pair, where its channels agree: closed for active.
    #[inline]
    const fn joined(&self, positions: PairPositions) -> Option<Position> {
        let second = match self.kind {
            PairKind::Equivalent => positions.second,
            PairKind::Antivalent => positions.second.opposite(),
        };
        match (positions.first, second) {
            (Position::Closed, Position::Closed) => Some(Position::Closed),
            (Position::Open, Position::Open) => Some(Position::Open),
            _ => None,
        }
    }

    /// Whether a tick with `positions` would change nothing: the tick may be stopped while they stay.
    #[must_use]
    pub fn is_settled(&self, state: &PairState, positions: PairPositions) -> bool {
        let mut next = *state;
        self.step(&mut next, positions) == PairReport::default() && next == *state
    }
}

impl Machine for ContactPair {
    type Input = PairPositions;
    type Output = PairReport;
    type State = PairState;

    #[inline]
    fn step(&self, state: &mut PairState, positions: PairPositions) -> PairReport {
        let mut report = PairReport::default();
        let joined = self.joined(positions);
        let next = match (state.phase, joined) {
            (phase, Some(Position::Open)) => {
                match phase {
                    Phase::PowerUp => report.initial = Some(Position::Open),
                    Phase::Active => report.edge = Some(Change::Break),
                    Phase::Fault(fault) => report.cleared = Some(fault),
                    Phase::Inactive | Phase::Leaving => {}
                }
                Phase::Inactive
            }
            (Phase::PowerUp, Some(Position::Closed)) => {
                report.initial = Some(Position::Closed);
                Phase::Active
            }
            (Phase::Inactive, Some(Position::Closed)) => {
                report.edge = Some(Change::Make);
                Phase::Active
            }
            (Phase::Active, None) => {
                report.edge = Some(Change::Break);
                Phase::Leaving
            }
            (phase, _) => phase,
        };
        let limited = match next {
            Phase::PowerUp | Phase::Inactive if joined.is_none() => Some(PairFault::NotJoined),
            Phase::Leaving => Some(PairFault::NotLeft),
            _ => None,
        };
        let Some(fault) = limited else {
            *state = PairState { phase: next, ticks: 0 };
            return report;
        };
        // The count of disagreement goes on through whatever the channels do, except where they settle it.
        if state.ticks < self.discrepancy {
            *state = PairState { phase: next, ticks: state.ticks.saturating_add(1) };
        } else {
            // A pair without a position is not active: it gets the open one together with its fault.
            if state.phase == Phase::PowerUp {
                report.initial = Some(Position::Open);
            }
            report.fault = Some(fault);
            *state = PairState { phase: Phase::Fault(fault), ticks: 0 };
        }
        report
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use std::vec::Vec;

    const ALL: [PairPositions; 4] = {
        let (o, c) = (Position::Open, Position::Closed);
        [
            PairPositions { first: o, second: o },
            PairPositions { first: o, second: c },
            PairPositions { first: c, second: o },
            PairPositions { first: c, second: c },
        ]
    };

    /// Outside check: the tables of the published function blocks, each input held. Sources: PLCopen Safety blocks as in
    /// a controller manual; Rockwell 1734-UM013.
    #[test]
    fn pair_held_positions_equal_published_tables() {
        #[track_caller]
        fn check(kind: PairKind, positions: PairPositions, expected: Option<Position>) {
            let pair = ContactPair::new(kind, 5);
            let mut state = ContactPair::POWER_UP;
            for tick in 1..=10 {
                let _ = pair.step(&mut state, positions);
                match expected {
                    Some(position) => assert_eq!((state.position(), state.fault()), (Some(position), None)),
                    None => assert_eq!(state.fault().is_some(), tick > 5),
                }
            }
            assert!(pair.is_settled(&state, positions));
        }
        let equivalent = [Some(Position::Open), None, None, Some(Position::Closed)];
        let antivalent = [None, Some(Position::Open), Some(Position::Closed), None];
        for i in 0..4 {
            check(PairKind::Equivalent, ALL[i], equivalent[i]);
            check(PairKind::Antivalent, ALL[i], antivalent[i]);
        }
    }

    #[test]
    fn pair_every_history_keeps_its_promises() {
        for kind in [PairKind::Equivalent, PairKind::Antivalent] {
            for limit in 0..=3u16 {
                let pair = ContactPair::new(kind, limit);
                for code in 0..4usize.pow(8) {
                    let history: Vec<_> = (0..8).map(|i| ALL[code / 4usize.pow(i) % 4]).collect();
                    promises_hold(pair, limit, &history);
                }
            }
        }
    }

    fn promises_hold(pair: ContactPair, limit: u16, history: &[PairPositions]) {
        let mut state = ContactPair::POWER_UP;
        // Whether an inactive sample came since the pair was last active; samples since it last was as it should be.
        let (mut inactive_seen, mut unresolved, mut initials) = (true, 0u16, 0);
        for &positions in history {
            let before = state;
            let report = pair.step(&mut state, positions);
            let joined = pair.joined(positions);
            let (was, is) = (before.position(), state.position());
            initials += u32::from(report.initial.is_some());

            // Active only while both say so, and the report is of just this tick.
            assert!(is != Some(Position::Closed) || joined == Some(Position::Closed), "{history:?}");
            assert!(
                was != Some(Position::Closed)
                    || joined == Some(Position::Closed)
                    || report.edge == Some(Change::Break)
            );
            assert_eq!(
                report.edge == Some(Change::Make),
                was == Some(Position::Open) && is == Some(Position::Closed)
            );
            assert_eq!(
                report.edge == Some(Change::Break),
                was == Some(Position::Closed) && is == Some(Position::Open)
            );
            // Active again only by way of inactive.
            if report.edge == Some(Change::Make) {
                assert!(inactive_seen, "{history:?}");
            }
            inactive_seen = match (joined, is) {
                (Some(Position::Open), _) => true,
                (_, Some(Position::Closed)) => false,
                _ => inactive_seen,
            };
            // A fault comes exactly when the pair was neither inactive nor active for more than the limit.
            let resolved = joined == Some(Position::Open) || is == Some(Position::Closed);
            unresolved = if resolved { 0 } else { unresolved + 1 };
            assert_eq!(state.fault().is_some(), unresolved > limit, "{history:?}");
            assert_eq!(report.fault, state.fault().filter(|_| before.fault().is_none()));
            // And goes only at the inactive state.
            if before.fault().is_some() && state.fault().is_none() {
                assert_eq!((joined, report.cleared), (Some(Position::Open), before.fault()));
            }
            // Nothing is operated at power-up.
            assert_eq!(report.initial, is.filter(|_| was.is_none()));
            assert!(was.is_some() || report.edge.is_none());
        }
        assert!(initials <= 1);
    }

    #[test]
    fn pair_limit_at_count_maximum_is_reached() {
        let pair = ContactPair::new(PairKind::Equivalent, u16::MAX);
        let mut state = ContactPair::POWER_UP;
        let faults: Vec<_> = (0..70_000).map(|_| pair.step(&mut state, ALL[1]).fault).collect();
        assert_eq!(faults.iter().position(Option::is_some), Some(65_535));
    }
}
