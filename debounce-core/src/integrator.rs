//! Saturating up/down counter with both ends as thresholds: [`Integrator`].

use core::fmt;

use crate::closed_form::UpDown;
use crate::count::Count;
use crate::envelope::{Envelope, PerChange, Verdict};
use crate::error::{Parameter, ParameterError};
use crate::law::Law;
use crate::machine::{Change, Machine, Position};

/// Settles a contact by counting samples: up on closed, down on open, switching only at 0 and at full scale.
///
/// # Method
/// Saturating up/down count whose two ends are the two thresholds; common practice. Steps of different size up and
/// down make the two changes differ. Held as the distance from the end that belongs to the output, which is proved
/// equal to the plain count by `integrator_every_word_equals_a_plain_count`.
///
/// # Units
/// One step takes one sample and is one tick. Full scale and steps are in units of the count; with steps of 1 they
/// are ticks.
///
/// # Bounds
/// From a settled start, counting the first sample of the new position as 1:
///
/// | quantity                          | value, in ticks                         | proof                                           |
/// |-----------------------------------|-----------------------------------------|-------------------------------------------------|
/// | latency of a clean make           | exactly full scale / up, rounded up     | `integrator_clean_change_takes_full_scale_ticks` |
/// | latency of a clean break          | exactly full scale / down, rounded up   | the same                                        |
/// | longest lone disturbance rejected | one less than that latency              | the same                                        |
///
/// Not promised: disturbances that follow each other closely add up. With full scale 3, closed, closed, open,
/// closed, closed makes at tick 5.
///
/// # State
/// [`IntegratorState`]: 2 bytes for `u8`, 4 for `u16`, held by assertions beside it.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in a step. Of the constructors, [`new`](Self::new) and [`with_steps`](Self::with_steps) do, which are meant
/// for constants: there a bad value does not compile.
///
/// # Examples
/// ```
/// use debounce_core::{Change, Integrator, Position::{Closed, Open}, Running};
/// const LAW: Integrator = Integrator::<u8>::new(3);
/// let mut key = Running::new(LAW, Open);
/// assert_eq!([Closed, Closed, Open, Closed].map(|sample| key.tick(sample)), [None; 4]);
/// assert_eq!(key.tick(Closed), Some(Change::Make));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Integrator<C = u8> {
    full_scale: C,
    up: C,
    down: C,
}

/// What an [`Integrator`] remembers: its output, and how far the count is from the end that belongs to it.
// Held as a distance, a settled contact is the same 0 at both ends, and one comparison serves both thresholds. The
// distance stands in one word with the output below it: a settled state then *is* the sample that leaves it so, which
// takes one comparison. The word is twice as wide as the count, so that no sum needs to be saturated.
#[derive(Clone, Copy, PartialEq, Eq, Hash)]
pub struct IntegratorState<C: Count = u8> {
    word: C::Packed,
}

const _: () = assert!(size_of::<IntegratorState<u8>>() == 2);
const _: () = assert!(size_of::<IntegratorState<u16>>() == 4);

impl<C: Count> IntegratorState<C> {
    /// Settled at `position`; what [`Law::rest`] returns, for constants.
    #[must_use]
    #[inline]
    pub const fn at_rest(position: Position) -> Self {
        match position {
            Position::Open => Self { word: C::BLANK },
            Position::Closed => Self { word: C::LOWEST },
        }
    }

    /// How far the count is from the end at which the present output rests.
    #[must_use]
    pub fn away(&self) -> C {
        C::narrowed(C::unpack(self.word) >> 1)
    }

    #[inline]
    fn output(self) -> Position {
        Position::closed_if(C::unpack(self.word) & 1 == 1)
    }
}

impl<C: Count> fmt::Debug for IntegratorState<C> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (away, output) = (self.away(), self.output());
        f.debug_struct("IntegratorState").field("away", &away).field("output", &output).finish()
    }
}

#[cfg(feature = "defmt")]
impl<C: Count + defmt::Format> defmt::Format for IntegratorState<C> {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "IntegratorState {{ away: {}, output: {} }}", self.away(), self.output());
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
        let word = C::unpack(state.word);
        let rest = u32::from(sample.is_closed());
        if word == rest {
            return None;
        }
        let step = 2 * self.step_of(sample).widened();
        if (word ^ rest) & 1 == 0 {
            // The bit below stays, and a difference below 0 is the rest.
            state.word = C::pack(if word < step { rest } else { word - step });
            return None;
        }
        // Wraps for no state that a count leads to.
        let word = word.wrapping_add(step);
        if word >> 1 < self.full_scale.widened() {
            state.word = C::pack(word);
            return None;
        }
        *state = self.rest(sample);
        Some(sample.reached_by())
    }
}

impl<C: Count> Law for Integrator<C> {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        IntegratorState::at_rest(position)
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        state.output()
    }
}

#[cfg(test)]
mod tests {
    use super::Integrator;
    use crate::words::assert_same;
    use crate::{Change, Count, Machine, Parameter, ParameterError, Position, Running};

    /// The textbook count: one number from 0 to full scale, cut off at both ends.
    fn counted(
        start: Position,
        full_scale: i32,
        up: i32,
        down: i32,
    ) -> impl FnMut(Position) -> Position + Clone {
        let mut output = start;
        let mut count = if start.is_closed() { full_scale } else { 0 };
        move |sample| {
            count = if sample.is_closed() { full_scale.min(count + up) } else { 0.max(count - down) };
            if count == full_scale {
                output = Position::Closed;
            } else if count == 0 {
                output = Position::Open;
            }
            output
        }
    }

