//! Several debounced pins, read in one call: [`DebouncedPins`].

use core::fmt;

use embedded_hal::digital::InputPin;

use super::{DebouncedPin, Settling};
use crate::machine::{Machine, Position};
use crate::running::Running;

/// Reads and debounces `N` pins in one call a tick; each has its own polarity, state and errors.
///
/// # Method
/// An array of [`DebouncedPin`]. Let the pins share their law as a [`ConstLaw`](crate::ConstLaw), which takes no room,
/// or by reference. Where all pins of a port come in one word, a [`DebouncedPort`](crate::DebouncedPort) is cheaper.
///
/// # Units
/// One call to [`tick`](Self::tick) takes one sample of every pin and is one tick.
///
/// # Bounds
/// Those of the law, pin by pin. A pin that answers with an error takes no sample: for it, and for no other, that tick
/// is lost. Proof: `pins_error_of_one_is_lost_to_no_other`.
///
/// # State
/// The pins, their polarities and the states of the law.
///
/// # Panics
/// Never.
///
/// # Examples
/// Two keys to ground and one to the supply of an (invented) greenhouse vent:
/// ```
/// use debounce_core::{Change, DebouncedPin, DebouncedPins, Integrator, Polarity, Position, Running};
/// # use embedded_hal_mock::eh1::{MockError, digital::{Mock, State::{High, Low}, Transaction}};
/// # let [mut up, mut down, mut stop] = [Low, High, Low].map(|level| Mock::new(&[Transaction::get(level)]));
/// # let (a, b, c) = (up.clone(), down.clone(), stop.clone());
/// static LAW: Integrator = Integrator::<u8>::new(1);
/// let key = |pin, polarity| DebouncedPin::new(pin, polarity, Running::new(&LAW, Position::Open));
/// let mut keys = DebouncedPins::new([
///     key(a, Polarity::ClosedWhenLow),
///     key(b, Polarity::ClosedWhenLow),
///     key(c, Polarity::ClosedWhenHigh),
/// ]);
/// assert_eq!(keys.tick(), [Ok(Some(Change::Make)), Ok(None), Ok(None)]);
/// assert!(keys.are_settled());
/// # [up, down, stop].iter_mut().for_each(Mock::done);
/// ```
#[derive(Clone)]
pub struct DebouncedPins<P, M: Machine<Input = Position>, const N: usize> {
    pins: [DebouncedPin<P, M>; N],
}

impl<P, M: Machine<Input = Position>, const N: usize> DebouncedPins<P, M, N> {
    /// Reads these pins.
    #[must_use]
    pub const fn new(pins: [DebouncedPin<P, M>; N]) -> Self {
        Self { pins }
    }

    /// The pins, each with the law at work.
    #[must_use]
    pub const fn pins(&self) -> &[DebouncedPin<P, M>; N] {
        &self.pins
    }

    /// Whether every pin is settled: the tick may stop until one of them leaves its
    /// [`wake_level`](DebouncedPin::wake_level)'s opposite.
    #[must_use]
    pub fn are_settled(&self) -> bool
    where
        M: Settling,
    {
        self.pins.iter().all(|pin| pin.running().settled_at().is_some())
    }

    /// Gives the pins and the laws back.
    #[must_use]
    pub fn release(self) -> [(P, Running<M>); N] {
        self.pins.map(DebouncedPin::release)
    }
}

impl<P: InputPin, M: Machine<Input = Position>, const N: usize> DebouncedPins<P, M, N> {
    /// Reads every pin and returns what the law of each reports, or its error.
    #[must_use = "a dropped edge is a lost operation"]
    #[inline]
    pub fn tick(&mut self) -> [Result<M::Output, P::Error>; N] {
        self.pins.each_mut().map(DebouncedPin::tick)
    }
}

impl<P, M, const N: usize> fmt::Debug for DebouncedPins<P, M, N>
where
    M: Machine<Input = Position>,
    DebouncedPin<P, M>: fmt::Debug,
{
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("DebouncedPins").field("pins", &self.pins).finish()
    }
}

#[cfg(feature = "defmt")]
impl<P, M, const N: usize> defmt::Format for DebouncedPins<P, M, N>
where
    M: Machine<Input = Position>,
    DebouncedPin<P, M>: defmt::Format,
{
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "DebouncedPins {{ pins: {} }}", self.pins);
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use std::io::ErrorKind;
    use std::vec::Vec;

    use embedded_hal_mock::eh1::MockError;
    use embedded_hal_mock::eh1::digital::State::{High, Low};
    use embedded_hal_mock::eh1::digital::{Mock, Transaction};

    use super::DebouncedPins;
    use crate::words::{row, words};
    use crate::{Change, DebouncedPin, Level, Polarity, Position, Running, ShiftRegister, Started};

    const LAW: ShiftRegister = ShiftRegister::new(2);

    #[test]
    fn pins_error_of_one_is_lost_to_no_other() {
        let broken = MockError::Io(ErrorKind::TimedOut);
        let scripts = [
            [Transaction::get(Low), Transaction::get(Low), Transaction::get(Low)],
            [Transaction::get(Low), Transaction::get(High).with_error(broken.clone()), Transaction::get(Low)],
        ];
        let pin = |script| {
            DebouncedPin::new(Mock::new(script), Polarity::ClosedWhenLow, Running::new(LAW, Position::Open))
        };
        let mut pins = DebouncedPins::new(scripts.each_ref().map(pin));
        assert!(pins.are_settled());
        assert_eq!(pins.tick(), [Ok(None), Ok(None)]);
        assert!(!pins.are_settled());
        assert_eq!(pins.tick(), [Ok(Some(Change::Make)), Err(broken)]);
        assert_eq!(pins.pins().each_ref().map(DebouncedPin::wake_level), [Some(Level::High), None]);
        assert_eq!(pins.tick(), [Ok(None), Ok(Some(Change::Make))]);
        assert!(pins.are_settled());
        pins.release().into_iter().for_each(|(mut pin, _)| pin.done());
    }

    /// Whatever two lines do, each pin's first report is its position, and every edge after it starts from there.
    #[test]
    fn pins_at_power_up_invent_no_operation() {
        const TICKS: usize = 5;
        for word in words(2 * TICKS) {
            let (first, second) = word.split_at(TICKS);
            let pin = |line: &[Position]| {
                let script: Vec<_> = line
                    .iter()
                    .map(|sample| Transaction::get(if sample.is_closed() { Low } else { High }))
                    .collect();
                DebouncedPin::new(Mock::new(&script), Polarity::ClosedWhenLow, Running::starting(LAW))
            };
            let mut pins = DebouncedPins::new([pin(first), pin(second)]);
            let mut positions = [None; 2];
            for _ in 0..TICKS {
                for (report, position) in pins.tick().into_iter().zip(&mut positions) {
                    *position = match (report.unwrap(), *position) {
                        (Some(Started::Initial(found)), None) => Some(found),
                        (Some(Started::Edge(change)), Some(before)) if change.to() != before => {
                            Some(change.to())
                        }
                        (None, before) => before,
                        (report, before) => panic!("{report:?} at {before:?}: {}", row(&word)),
                    };
                }
            }
            for (line, position) in [first, second].into_iter().zip(positions) {
                // Two samples alike in a row, and there is a position: that of the last such pair.
                let expected = line.windows(2).rfind(|pair| pair[0] == pair[1]).map(|pair| pair[1]);
                assert_eq!(position, expected, "{}", row(&word));
            }
            pins.release().into_iter().for_each(|(mut pin, _)| pin.done());
        }
    }
}
