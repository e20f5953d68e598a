//! A machine together with its state: [`Running`].

use crate::law::{Law, is_settled};
use crate::machine::{Machine, Position};
use crate::starting::{Starting, StartingState};

/// A machine and its state, for the common case of one input.
///
/// Where many inputs share one law, keep the law once (in flash, or as a [`ConstLaw`](crate::ConstLaw), which
/// takes no room) and only the states in RAM.
///
/// # Examples
/// ```
/// use debounce_core::{Change, Integrator, Position, Running};
/// let mut key = Running::new(Integrator::<u8>::new(2), Position::Open);
/// assert_eq!(key.tick(Position::Closed), None);
/// assert!(!key.is_settled());
/// assert_eq!(key.tick(Position::Closed), Some(Change::Make));
/// assert_eq!(key.position(), Position::Closed);
/// assert!(key.is_settled());
/// ```
///
/// In a `static`:
/// ```
/// use debounce_core::{Integrator, IntegratorState, Position, Running};
/// use std::sync::Mutex;
/// static KEY: Mutex<Running<Integrator>> =
///     Mutex::new(Running::from_parts(Integrator::<u8>::new(2), IntegratorState::at_rest(Position::Open)));
/// assert!(KEY.lock().unwrap().is_settled());
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct Running<M: Machine> {
    law: M,
    state: M::State,
}

impl<M: Machine> Running<M> {
    /// Runs `law` on from `state`.
    #[must_use]
    pub const fn from_parts(law: M, state: M::State) -> Self {
        Self { law, state }
    }

    /// Takes the sample of one tick and returns what the law reports.
    #[must_use = "a dropped edge is a lost operation"]
    #[inline]
    pub fn tick(&mut self, sample: M::Input) -> M::Output {
        self.law.step(&mut self.state, sample)
    }

    /// The law.
    #[must_use]
    pub const fn law(&self) -> &M {
        &self.law
    }

    /// The state.
    #[must_use]
    pub const fn state(&self) -> &M::State {
        &self.state
    }
}

impl<L: Law> Running<L> {
    /// Runs `law`, settled at `position`.
    ///
    /// Where the position at power-up is not known, use [`starting`](Running::starting).
    #[must_use]
    pub fn new(law: L, position: Position) -> Self {
        let state = law.rest(position);
        Self { law, state }
    }

    /// The debounced position.
    #[must_use]
    #[inline]
    pub fn position(&self) -> Position {
        self.law.output(&self.state)
    }

    /// Whether the law is settled at its own output.
    ///
    /// While it is, and the line stays at [`position`](Self::position), the tick may be stopped without loss.
    #[must_use]
    #[inline]
    pub fn is_settled(&self) -> bool {
        is_settled(&self.law, &self.state, self.position())
    }
}

impl<L: Law> Running<Starting<L>> {
    /// Runs `law` from power-up, with no position until it has found one; see [`Starting`].
    #[must_use]
    pub fn starting(law: L) -> Self {
        let state = StartingState::undecided(law.rest(Position::Open), law.rest(Position::Closed));
        Self { law: Starting::new(law), state }
    }

    /// The debounced position, once there is one.
    #[must_use]
    #[inline]
    pub fn position(&self) -> Option<Position> {
        self.law.position(&self.state)
    }

    /// Whether there is a position and the law is settled at it.
    #[must_use]
    #[inline]
    pub fn is_settled(&self) -> bool {
        match (&self.state, self.position()) {
            (StartingState::Decided(state), Some(position)) => is_settled(self.law.law(), state, position),
            _ => false,
        }
    }
}

#[cfg(feature = "defmt")]
impl<M> defmt::Format for Running<M>
where
    M: Machine + defmt::Format,
    M::State: defmt::Format,
{
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "Running {{ law: {}, state: {} }}", self.law, self.state);
    }
}

#[cfg(test)]
mod tests {
    use super::Running;
    use crate::{
        Change, Integrator, IntegratorState, Law, Position, ShiftRegister, StateMachine,
        StateMachineParameters,
    };

    #[test]
    fn running_from_parts_goes_on_from_that_state() {
        let law = ShiftRegister::new(3);
        let mut first = Running::new(law, Position::Open);
        assert_eq!(first.tick(Position::Closed), None);
        assert_eq!(first.tick(Position::Closed), None);
        let mut second = Running::from_parts(law, *first.state());
        assert_eq!(second.tick(Position::Closed), Some(Change::Make));
        assert_eq!(second.law().window(), 3);
        assert_eq!(second.position(), Position::Closed);
    }

    #[test]
    fn running_law_held_by_reference_behaves_alike() {
        fn makes<L: Law>(law: L) -> Option<Change> {
            let mut running = Running::new(law, Position::Open);
            assert_eq!(running.tick(Position::Closed), None);
            running.tick(Position::Closed)
        }
        let mut law = ShiftRegister::new(2);
        assert_eq!(makes::<&ShiftRegister>(&law), Some(Change::Make));
        assert_eq!(makes::<&mut ShiftRegister>(&mut law), Some(Change::Make));
        assert_eq!(makes(law), Some(Change::Make));
    }

    #[test]
    fn running_at_rest_by_constant_equals_new() {
        const HELD: Running<Integrator> =
            Running::from_parts(Integrator::<u8>::new(4), IntegratorState::at_rest(Position::Closed));
        assert_eq!(HELD, Running::new(Integrator::<u8>::new(4), Position::Closed));
    }

    #[test]
    fn running_in_lock_out_is_not_settled() {
        let law = StateMachine::<u8>::new(StateMachineParameters::confirm(1, 1).lockout(2, 0));
        let mut running = Running::new(law, Position::Open);
        assert_eq!(running.tick(Position::Closed), Some(Change::Make));
        assert!(!running.is_settled());
        assert_eq!(running.tick(Position::Open), None);
        assert!(!running.is_settled());
        assert_eq!(running.tick(Position::Closed), None);
        assert!(running.is_settled());
    }

    #[test]
    fn running_position_differs_from_a_settled_input_it_has_not_followed() {
        let mut running = Running::new(ShiftRegister::new(2), Position::Open);
        assert_eq!(running.tick(Position::Closed), None);
        assert_eq!(running.position(), Position::Open);
        assert!(!running.is_settled());
    }
}
