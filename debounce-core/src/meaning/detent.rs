//! The clicks of a knob: [`Detents`].

use super::quadrature::{Phases, Quadrature, QuadratureEvent, QuadratureState, Resolution, Turn};
use crate::machine::Machine;

/// Where in the cycle a knob comes to rest.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum RestPhases {
    /// One detent a cycle, with both phases open.
    BothOpen,
    /// One detent a cycle, with both phases closed.
    BothClosed,
    /// Two detents a cycle, with both phases open and with both closed.
    BothAlike,
}

impl RestPhases {
    #[inline]
    const fn rests_at(self, quarter: u8) -> bool {
        match self {
            Self::BothOpen => quarter == 0,
            Self::BothClosed => quarter == 2,
            Self::BothAlike => quarter == 0 || quarter == 2,
        }
    }

    /// Quarters from rest to rest.
    #[inline]
    const fn quarters(self) -> i8 {
        match self {
            Self::BothOpen | Self::BothClosed => 4,
            Self::BothAlike => 2,
        }
    }
}

/// Reports one step for each detent of a knob, on arrival there; bounce and half turns report nothing.
///
/// # Method
/// Derived here on [`Quadrature`]: quarters are added up from the last rest; a rest phase that is reached with a whole
/// detent's worth of them is a click, with none it is the same detent again. After a lost step the sum is not known,
/// so that click is not guessed: [`QuadratureEvent::Lost`] is reported and counting begins anew at the next rest.
///
/// # Units
/// One call to [`step`](Machine::step) takes one sample of both phases and is one tick. Steps are detents.
///
/// # Bounds
/// Bounce and distance of edges as for [`Quadrature`]:
///
/// | Quantity                                    | Value          | Proof                                          |
/// |---------------------------------------------|----------------|------------------------------------------------|
/// | clicks less true detents, at every rest     | exactly 0      | `detents_bounce_at_rated_distance_loses_nothing`   |
/// | reports while the shaft trembles short of the next rest | none | `detents_tremble_short_of_next_rest_is_silent` |
/// | reports before the first rest after power-up | none but `Lost` | `detents_power_up_anywhere_invents_no_click`   |
///
/// # State
/// 2 bytes; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never.
///
/// # Examples
/// ```
/// use debounce_core::{Detents, Machine, Phases, QuadratureEvent, RestPhases, Turn};
/// const KNOB: Detents = Detents::new(RestPhases::BothOpen);
/// let mut state = Detents::POWER_UP;
/// let mut clicks = [0, 1, 2, 3, 0, 3, 0].map(|quarter| KNOB.step(&mut state, Phases::CYCLE[quarter]));
/// assert_eq!(clicks[4], Some(QuadratureEvent::Step(Turn::Forward)));
/// clicks[4] = None;
/// assert_eq!(clicks, [None; 7]);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Detents {
    rests: RestPhases,
}

/// What a [`Detents`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct DetentState {
    phases: QuadratureState,
    since_rest: i8,
}

const _: () = assert!(size_of::<DetentState>() == 2);

// The sum of quarters is not known: at power-up, and after a lost step.
const UNKNOWN: i8 = i8::MIN;

impl Detents {
    /// The state at power-up: neither phase nor detent is known.
    pub const POWER_UP: DetentState = DetentState { phases: Quadrature::POWER_UP, since_rest: UNKNOWN };

    /// A knob that rests at `rests`.
    #[must_use]
    pub const fn new(rests: RestPhases) -> Self {
        Self { rests }
    }
}

impl Machine for Detents {
    type Input = Phases;
    type Output = Option<QuadratureEvent>;
    type State = DetentState;

    #[inline]
    fn step(&self, state: &mut DetentState, phases: Phases) -> Option<QuadratureEvent> {
        let moved = Quadrature::new(Resolution::X4).step(&mut state.phases, phases);
        let mut event = None;
        match moved {
            Some(QuadratureEvent::Lost) => {
                state.since_rest = UNKNOWN;
                event = moved;
            }
            // From rest to rest the sum stays within one detent either way, so it cannot overflow.
            Some(QuadratureEvent::Step(turn)) if state.since_rest != UNKNOWN => {
                state.since_rest = state.since_rest.saturating_add(turn.sign());
            }
            _ => {}
        }
        if self.rests.rests_at(phases.quarter()) {
            if state.since_rest == self.rests.quarters() {
                event = Some(QuadratureEvent::Step(Turn::Forward));
            } else if state.since_rest == -self.rests.quarters() {
                event = Some(QuadratureEvent::Step(Turn::Backward));
            }
            state.since_rest = 0;
        }
        event
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const ALL: [RestPhases; 3] = [RestPhases::BothOpen, RestPhases::BothClosed, RestPhases::BothAlike];

    #[test]
    fn detents_tremble_short_of_next_rest_is_silent() {
        for rests in ALL {
            let rest: i32 = if rests == RestPhases::BothClosed { 2 } else { 0 };
            let reach = i32::from(rests.quarters()) - 1;
            let knob = Detents::new(rests);
            // Every walk of 12 quarters that stays short of the neighbouring rests.
            for walk in 0..1u32 << 12 {
                let mut state = Detents::POWER_UP;
                let mut at = 0;
                for i in 0..=12 {
                    let phases = Phases::CYCLE[usize::try_from((rest + at).rem_euclid(4)).unwrap()];
                    assert_eq!(knob.step(&mut state, phases), None);
                    let step = if walk >> i & 1 == 1 { 1 } else { -1 };
                    at = (at + step).clamp(-reach, reach);
                }
            }
        }
    }

    #[test]
    fn detents_power_up_anywhere_invents_no_click() {
        for rests in ALL {
            let knob = Detents::new(rests);
            for code in 0..4usize.pow(6) {
                let mut state = Detents::POWER_UP;
                let mut rested = false;
                for i in 0..6 {
                    let phases = Phases::CYCLE[code / 4usize.pow(i) % 4];
                    let event = knob.step(&mut state, phases);
                    if !rested {
                        assert!(matches!(event, None | Some(QuadratureEvent::Lost)));
                    }
                    rested |= rests.rests_at(phases.quarter());
                }
            }
        }
    }

    #[test]
    fn detents_lost_step_is_reported_and_counting_begins_anew() {
        let knob = Detents::new(RestPhases::BothOpen);
        let mut state = Detents::POWER_UP;
        let mut step = |quarter: usize| knob.step(&mut state, Phases::CYCLE[quarter]);
        assert_eq!([step(0), step(1), step(3), step(0)], [None, None, Some(QuadratureEvent::Lost), None]);
        assert_eq!(
            [step(1), step(2), step(3), step(0)],
            [None, None, None, Some(QuadratureEvent::Step(Turn::Forward))]
        );
    }

    #[test]
    fn detents_lost_step_on_the_way_is_not_made_a_click() {
        // Forward by a quarter, two quarters nobody saw, and on to the rest: one click, two, or none. It is not guessed.
        let knob = Detents::new(RestPhases::BothAlike);
        let mut state = Detents::POWER_UP;
        let events = [0, 1, 3, 0].map(|quarter: usize| knob.step(&mut state, Phases::CYCLE[quarter]));
        assert_eq!(events, [None, None, Some(QuadratureEvent::Lost), None]);
    }
}
