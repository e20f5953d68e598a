//! Measures one contender.

use core::arch::asm;
use core::fmt::{self, Write};

use debounce_core::{Change, Position};
use rig::{Counter, say};

use crate::input::{Kind, TICKS};

/// A loop over samples: from the first to the end, with the state in memory.
pub(crate) type Loop<S> = unsafe extern "C" fn(*const Position, *const Position, *mut S);

/// What a program does at an edge: a call that returns at once. It is counted where an edge is reported.
#[unsafe(no_mangle)]
#[inline(never)]
pub(crate) extern "C" fn cost_report(edge: i32) {
    // SAFETY: nothing is done.
    unsafe { asm!("/* {0} */", in(reg) edge, options(nomem, nostack, preserves_flags)) };
}

#[inline(always)]
pub(crate) fn report(change: Change) {
    cost_report(change as i32);
}

/// Makes the compiler believe that something else happens here, which may look at the state.
#[inline(always)]
pub(crate) fn elsewhere<S>(next: &mut *const Position, state: &mut *mut S) {
    // SAFETY: nothing is done.
    unsafe { asm!("/* {0} {1} */", inout(reg) *next, inout(reg) *state, options(nostack, preserves_flags)) };
}

/// The loop with nothing in it but the sample: what is not the tick's.
#[inline(never)]
unsafe extern "C" fn empty(mut next: *const Position, end: *const Position, mut state: *mut ()) {
    while next != end {
        // SAFETY: the caller gives a slice by its ends.
        let sample = unsafe { *next };
        // SAFETY: nothing is done with it.
        unsafe { asm!("/* {0} */", in(reg) sample as u32, options(nomem, nostack, preserves_flags)) };
        next = next.wrapping_add(1);
        elsewhere(&mut next, &mut state);
    }
}

static mut SAMPLES: [Position; TICKS] = [Position::Open; TICKS];

/// Measures `run` from the state `start` and prints the row that begins with `name`.
pub(crate) fn measure<S: Copy>(counter: &Counter, name: fmt::Arguments<'_>, start: S, run: Loop<S>) {
    let mut row = Row { text: [0; 200], length: 0 };
    let _ = write!(row, "{name}: state {} bytes", size_of::<S>());
    for kind in Kind::ALL {
        // SAFETY: there is one thread, and nobody else holds the samples.
        let samples = unsafe { &mut *(&raw mut SAMPLES) };
        kind.fill(samples);
        let idle = Cost::of(counter, samples, (), empty);
        let cost = Cost::of(counter, samples, start, run);
        let _ = write!(row, "; {kind} total {} worst {}", cost.total - idle.total, cost.worst - idle.worst);
    }
    say!("{}", row.text());
}

struct Cost {
    /// Instructions of all ticks.
    total: u32,
    /// Instructions of the dearest tick.
    worst: u32,
}

impl Cost {
    fn of<S: Copy>(counter: &Counter, samples: &[Position], start: S, run: Loop<S>) -> Self {
        let mut state = start;
        let together = timed(counter, samples, &mut state, run);
        // One tick at a time: the same ticks, and as many times what happens around the loop.
        let (mut state, mut apart, mut dearest) = (start, 0, 0);
        for sample in samples {
            let cost = timed(counter, core::slice::from_ref(sample), &mut state, run);
            apart += cost;
            dearest = dearest.max(cost);
        }
        let rounds = samples.len() as u32 - 1;
        let around = (apart - together) / rounds;
        assert_eq!(around * rounds, apart - together, "the loop was unrolled: a tick has no cost of its own");
        Self { total: together - around, worst: dearest - around }
    }
}

/// A function of its own, so that what happens around the loop is the same every time.
#[inline(never)]
fn timed<S>(counter: &Counter, samples: &[Position], state: &mut S, run: Loop<S>) -> u32 {
    let ends = samples.as_ptr_range();
    // SAFETY: the ends of a slice, and a state.
    counter.count(|| unsafe { run(ends.start, ends.end, state) })
}

struct Row {
    text: [u8; 200],
    length: usize,
}

impl Row {
    fn text(&self) -> &str {
        core::str::from_utf8(&self.text[..self.length]).expect("only whole strings are written")
    }
}

impl Write for Row {
    fn write_str(&mut self, text: &str) -> fmt::Result {
        let room = self.text.get_mut(self.length..self.length + text.len()).ok_or(fmt::Error)?;
        room.copy_from_slice(text.as_bytes());
        self.length += text.len();
        Ok(())
    }
}
