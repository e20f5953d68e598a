//! The board, which is not there: its lines follow a script.
//!
//! On a real board a pin interrupt ends the wait for a level, and a timer that runs only then makes the ticks.

use core::convert::Infallible;
use core::future::poll_fn;
use core::sync::atomic::{AtomicU32, Ordering};
use core::task::Poll;

use embedded_hal::digital::{ErrorType, InputPin};
use embedded_hal_async::digital::Wait;

/// A millisecond at the clock of the emulated LM3S6965 after reset.
pub(crate) const CYCLES_PER_TICK: u32 = 12_500;

/// The milliseconds that the show takes.
pub(crate) const END: u32 = 1_000;

static NOW: AtomicU32 = AtomicU32::new(0);
static READINGS: AtomicU32 = AtomicU32::new(0);

// Loads and stores only, so that parts without more can do it; each is written from one place.

/// A millisecond goes by.
pub(crate) fn pass() {
    NOW.store(now() + 1, Ordering::Relaxed);
}

pub(crate) fn now() -> u32 {
    NOW.load(Ordering::Relaxed)
}

/// How often a line was read.
pub(crate) fn readings() -> u32 {
    READINGS.load(Ordering::Relaxed)
}

/// A line of the board.
pub(crate) struct Line {
    /// When the contact is moved, first to closed.
    moves: &'static [u32],
}

/// How a contact reads in the first ticks after a change: 1 the new position, 0 the old one.
const BOUNCE: u32 = 0b1_0110;
const BOUNCE_TICKS: u32 = 5;

impl Line {
    /// Closed at power-up, opened and closed again.
    pub(crate) const LID: Self = Self { moves: &[0, 300, 620] };
    /// Two operations, and a disturbance of 2 ms.
    pub(crate) const FLOAT: Self = Self { moves: &[100, 180, 450, 452, 700, 760] };

    fn is_closed(&self) -> bool {
        let past = self.moves.iter().take_while(|at| **at <= now()).count();
        let Some(at) = past.checked_sub(1).and_then(|last| self.moves.get(last)) else { return false };
        let since = now() - at;
        let arrived = *at == 0 || since >= BOUNCE_TICKS || BOUNCE >> since & 1 == 1;
        (past % 2 == 1) == arrived
    }

    /// Ends as soon as the line reads as asked. It does not count as a reading: on a real board it is an interrupt.
    async fn level(&mut self, closed: bool) {
        poll_fn(|_| if self.is_closed() == closed { Poll::Ready(()) } else { Poll::Pending }).await;
    }
}

impl ErrorType for Line {
    type Error = Infallible;
}

impl InputPin for Line {
    fn is_high(&mut self) -> Result<bool, Infallible> {
        self.is_low().map(|low| !low)
    }

    fn is_low(&mut self) -> Result<bool, Infallible> {
        READINGS.store(readings() + 1, Ordering::Relaxed);
        Ok(self.is_closed())
    }
}

impl Wait for Line {
    async fn wait_for_high(&mut self) -> Result<(), Infallible> {
        self.level(false).await;
        Ok(())
    }

    async fn wait_for_low(&mut self) -> Result<(), Infallible> {
        self.level(true).await;
        Ok(())
    }

    async fn wait_for_rising_edge(&mut self) -> Result<(), Infallible> {
        self.level(true).await;
        self.wait_for_high().await
    }

    async fn wait_for_falling_edge(&mut self) -> Result<(), Infallible> {
        self.level(false).await;
        self.wait_for_low().await
    }

    async fn wait_for_any_edge(&mut self) -> Result<(), Infallible> {
        let before = self.is_closed();
        self.level(!before).await;
        Ok(())
    }
}

/// The ticks of one task, on the grid of the board's milliseconds.
pub(crate) struct Ticker {
    /// The first millisecond at which there was no tick yet.
    due: u32,
}

impl Ticker {
    pub(crate) const fn new() -> Self {
        Self { due: 0 }
    }

    /// Waits for the next millisecond that had no tick yet. Those that were slept through are not made up for.
    pub(crate) async fn next(&mut self) {
        poll_fn(|_| if now() >= self.due { Poll::Ready(()) } else { Poll::Pending }).await;
        self.due = now() + 1;
    }
}
