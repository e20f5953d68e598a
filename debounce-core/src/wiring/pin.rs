//! A debounced input pin over embedded-hal: [`DebouncedPin`].

use core::fmt;

use embedded_hal::digital::InputPin;

use super::{Level, Polarity, Settling};
use crate::machine::{Machine, Position};
use crate::running::Running;

/// An input pin, its polarity and a running law: one call a tick reads and debounces.
///
/// # Method
/// Polarity is turned here and nowhere else. The law may be held by value, by reference, as a
/// [`ConstLaw`](crate::ConstLaw), or started at power-up by [`Running::starting`].
///
/// # Units
/// One call to [`tick`](Self::tick) takes one sample and is one tick.
///
/// # Bounds
/// Those of the law. A pin that answers with an error takes no sample: the tick is lost. Proof:
/// `pin_error_is_passed_on_and_takes_no_sample`.
///
/// # State
/// The pin, one byte of polarity, and that of the law.
///
/// # Panics
/// Never.
///
/// # Examples
/// ```
/// use debounce_core::{Change, DebouncedPin, Polarity, Position, Running, ShiftRegister};
/// # use embedded_hal_mock::eh1::digital::{Mock, State::Low, Transaction};
/// # let mut pin = Mock::new(&[Transaction::get(Low), Transaction::get(Low)]);
/// # let pin_of_the_board = pin.clone();
/// let law = Running::new(ShiftRegister::new(2), Position::Open);
/// let mut key = DebouncedPin::new(pin_of_the_board, Polarity::ClosedWhenLow, law);
/// // Once a tick:
/// assert_eq!(key.tick()?, None);
/// assert_eq!(key.tick()?, Some(Change::Make));
/// # pin.done();
/// # Ok::<(), embedded_hal_mock::eh1::MockError>(())
/// ```
#[derive(Clone)]
pub struct DebouncedPin<P, M: Machine<Input = Position>> {
    pin: P,
    polarity: Polarity,
    running: Running<M>,
}

impl<P, M: Machine<Input = Position>> DebouncedPin<P, M> {
    /// Reads `pin`, wired with `polarity`, into `running`.
    #[must_use]
    pub const fn new(pin: P, polarity: Polarity, running: Running<M>) -> Self {
        Self { pin, polarity, running }
    }

    /// The law at work, for its position and whether it is settled.
    #[must_use]
    pub const fn running(&self) -> &Running<M> {
        &self.running
    }

    /// The level that has to restart the tick, when the tick may stop: the one opposite to the settled position.
    ///
    /// `None` while the tick has to go on. Arm a *level* wake-up with it, or an edge wake-up and then read the pin
    /// once more before sleeping: a line that moved in between makes no edge any more.
    #[must_use]
    pub fn wake_level(&self) -> Option<Level>
    where
        M: Settling,
    {
        self.running.settled_at().map(|position| self.polarity.level(position.opposite()))
    }

    #[cfg(feature = "embedded-hal-async")]
    pub(super) const fn pin_mut(&mut self) -> &mut P {
        &mut self.pin
    }

    /// Gives the pin and the law back.
    #[must_use]
    pub fn release(self) -> (P, Running<M>) {
        (self.pin, self.running)
    }
}

impl<P: InputPin, M: Machine<Input = Position>> DebouncedPin<P, M> {
    /// Reads the pin, takes that as the sample of this tick and returns what the law reports.
    ///
    /// # Errors
    /// The pin's own error. No sample is taken then: the law has seen a lost tick.
    #[inline]
    pub fn tick(&mut self) -> Result<M::Output, P::Error> {
        let sample = if self.pin.is_low()? { self.polarity.at_low() } else { self.polarity.at_high() };
        Ok(self.running.tick(sample))
    }
}

impl<P, M> fmt::Debug for DebouncedPin<P, M>
where
    P: fmt::Debug,
    M: Machine<Input = Position>,
    Running<M>: fmt::Debug,
{
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("DebouncedPin")
            .field("pin", &self.pin)
            .field("polarity", &self.polarity)
            .field("running", &self.running)
            .finish()
    }
}

