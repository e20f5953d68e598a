//! How fast an encoder turns: [`Speed`].

use super::quadrature::QuadratureEvent;
use crate::error::{Parameter, ParameterError};
use crate::machine::Machine;

/// Adds up steps over a gate of fixed length: one result at the end of each gate.
///
/// # Method
/// Frequency counting with a fixed gate, common practice. The division that makes steps per second of it stays out of
/// the tick: [`per_second`](Self::per_second) is called where the result is wanted.
///
/// # Units
/// One call to [`step`](Machine::step) takes the event of one tick and is one tick. The gate is in ticks, the result
/// in steps a gate, forward less backward.
///
/// # Bounds
///
/// | Quantity                         | Value                       | Proof                                 |
/// |----------------------------------|-----------------------------|---------------------------------------|
/// | result                           | exact, at every `gate`-th tick | `speed_results_add_up_to_all_steps` |
/// | error as a measure of speed      | less than 1 step a gate     | same                                  |
///
/// A gate of `G` ticks at `f` ticks a second cannot tell speeds apart that differ by less than `f / G` steps a second.
/// A lost tick makes the gate longer in time and the speed too high by as much.
///
/// # State
/// 4 bytes; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never in `step`. A gate of 0 or over 32767 ticks panics in [`new`](Self::new), in a constant at compile time.
///
/// # Examples
/// ```
/// use debounce_core::{Machine, QuadratureEvent, Speed, Turn};
/// const SPEED: Speed = Speed::new(100);
/// let mut state = Speed::POWER_UP;
/// let mut result = None;
/// for tick in 0..100 {
///     let event = (tick % 4 == 0).then_some(QuadratureEvent::Step(Turn::Backward));
///     result = SPEED.step(&mut state, event);
/// }
/// assert_eq!(result, Some(-25));
/// assert_eq!(SPEED.per_second(-25, 1000), -250);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Speed {
    gate: u16,
}

/// What a [`Speed`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct SpeedState {
    ticks: u16,
    steps: i16,
}

const _: () = assert!(size_of::<SpeedState>() == 4);

impl Speed {
    /// The state at power-up: a gate begins.
    pub const POWER_UP: SpeedState = SpeedState { ticks: 0, steps: 0 };

    /// A gate of `gate_ticks`.
    ///
    /// # Panics
    /// When it is 0 or over 32767; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(gate_ticks: u16) -> Self {
        match Self::try_new(gate_ticks) {
            Ok(speed) => speed,
            Err(_) => panic!("a gate has 1 to 32767 ticks"),
        }
    }

    /// [`new`](Self::new) for values known at run time; links no panic.
    ///
    /// # Errors
    /// Where the gate is 0 or over 32767 ticks.
    pub const fn try_new(gate_ticks: u16) -> Result<Self, ParameterError> {
        // One step a tick at most, so a gate no longer than this cannot overflow the sum.
        const MOST: u16 = i16::MAX as u16;
        match gate_ticks {
            0 => Err(ParameterError::Zero(Parameter::Gate)),
            1..=MOST => Ok(Self { gate: gate_ticks }),
            _ => Err(ParameterError::CountTooNarrow {
                parameter: Parameter::Gate,
                ticks: gate_ticks as u32,
                most: MOST,
            }),
        }
    }

    /// Steps per second, toward zero, from the steps of one gate and the rate of the tick.
    #[must_use]
    pub const fn per_second(&self, steps: i16, ticks_per_second: u32) -> i64 {
        match (steps as i64 * ticks_per_second as i64).checked_div(self.gate as i64) {
            Some(rate) => rate,
            // The constructors let no gate of 0 through.
            None => 0,
        }
    }
}

impl Machine for Speed {
    type Input = Option<QuadratureEvent>;
    type Output = Option<i16>;
    type State = SpeedState;

    #[inline]
    fn step(&self, state: &mut SpeedState, event: Option<QuadratureEvent>) -> Option<i16> {
        if let Some(event) = event {
            state.steps = state.steps.saturating_add(i16::from(event.steps()));
        }
        state.ticks = state.ticks.saturating_add(1);
        if state.ticks < self.gate {
            return None;
        }
        let steps = state.steps;
        *state = Self::POWER_UP;
        Some(steps)
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use std::string::ToString;

    use super::*;
    use crate::meaning::Turn;

    #[test]
    fn speed_results_add_up_to_all_steps() {
        for gate in [1, 2, 7, 100] {
            let speed = Speed::new(gate);
            let mut state = Speed::POWER_UP;
            let (mut all, mut results) = (0, 0);
            for tick in 1..=7000u32 {
                let event = match tick.wrapping_mul(2_654_435_761) >> 30 {
                    0 => None,
                    1 => Some(QuadratureEvent::Step(Turn::Backward)),
                    2 => Some(QuadratureEvent::Lost),
                    _ => Some(QuadratureEvent::Step(Turn::Forward)),
                };
                all += event.map_or(0, |e| i32::from(e.steps()));
                let result = speed.step(&mut state, event);
                assert_eq!(result.is_some(), tick % u32::from(gate) == 0);
                results += i32::from(result.unwrap_or(0));
                if result.is_some() {
                    assert_eq!(results, all);
                }
            }
        }
    }

    #[test]
    fn speed_full_gate_of_steps_does_not_overflow() {
        let speed = Speed::new(32_767);
        let mut state = Speed::POWER_UP;
        let step = Some(QuadratureEvent::Step(Turn::Backward));
        let last = (0..32_767).map(|_| speed.step(&mut state, step)).last();
        assert_eq!(last, Some(Some(-32_767)));
        assert_eq!(speed.per_second(-32_767, u32::MAX), -i64::from(u32::MAX));
        let refused = |gate| Speed::try_new(gate).map_err(|error| error.to_string());
        assert_eq!(refused(0), Err("a gate of 0 ticks counts no steps; use at least 1".to_string()));
        let long = "a gate of 32768 ticks does not fit the count; the most it holds is 32767";
        assert_eq!(refused(32_768), Err(long.to_string()));
        assert!(Speed::try_new(32_767).is_ok());
    }
}
