//! Power-up: a law that has no position until the first settled one: [`Starting`].

use crate::law::Law;
use crate::machine::{Change, Machine, Position};

/// What a law reports from power-up on.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Started {
    /// The position found at power-up. It comes once, before any edge, and is no operation.
    Initial(Position),
    /// An operation.
    Edge(Change),
}

/// Finds the position at power-up and reports it as [`Started::Initial`], never as an edge; from then on runs `L`.
///
/// A contact that is closed at boot was not operated, and a law that is started at the wrong position would say
/// that it was. Nor can the first sample be believed: it may fall in a bounce or a disturbance.
///
/// # Method
/// Derived here. The law runs twice, from rest open and from rest closed. As soon as both runs are in the same
/// state, the start makes no difference any more: that state's output is reported as the position, and one run
/// goes on. Until then nothing is reported.
///
/// So everything after the first report is what the law would have reported had it been started at *either*
/// position; whatever is proved of it for a start at the contact's true position holds from there on, and so does
/// what is proved for a contact that was operated exactly at power-up, bounce and all. An operation before the
/// first report is not reported as an edge; the position already includes it.
///
/// # Units
/// One step takes one sample and is one tick.
///
/// # Bounds
/// A constant line is reported once the law, started at the other position, has followed it and settled. In ticks,
/// counting the first sample as 1:
///
/// | law                | first report on a constant line                                          |
/// |--------------------|--------------------------------------------------------------------------|
/// | `Integrator`       | full scale divided by the step of that sample, rounded up                |
/// | `ShiftRegister`    | the window                                                               |
/// | `MajorityRegister` | the window, which must be filled anew                                    |
/// | `StateMachine`     | the confirm count and the lock-out of the change to that position, added |
///
/// Proof: `starting_constant_line_is_reported_in_time`. Not promised: a law of one's own that never forgets its
/// start (a count of all edges in its state, say) is never decided.
///
/// # State
/// Twice that of the law, and at most one tag beside it.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never.
///
/// # Examples
/// A contact that is closed at boot, with a disturbance in the first sample:
/// ```
/// use debounce_core::{Change, Position::{Closed, Open}, Running, ShiftRegister, Started};
/// let mut lid = Running::starting(ShiftRegister::new(2));
/// assert_eq!(lid.tick(Open), None);
/// assert_eq!(lid.tick(Closed), None);
/// assert_eq!(lid.position(), None);
/// assert_eq!(lid.tick(Closed), Some(Started::Initial(Closed)));
/// assert_eq!(lid.position(), Some(Closed));
/// assert_eq!(lid.tick(Open), None);
/// assert_eq!(lid.tick(Open), Some(Started::Edge(Change::Break)));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Starting<L> {
    law: L,
}

/// What a [`Starting`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum StartingState<S> {
    /// The two runs still differ.
    Undecided {
        /// The run that was at rest open at power-up.
        from_open: S,
        /// The run that was at rest closed at power-up.
        from_closed: S,
    },
    /// The runs have met.
    Decided(S),
}

impl<S: Copy> StartingState<S> {
    /// Power-up, for constants: the rest states of the law at open and at closed.
    #[must_use]
    pub const fn undecided(rest_open: S, rest_closed: S) -> Self {
        Self::Undecided { from_open: rest_open, from_closed: rest_closed }
    }
}

impl<L: Law> Starting<L> {
    /// Starts `law`.
    #[must_use]
    pub const fn new(law: L) -> Self {
        Self { law }
    }

    /// The law.
    #[must_use]
    pub const fn law(&self) -> &L {
        &self.law
    }

    /// The state at power-up.
    #[must_use]
    pub fn power_up(&self) -> StartingState<L::State> {
        StartingState::undecided(self.law.rest(Position::Open), self.law.rest(Position::Closed))
    }

    /// The debounced position in `state`, once there is one.
    #[must_use]
    #[inline]
    pub fn position(&self, state: &StartingState<L::State>) -> Option<Position> {
        match state {
            StartingState::Undecided { .. } => None,
            StartingState::Decided(state) => Some(self.law.output(state)),
        }
    }
}

impl<L: Law> Machine for Starting<L> {
    type Input = Position;
    type Output = Option<Started>;
    type State = StartingState<L::State>;