#[cfg(feature = "defmt")]
impl<P, M> defmt::Format for DebouncedPin<P, M>
where
    P: defmt::Format,
    M: Machine<Input = Position> + defmt::Format,
    M::State: defmt::Format,
{
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(
            f,
            "DebouncedPin {{ pin: {}, polarity: {}, running: {} }}",
            self.pin,
            self.polarity,
            self.running
        );
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use std::io::ErrorKind;
    use std::vec::Vec;

    use embedded_hal_mock::eh1::MockError;
    use embedded_hal_mock::eh1::digital::State::{High, Low};
    use embedded_hal_mock::eh1::digital::{Mock, State, Transaction};

    use super::DebouncedPin;
    use crate::{Change, Level, Polarity, Position, Running, ShiftRegister, Started};

    #[track_caller]
    fn reports(polarity: Polarity, levels: &[State], expected: &[Option<Change>]) {
        let script: Vec<_> = levels.iter().map(|&level| Transaction::get(level)).collect();
        let running = Running::new(ShiftRegister::new(2), Position::Open);
        let mut pin = DebouncedPin::new(Mock::new(&script), polarity, running);
        let seen: Vec<_> = levels.iter().map(|_| pin.tick().unwrap()).collect();
        assert_eq!(seen, expected);
        pin.release().0.done();
    }

    #[test]
    fn pin_polarity_is_turned_once() {
        let expected = [None, Some(Change::Make), None, Some(Change::Break)];
        reports(Polarity::ClosedWhenLow, &[Low, Low, High, High], &expected);
        reports(Polarity::ClosedWhenHigh, &[High, High, Low, Low], &expected);
        reports(Polarity::ClosedWhenHigh, &[Low, Low], &[None, None]);
        reports(Polarity::ClosedWhenLow, &[High, High], &[None, None]);
    }

    #[test]
    fn pin_error_is_passed_on_and_takes_no_sample() {
        let broken = MockError::Io(ErrorKind::TimedOut);
        let script = [
            Transaction::get(Low),
            Transaction::get(High).with_error(broken.clone()),
            Transaction::get(Low).with_error(broken.clone()),
            Transaction::get(Low),
        ];
        let running = Running::new(ShiftRegister::new(2), Position::Open);
        let mut pin = DebouncedPin::new(Mock::new(&script), Polarity::ClosedWhenLow, running);
        assert_eq!(pin.tick(), Ok(None));
        let before = *pin.running();
        assert_eq!(pin.tick(), Err(broken.clone()));
        assert_eq!(pin.tick(), Err(broken));
        assert_eq!(*pin.running(), before);
        assert_eq!(pin.tick(), Ok(Some(Change::Make)));
        pin.release().0.done();
    }

    #[test]
    fn pin_held_low_at_power_up_is_a_position_and_no_operation() {
        let script = [Transaction::get(Low), Transaction::get(Low), Transaction::get(Low)];
        let running = Running::starting(ShiftRegister::new(2));
        let mut pin = DebouncedPin::new(Mock::new(&script), Polarity::ClosedWhenLow, running);
        assert_eq!(pin.tick(), Ok(None));
        assert_eq!(pin.running().position(), None);
        assert_eq!(pin.tick(), Ok(Some(Started::Initial(Position::Closed))));
        assert_eq!(pin.tick(), Ok(None));
        pin.release().0.done();
    }

    #[test]
    fn pin_wake_level_is_opposite_to_the_settled_position() {
        for (polarity, open_wakes) in
            [(Polarity::ClosedWhenLow, Level::Low), (Polarity::ClosedWhenHigh, Level::High)]
        {
            for position in Position::BOTH {
                let running = Running::new(ShiftRegister::new(2), position);
                let pin = DebouncedPin::new(Mock::new(&[]), polarity, running);
                let same = pin.wake_level() == Some(open_wakes);
                assert_eq!(same, position == Position::Open, "{polarity:?} {position:?}");
                assert!(pin.wake_level().is_some());
                pin.release().0.done();
            }
        }
        let script = [Transaction::get(Low), Transaction::get(Low)];
        let running = Running::new(ShiftRegister::new(2), Position::Open);
        let mut pin = DebouncedPin::new(Mock::new(&script), Polarity::ClosedWhenLow, running);
        assert_eq!(pin.tick(), Ok(None));
        assert_eq!(pin.wake_level(), None);
        assert_eq!(pin.tick(), Ok(Some(Change::Make)));
        assert_eq!(pin.wake_level(), Some(Level::High));
        pin.release().0.done();
    }
}
