//! When the tick may stop: [`Settling`].

use crate::law::{Law, is_settled};
use crate::machine::{Machine, Position};
use crate::running::Running;
use crate::starting::{Starting, StartingState};

/// A machine over samples that can say when its tick may stop: every [`Law`], and every law that is [`Starting`].
///
/// # Examples
/// ```
/// use debounce_core::{Integrator, Position, Running};
/// let mut lid = Running::starting(Integrator::<u8>::new(2));
/// assert_eq!(lid.settled_at(), None); // the position is not known yet
/// let _ = lid.tick(Position::Closed);
/// let _ = lid.tick(Position::Closed);
/// assert_eq!(lid.settled_at(), Some(Position::Closed));
/// ```
pub trait Settling: Machine<Input = Position> {
    /// The position at which the machine is settled: samples of it change nothing and report nothing.
    ///
    /// While the line stays there, ticks may be left out without loss.
    fn settled_at(&self, state: &Self::State) -> Option<Position>;
}

impl<L: Law> Settling for L {
    #[inline]
    fn settled_at(&self, state: &L::State) -> Option<Position> {
        let position = self.output(state);
        is_settled(self, state, position).then_some(position)
    }
}

impl<L: Law> Settling for Starting<L> {
    #[inline]
    fn settled_at(&self, state: &StartingState<L::State>) -> Option<Position> {
        match state {
            StartingState::Undecided { .. } => None,
            StartingState::Decided(state) => self.law().settled_at(state),
        }
    }
}

impl<M: Settling> Running<M> {
    /// The position at which the machine is settled, if it is: while the line stays there, the tick may be stopped.
    #[must_use]
    #[inline]
    pub fn settled_at(&self) -> Option<Position> {
        self.law().settled_at(self.state())
    }
}

#[cfg(test)]
mod tests {
    use crate::words::{row, words};
    use crate::{
        Integrator, Law, MajorityRegister, Position, Running, Settling, ShiftRegister, StateMachine,
        StateMachineParameters,
    };

    /// Wherever a machine says that it is settled, a sample of that position changes nothing and reports nothing.
    #[track_caller]
    fn check<M>(power_up: Running<M>, length: usize, settles: bool)
    where
        M: Settling<Output: PartialEq + Default> + Copy,
    {
        let mut seen = [0; 2];
        for word in words(length) {
            let mut running = power_up;
            for &sample in &word {
                let _ = running.tick(sample);
                let Some(position) = running.settled_at() else { continue };
                seen[usize::from(position.is_closed())] += 1;
                let mut next = running;
                assert!(next.tick(position) == M::Output::default(), "{}", row(&word));
                assert!(next.state() == running.state(), "{}", row(&word));
            }
        }
        assert_eq!(seen[0] > 0 && seen[1] > 0, settles);
    }

    #[track_caller]
    fn both<L: Law + Copy>(law: L, length: usize) {
        check(Running::new(law, Position::Open), length, true);
        check(Running::starting(law), length, true);
    }

    #[test]
    fn settling_any_word_says_so_only_where_ticks_may_be_left_out() {
        both(Integrator::<u8>::new(3), 10);
        both(ShiftRegister::new(3), 10);
        both(MajorityRegister::<u8>::new(3, 4), 12);
        let parameters = StateMachineParameters::confirm(2, 1).patience(2, 1).lockout(3, 1);
        both(StateMachine::<u8>::new(parameters), 13);
    }

    #[test]
    fn settling_before_the_first_position_is_refused() {
        // One sample cannot decide two.
        check(Running::starting(ShiftRegister::new(2)), 1, false);
    }
}
