//! A debounced pin that sleeps: [`AsyncPin`].

use embedded_hal::digital::{InputPin, PinState};
use embedded_hal_async::delay::DelayNs;
use embedded_hal_async::digital::Wait;

use crate::law::{Law, is_settled};
use crate::machine::{Change, Position};

/// A debounced pin for async programs: ticks while something is going on, sleeps on the pin when it has settled.
///
/// # Method
/// Derived here. While the law is settled at what the line reads, the tick is stopped and the pin waits for the *level*
/// that the line does not have. Not for an edge: a change between the last reading and the arming of the wait would be
/// an edge that is gone, whereas the level is still there and the wait ends at once. After a wake-up the line is read
/// anew; a disturbance that is over by then is no sample, and the pin goes back to sleep.
///
/// At power-up the law runs twice, from rest open and from rest closed, until both runs are in the same state: only then
/// is there a position, and no operation is made of it.
///
/// # Units
/// The tick is in microseconds, as the delay counts it. The delay only bounds it from below: what the executor adds is
/// jitter and lateness of the sample, and belongs into the tolerance of the tick.
///
/// # Bounds
///
/// | Quantity                                             | Value                    | Proof                                   |
/// |------------------------------------------------------|--------------------------|-----------------------------------------|
/// | edges, and the ticks they come at                    | those of the law ticked without sleep | `async_pin_every_waveform_equals_law_without_sleep` |
/// | changes lost between the last reading and the sleep  | none                     | `async_pin_change_before_arming_is_not_lost`    |
/// | ticks while settled                                  | at most 1                | `async_pin_settled_line_takes_no_ticks`         |
/// | samples taken from a pin error                       | none, state kept         | `async_pin_error_takes_no_sample`               |
///
/// The first holds for a line that changes between ticks. In general a wake-up begins ticks of a new phase: the first
/// sample after it is taken as soon as the program runs, so latency counts from there.
///
/// [`wait_for_change`](Self::wait_for_change) may be dropped at any await, as by a select: nothing is lost but the rest
/// of a tick, which begins anew.
///
/// # State
/// Pin, delay, law, its state and 8 bytes or so.
///
/// # Panics
/// Never.
///
/// # Examples
/// ```
/// use debounce_core::{AsyncPin, Bank, Change, Lane};
/// use embedded_hal::digital::{InputPin, PinState};
/// use embedded_hal_async::{delay::DelayNs, digital::Wait};
///
/// async fn count_operations(pin: impl InputPin + Wait, delay: impl DelayNs) -> u32 {
///     // Pull-up and contact to ground; four samples, 2 ms apart.
///     let law = Lane::new(Bank::<u8, 2>::new(0));
///     let mut lid = AsyncPin::new(pin, delay, law, PinState::Low, 2_000);
///     let mut operations = 0;
///     while let Ok(change) = lid.wait_for_change().await {
///         operations += u32::from(change == Change::Make);
///     }
///     operations
/// }
/// ```
#[derive(Debug)]
pub struct AsyncPin<P, D, L: Law> {
    pin: P,
    delay: D,
    law: L,
    closed_reads: PinState,
    tick_us: u32,
    // None until the first position is known.
    state: Option<L::State>,
    // A sample was taken and the tick after it is not over.
    in_tick: bool,
}

impl<P: InputPin + Wait, D: DelayNs, L: Law> AsyncPin<P, D, L> {
    /// A pin that reads `closed_reads` while its contact is closed, sampled every `tick_us` microseconds.
    #[must_use]
    pub const fn new(pin: P, delay: D, law: L, closed_reads: PinState, tick_us: u32) -> Self {
        Self { pin, delay, law, closed_reads, tick_us, state: None, in_tick: false }
    }

    /// The debounced position; `None` before the first one is known.
    #[must_use]
    pub fn position(&self) -> Option<Position> {
        self.state.as_ref().map(|state| self.law.output(state))
    }

    /// Waits until the pin has its first position, which is no operation; returns at once when it has one.
    ///
    /// # Errors
    /// That of the pin; the start begins anew at the next call.
    pub async fn wait_for_initial(&mut self) -> Result<Position, P::Error> {
        let state = self.started().await?;
        Ok(self.law.output(&state))
    }

    /// Waits for the next operation.
    ///
    /// # Errors
    /// That of the pin. No sample was taken then, and the state is kept: call again.
    pub async fn wait_for_change(&mut self) -> Result<Change, P::Error> {
        let mut state = self.started().await?;
        loop {
            self.end_tick().await;
            let sample = self.sample()?;
            if is_settled(&self.law, &state, sample) {
                self.sleep_while(sample).await?;
                continue;
            }
            let edge = self.law.step(&mut state, sample);
            self.state = Some(state);
            self.in_tick = true;
            if let Some(edge) = edge {
                return Ok(edge);
            }
        }
    }

    /// Gives the pin and the delay back.
    pub fn release(self) -> (P, D) {
        (self.pin, self.delay)
    }

