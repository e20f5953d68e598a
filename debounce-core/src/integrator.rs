//! Saturating up/down counter with both ends as thresholds: [`Integrator`].

use crate::closed_form::UpDown;
use crate::count::Count;
use crate::envelope::{Envelope, PerChange, Verdict};
use crate::error::{Parameter, ParameterError};
use crate::law::Law;
use crate::machine::{Change, Machine, Position};

/// Settles a contact by counting samples: up on closed, down on open, switching only at 0 and at full scale.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Integrator<C = u8> {
    full_scale: C,
    up: C,
    down: C,
}

/// What an [`Integrator`] remembers.
// Held as the distance from the end that belongs to the output: a settled contact is then the same 0 at both
// ends, and one comparison serves both thresholds.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct IntegratorState<C = u8> {
    away: C,
    output: Position,
}

const _: () = assert!(size_of::<IntegratorState<u8>>() == 2);
const _: () = assert!(size_of::<IntegratorState<u16>>() == 4);

impl<C: Count> IntegratorState<C> {
    /// How far the count is from the end at which the present output rests.
    #[must_use]
    pub const fn away(&self) -> C {
        self.away
    }
}

impl<C: Count> Integrator<C> {
    /// The end of the count at which it makes; the other end is 0.
    #[must_use]
    pub const fn full_scale(&self) -> C {
        self.full_scale
    }

    /// What a closed sample adds to the count.
    #[must_use]
    pub const fn up(&self) -> C {
        self.up
    }

    /// What an open sample takes from the count.
    #[must_use]
    pub const fn down(&self) -> C {
        self.down
    }

    /// How far a sample moves the count.
    #[inline]
    const fn step_of(&self, sample: Position) -> C {
        match sample {
            Position::Open => self.down,
            Position::Closed => self.up,
        }
    }
}

macro_rules! constructors {
    ($($width:ty),*) => {$(
        impl Integrator<$width> {
            /// What the integrator guarantees inside `envelope`.
            #[must_use]
            pub const fn verdict(&self, envelope: &Envelope) -> Verdict {
                // Every count is narrower than 32 bits.
                UpDown {
                    full_scale: self.full_scale as u32,
                    step: PerChange { make: self.up as u32, break_: self.down as u32 },
                }
                .verdict(envelope)
            }

            /// An integrator that moves by 1 at every sample.
            ///
            /// # Panics
            /// When `full_scale` is 0; in a constant that is an error at compile time.
            #[must_use]
            pub const fn new(full_scale: $width) -> Self {
                Self::with_steps(full_scale, 1, 1)
            }

            /// An integrator that moves by `up` at a closed sample and by `down` at an open one.
            ///
            /// # Panics
            /// When [`try_with_steps`](Self::try_with_steps) refuses; in a constant that is an error at compile time.
            #[must_use]
            pub const fn with_steps(full_scale: $width, up: $width, down: $width) -> Self {
                match Self::try_with_steps(full_scale, up, down) {
                    Ok(law) => law,
                    Err(error) => panic!("{}", error.refusal()),
                }
            }

            /// [`new`](Self::new) for a value known at run time; links no panic.
            ///
            /// # Errors
            /// When `full_scale` is 0.
            pub const fn try_new(full_scale: $width) -> Result<Self, ParameterError> {
                Self::try_with_steps(full_scale, 1, 1)
            }

            /// [`with_steps`](Self::with_steps) for values known at run time; links no panic.
            ///
            /// # Errors
            /// When a value is 0, or a step is longer than `full_scale`.
            pub const fn try_with_steps(full_scale: $width, up: $width, down: $width) -> Result<Self, ParameterError> {
                if full_scale == 0 {
                    return Err(ParameterError::Zero(Parameter::FullScale));
                }
                if up == 0 {
                    return Err(ParameterError::Zero(Parameter::UpStep));
                }
                if down == 0 {
                    return Err(ParameterError::Zero(Parameter::DownStep));
                }
                let step = if up > down { up } else { down };
                if step > full_scale {
                    return Err(ParameterError::StepBeyondFullScale {
                        step: step as u16,
                        full_scale: full_scale as u16,
                    });
                }
                Ok(Self { full_scale, up, down })
            }
        }
    )*};
}

constructors!(u8, u16);

impl<C: Count> Machine for Integrator<C> {
    type Input = Position;
    type Output = Option<Change>;
    type State = IntegratorState<C>;

    #[inline]
    fn step(&self, state: &mut Self::State, sample: Position) -> Option<Change> {
        if sample == state.output {
            if state.away != C::ZERO {
                state.away = state.away.minus(self.step_of(sample));
            }
            return None;
        }
        // A sum that saturates is at full scale too.
        let away = state.away.plus(self.step_of(sample));
        if away < self.full_scale {
            state.away = away;
            return None;
        }
        *state = self.rest(sample);
        Some(sample.reached_by())
    }
}

impl<C: Count> Law for Integrator<C> {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        IntegratorState { away: C::ZERO, output: position }
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        state.output
    }
}
