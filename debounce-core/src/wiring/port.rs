//! A whole port in one word: [`PortReader`] and [`DebouncedPort`].

use core::fmt;

use crate::bank::Word;
use crate::machine::Machine;
use crate::running::Running;
use crate::still::is_still;

/// Reads all inputs of a port at once, as one word with one lane for each.
///
/// Most parts give a port register in one read: then every lane is of the same instant. A reading is as the lines are;
/// polarity is turned by the bank. Implemented for every closure that returns a word or an error, so that a register is
/// read where it stands: `|| Ok::<u16, Infallible>(gpio.data.read())`.
pub trait PortReader<W: Word> {
    /// What may go wrong, [`Infallible`](core::convert::Infallible) for a register of the part itself.
    type Error;

    /// Reads the port: a lane is set where the line reads high.
    ///
    /// # Errors
    /// What the way to the port says, an expander on a bus for example. There is no sample then.
    fn read_port(&mut self) -> Result<W, Self::Error>;
}

impl<F, W: Word, E> PortReader<W> for F
where
    F: FnMut() -> Result<W, E>,
{
    type Error = E;

    #[inline]
    fn read_port(&mut self) -> Result<W, E> {
        self()
    }
}

/// Reads a port and debounces all of it in one call a tick.
///
/// # Method
/// A [`PortReader`] in front of a running machine over whole words. Polarity belongs to that machine, which turns it
/// where it costs least.
///
/// # Units
/// One call to [`tick`](Self::tick) takes one sample of every input and is one tick.
///
/// # Bounds
/// Those of the machine. A reader that answers with an error takes no sample: the tick is lost to every input of the
/// port. Proof: `port_error_is_passed_on_and_takes_no_sample`.
///
/// # State
/// The reader and that of the machine.
///
/// # Panics
/// Never.
///
/// # Examples
/// Eight keys with pull-ups, each settled by four samples in a row; a bank of such inputs, from power-up:
/// ```
/// use core::convert::Infallible;
/// use debounce_core::{Bank, DebouncedPort, Running, StartingBank};
/// const KEYS: StartingBank<Bank<u8, 2>, 2> = StartingBank::new(Bank::new(0xff));
/// let register = || Ok::<u8, Infallible>(0b1111_1110); // the first key is held down
/// let mut port = DebouncedPort::new(register, Running::from_parts(KEYS, KEYS.power_up::<u8>()));
/// for _ in 0..3 {
///     assert!(port.tick().is_ok_and(|started| started.initial == 0));
/// }
/// let fourth = port.tick().unwrap();
/// assert_eq!((fourth.initial, fourth.changes.any()), (0xff, 0)); // held down at boot is no operation
/// assert!(port.is_settled(0b1111_1110));
/// ```
#[derive(Clone)]
pub struct DebouncedPort<R, M: Machine> {
    reader: R,
    running: Running<M>,
}

impl<R, M: Machine> DebouncedPort<R, M> {
    /// Reads `reader` into `running`.
    #[must_use]
    pub const fn new(reader: R, running: Running<M>) -> Self {
        Self { reader, running }
    }

    /// The machine at work.
    #[must_use]
    pub const fn running(&self) -> &Running<M> {
        &self.running
    }

    /// Whether a tick that reads `port` would change nothing: the tick may stop for as long as the port reads so.
    ///
    /// Arm the wake-up for a port unlike `port` first, then read the port once more and ask with that reading: an input
    /// that moves before the arming makes no edge after it.
    #[must_use]
    pub fn is_settled(&self, port: M::Input) -> bool {
        is_still(self.running.law(), self.running.state(), port)
    }

    /// Gives the reader and the machine back.
    #[must_use]
    pub fn release(self) -> (R, Running<M>) {
        (self.reader, self.running)
    }
}

impl<R, M> DebouncedPort<R, M>
where
    M: Machine<Input: Word>,
    R: PortReader<M::Input>,
{
    /// Reads the port, takes that as the sample of this tick and returns what the machine reports.
    ///
    /// # Errors
    /// The reader's own error. No sample is taken then: the machine has seen a lost tick.
    #[inline]
    pub fn tick(&mut self) -> Result<M::Output, R::Error> {
        Ok(self.running.tick(self.reader.read_port()?))
    }
}

impl<R, M> fmt::Debug for DebouncedPort<R, M>
where
    R: fmt::Debug,
    M: Machine,
    Running<M>: fmt::Debug,
{
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_struct("DebouncedPort").field("reader", &self.reader).field("running", &self.running).finish()
    }
}

