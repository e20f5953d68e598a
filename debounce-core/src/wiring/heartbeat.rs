//! A tick that has stopped, seen from outside it: [`Heartbeat`].

use crate::machine::Machine;

/// What is wrong with a tick.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum TickFault {
    /// Not one tick came since the last beat.
    Stopped,
    /// Some came, and so many fewer than there should have been.
    Lost(u32),
}

/// Compares the ticks that came with those that should have come, at every beat of a clock of its own.
///
/// # Method
/// Derived here. A tick that has stopped cannot be seen from inside the tick. Let the tick count itself in a wrapping
/// counter, and step this machine with the count from somewhere else: the main loop, a watchdog's early warning, a slow
/// timer. Fewer than `least` ticks since the last beat are a fault.
///
/// # Units
/// One call to [`step`](Machine::step) is one beat; it takes the number of ticks so far, wrapping at 2^32.
///
/// # Bounds
///
/// | Quantity                                | Value                     | Proof                                       |
/// |-----------------------------------------|---------------------------|---------------------------------------------|
/// | fault reported                          | exactly below `least`     | `heartbeat_fewer_ticks_than_least_are_a_fault` |
/// | first beat                              | no report                 | same                                        |
///
/// More than 2^32 ticks between two beats look like fewer. After a sleep in which the tick stood still on purpose,
/// begin anew from [`POWER_UP`](Self::POWER_UP).
///
/// # State
/// 8 bytes; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never.
///
/// # Examples
/// A tick of 1 ms and a beat of 100 ms, with one tick of slack:
/// ```
/// use debounce_core::{Heartbeat, Machine, TickFault};
/// const BEAT: Heartbeat = Heartbeat::new(99);
/// let mut state = Heartbeat::POWER_UP;
/// assert_eq!(BEAT.step(&mut state, 1_000), None);
/// assert_eq!(BEAT.step(&mut state, 1_100), None);
/// assert_eq!(BEAT.step(&mut state, 1_196), Some(TickFault::Lost(3)));
/// assert_eq!(BEAT.step(&mut state, 1_196), Some(TickFault::Stopped));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Heartbeat {
    least: u32,
}

const _: () = assert!(size_of::<<Heartbeat as Machine>::State>() == 8);

impl Heartbeat {
    /// The state before the first beat.
    pub const POWER_UP: Option<u32> = None;

    /// Expects at least so many ticks from one beat to the next; 0 finds no fault.
    #[must_use]
    pub const fn new(least_ticks: u32) -> Self {
        Self { least: least_ticks }
    }
}

impl Machine for Heartbeat {
    type Input = u32;
    type Output = Option<TickFault>;
    /// The ticks at the last beat.
    type State = Option<u32>;

    #[inline]
    fn step(&self, last: &mut Option<u32>, ticks: u32) -> Option<TickFault> {
        let came = ticks.wrapping_sub(last.replace(ticks)?);
        match self.least.checked_sub(came) {
            None | Some(0) => None,
            Some(_) if came == 0 => Some(TickFault::Stopped),
            Some(lost) => Some(TickFault::Lost(lost)),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn heartbeat_fewer_ticks_than_least_are_a_fault() {
        for start in [0, 7, u32::MAX - 2, u32::MAX] {
            for least in 0..6 {
                for came in 0..8 {
                    let beat = Heartbeat::new(least);
                    let mut state = Heartbeat::POWER_UP;
                    assert_eq!(beat.step(&mut state, start), None);
                    let expected = match came {
                        _ if came >= least => None,
                        0 => Some(TickFault::Stopped),
                        _ => Some(TickFault::Lost(least - came)),
                    };
                    assert_eq!(beat.step(&mut state, start.wrapping_add(came)), expected, "{least} {came}");
                }
            }
        }
    }
}
