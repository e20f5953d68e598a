//! Four states, each change with a count of its own: [`StateMachine`].

use crate::closed_form::Counting;
use crate::count::Count;
use crate::envelope::{Envelope, PerChange, Verdict};
use crate::error::{Parameter, ParameterError};
use crate::law::Law;
use crate::machine::{Change, Machine, Position};

/// The parameters of a [`StateMachine`], in ticks, each for a make and for a break.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct StateMachineParameters<C = u8> {
    /// Samples of the new position that are needed to report the change; at least 1.
    pub confirm: PerChange<C>,
    /// Samples of the old position *in a row* that clear a count that has begun; at least 1.
    pub patience: PerChange<C>,
    /// Ticks that are ignored after the change was reported.
    pub lockout: PerChange<C>,
}

impl<C: Count> StateMachineParameters<C> {
    /// The textbook machine: the given confirm counts, patience 1, no lock-out.
    #[must_use]
    pub const fn confirm(make: C, break_: C) -> Self {
        Self {
            confirm: PerChange { make, break_ },
            patience: PerChange { make: C::ONE, break_: C::ONE },
            lockout: PerChange { make: C::ZERO, break_: C::ZERO },
        }
    }

    /// Sets the patience.
    #[must_use]
    pub const fn patience(mut self, make: C, break_: C) -> Self {
        self.patience = PerChange { make, break_ };
        self
    }

    /// Sets the lock-out.
    #[must_use]
    pub const fn lockout(mut self, make: C, break_: C) -> Self {
        self.lockout = PerChange { make, break_ };
        self
    }
}

/// Settles a contact by four states, open, closing, closed and opening, with confirm, patience and lock-out ticks.
///
/// # Method
/// Each change has a waiting state. Source: Virginia Tech embedded systems course, "Debouncing alternative" (the
/// four states; and, beside them, a wait without looking, the lock-out here). Differs from the source in counting:
///
/// * *confirm*: a contrary sample begins a count, and this many of them report the change;
/// * *patience*, derived here: only this many agreeing samples *in a row* clear a count that has begun. Patience 1 is
///   the textbook machine, which begins anew after every one;
/// * *lock-out*: so many ticks after a report are not looked at.
///
/// Proved equal to a look back over all samples by `state_machine_every_word_equals_looking_back`.
///
/// # Units
/// One step takes one sample and is one tick. All parameters are in ticks.
///
/// # Bounds
/// From a settled start, counting the first sample of the new position as 1:
///
/// | quantity                          | value, in ticks       | proof                                                   |
/// |-----------------------------------|-----------------------|---------------------------------------------------------|
/// | latency of a clean change         | exactly its confirm   | `state_machine_counts_at_the_end_of_their_width_still_serve` |
/// | longest lone disturbance rejected | its confirm less 1    | the same                                                |
/// | ticks not looked at after it      | exactly its lock-out  | the same                                                |
///
/// Not promised: disturbances with fewer agreeing samples between them than the patience add up.
/// [`for_envelope`](Self::for_envelope) chooses the parameters so that they do not.
///
/// # State
/// [`StateMachineState`]: 3 bytes for `u8`, 6 for `u16`, held by assertions beside it.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in a step. Of the constructors, [`new`](Self::new) does, which is meant for constants: there a bad value
/// does not compile.
///
/// # Examples
/// ```
/// use debounce_core::{Change, Position::{Closed, Open}, Running, StateMachine, StateMachineParameters};
/// const LAW: StateMachine =
///     StateMachine::<u8>::new(StateMachineParameters::confirm(2, 2).patience(2, 2).lockout(1, 0));
/// let mut key = Running::new(LAW, Open);
/// assert_eq!(key.tick(Closed), None);
/// assert_eq!(key.tick(Open), None); // one agreeing sample is not enough to forget
/// assert_eq!(key.tick(Closed), Some(Change::Make));
/// assert_eq!(key.tick(Open), None); // locked out
/// assert!(key.is_settled());
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct StateMachine<C = u8> {
    parameters: StateMachineParameters<C>,
}

/// What a [`StateMachine`] remembers.
// A settled stage *is* the sample that leaves it so, which takes one comparison.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct StateMachineState<C = u8> {
    /// The output in the lowest bit, and what goes on above it.
    stage: u8,
    /// Contrary samples so far, while counting.
    seen: C,
    /// While counting, agreeing samples in a row; while locked out, the ticks left.
    agree: C,
}

/// The bit of the output.
const OUTPUT: u8 = 1;
/// Set while contrary samples are counted.
const COUNTING: u8 = 2;
/// Set while nothing is looked at.
const LOCKED_OUT: u8 = 4;

/// A settled stage and a contrary sample differ in this.
const BEGINNING: u8 = OUTPUT;
/// A counting stage and one more contrary sample differ in this.
const COUNTING_ON: u8 = COUNTING | OUTPUT;

