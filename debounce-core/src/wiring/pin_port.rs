//! Pins that make a port: [`PinPort`].

use embedded_hal::digital::InputPin;

use super::PortReader;
use crate::bank::Word;

/// Pins read one after the other as a port: pin `i` is lane `i`; lanes without a pin read low.
///
/// # Method
/// Common practice. The lanes are not of the same instant: the time from the first to the last read is sampling aperture,
/// and belongs into the jitter of the [`TickClock`](crate::TickClock). A pin that returns an error ends the reading:
/// there is no sample of any lane, the bank is not stepped, and the tick counts as lost.
///
/// # Units
/// One call to [`read_port`](PortReader::read_port) is one sample of every lane.
///
/// # Bounds
///
/// | Quantity                        | Value    | Proof                                    |
/// |---------------------------------|----------|------------------------------------------|
/// | lane of pin `i`                 | `i`      | `pin_port_every_level_is_read_in_its_lane`   |
/// | samples from a reading with an error | none | `pin_port_error_of_any_pin_gives_no_sample`  |
///
/// # State
/// The pins.
///
/// # Panics
/// Never. More pins than the word has lanes do not compile.
///
/// # Examples
/// ```
/// use debounce_core::{Bank, Machine, PinPort, PortReader};
/// use embedded_hal::digital::InputPin;
///
/// fn tick_forever<P: InputPin>(pins: [P; 6], wait: impl Fn()) {
///     const KEYS: Bank<u8, 2> = Bank::new(0b11_1111); // pull-ups: closed reads low
///     let mut port = PinPort::new(pins);
///     let mut state = KEYS.all_open();
///     loop {
///         wait();
///         if let Ok(reading) = port.read_port() {
///             let changes = KEYS.step(&mut state, reading);
///             // ...
///         }
///     }
/// }
/// ```
#[derive(Clone, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PinPort<P, const N: usize> {
    pins: [P; N],
}

impl<P, const N: usize> PinPort<P, N> {
    /// A port of these pins.
    #[must_use]
    pub const fn new(pins: [P; N]) -> Self {
        Self { pins }
    }

    /// Gives the pins back.
    pub fn release(self) -> [P; N] {
        self.pins
    }
}

impl<W: Word, P: InputPin, const N: usize> PortReader<W> for PinPort<P, N> {
    type Error = P::Error;

    fn read_port(&mut self) -> Result<W, P::Error> {
        const { assert!(N <= W::LANES as usize, "more pins than the word has lanes: use a wider word") };
        let mut port = W::NONE;
        for (lane, pin) in (0u32..).zip(&mut self.pins) {
            if pin.is_high()? {
                port |= W::lane(lane);
            }
        }
        Ok(port)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bank::Bank;
    use crate::machine::Machine;
    use embedded_hal::digital::{Error, ErrorKind, ErrorType, InputPin};

    #[derive(Debug, PartialEq, Eq)]
    struct Broken;

    impl Error for Broken {
        fn kind(&self) -> ErrorKind {
            ErrorKind::Other
        }
    }

    struct Pin(Result<bool, ()>);

    impl ErrorType for Pin {
        type Error = Broken;
    }

    impl InputPin for Pin {
        fn is_high(&mut self) -> Result<bool, Broken> {
            self.0.map_err(|()| Broken)
        }

        fn is_low(&mut self) -> Result<bool, Broken> {
            self.is_high().map(|high| !high)
        }
    }

    #[test]
    fn pin_port_every_level_is_read_in_its_lane() {
        for levels in 0..32u16 {
            let mut port = PinPort::new([0, 1, 2, 3, 4].map(|i| Pin(Ok(levels >> i & 1 == 1))));
            assert_eq!(port.read_port(), Ok(levels));
        }
        let mut full = PinPort::new([(); 64].map(|()| Pin(Ok(true))));
        assert_eq!(PortReader::<u64>::read_port(&mut full), Ok(u64::MAX));
    }

    #[test]
    fn pin_port_error_of_any_pin_gives_no_sample() {
        let bank = Bank::<u8, 1>::new(0);
        for broken in 0..3 {
            let mut state = bank.all_open();
            let mut changes = 0;
            // Closed throughout, with one reading that fails between the two that confirm.
            for tick in 0..3 {
                let mut port = PinPort::new(
                    [0, 1, 2].map(|i| Pin(if tick == 1 && i == broken { Err(()) } else { Ok(true) })),
                );
                if let Ok(reading) = port.read_port() {
                    changes |= bank.step(&mut state, reading).make;
                } else {
                    assert_eq!((tick, changes), (1, 0));
                }
            }
            assert_eq!(changes, 0b111);
        }
    }
}