    #[test]
    fn integrator_every_word_equals_a_plain_count() {
        for full_scale in 1..=6 {
            for up in 1..=full_scale {
                for down in 1..=full_scale {
                    let model = |start| counted(start, full_scale.into(), up.into(), down.into());
                    let narrow = Integrator::<u8>::try_with_steps(full_scale, up, down).unwrap();
                    assert_same(&narrow, 12, model);
                    let (full_scale, up, down) = (full_scale.into(), up.into(), down.into());
                    let wide = Integrator::<u16>::try_with_steps(full_scale, up, down).unwrap();
                    assert_same(&wide, 12, model);
                }
            }
        }
    }

    /// Makes after `latency` closed samples exactly, and breaks after as many open ones.
    #[track_caller]
    fn makes_and_breaks_after<C: Count>(law: Integrator<C>, latency: u32) {
        let mut running = Running::new(law, Position::Open);
        for sample in [Position::Closed, Position::Open] {
            for _ in 1..latency {
                assert_eq!(running.tick(sample), None);
            }
            assert_eq!(running.tick(sample), Some(sample.reached_by()));
            assert!(running.is_settled());
        }
    }

    #[test]
    fn integrator_clean_change_takes_full_scale_ticks() {
        makes_and_breaks_after(Integrator::<u8>::new(1), 1);
        makes_and_breaks_after(Integrator::<u8>::new(2), 2);
        makes_and_breaks_after(Integrator::<u8>::new(254), 254);
        makes_and_breaks_after(Integrator::<u8>::new(255), 255);
        makes_and_breaks_after(Integrator::<u16>::new(256), 256);
        makes_and_breaks_after(Integrator::<u16>::new(65_535), 65_535);
    }

    #[test]
    fn integrator_steps_that_do_not_divide_full_scale_round_up() {
        makes_and_breaks_after(Integrator::<u8>::with_steps(7, 2, 2), 4);
        makes_and_breaks_after(Integrator::<u8>::with_steps(8, 2, 2), 4);
        makes_and_breaks_after(Integrator::<u8>::with_steps(9, 2, 2), 5);
        let mut running = Running::new(Integrator::<u8>::with_steps(7, 3, 2), Position::Open);
        let line = [1, 1, 1, 0, 0, 0, 0].map(|bit| Position::closed_if(bit == 1));
        let (make, break_) = (Some(Change::Make), Some(Change::Break));
        assert_eq!(line.map(|sample| running.tick(sample)), [None, None, make, None, None, None, break_]);
    }

    #[test]
    fn integrator_sum_beyond_the_width_of_the_count_still_switches() {
        // 2 * 200 and 2 * 40 000 do not fit their widths.
        makes_and_breaks_after(Integrator::<u8>::with_steps(255, 200, 200), 2);
        makes_and_breaks_after(Integrator::<u16>::with_steps(65_535, 40_000, 40_000), 2);
    }

    #[test]
    fn integrator_close_glitches_add_up() {
        let mut running = Running::new(Integrator::<u8>::new(3), Position::Open);
        let line = [1, 1, 0, 1].map(|bit| Position::closed_if(bit == 1));
        assert_eq!(line.map(|sample| running.tick(sample)), [None; 4]);
        assert_eq!(running.state().away(), 2);
        assert_eq!(running.tick(Position::Closed), Some(Change::Make));
    }

    #[test]
    fn integrator_any_state_whatever_finds_the_line_again() {
        let law = Integrator::<u8>::with_steps(9, 2, 3);
        for word in 0..=u16::MAX {
            for line in Position::BOTH {
                let mut state = super::IntegratorState { word };
                // The farthest word comes down by 2 or by 3 a tick.
                let mut ticks = 0;
                while state != super::IntegratorState::at_rest(line) {
                    let _ = law.step(&mut state, line);
                    ticks += 1;
                    assert!(ticks <= u32::from(word) / 4 + 6, "{word:#06x} {line:?}");
                }
            }
        }
    }

    #[track_caller]
    fn answer(full_scale: u8, up: u8, down: u8, expected: Result<(), ParameterError>) {
        assert_eq!(Integrator::<u8>::try_with_steps(full_scale, up, down).map(|_| ()), expected);
        let wide = Integrator::<u16>::try_with_steps(full_scale.into(), up.into(), down.into());
        assert_eq!(wide.map(|_| ()), expected);
    }

    #[test]
    fn integrator_parameters_at_their_limits_are_taken_or_refused() {
        answer(0, 1, 1, Err(ParameterError::Zero(Parameter::FullScale)));
        answer(1, 1, 1, Ok(()));
        answer(4, 0, 1, Err(ParameterError::Zero(Parameter::UpStep)));
        answer(4, 1, 0, Err(ParameterError::Zero(Parameter::DownStep)));
        answer(4, 4, 4, Ok(()));
        answer(4, 5, 1, Err(ParameterError::StepBeyondFullScale { step: 5, full_scale: 4 }));
        answer(4, 1, 5, Err(ParameterError::StepBeyondFullScale { step: 5, full_scale: 4 }));
        assert_eq!(Integrator::<u8>::try_new(0), Err(ParameterError::Zero(Parameter::FullScale)));
        let law = Integrator::<u8>::try_new(7).unwrap();
        assert_eq!((law.full_scale(), law.up(), law.down()), (7, 1, 1));
    }
}