const _: () = assert!(size_of::<StateMachineState<u8>>() == 3);
const _: () = assert!(size_of::<StateMachineState<u16>>() == 6);

/// The four states that give the machine its name.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Phase {
    /// Open, and no make is being counted.
    Open,
    /// Open, and closed samples have begun to count.
    Closing,
    /// Closed, and no break is being counted.
    Closed,
    /// Closed, and open samples have begun to count.
    Opening,
}

impl<C: Count> StateMachineState<C> {
    /// Settled at `position`; what [`Law::rest`] returns, for constants.
    #[must_use]
    #[inline]
    pub const fn at_rest(position: Position) -> Self {
        // `Position` numbers its two.
        Self { stage: position as u8, seen: C::ZERO, agree: C::ZERO }
    }

    /// Which of the four states this is; the lock-out belongs to open or closed.
    #[must_use]
    pub fn phase(&self) -> Phase {
        match (self.output(), self.stage & COUNTING == 0) {
            (Position::Open, true) => Phase::Open,
            (Position::Open, false) => Phase::Closing,
            (Position::Closed, true) => Phase::Closed,
            (Position::Closed, false) => Phase::Opening,
        }
    }

    /// How many more ticks will be ignored.
    #[must_use]
    pub fn locked_out(&self) -> C {
        if self.stage & LOCKED_OUT == 0 { C::ZERO } else { self.agree }
    }

    #[inline]
    fn output(&self) -> Position {
        Position::closed_if(self.stage & OUTPUT != 0)
    }
}

impl<C: Count> StateMachine<C> {
    /// The parameters.
    #[must_use]
    pub const fn parameters(&self) -> StateMachineParameters<C> {
        self.parameters
    }

    /// Which of the four states `state` is; the lock-out belongs to open or closed.
    #[must_use]
    pub fn phase(&self, state: &StateMachineState<C>) -> Phase {
        state.phase()
    }

    /// Settles at `position`, or is locked out there.
    #[inline]
    fn change(&self, state: &mut StateMachineState<C>, position: Position) -> Change {
        let change = position.reached_by();
        *state = self.rest(position);
        let lockout = self.parameters.lockout.at(change);
        if lockout != C::ZERO {
            state.stage |= LOCKED_OUT;
            state.agree = lockout;
        }
        change
    }
}

macro_rules! constructors {
    ($($width:ty),*) => {$(
        impl StateMachine<$width> {
            /// A machine with the given parameters.
            ///
            /// # Panics
            /// When [`try_new`](Self::try_new) refuses; in a constant that is an error at compile time.
            #[must_use]
            pub const fn new(parameters: StateMachineParameters<$width>) -> Self {
                match Self::try_new(parameters) {
                    Ok(law) => law,
                    Err(error) => panic!("{}", error.refusal()),
                }
            }

            /// [`new`](Self::new) for values known at run time; links no panic.
            ///
            /// # Errors
            /// When a confirm count or a patience is 0.
            pub const fn try_new(parameters: StateMachineParameters<$width>) -> Result<Self, ParameterError> {
                let zero = if parameters.confirm.make == 0 {
                    Parameter::ConfirmMake
                } else if parameters.confirm.break_ == 0 {
                    Parameter::ConfirmBreak
                } else if parameters.patience.make == 0 {
                    Parameter::PatienceMake
                } else if parameters.patience.break_ == 0 {
                    Parameter::PatienceBreak
                } else {
                    return Ok(Self { parameters });
                };
                Err(ParameterError::Zero(zero))
            }

            /// What the machine guarantees inside `envelope`.
            #[must_use]
            pub const fn verdict(&self, envelope: &Envelope) -> Verdict {
                let p = &self.parameters;
                // Every count is narrower than 32 bits.
                Counting {
                    confirm: PerChange { make: p.confirm.make as u32, break_: p.confirm.break_ as u32 },
                    patience: PerChange { make: p.patience.make as u32, break_: p.patience.break_ as u32 },
                    lockout: PerChange { make: p.lockout.make as u32, break_: p.lockout.break_ as u32 },
                }
                .verdict(envelope)
            }

            /// The machine whose worst latency inside `envelope` is the least that any logic can have.
            ///
            /// That is its [`limit`](Envelope::limit), by the [proof](crate::proofs). Where only the dwells are too short
            /// for a limit in closed form there still is a machine, but nothing is promised of it.
            ///
            /// # Errors
            /// Where no closed form is proved: disturbances at both positions and quiet not longer than the widest
            /// of them, or calm neither 0 nor longer than it; and where a parameter does not fit the count.
            pub const fn for_envelope(envelope: &Envelope) -> Result<Self, ParameterError> {
                let wanted = match reaching_the_limit(envelope) {
                    Ok(wanted) => wanted,
                    Err(error) => return Err(error),
                };
                let most = <$width>::MAX as u32;
                if let Some(error) = wanted.beyond(most) {
                    return Err(error);
                }
                // Every value was compared with the width just above.
                let (confirm, patience, lockout) = (wanted.confirm, wanted.patience, wanted.lockout);
                Self::try_new(StateMachineParameters {
                    confirm: PerChange { make: confirm.make as $width, break_: confirm.break_ as $width },
                    patience: PerChange { make: patience.make as $width, break_: patience.break_ as $width },
                    lockout: PerChange { make: lockout.make as $width, break_: lockout.break_ as $width },
                })
            }
        }
    )*};
}