    async fn started(&mut self) -> Result<L::State, P::Error> {
        if let Some(state) = self.state {
            return Ok(state);
        }
        let mut from_open = self.law.rest(Position::Open);
        let mut from_closed = self.law.rest(Position::Closed);
        while from_open != from_closed {
            self.end_tick().await;
            let sample = self.sample()?;
            // Edges of either run are guesses about a contact whose position is not known.
            let _ = self.law.step(&mut from_open, sample);
            let _ = self.law.step(&mut from_closed, sample);
            self.in_tick = true;
        }
        self.state = Some(from_open);
        Ok(from_open)
    }

    async fn end_tick(&mut self) {
        if self.in_tick {
            self.delay.delay_us(self.tick_us).await;
            self.in_tick = false;
        }
    }

    fn sample(&mut self) -> Result<Position, P::Error> {
        let high = self.pin.is_high()?;
        Ok(Position::closed_if(PinState::from(high) == self.closed_reads))
    }

    async fn sleep_while(&mut self, position: Position) -> Result<(), P::Error> {
        // Closed and closed reads high, or open and closed reads low: the line is high now.
        if position.is_closed() == (self.closed_reads == PinState::High) {
            self.pin.wait_for_low().await
        } else {
            self.pin.wait_for_high().await
        }
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use crate::bank::{Bank, EdgeRule, Lane, PatientBank};
    use core::cell::Cell;
    use core::pin::pin;
    use core::task::{Context, Poll, Waker};
    use embedded_hal::digital::{Error, ErrorKind, ErrorType};
    use std::vec::Vec;

    /// A line that is known for all time: one level a tick. The end of it is an error of the pin.
    struct Line {
        high: Vec<bool>,
        now: Cell<usize>,
        reads: Cell<usize>,
        delays: Cell<usize>,
        // The read after which time goes on by one tick, unseen: the gap between reading and arming.
        slips_after_read: Option<usize>,
        fails_at_read: Option<usize>,
    }

    impl Line {
        fn new(high: Vec<bool>) -> Self {
            let zero = || Cell::new(0);
            Self {
                high,
                now: zero(),
                reads: zero(),
                delays: zero(),
                slips_after_read: None,
                fails_at_read: None,
            }
        }
    }

    #[derive(Debug, PartialEq, Eq)]
    enum Stop {
        End,
        Failed,
    }

    impl Error for Stop {
        fn kind(&self) -> ErrorKind {
            ErrorKind::Other
        }
    }

    struct Pin<'a>(&'a Line);

