//! A whole port in one word: [`PortReader`] and [`DebouncedPort`].

use core::fmt;

use crate::machine::Machine;
use crate::running::Running;

/// Reads all inputs of a port at once, as one word with one bit for each.
///
/// Implemented for every closure that returns such a word or an error, so that a register of the part is read where it
/// stands: `|| Ok::<_, Infallible>(gpio.data.read())`.
pub trait PortReader {
    /// The word: an unsigned integer wide enough for the port.
    type Word: Copy;
    /// What may go wrong, [`Infallible`](core::convert::Infallible) for a register of the part itself.
    type Error;

    /// Reads the port, before polarity.
    ///
    /// # Errors
    /// What the way to the port says, an expander on a bus for example.
    fn read(&mut self) -> Result<Self::Word, Self::Error>;
}

impl<F, W: Copy, E> PortReader for F
where
    F: FnMut() -> Result<W, E>,
{
    type Word = W;
    type Error = E;

    #[inline]
    fn read(&mut self) -> Result<W, E> {
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
/// Any machine over words will do; here one that reports which bits changed (it debounces nothing):
/// ```
/// use core::convert::Infallible;
/// use debounce_core::{DebouncedPort, Machine, Running};
/// struct Changed;
/// impl Machine for Changed {
///     type Input = u8;
///     type Output = u8;
///     type State = u8;
///     fn step(&self, state: &mut u8, port: u8) -> u8 {
///         core::mem::replace(state, port) ^ port
///     }
/// }
/// let mut register = [0b0001, 0b0011].into_iter();
/// let reader = || Ok::<u8, Infallible>(register.next().unwrap_or(0));
/// let mut port = DebouncedPort::new(reader, Running::from_parts(Changed, 0));
/// assert_eq!(port.tick(), Ok(0b0001));
/// assert_eq!(port.tick(), Ok(0b0010));
/// assert!(port.is_settled(0b0011) && !port.is_settled(0));
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
        let mut next = *self.running.state();
        let _ = self.running.law().step(&mut next, port);
        next == *self.running.state()
    }

    /// Gives the reader and the machine back.
    #[must_use]
    pub fn release(self) -> (R, Running<M>) {
        (self.reader, self.running)
    }
}

impl<R: PortReader, M: Machine<Input = R::Word>> DebouncedPort<R, M> {
    /// Reads the port, takes that as the sample of this tick and returns what the machine reports.
    ///
    /// # Errors
    /// The reader's own error. No sample is taken then: the machine has seen a lost tick.
    #[inline]
    pub fn tick(&mut self) -> Result<M::Output, R::Error> {
        Ok(self.running.tick(self.reader.read()?))
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
    use super::DebouncedPort;
    use crate::{Machine, Running};

    /// Two lanes, each of which changes at its second contrary sample in a row.
    #[derive(Clone, Copy)]
    struct Twice;

    impl Machine for Twice {
        type Input = u8;
        type Output = u8;
        type State = (u8, u8);

        fn step(&self, (settled, once): &mut (u8, u8), port: u8) -> u8 {
            let contrary = port ^ *settled;
            let changed = contrary & *once;
            *once = contrary & !changed;
            *settled ^= changed;
            changed
        }
    }

    #[test]
    fn port_error_is_passed_on_and_takes_no_sample() {
        let mut readings = [Ok(1), Err("no answer"), Err("no answer"), Ok(1)].into_iter();
        let mut port =
            DebouncedPort::new(|| readings.next().unwrap_or(Ok(0)), Running::from_parts(Twice, (0, 0)));
        assert_eq!(port.tick(), Ok(0));
        let before = *port.running().state();
        assert_eq!(port.tick(), Err("no answer"));
        assert_eq!(port.tick(), Err("no answer"));
        assert_eq!(*port.running().state(), before);
        assert_eq!(port.tick(), Ok(1));
    }

    #[test]
    fn port_is_settled_exactly_where_a_tick_changes_nothing() {
        let mut port = DebouncedPort::new(|| Ok::<u8, ()>(0b11), Running::from_parts(Twice, (0, 0)));
        assert!(port.is_settled(0) && !port.is_settled(1));
        assert_eq!(port.tick(), Ok(0));
        assert!((0..4).all(|reading| !port.is_settled(reading)));
        assert_eq!(port.tick(), Ok(0b11));
        assert!((0..4).all(|reading| port.is_settled(reading) == (reading == 0b11)));
    }
}
