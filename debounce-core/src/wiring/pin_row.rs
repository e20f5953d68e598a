//! Pins that are read as if they were a port: [`PinRow`].

use embedded_hal::digital::InputPin;

use super::PortReader;

/// Reads up to 32 pins into one word, the first into bit 0: a port of pins that lie apart.
///
/// # Method
/// One read a pin, all or nothing: where one pin answers with an error there is no word.
///
/// # Units
/// One [`read`](PortReader::read) is one sample of every pin. The pins are read one after the other; the time that takes
/// belongs to the aperture of the [`TickClock`](crate::TickClock).
///
/// # Bounds
/// Bit `i` is 1 exactly when pin `i` reads high. Proof: `pin_row_reads_first_pin_into_bit_0`.
///
/// # State
/// The pins.
///
/// # Panics
/// Never. More than 32 pins do not compile.
///
/// # Examples
/// ```
/// use debounce_core::{PinRow, PortReader};
/// # use embedded_hal_mock::eh1::digital::{Mock, State::{High, Low}, Transaction};
/// # let mut pins = [High, Low].map(|level| Mock::new(&[Transaction::get(level)]));
/// # let pins_of_the_board = pins.clone();
/// let mut row = PinRow::new(pins_of_the_board);
/// assert_eq!(row.read(), Ok(0b01));
/// # pins.iter_mut().for_each(Mock::done);
/// ```
#[derive(Clone, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PinRow<P, const N: usize> {
    pins: [P; N],
}

impl<P, const N: usize> PinRow<P, N> {
    /// Reads these pins.
    #[must_use]
    pub const fn new(pins: [P; N]) -> Self {
        const { assert!(N <= 32, "a row of pins is read into 32 bits: take at most 32 pins") };
        Self { pins }
    }

    /// Gives the pins back.
    #[must_use]
    pub fn release(self) -> [P; N] {
        self.pins
    }
}

impl<P: InputPin, const N: usize> PortReader for PinRow<P, N> {
    type Word = u32;
    type Error = P::Error;

    #[inline]
    fn read(&mut self) -> Result<u32, P::Error> {
        let mut word = 0;
        // From the last pin to the first, which so comes to stand in bit 0.
        for pin in self.pins.iter_mut().rev() {
            word = word << 1 | u32::from(pin.is_high()?);
        }
        Ok(word)
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use std::io::ErrorKind;

    use embedded_hal_mock::eh1::MockError;
    use embedded_hal_mock::eh1::digital::State::{High, Low};
    use embedded_hal_mock::eh1::digital::{Mock, Transaction};

    use super::PinRow;
    use crate::PortReader;

    #[test]
    fn pin_row_reads_first_pin_into_bit_0() {
        for expected in 0..8 {
            let level = |bit: u32| if expected >> bit & 1 == 1 { High } else { Low };
            let mut row = PinRow::new([0, 1, 2].map(|bit| Mock::new(&[Transaction::get(level(bit))])));
            assert_eq!(row.read(), Ok(expected));
            row.release().iter_mut().for_each(Mock::done);
        }
    }

    #[test]
    fn pin_row_of_32_pins_fills_the_word() {
        let mut row = PinRow::new([(); 32].map(|()| Mock::new(&[Transaction::get(High)])));
        assert_eq!(row.read(), Ok(u32::MAX));
        row.release().iter_mut().for_each(Mock::done);
    }

    #[test]
    fn pin_row_error_gives_no_word() {
        let broken = MockError::Io(ErrorKind::TimedOut);
        let script = [Transaction::get(High).with_error(broken.clone())];
        let mut row = PinRow::new([Mock::new(&[]), Mock::new(&script), Mock::new(&[Transaction::get(High)])]);
        assert_eq!(row.read(), Err(broken));
        row.release().iter_mut().for_each(Mock::done);
    }
}
