//! From interrupt handler to main loop: [`Mailbox`].

use core::cell::RefCell;

use critical_section::Mutex;
use heapless::Deque;

/// What a [`Mailbox`] hands out.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[must_use]
pub enum Delivery<T> {
    /// An event, in the order of posting.
    Event(T),
    /// So many events were lost at this place of the order, because the box was full. Up to `u16::MAX`, which stands
    /// for that or more. Whoever sums up changes must ask the machine for its position again.
    Lost(u16),
}

/// Hands events from an interrupt handler to the main loop, in order; what does not fit is counted and reported.
///
/// # Method
/// Bounded queue under a critical section, common practice; derived here: each event carries how many were lost just
/// before it, so that a loss is delivered at its place in the order. No atomics are used, so it serves parts that have
/// none (Cortex-M0, riscv32imc). The program brings the implementation of `critical-section`.
///
/// # Units
/// `N` is in events. There are no ticks here.
///
/// # Bounds
///
/// | Quantity                                             | Value            | Proof                                       |
/// |------------------------------------------------------|------------------|---------------------------------------------|
/// | events that fit                                      | exactly `N`      | `mailbox_every_order_of_posts_and_takes_equals_log` |
/// | events delivered, out of order or twice              | none             | same                                        |
/// | events lost without being reported                   | none             | same                                        |
/// | time with interrupts off                             | one copy of an event | by reading: no loop under the lock      |
///
/// # State
/// `N` events with 2 bytes each, and up to five words; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never. `N == 0` does not compile.
///
/// # Examples
/// ```
/// use debounce_core::{Change, Delivery, Mailbox};
/// static EDGES: Mailbox<Change, 2> = Mailbox::new();
///
/// // In the interrupt handler; a full box gives the event back, and reports it as lost later.
/// assert_eq!(EDGES.post(Change::Make), Ok(()));
/// assert_eq!(EDGES.post(Change::Break), Ok(()));
/// assert_eq!(EDGES.post(Change::Make), Err(Change::Make));
///
/// // In the main loop.
/// assert_eq!(EDGES.take(), Some(Delivery::Event(Change::Make)));
/// assert_eq!(EDGES.take(), Some(Delivery::Event(Change::Break)));
/// assert_eq!(EDGES.take(), Some(Delivery::Lost(1)));
/// assert_eq!(EDGES.take(), None);
/// ```
pub struct Mailbox<T, const N: usize> {
    inner: Mutex<RefCell<Inner<T, N>>>,
}

struct Inner<T, const N: usize> {
    // Each event with the number that was lost just before it.
    queue: Deque<(u16, T), N>,
    lost_since: u16,
}

const _: () = assert!(size_of::<Mailbox<u16, 16>>() <= 16 * 4 + 5 * size_of::<usize>());

impl<T, const N: usize> Mailbox<T, N> {
    /// An empty box.
    #[must_use]
    pub const fn new() -> Self {
        const { assert!(N >= 1, "a mailbox holds at least 1 event") };
        Self { inner: Mutex::new(RefCell::new(Inner { queue: Deque::new(), lost_since: 0 })) }
    }

    /// Posts an event.
    ///
    /// # Errors
    /// Gives the event back when the box is full; it then counts as lost.
    pub fn post(&self, event: T) -> Result<(), T> {
        critical_section::with(|token| {
            // Nothing below calls out, so the cell is never borrowed twice; a failure would lose the event, and say so.
            let Ok(mut inner) = self.inner.borrow(token).try_borrow_mut() else { return Err(event) };
            let lost = inner.lost_since;
            match inner.queue.push_back((lost, event)) {
                Ok(()) => {
                    inner.lost_since = 0;
                    Ok(())
                }
                Err((_, event)) => {
                    inner.lost_since = lost.saturating_add(1);
                    Err(event)
                }
            }
        })
    }

    /// Takes the next event, or the news that some were lost at this place; `None` when there is nothing.
    pub fn take(&self) -> Option<Delivery<T>> {
        critical_section::with(|token| {
            let mut inner = self.inner.borrow(token).try_borrow_mut().ok()?;
            let lost = match inner.queue.front_mut() {
                Some((lost, _)) => core::mem::take(lost),
                None => core::mem::take(&mut inner.lost_since),
            };
            if lost > 0 {
                return Some(Delivery::Lost(lost));
            }
            inner.queue.pop_front().map(|(_, event)| Delivery::Event(event))
        })
    }
}

