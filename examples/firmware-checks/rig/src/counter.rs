//! Counts instructions: [`Counter`].

use core::sync::atomic::{Ordering, compiler_fence};

use crate::machine;

/// Counts the instructions between two readings of a clock, exactly.
///
/// With `-icount` the emulator's time advances by a fixed amount with every instruction, and a timer shows it. How
/// much the timer moves in an instruction is found from a loop whose length is known, and checked with others.
pub struct Counter {
    /// Clock steps in `UNIT` instructions.
    steps: u32,
}

const UNIT: u32 = 20_000;

impl Counter {
    /// A counter that is calibrated.
    ///
    /// # Panics
    /// When the emulator does not count instructions, or counts them too coarsely to tell one from two.
    #[must_use]
    pub fn new() -> Self {
        machine::start_clock();
        let short = spinning(1);
        let counter = Self { steps: spinning(1 + UNIT / 2) - short };
        assert!(counter.steps >= UNIT, "the timer is too coarse: run the emulator with -icount shift=10");
        for rounds in [2, 3, 10, 777, 12_345] {
            let found = counter.instructions(spinning(rounds) - short);
            assert_eq!(found, 2 * (rounds - 1), "the emulator does not count instructions");
        }
        counter
    }

    /// Where the clock is read; a null pointer where an instruction reads it.
    pub const CLOCK: *const u32 = machine::CLOCK;

    /// The instructions from the one that read `before` to the one that read `after`.
    #[must_use]
    pub fn between(&self, before: u32, after: u32) -> u32 {
        self.instructions(machine::steps(before, after))
    }

    fn instructions(&self, steps: u32) -> u32 {
        let (steps, per_unit) = (u64::from(steps), u64::from(self.steps));
        // Rounded: an instruction is at least one step. Fits, being no more than the steps.
        ((steps * u64::from(UNIT) + per_unit / 2) / per_unit) as u32
    }
}

impl Default for Counter {
    fn default() -> Self {
        Self::new()
    }
}

/// The steps of a loop; a function of its own, so that all that differs between two calls is the rounds.
#[inline(never)]
fn spinning(rounds: u32) -> u32 {
    let before = machine::clock();
    compiler_fence(Ordering::SeqCst);
    machine::spin(rounds);
    compiler_fence(Ordering::SeqCst);
    machine::steps(before, machine::clock())
}
