//! One law in front of another: [`Chain`].

use crate::law::Law;
use crate::machine::{Change, Machine, Position};

/// Gives every sample to a first law, and what that law makes of it to a second one, whose edges are reported.
///
/// # Method
/// Series connection of two machines; common practice, as with a majority filter that takes single wrong samples
/// out before a slower law settles the contact. In each tick the first law takes the sample, and the second takes
/// the output that the first has after it.
///
/// # Units
/// One step takes one sample and is one tick of both laws.
///
/// # Bounds
/// From a settled start, counting the first sample of the new position as 1:
///
/// | quantity                            | value, in ticks                              | proof |
/// |-------------------------------------|----------------------------------------------|-------|
/// | latency of a clean make or break    | exactly the first's plus the second's less 1 | `chain_clean_change_adds_the_latencies_less_one` |
/// | longest lone disturbance rejected   | at least that of the first                   | `chain_lone_disturbance_that_the_first_rejects_is_rejected` |
///
/// Not promised: the bounds of the two do not add up beyond that. The first delays a make and a break differently,
/// so it can shorten an operation or a quiet stretch before the second sees it. The harness explores the pair as
/// the one machine that it is.
///
/// # State
/// [`ChainState`]: the two states side by side, 5 bytes for a majority register in front of a state machine; held
/// by an assertion beside it.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never.
///
/// # Examples
/// ```
/// use debounce_core::{Chain, Change, MajorityRegister, Position, Running, StateMachine, StateMachineParameters};
///
/// const FILTER: MajorityRegister = MajorityRegister::<u8>::new(2, 3);
/// const COUNT: StateMachine = StateMachine::<u8>::new(StateMachineParameters::confirm(3, 3));
/// let mut door = Running::new(Chain::new(FILTER, COUNT), Position::Open);
/// // One wrong sample among closed ones is filtered out and does not begin the count anew.
/// let samples = [Position::Closed, Position::Closed, Position::Open, Position::Closed];
/// assert_eq!(samples.map(|sample| door.tick(sample)), [None, None, None, Some(Change::Make)]);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Chain<A, B> {
    first: A,
    second: B,
}

/// What a [`Chain`] remembers: the states of its two laws.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct ChainState<A, B> {
    first: A,
    second: B,
}

const _: () =
    assert!(size_of::<ChainState<crate::MajorityRegisterState<u8>, crate::StateMachineState<u8>>>() == 5);

impl<A, B> Chain<A, B> {
    /// `first` in front of `second`.
    #[must_use]
    pub const fn new(first: A, second: B) -> Self {
        Self { first, second }
    }

    /// The law that takes the samples.
    #[must_use]
    pub const fn first(&self) -> &A {
        &self.first
    }

    /// The law that takes the outputs of the first and reports.
    #[must_use]
    pub const fn second(&self) -> &B {
        &self.second
    }
}

impl<A, B> ChainState<A, B> {
    /// The states of the two laws side by side, for constants; at rest when both rest at the same position.
    #[must_use]
    pub const fn from_parts(first: A, second: B) -> Self {
        Self { first, second }
    }

    /// The state of the first law.
    #[must_use]
    pub const fn first(&self) -> &A {
        &self.first
    }

    /// The state of the second law.
    #[must_use]
    pub const fn second(&self) -> &B {
        &self.second
    }
}

impl<A: Law, B: Law> Machine for Chain<A, B> {
    type Input = Position;
    type Output = Option<Change>;
    type State = ChainState<A::State, B::State>;

    #[inline]
    fn step(&self, state: &mut Self::State, sample: Position) -> Option<Change> {
        // The first law's edges are its outputs seen once; only the second's are reported.
        let _ = self.first.step(&mut state.first, sample);
        self.second.step(&mut state.second, self.first.output(&state.first))
    }
}

impl<A: Law, B: Law> Law for Chain<A, B> {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        ChainState { first: self.first.rest(position), second: self.second.rest(position) }
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        self.second.output(&state.second)
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::{Chain, ChainState};
    use crate::words::{assert_same, words};
    use crate::{
        Change, Integrator, Law, Machine, MajorityRegister, MajorityRegisterState, Position, Running,
        ShiftRegister, StateMachine, StateMachineParameters, StateMachineState,
    };