impl<T, const N: usize> Default for Mailbox<T, N> {
    fn default() -> Self {
        Self::new()
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use std::collections::VecDeque;
    use std::vec::Vec;

    #[test]
    fn mailbox_every_order_of_posts_and_takes_equals_log() {
        for order in 0..1u32 << 14 {
            let mailbox = Mailbox::<u32, 3>::new();
            // What is to be delivered, losses at their places; how many events wait.
            let mut log: VecDeque<Delivery<u32>> = VecDeque::new();
            let waiting = |log: &VecDeque<_>| log.iter().filter(|d| matches!(d, Delivery::Event(_))).count();
            for event in 0..14 {
                if order >> event & 1 == 1 {
                    if waiting(&log) < 3 {
                        assert_eq!(mailbox.post(event), Ok(()));
                        log.push_back(Delivery::Event(event));
                    } else {
                        assert_eq!(mailbox.post(event), Err(event));
                        match log.back_mut() {
                            Some(Delivery::Lost(lost)) => *lost += 1,
                            _ => log.push_back(Delivery::Lost(1)),
                        }
                    }
                } else {
                    assert_eq!(mailbox.take(), log.pop_front(), "{order:b}");
                }
            }
            let rest: Vec<_> = core::iter::from_fn(|| mailbox.take()).collect();
            assert_eq!(rest, Vec::from(log));
        }
    }

    #[test]
    fn mailbox_losses_beyond_count_stay_at_its_end() {
        let mailbox = Mailbox::<u8, 1>::new();
        for _ in 0..70_000 {
            let _ = mailbox.post(1);
        }
        assert_eq!(mailbox.take(), Some(Delivery::Event(1)));
        assert_eq!(mailbox.take(), Some(Delivery::Lost(u16::MAX)));
        assert_eq!(mailbox.take(), None);
    }

    #[test]
    fn mailbox_between_threads_loses_nothing_unreported() {
        static EDGES: Mailbox<u32, 4> = Mailbox::new();
        let poster = std::thread::spawn(|| {
            for event in 0..20_000 {
                let _ = EDGES.post(event);
                if event % 64 == 0 {
                    std::thread::yield_now();
                }
            }
        });
        let mut next = 0;
        while next < 20_000 {
            match EDGES.take() {
                Some(Delivery::Event(event)) => {
                    assert_eq!(event, next);
                    next += 1;
                }
                Some(Delivery::Lost(lost)) => {
                    assert!(lost < u16::MAX);
                    next += u32::from(lost);
                }
                None => std::thread::yield_now(),
            }
        }
        poster.join().unwrap();
        assert_eq!((EDGES.take(), next), (None, 20_000));
    }

    /// From two lines through their laws and the box to a slow main loop: nothing comes out that no line did.
    #[test]
    fn mailbox_chain_at_power_up_invents_no_operation() {
        use crate::words::{row, words};
        use crate::{Running, ShiftRegister, Started};

        const TICKS: usize = 6;
        for word in words(2 * TICKS) {
            for every in 1..=3 {
                let mailbox = Mailbox::<(usize, Started), 2>::new();
                let mut laws = [Running::starting(ShiftRegister::new(2)); 2];
                let (mut posted, mut delivered, mut lost) = (Vec::new(), Vec::new(), 0);
                let mut main = || {
                    while let Some(delivery) = mailbox.take() {
                        match delivery {
                            Delivery::Event(event) => delivered.push(event),
                            Delivery::Lost(more) => lost += usize::from(more),
                        }
                    }
                };
                for tick in 0..TICKS {
                    for (line, law) in laws.iter_mut().enumerate() {
                        let Some(report) = law.tick(word[line * TICKS + tick]) else { continue };
                        posted.push((line, report));
                        let _ = mailbox.post((line, report));
                    }
                    if tick % every == 0 {
                        main();
                    }
                }
                main();
                for line in 0..2 {
                    let mut reports = posted.iter().filter(|report| report.0 == line).map(|report| report.1);
                    let samples = &word[line * TICKS..][..TICKS];
                    let found = samples.windows(2).find(|pair| pair[0] == pair[1]).map(|pair| pair[0]);
                    assert_eq!(reports.next(), found.map(Started::Initial), "{}", row(&word));
                    assert!(reports.all(|report| matches!(report, Started::Edge(_))), "{}", row(&word));
                }
                // What came out was put in, in that order, and what did not is counted.
                let mut rest = posted.iter();
                assert!(delivered.iter().all(|event| rest.any(|post| post == event)), "{}", row(&word));
                assert_eq!(delivered.len() + lost, posted.len(), "{}", row(&word));
            }
        }
    }
}
