//! A debounced pin that sleeps between operations, over embedded-hal-async.

use embedded_hal::digital::InputPin;
use embedded_hal_async::digital::Wait;

use super::{DebouncedPin, Level, Settling};

impl<P, M, E> DebouncedPin<P, M>
where
    P: InputPin + Wait,
    M: Settling<Output = Option<E>>,
{
    /// Waits for the next report of the law; sleeps without a tick for as long as the line gives nothing to do.
    ///
    /// # Method
    /// While the law is settled the pin is waited for, at the *level* opposite to the settled position: a line that
    /// moved before the wake-up was armed ends the wait at once, where an edge would have been lost. From then on every
    /// sample follows one completed `tick`, until the law has settled again. So no two samples are closer than the
    /// tick, a noisy line wakes the processor at most once a tick, and the samples left out all would have read the
    /// settled position, of which the law takes no notice.
    ///
    /// # Units
    /// `tick` makes the future of one tick: a delay of one tick period, or a ticker's next one. It must not be ready
    /// sooner than a tick period after it was last; a ticker that makes up for missed ticks has to be reset first.
    ///
    /// # Bounds
    /// Where ticks come on a fixed grid the reports are, tick by tick, those of a law that never sleeps. Where `tick`
    /// is a delay that begins at the wake-up, the first sample comes a whole tick after the change: reports come up to
    /// one tick later, operations have to be one tick longer, and a wake-up within a tick of the last sample stretches
    /// that one gap to up to two ticks. Prefer the grid where disturbances leave no such room. Proofs:
    /// `asleep_on_a_grid_equals_always_ticking`, `asleep_on_a_delay_loses_no_operation_longer_than_the_count`.
    ///
    /// Between two calls no samples are taken: a caller that stays away for longer than a tick loses ticks. A future
    /// that is dropped loses the tick it waited for and nothing else, for all state is in `self`.
    ///
    /// # Errors
    /// The pin's own, from reading or from waiting. No sample is taken then; call again to go on.
    ///
    /// # Panics
    /// Never where it is awaited. Polled by hand after its end it panics, as every `async fn` does; that check of the
    /// language is the only one that a program links with it.
    ///
    /// # Examples
    /// ```
    /// use debounce_core::{Change, DebouncedPin, Polarity, Position, Running, ShiftRegister};
    /// use embedded_hal_async::delay::DelayNs;
    /// # use embedded_hal_mock::eh1::digital::{Mock, State::Low, Transaction};
    /// # let mut pin = Mock::new(&[
    /// #     Transaction::wait_for_state(Low), Transaction::get(Low), Transaction::get(Low)]);
    /// # let pin_of_the_board = pin.clone();
    /// # let mut timer = embedded_hal_mock::eh1::delay::NoopDelay::new();
    /// # let task = async {
    /// let law = Running::new(ShiftRegister::new(2), Position::Open);
    /// let mut key = DebouncedPin::new(pin_of_the_board, Polarity::ClosedWhenLow, law);
    /// let change = key.next_report(async || timer.delay_ms(1).await).await?;
    /// assert_eq!(change, Change::Make);
    /// # Ok::<(), embedded_hal_mock::eh1::MockError>(())
    /// # };
    /// # let mut context = core::task::Context::from_waker(core::task::Waker::noop());
    /// # assert_eq!(core::pin::pin!(task).as_mut().poll(&mut context), core::task::Poll::Ready(Ok(())));
    /// # pin.done();
    /// ```
    pub async fn next_report(&mut self, mut tick: impl AsyncFnMut()) -> Result<E, P::Error> {
        loop {
            match self.wake_level() {
                Some(Level::Low) => self.pin_mut().wait_for_low().await?,
                Some(Level::High) => self.pin_mut().wait_for_high().await?,
                None => {}
            }
            tick().await;
            if let Some(report) = self.tick()? {
                return Ok(report);
            }
        }
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use core::cell::Cell;
    use core::convert::Infallible;
    use core::future::poll_fn;
    use core::pin::pin;
    use core::task::{Context, Poll, Waker};
    use std::io::ErrorKind;
    use std::vec::Vec;

    use embedded_hal::digital::{ErrorType, InputPin};
    use embedded_hal_async::digital::Wait;
    use embedded_hal_mock::eh1::MockError;
    use embedded_hal_mock::eh1::digital::State::{High, Low};
    use embedded_hal_mock::eh1::digital::{Mock, Transaction};

    use crate::words::{row, words};
    use crate::{
        Change, DebouncedPin, Polarity, Position, Running, Settling, ShiftRegister, Started, StateMachine,
        StateMachineParameters,
    };

    /// Moments from one tick to the next: the line may move in between.
    const MOMENTS: usize = 3;

    /// A line over time; one moment passes whenever everything waits.
    struct World {
        line: Vec<Position>,
        now: Cell<usize>,
    }

    impl World {
        fn position(&self) -> Position {
            self.line[self.now.get()]
        }
    }

    #[derive(Clone, Copy)]
    enum Arming {
        Level,
        Edge,
    }

    struct Line<'a>(&'a World, Arming);

    impl Line<'_> {
        /// Arming takes a moment; then the level is looked for, or a change to it since the arming.
        async fn until(&mut self, position: Position) {
            let mut before = None;
            let mut arming = true;
            poll_fn(|_| {
                if core::mem::replace(&mut arming, false) {
                    return Poll::Pending;
                }
                let line = self.0.position();
                let woken = line == position
                    && match self.1 {
                        Arming::Level => true,
                        Arming::Edge => before == Some(position.opposite()),
                    };
                before = Some(line);
                if woken { Poll::Ready(()) } else { Poll::Pending }
            })
            .await;
        }
    }

    impl ErrorType for Line<'_> {
        type Error = Infallible;
    }

    impl InputPin for Line<'_> {
        fn is_high(&mut self) -> Result<bool, Infallible> {
            Ok(self.0.position().is_closed())
        }

        fn is_low(&mut self) -> Result<bool, Infallible> {
            Ok(!self.0.position().is_closed())
        }
    }

    impl Wait for Line<'_> {
        async fn wait_for_high(&mut self) -> Result<(), Infallible> {
            self.until(Position::Closed).await;
            Ok(())
        }

        async fn wait_for_low(&mut self) -> Result<(), Infallible> {
            self.until(Position::Open).await;
            Ok(())
        }

        async fn wait_for_rising_edge(&mut self) -> Result<(), Infallible> {
            panic!("an edge may be lost")
        }

        async fn wait_for_falling_edge(&mut self) -> Result<(), Infallible> {
            panic!("an edge may be lost")
        }

        async fn wait_for_any_edge(&mut self) -> Result<(), Infallible> {
            panic!("an edge may be lost")
        }
    }

    #[derive(Clone, Copy)]
    enum Ticks {
        /// At every third moment, whoever waits for it.
        Grid,
        /// Three moments after the call.
        Delay,
    }

    /// What a sleeping law reports on a line and when, and how many ticks it took.
    fn asleep<M, E: Copy>(
        line: &[Position],
        running: Running<M>,
        arming: Arming,
        ticks: Ticks,
    ) -> (Vec<(usize, E)>, usize)
    where
        M: Settling<Output = Option<E>>,
    {
        let world = World { line: line.to_vec(), now: Cell::new(0) };
        let mut reports = Vec::new();
        let taken = Cell::new(0);
        let next_free = Cell::new(0);
        let tick = async || {
            let called = world.now.get();
            poll_fn(|_| {
                let now = world.now.get();
                let due = match ticks {
                    Ticks::Grid => now.is_multiple_of(MOMENTS) && now >= next_free.get(),
                    Ticks::Delay => now >= called + MOMENTS,
                };
                if !due {
                    return Poll::Pending;
                }
                next_free.set(now + 1);
                taken.set(taken.get() + 1);
                Poll::Ready(())
            })
            .await;
        };
        {
            let mut pin = DebouncedPin::new(Line(&world, arming), Polarity::ClosedWhenHigh, running);
            let mut task = pin!(async {
                loop {
                    let Ok(report) = pin.next_report(&tick).await;
                    reports.push((world.now.get(), report));
                }
            });
            let mut context = Context::from_waker(Waker::noop());
            while world.now.get() < line.len() {
                let poll: Poll<()> = task.as_mut().poll(&mut context);
                assert!(poll.is_pending());
                world.now.set(world.now.get() + 1);
            }
        }
        (reports, taken.get())
    }

    /// What a law reports that ticks at every third moment.
    fn awake<M, E>(line: &[Position], mut running: Running<M>) -> Vec<(usize, E)>
    where
        M: Settling<Output = Option<E>>,
    {
        let instants = (0..line.len()).step_by(MOMENTS);
        instants.filter_map(|at| Some((at, running.tick(line[at])?))).collect()
    }

    fn locked() -> StateMachine {
        StateMachine::<u8>::new(StateMachineParameters::confirm(2, 1).patience(2, 1).lockout(2, 1))
    }

    #[track_caller]
    fn equal<M, E>(power_up: Running<M>)
    where
        M: Settling<Output = Option<E>> + Copy,
        E: Copy + PartialEq + core::fmt::Debug,
    {
        let mut spared = 0;
        for word in words(4 * MOMENTS) {
            // Time to fall asleep before the word, and to report after it.
            let last = word[word.len() - 1];
            let line: Vec<_> =
                [Position::Open; 4 * MOMENTS].into_iter().chain(word.iter().copied()).collect();
            let line: Vec<_> = line.into_iter().chain([last; 5 * MOMENTS]).collect();
            let (reports, taken) = asleep(&line, power_up, Arming::Level, Ticks::Grid);
            assert_eq!(reports, awake(&line, power_up), "{}", row(&line));
            spared += line.len() / MOMENTS - taken;
        }
        assert!(spared > 0);
    }

    #[test]
    fn asleep_on_a_grid_equals_always_ticking() {
        equal(Running::new(ShiftRegister::new(2), Position::Open));
        equal(Running::new(locked(), Position::Open));
    }

    #[test]
    fn asleep_at_power_up_equals_always_ticking_and_invents_nothing() {
        equal(Running::starting(ShiftRegister::new(2)));
        for line in Position::BOTH {
            let power_up = Running::starting(locked());
            let (reports, _) = asleep(&[line; 60], power_up, Arming::Level, Ticks::Grid);
            let found = matches!(reports[..], [(_, Started::Initial(position))] if position == line);
            assert!(found, "{reports:?}");
        }
    }

    /// A hold of two ticks is always seen twice by a clock that never stops; a delay that begins at the wake-up needs
    /// one moment more, for its first sample comes a tick after the change.
    #[test]
    fn asleep_on_a_delay_loses_no_operation_longer_than_the_count() {
        const COUNTED: usize = 2 * MOMENTS;
        let seen = |first, second| {
            let mut line = std::vec![Position::Open; 7];
            line.resize(7 + first, Position::Closed);
            line.resize(7 + first + second, Position::Open);
            line.resize(7 + first + second + 12, Position::Closed);
            let law = Running::new(ShiftRegister::new(2), Position::Open);
            let (reports, _) = asleep(&line, law, Arming::Level, Ticks::Delay);
            reports.into_iter().map(|(_, change)| change).collect::<Vec<_>>()
        };
        for (first, second) in
            (1..12).flat_map(|first| (1..12).map(move |second| (COUNTED + first, COUNTED + second)))
        {
            assert_eq!(seen(first, second), [Change::Make, Change::Break, Change::Make], "{first} {second}");
        }
        assert_eq!(seen(COUNTED, COUNTED + 6), [Change::Make]);
    }

    /// The comparison can fail: a wake-up on edges does lose operations.
    #[test]
    fn asleep_waiting_for_an_edge_would_lose_an_operation() {
        let law = || Running::new(ShiftRegister::new(2), Position::Open);
        let lost = (0..12).any(|at| {
            let mut line = std::vec![Position::Open; at];
            line.resize(48, Position::Closed);
            let (reports, _) = asleep(&line, law(), Arming::Edge, Ticks::Grid);
            let (kept, _) = asleep(&line, law(), Arming::Level, Ticks::Grid);
            assert_eq!(kept.len(), 1);
            reports.is_empty()
        });
        assert!(lost);
    }

    #[test]
    fn asleep_errors_are_passed_on_and_take_no_sample() {
        let broken = MockError::Io(ErrorKind::TimedOut);
        let script = [
            Transaction::wait_for_state(Low).with_error(broken.clone()),
            Transaction::wait_for_state(Low),
            Transaction::get(Low),
            Transaction::get(Low).with_error(broken.clone()),
            Transaction::get(Low),
        ];
        let law = Running::new(ShiftRegister::new(2), Position::Open);
        let mut key = DebouncedPin::new(Mock::new(&script), Polarity::ClosedWhenLow, law);
        let mut context = Context::from_waker(Waker::noop());
        for expected in [Err(broken.clone()), Err(broken), Ok(Change::Make)] {
            let poll = pin!(key.next_report(async || ())).as_mut().poll(&mut context);
            assert_eq!(poll, Poll::Ready(expected));
        }
        key.release().0.done();
    }

    #[test]
    fn asleep_waits_for_the_level_opposite_to_the_settled_one() {
        for (polarity, make, rest) in
            [(Polarity::ClosedWhenLow, Low, High), (Polarity::ClosedWhenHigh, High, Low)]
        {
            let script = [
                Transaction::wait_for_state(make),
                Transaction::get(make),
                Transaction::wait_for_state(rest),
                Transaction::get(rest),
            ];
            let law = Running::new(ShiftRegister::new(1), Position::Open);
            let mut key = DebouncedPin::new(Mock::new(&script), polarity, law);
            let mut context = Context::from_waker(Waker::noop());
            for change in [Change::Make, Change::Break] {
                let poll = pin!(key.next_report(async || ())).as_mut().poll(&mut context);
                assert_eq!(poll, Poll::Ready(Ok(change)));
            }
            key.release().0.done();
        }
    }
}