#[cfg(feature = "defmt")]
impl<R, M> defmt::Format for DebouncedPort<R, M>
where
    R: defmt::Format,
    M: Machine + defmt::Format,
    M::State: defmt::Format,
{
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "DebouncedPort {{ reader: {}, running: {} }}", self.reader, self.running);
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use std::vec::Vec;

    use super::DebouncedPort;
    use crate::words::{row, words};
    use crate::{Bank, Changes, Lane, Running, ShiftRegister, Started, StartingBank};

    const BANK: Bank<u8, 1> = Bank::new(0b10);

    #[test]
    fn port_error_is_passed_on_and_takes_no_sample() {
        let mut readings = [Ok(0b11), Err("no answer"), Err("no answer"), Ok(0b11)].into_iter();
        let reader = || readings.next().unwrap_or(Ok(0));
        let mut port = DebouncedPort::new(reader, Running::from_parts(BANK, BANK.all_open()));
        assert_eq!(port.tick(), Ok(Changes::NONE));
        let before = *port.running().state();
        assert_eq!(port.tick(), Err("no answer"));
        assert_eq!(port.tick(), Err("no answer"));
        assert_eq!(*port.running().state(), before);
        assert_eq!(port.tick(), Ok(Changes { make: 1, break_: 0 }));
    }

    #[test]
    fn port_is_settled_exactly_where_a_tick_changes_nothing() {
        let mut port = DebouncedPort::new(|| Ok::<u8, ()>(0b01), Running::from_parts(BANK, BANK.all_open()));
        assert!((0..4).all(|reading| port.is_settled(reading) == (reading == 0b10)));
        assert_eq!(port.tick(), Ok(Changes::NONE));
        assert!((0..4).all(|reading| !port.is_settled(reading)));
        assert_eq!(port.tick(), Ok(Changes { make: 0b11, break_: 0 }));
        assert!((0..4).all(|reading| port.is_settled(reading) == (reading == 0b01)));
    }

    /// Whatever two lines do from power-up on: each lane reports what a lone starting law reports on its line, so a
    /// position first and no operation with it.
    #[test]
    fn port_at_power_up_invents_no_operation() {
        const TICKS: usize = 6;
        const PORT: StartingBank<Bank<u8, 1>, 1> = StartingBank::new(BANK);
        for word in words(2 * TICKS) {
            let lines = word.split_at(TICKS);
            // The second lane is inverted; the other six lie open and still.
            let reading =
                |tick: usize| u8::from(lines.0[tick].is_closed()) | u8::from(!lines.1[tick].is_closed()) << 1;
            let mut readings = (0..TICKS).map(reading);
            let reader = || readings.next().ok_or(());
            let mut port = DebouncedPort::new(reader, Running::from_parts(PORT, PORT.power_up()));
            let mut laws = [Running::starting(ShiftRegister::new(2)); 2];
            for tick in 0..TICKS {
                let started = port.tick().unwrap();
                for (lane, line) in [lines.0, lines.1].into_iter().enumerate() {
                    let report = laws[lane].tick(line[tick]);
                    let initial = started.initial >> lane & 1 == 1;
                    let (make, break_) =
                        (started.changes.make >> lane & 1 == 1, started.changes.break_ >> lane & 1 == 1);
                    let expected = match report {
                        None => (false, false, false),
                        Some(Started::Initial(_)) => (true, false, false),
                        Some(Started::Edge(change)) => {
                            (false, change.to().is_closed(), !change.to().is_closed())
                        }
                    };
                    assert_eq!((initial, make, break_), expected, "{} at {tick}", row(&word));
                }
                let quiet_lanes = if tick == 1 { 0b1111_1100 } else { 0 };
                assert_eq!(started.initial & 0b1111_1100, quiet_lanes);
            }
            assert!(port.tick().is_err());
        }
    }

    /// Samples on a fixed grid and a tick that stops whenever the port is settled, restarted by the level of any line:
    /// the same changes at the same ticks.
    #[test]
    fn port_asleep_while_settled_equals_always_ticking() {
        let mut slept = 0;
        for word in words(12) {
            let readings: Vec<u8> = word
                .chunks(2)
                .map(|pair| u8::from(pair[0].is_closed()) | u8::from(pair[1].is_closed()) << 1)
                .collect();
            let mut awake = Running::from_parts(BANK, BANK.all_open());
            let asleep = Running::from_parts(BANK, BANK.all_open());
            let current = core::cell::Cell::new(0b10);
            let mut asleep = DebouncedPort::new(|| Ok::<u8, ()>(current.get()), asleep);
            for reading in readings {
                current.set(reading);
                let expected = awake.tick(reading);
                if asleep.is_settled(reading) {
                    slept += 1;
                    assert!(expected.is_none());
                } else {
                    assert_eq!(asleep.tick(), Ok(expected), "{}", row(&word));
                }
            }
            assert_eq!(awake.state(), asleep.running().state());
        }
        assert!(slept > 0);
    }

    #[test]
    fn port_lane_as_law_is_settling_too() {
        let lane = Running::new(Lane::new(BANK), crate::Position::Open);
        assert_eq!(lane.settled_at(), Some(crate::Position::Open));
    }
}