    #[inline]
    fn step(&self, state: &mut Self::State, sample: Position) -> Option<Started> {
        match state {
            StartingState::Decided(decided) => self.law.step(decided, sample).map(Started::Edge),
            StartingState::Undecided { from_open, from_closed } => {
                // Edges of either run are guesses about a contact whose position is not known.
                let _ = self.law.step(from_open, sample);
                let _ = self.law.step(from_closed, sample);
                if from_open != from_closed {
                    return None;
                }
                let decided = *from_open;
                *state = StartingState::Decided(decided);
                Some(Started::Initial(self.law.output(&decided)))
            }
        }
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use std::vec::Vec;

    use super::{Started, Starting, StartingState};
    use crate::words::{row, words};
    use crate::{
        Change, Envelope, Integrator, Law, Machine, MajorityRegister, Position, Running, ShiftRegister,
        StateMachine, StateMachineParameters,
    };

    /// One initial report, no edge before it, and from there on the same as the law started at either position.
    #[track_caller]
    fn check<L: Law>(law: L, length: usize) {
        let starting = Starting::new(&law);
        for word in words(length) {
            let mut state = starting.power_up();
            let mut runs = Position::BOTH.map(|start| law.rest(start));
            let mut decided = false;
            for (tick, &sample) in word.iter().enumerate() {
                let here = || std::format!("tick {} of {}", tick + 1, row(&word));
                let report = starting.step(&mut state, sample);
                let edges = runs.each_mut().map(|run| law.step(run, sample));
                if decided {
                    assert_eq!(edges, [report, report].map(as_edge), "{}", here());
                } else {
                    let met = (runs[0] == runs[1]).then(|| Started::Initial(law.output(&runs[0])));
                    assert_eq!(report, met, "{}", here());
                    decided = report.is_some();
                }
                let position = decided.then(|| law.output(&runs[1]));
                assert_eq!(starting.position(&state), position, "{}", here());
            }
        }
    }

    fn as_edge(report: Option<Started>) -> Option<Change> {
        report.map(|started| match started {
            Started::Edge(change) => change,
            Started::Initial(_) => panic!("a second initial report"),
        })
    }

    const LOCKED: StateMachine =
        StateMachine::<u8>::new(StateMachineParameters::confirm(2, 3).patience(2, 1).lockout(3, 1));

    #[test]
    fn starting_any_word_reports_one_position_then_equals_the_law() {
        check(Integrator::<u8>::new(1), 8);
        check(Integrator::<u16>::new(3), 12);
        check(Integrator::<u8>::with_steps(5, 2, 3), 12);
        check(ShiftRegister::new(1), 8);
        check(ShiftRegister::new(4), 12);
        check(MajorityRegister::<u8>::new(3, 4), 12);
        check(LOCKED, 14);
    }

    #[track_caller]
    fn first_report<L: Law>(law: L, line: Position, expected: usize) {
        let mut running = Running::starting(law);
        for tick in 1..=2 * expected + 4 {
            let report = (tick == expected).then_some(Started::Initial(line));
            assert_eq!(running.tick(line), report, "tick {tick}");
            assert_eq!(running.is_settled(), tick >= expected, "tick {tick}");
        }
    }

    #[test]
    fn starting_constant_line_is_reported_in_time() {
        for line in Position::BOTH {
            for n in 1..=9 {
                first_report(Integrator::<u8>::new(n), line, n.into());
                first_report(ShiftRegister::new(n), line, n.into());
                first_report(MajorityRegister::<u16>::new(n / 2 + 1, n), line, n.into());
            }
        }
        first_report(Integrator::<u8>::with_steps(7, 2, 3), Position::Closed, 4);
        first_report(Integrator::<u8>::with_steps(7, 2, 3), Position::Open, 3);
        first_report(LOCKED, Position::Closed, 2 + 3);
        first_report(LOCKED, Position::Open, 3 + 1);
    }

    #[test]
    fn starting_make_at_boot_with_any_bounce_reports_no_false_edge() {
        const BOUNCE: usize = 6;
        const ENVELOPE: Envelope = Envelope::clean(40, 40).bounce(BOUNCE as u32, 3).glitch(1, 2).quiet(9);
        let law = StateMachine::<u8>::for_envelope(&ENVELOPE).unwrap();
        let mut found_open_first = false;
        for bounce in words(BOUNCE) {
            let mut running = Running::starting(law);
            let line = bounce.iter().copied().chain([Position::Closed; 30]);
            let reports: Vec<_> = line.filter_map(|sample| running.tick(sample)).collect();
            let open_first = [Started::Initial(Position::Open), Started::Edge(Change::Make)];
            found_open_first |= reports == open_first;
            assert!(
                reports == [Started::Initial(Position::Closed)] || reports == open_first,
                "{}: {reports:?}",
                row(&bounce)
            );
        }
        assert!(found_open_first);
    }

    #[test]
    fn starting_state_of_a_packed_law_is_small() {
        assert!(size_of::<StartingState<<Integrator as Machine>::State>>() <= 6);
        assert!(size_of::<StartingState<<StateMachine as Machine>::State>>() <= 7);
    }
}