constructors!(u8, u16);

impl StateMachineParameters<u32> {
    /// The first parameter that is more than `most`, as an error.
    const fn beyond(&self, most: u32) -> Option<ParameterError> {
        let (parameter, ticks) = if self.confirm.make > most {
            (Parameter::ConfirmMake, self.confirm.make)
        } else if self.confirm.break_ > most {
            (Parameter::ConfirmBreak, self.confirm.break_)
        } else if self.patience.make > most {
            (Parameter::PatienceMake, self.patience.make)
        } else if self.patience.break_ > most {
            (Parameter::PatienceBreak, self.patience.break_)
        } else if self.lockout.make > most {
            (Parameter::LockoutMake, self.lockout.make)
        } else if self.lockout.break_ > most {
            (Parameter::LockoutBreak, self.lockout.break_)
        } else {
            return None;
        };
        // No count is wider than 16 bits.
        Some(ParameterError::CountTooNarrow { parameter, ticks, most: most as u16 })
    }
}

/// The parameters of [`StateMachine::for_envelope`] before they are narrowed to a count.
const fn reaching_the_limit(envelope: &Envelope) -> Result<StateMachineParameters<u32>, ParameterError> {
    let e = envelope.delivered();
    let (open, closed) = (e.glitch.open, e.glitch.closed);
    let glitch = e.widest_glitch();
    if !e.disturbances_apart() {
        return Err(ParameterError::QuietTooShort { quiet: e.quiet, glitch });
    }
    // A width of u32::MAX saturates here and is refused by every count.
    let confirm = PerChange { make: open.saturating_add(1), break_: closed.saturating_add(1) };
    let patience = if e.calm == 0 {
        PerChange { make: confirm.break_, break_: confirm.make }
    } else if e.calm > glitch {
        PerChange { make: 1, break_: 1 }
    } else {
        return Err(ParameterError::CalmTooShort { calm: e.calm, glitch });
    };
    let lockout =
        PerChange { make: e.bounce.make.saturating_sub(1), break_: e.bounce.break_.saturating_sub(1) };
    Ok(StateMachineParameters { confirm, patience, lockout })
}

impl<C: Count> Machine for StateMachine<C> {
    type Input = Position;
    type Output = Option<Change>;
    type State = StateMachineState<C>;

    // Always: as a function shared by several constant laws it would look their parameters up, at three times the cost.
    #[inline(always)]
    fn step(&self, state: &mut Self::State, sample: Position) -> Option<Change> {
        if state.stage == sample as u8 {
            return None;
        }
        // What goes on, and in the lowest bit whether the sample is contrary. The settled case, by far the most
        // frequent, stands before it: one more case here, and all would pay for a table of jumps.
        match state.stage ^ sample as u8 {
            COUNTING_ON => {
                // Of a confirm count of 1 or more; a count below it has room for one more.
                if state.seen < self.parameters.confirm.at(sample.reached_by()).minus(C::ONE) {
                    state.seen = state.seen.plus(C::ONE);
                    state.agree = C::ZERO;
                    return None;
                }
                Some(self.change(state, sample))
            }
            BEGINNING => {
                if self.parameters.confirm.at(sample.reached_by()) == C::ONE {
                    return Some(self.change(state, sample));
                }
                let stage = sample.opposite() as u8 | COUNTING;
                *state = StateMachineState { stage, seen: C::ONE, agree: C::ZERO };
                None
            }
            COUNTING => {
                let change = sample.opposite().reached_by();
                if state.agree < self.parameters.patience.at(change).minus(C::ONE) {
                    state.agree = state.agree.plus(C::ONE);
                } else {
                    *state = self.rest(sample);
                }
                None
            }
            _ => {
                if state.agree > C::ONE {
                    state.agree = state.agree.minus(C::ONE);
                } else {
                    *state = self.rest(state.output());
                }
                None
            }
        }
    }
}

impl<C: Count> Law for StateMachine<C> {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        StateMachineState::at_rest(position)
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        state.output()
    }
}

#[cfg(test)]
mod tests;
