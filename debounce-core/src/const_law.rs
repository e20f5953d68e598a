//! A law whose parameters are constants and take no room: [`ConstLaw`].

use core::fmt;
use core::hash::{Hash, Hasher};
use core::marker::PhantomData;

use crate::law::Law;
use crate::machine::{Change, Machine, Position};

/// The parameters of a [`ConstLaw`].
///
/// A program that uses a law with refused parameters does not build. Being an associated constant, [`LAW`](Self::LAW)
/// is looked at only where it is used, and not by `cargo check`; `const _: () = { let _ = Door::LAW; };` beside it
/// refuses at once.
pub trait Config {
    /// The law.
    type Law: Law;
    /// The law with its parameters.
    const LAW: Self::Law;
}

/// A law that takes no room: its parameters are the constants of `C`, so the compiler can fold them into the code.
///
/// # Examples
/// ```
/// use debounce_core::{Change, Config, ConstLaw, Position, Running, ShiftRegister};
///
/// struct Door;
/// impl Config for Door {
///     type Law = ShiftRegister;
///     const LAW: ShiftRegister = ShiftRegister::new(2);
/// }
///
/// let mut door = Running::new(ConstLaw::<Door>::new(), Position::Open);
/// assert_eq!(size_of_val(&door), 2); // only the state
/// assert_eq!(door.tick(Position::Closed), None);
/// assert_eq!(door.tick(Position::Closed), Some(Change::Make));
/// ```
pub struct ConstLaw<C> {
    // `fn() -> C` owns no C: the law may be shared between threads whatever C is.
    config: PhantomData<fn() -> C>,
}

impl<C: Config> ConstLaw<C> {
    /// The law of `C`.
    #[must_use]
    pub const fn new() -> Self {
        Self { config: PhantomData }
    }
}

// Derived implementations would ask the same of C, which holds no data.

impl<C> Clone for ConstLaw<C> {
    fn clone(&self) -> Self {
        *self
    }
}

impl<C> Copy for ConstLaw<C> {}

impl<C> Default for ConstLaw<C> {
    fn default() -> Self {
        Self { config: PhantomData }
    }
}

impl<C> PartialEq for ConstLaw<C> {
    fn eq(&self, _: &Self) -> bool {
        true
    }
}

impl<C> Eq for ConstLaw<C> {}

impl<C> Hash for ConstLaw<C> {
    fn hash<H: Hasher>(&self, _: &mut H) {}
}

impl<C> fmt::Debug for ConstLaw<C> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("ConstLaw")
    }
}

#[cfg(feature = "defmt")]
impl<C> defmt::Format for ConstLaw<C> {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "ConstLaw");
    }
}

impl<C: Config> Machine for ConstLaw<C> {
    type Input = Position;
    type Output = Option<Change>;
    type State = <C::Law as Machine>::State;

    #[inline]
    fn step(&self, state: &mut Self::State, sample: Position) -> Option<Change> {
        // A copy, so that what differs between make and break is chosen among constants and not looked up in memory.
        let law = C::LAW;
        law.step(state, sample)
    }
}

impl<C: Config> Law for ConstLaw<C> {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        C::LAW.rest(position)
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        C::LAW.output(state)
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::{Config, ConstLaw};
    use crate::words::assert_same;
    use crate::{Law, Position, StateMachine, StateMachineParameters};

    // Deliberately without Clone, Debug, Default, Send or Sync of its own.
    struct Hatch {
        _not_send: *const (),
    }

    impl Config for Hatch {
        type Law = StateMachine;
        const LAW: StateMachine =
            StateMachine::<u8>::new(StateMachineParameters::confirm(2, 3).patience(2, 1).lockout(1, 2));
    }

    #[test]
    fn const_law_equals_the_law_it_holds() {
        let law = ConstLaw::<Hatch>::new();
        assert_same(&law, 12, |start| {
            let mut state = Hatch::LAW.rest(start);
            move |sample| {
                let _ = crate::Machine::step(&Hatch::LAW, &mut state, sample);
                Hatch::LAW.output(&state)
            }
        });
    }

    #[test]
    fn const_law_asks_nothing_of_its_config() {
        fn check<T: Copy + Default + core::fmt::Debug + Eq + Send + Sync + 'static>(law: T) {
            assert_eq!(law, T::default());
            assert_eq!(std::format!("{law:?}"), "ConstLaw");
        }
        check(ConstLaw::<Hatch>::new());
        assert_eq!(size_of::<ConstLaw<Hatch>>(), 0);
        assert_eq!(ConstLaw::<Hatch>::new().rest(Position::Closed), Hatch::LAW.rest(Position::Closed));
    }
}