    impl ErrorType for Pin<'_> {
        type Error = Stop;
    }

    impl InputPin for Pin<'_> {
        fn is_high(&mut self) -> Result<bool, Stop> {
            let line = self.0;
            let read = line.reads.get();
            line.reads.set(read + 1);
            if line.fails_at_read == Some(read) {
                return Err(Stop::Failed);
            }
            let high = line.high.get(line.now.get()).copied().ok_or(Stop::End);
            if line.slips_after_read == Some(read) {
                line.now.set(line.now.get() + 1);
            }
            high
        }

        fn is_low(&mut self) -> Result<bool, Stop> {
            self.is_high().map(|high| !high)
        }
    }

    impl Pin<'_> {
        fn sleep_until(&self, high: bool) -> Result<(), Stop> {
            let now = self.0.now.get();
            let ahead = self.0.high[now..].iter().position(|&level| level == high).ok_or(Stop::End)?;
            self.0.now.set(now + ahead);
            Ok(())
        }
    }

    impl Wait for Pin<'_> {
        async fn wait_for_high(&mut self) -> Result<(), Stop> {
            self.sleep_until(true)
        }

        async fn wait_for_low(&mut self) -> Result<(), Stop> {
            self.sleep_until(false)
        }

        async fn wait_for_rising_edge(&mut self) -> Result<(), Stop> {
            Err(Stop::Failed)
        }

        async fn wait_for_falling_edge(&mut self) -> Result<(), Stop> {
            Err(Stop::Failed)
        }

        async fn wait_for_any_edge(&mut self) -> Result<(), Stop> {
            Err(Stop::Failed)
        }
    }

    struct Delay<'a>(&'a Line);

    impl DelayNs for Delay<'_> {
        async fn delay_ns(&mut self, ns: u32) {
            assert_eq!(ns, 1_000_000);
            self.0.delays.set(self.0.delays.get() + 1);
            self.0.now.set(self.0.now.get() + 1);
        }
    }

    /// Nothing here ever waits for the outside, so one poll is all.
    fn run<T>(future: impl Future<Output = T>) -> T {
        match pin!(future).poll(&mut Context::from_waker(Waker::noop())) {
            Poll::Ready(value) => value,
            Poll::Pending => panic!("a future of this test waited"),
        }
    }

    fn edges<L: Law>(line: &Line, law: L, closed_reads: PinState) -> Vec<(usize, Change)> {
        let mut contact = AsyncPin::new(Pin(line), Delay(line), law, closed_reads, 1_000);
        core::iter::from_fn(|| run(contact.wait_for_change()).ok().map(|edge| (line.now.get(), edge)))
            .collect()
    }

    /// The edges of the law stepped at every tick, once both of its starts have met.
    fn without_sleep<L: Law>(law: &L, high: &[bool], closed_reads: PinState) -> Vec<(usize, Change)> {
        let [mut one, mut other] = Position::BOTH.map(|p| law.rest(p));
        let mut edges = Vec::new();
        for (tick, &high) in high.iter().enumerate() {
            let sample = Position::closed_if(PinState::from(high) == closed_reads);
            let met = one == other;
            let edge = law.step(&mut one, sample);
            let _ = law.step(&mut other, sample);
            if met {
                edges.extend(edge.map(|edge| (tick, edge)));
            }
        }
        edges
    }

    #[test]
    fn async_pin_every_waveform_equals_law_without_sleep() {
        let rule = EdgeRule::new(2).patience(2).lockout(2);
        for bits in 0..1u32 << 14 {
            let high: Vec<_> = (0..14).map(|i| bits >> i & 1 == 1).collect();
            for closed_reads in [PinState::High, PinState::Low] {
                let bank = Lane::new(Bank::<u8, 1>::new(0));
                let line = Line::new(high.clone());
                assert_eq!(
                    edges(&line, bank, closed_reads),
                    without_sleep(&bank, &high, closed_reads),
                    "{high:?}"
                );
                let patient = Lane::new(PatientBank::<u8, 1, 1, 2>::new(0, rule, rule));
                let line = Line::new(high.clone());
                assert_eq!(edges(&line, patient, closed_reads), without_sleep(&patient, &high, closed_reads));
            }
        }
    }

    #[test]
    fn async_pin_change_before_arming_is_not_lost() {
        // Low for six ticks, then high. The read of tick 5 says low; before the wait is armed, the line is high.
        let high: Vec<_> = (0..20).map(|tick| tick >= 6).collect();
        for slips in 0..12 {
            let mut line = Line::new(high.clone());
            line.slips_after_read = Some(slips);
            let law = Lane::new(Bank::<u8, 1>::new(0));
            let makes = edges(&line, law, PinState::High);
            assert_eq!(
                makes.iter().map(|e| e.1).collect::<Vec<_>>(),
                [Change::Make],
                "slip after read {slips}"
            );
        }
        // The very case, made sure of: asleep at the last low tick.
        let mut line = Line::new([std::vec![false; 4], std::vec![true; 9]].concat());
        line.slips_after_read = Some(3);
        let law = Lane::new(Bank::<u8, 1>::new(0));
        assert_eq!(edges(&line, law, PinState::High).len(), 1);
    }

    #[test]
    fn async_pin_settled_line_takes_no_ticks() {
        let mut high = std::vec![false; 100_000];
        high.extend([true; 10]);
        let line = Line::new(high);
        let mut contact =
            AsyncPin::new(Pin(&line), Delay(&line), Lane::new(Bank::<u8, 1>::new(0)), PinState::High, 1_000);
        assert_eq!(run(contact.wait_for_initial()), Ok(Position::Open));
        let before = line.delays.get();
        assert_eq!(run(contact.wait_for_change()), Ok(Change::Make));
        // One that ends the tick of the last sample, one from the first to the second closed sample.
        assert_eq!(line.delays.get() - before, 2);
        assert_eq!(contact.position(), Some(Position::Closed));
    }

    #[test]
    fn async_pin_error_takes_no_sample() {
        let high: Vec<_> = (0..16).map(|tick| (5..11).contains(&tick)).collect();
        let law = Lane::new(Bank::<u8, 2>::new(0));
        let whole = edges(&Line::new(high.clone()), law, PinState::High);
        assert_eq!(whole.len(), 2);
        for fails in 0..12 {
            let mut line = Line::new(high.clone());
            line.fails_at_read = Some(fails);
            let mut contact = AsyncPin::new(Pin(&line), Delay(&line), law, PinState::High, 1_000);
            let mut seen = Vec::new();
            let mut failures = 0;
            loop {
                match run(contact.wait_for_change()) {
                    Ok(edge) => seen.push((line.now.get(), edge)),
                    Err(Stop::Failed) => failures += 1,
                    Err(Stop::End) => break,
                }
            }
            // Time stood still for the failed read, so the retry reads the same tick.
            assert_eq!(failures, 1, "read {fails} never came");
            if fails >= 4 {
                assert_eq!(seen, whole, "read {fails}");
            }
        }
    }

    #[test]
    fn async_pin_closed_at_power_up_is_no_operation() {
        let line = Line::new(std::vec![true; 50]);
        assert_eq!(edges(&line, Lane::new(Bank::<u8, 2>::new(0)), PinState::High), []);
    }
}