    /// Two laws of their own, the one fed with what the other says.
    fn by_hand<A: Law + Copy, B: Law + Copy>(
        first: A,
        second: B,
        start: Position,
    ) -> impl FnMut(Position) -> Position + Clone {
        let mut states = (first.rest(start), second.rest(start));
        move |sample| {
            let _ = first.step(&mut states.0, sample);
            let _ = second.step(&mut states.1, first.output(&states.0));
            second.output(&states.1)
        }
    }

    #[track_caller]
    fn equals_by_hand<A: Law + Copy, B: Law + Copy>(first: A, second: B) {
        assert_same(&Chain::new(first, second), 12, |start| by_hand(first, second, start));
    }

    fn counting(confirm: u8, patience: u8, lockout: u8) -> StateMachine {
        let parameters = StateMachineParameters::<u8>::confirm(confirm, confirm);
        StateMachine::<u8>::new(parameters.patience(patience, patience).lockout(lockout, lockout))
    }

    #[test]
    fn chain_every_word_equals_the_second_law_fed_by_the_first() {
        equals_by_hand(MajorityRegister::<u8>::new(2, 3), counting(3, 2, 1));
        equals_by_hand(ShiftRegister::new(2), Integrator::<u8>::new(3));
        equals_by_hand(
            Chain::new(ShiftRegister::new(2), MajorityRegister::<u8>::new(2, 3)),
            counting(2, 1, 0),
        );
    }

    #[test]
    fn chain_behind_a_window_of_one_sample_equals_the_second_law() {
        let second = counting(3, 2, 2);
        let chain = Chain::new(ShiftRegister::new(1), second);
        assert_same(&chain, 12, |start| {
            let mut state = second.rest(start);
            move |sample| {
                let _ = second.step(&mut state, sample);
                second.output(&state)
            }
        });
    }

    /// The tick at which a clean change from rest is reported.
    fn latency<L: Law>(law: L, change: Change) -> Option<u32> {
        let mut running = Running::new(law, change.to().opposite());
        (1..=100).find(|_| running.tick(change.to()) == Some(change))
    }

    #[test]
    fn chain_clean_change_adds_the_latencies_less_one() {
        for (majority, window) in [(1, 1), (2, 3), (3, 5), (8, 8)] {
            let first = MajorityRegister::<u8>::new(majority, window);
            for second in [counting(1, 1, 0), counting(4, 2, 3), counting(7, 7, 0)] {
                for change in [Change::Make, Change::Break] {
                    let parts = (latency(first, change).unwrap(), latency(second, change).unwrap());
                    let both = latency(Chain::new(first, second), change);
                    assert_eq!(both, Some(parts.0 + parts.1 - 1), "{majority} of {window}, then {second:?}");
                }
            }
        }
    }

    #[test]
    fn chain_lone_disturbance_that_the_first_rejects_is_rejected() {
        // 3 of 5 rejects every disturbance of 2 samples; the second alone would report each of them.
        let chain = Chain::new(MajorityRegister::<u8>::new(3, 5), ShiftRegister::new(1));
        for start in Position::BOTH {
            for word in words(2) {
                let mut running = Running::new(chain, start);
                let steady = [start; 8];
                assert!(word.iter().chain(&steady).all(|&sample| running.tick(sample).is_none()), "{word:?}");
            }
            let mut running = Running::new(chain, start);
            let reported = [start.opposite(); 3].map(|sample| running.tick(sample));
            assert!(reported[2].is_some(), "one sample more is reported");
        }
    }

    #[test]
    fn chain_state_from_parts_is_the_state_at_rest() {
        let chain = Chain::new(MajorityRegister::<u8>::new(2, 3), counting(2, 1, 0));
        for position in Position::BOTH {
            let parts = (MajorityRegisterState::at_rest(position), StateMachineState::at_rest(position));
            let state = ChainState::from_parts(parts.0, parts.1);
            assert_eq!(chain.rest(position), state);
            assert_eq!((*state.first(), *state.second()), parts);
            assert!(crate::is_settled(&chain, &state, position));
        }
    }
}
