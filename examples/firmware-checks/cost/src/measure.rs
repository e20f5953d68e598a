//! Measures one contender.

use core::arch::asm;
use core::fmt::{self, Write};

use debounce_core::Change;
use rig::{Counter, say};

use crate::input::{Kind, Sample, Source, TICKS};

/// A loop over the samples that `feed` gives until there is none left, with the state in memory.
pub(crate) type Loop<S> = unsafe extern "C" fn(feed: *mut Feed, state: *mut S);

/// Gives the samples one by one and notes the time at each.
#[repr(C)]
pub(crate) struct Feed {
    last: *const (),
    note: *mut u32,
    clock: *const u32,
    end: *const (),
}

/// The instructions in a tick that are the loop's: those of [`next`], the look whether that was the last, and the load
/// of the sample.
const OF_THE_LOOP: u32 = if cfg!(target_arch = "arm") { 15 + 2 + 1 } else { 15 + 1 + 1 };

/// What [`next`] gives at the end: not an address of a sample, and not 0, for which some branches are shorter.
const END: usize = 1;

/// What a program does at an edge: a call that returns at once. It is counted where an edge is reported.
#[unsafe(no_mangle)]
#[inline(never)]
pub(crate) extern "C" fn cost_report(edge: i32) {
    // SAFETY: nothing is done.
    unsafe { asm!("/* {0} */", in(reg) edge, options(nomem, nostack, preserves_flags)) };
}

/// The same for the lanes of a bank.
#[inline(never)]
pub(crate) extern "C" fn report_lanes(make: u32, break_: u32) {
    // SAFETY: nothing is done.
    unsafe { asm!("/* {0} {1} */", in(reg) make, in(reg) break_, options(nomem, nostack, preserves_flags)) };
}

/// The same for anything else that a step says.
#[inline(never)]
pub(crate) extern "C" fn look_at(said: *const ()) {
    // SAFETY: nothing is done; the compiler must believe that it is read.
    unsafe { asm!("/* {0} */", in(reg) said, options(readonly, nostack, preserves_flags)) };
}

#[inline(always)]
pub(crate) fn report(change: Change) {
    cost_report(change as i32);
}

/// The place of the next sample, none at the end; the time is noted.
///
/// It is found by the same instructions in every loop that is measured, so that what the compiler makes of a loop does
/// not count for or against what is in it; and the compiler must believe that the state is looked at here, as it is in
/// a program that does something else between two ticks.
///
/// # Safety
/// The feed has room for another note.
#[inline(always)]
pub(crate) unsafe fn next<T>(feed: *mut Feed) -> Option<*const T> {
    let place: *const T;
    // SAFETY: the caller's promise.
    unsafe {
        #[cfg(target_arch = "arm")]
        asm!(
            "ldr {more}, [{feed}, #8]",
            "ldr {more}, [{more}]",
            "ldr {place}, [{feed}, #4]",
            "str {more}, [{place}]",
            "adds {place}, #4",
            "str {place}, [{feed}, #4]",
            "ldr {place}, [{feed}]",
            "adds {place}, #{size}",
            "str {place}, [{feed}]",
            // At the end all ones, else 0; and so 1 or the place.
            "ldr {more}, [{feed}, #12]",
            "subs {more}, {more}, {place}",
            "subs {more}, #1",
            "sbcs {more}, {more}",
            "bics {place}, {more}",
            "subs {place}, {place}, {more}",
            feed = in(reg) feed, place = out(reg) place, more = out(reg) _, size = const size_of::<T>(),
            options(nostack)
        );
        #[cfg(target_arch = "riscv32")]
        asm!(
            "csrr {more}, minstret",
            "lw {place}, 4({feed})",
            "sw {more}, 0({place})",
            "addi {place}, {place}, 4",
            "sw {place}, 4({feed})",
            "lw {place}, 0({feed})",
            "addi {place}, {place}, {size}",
            "sw {place}, 0({feed})",
            // At the end 0, else all ones; and so 1 or the place.
            "lw {more}, 12({feed})",
            "sub {more}, {more}, {place}",
            "snez {more}, {more}",
            "neg {more}, {more}",
            "and {place}, {place}, {more}",
            "addi {more}, {more}, 1",
            "or {place}, {place}, {more}",
            feed = in(reg) feed, place = out(reg) place, more = out(reg) _, size = const size_of::<T>(),
            options(nostack)
        );
    }
    (place.addr() != END).then_some(place)
}

/// How many ticks are measured at once: as many as the smallest memory holds.
const CHUNK: usize = 1000;
const CHUNKS: usize = TICKS / CHUNK;
/// And one before them, which is not counted: what a loop does once, before its first tick, falls into it.
const SAMPLES_OF_A_CHUNK: usize = 1 + CHUNK;

static mut SAMPLES: [u32; SAMPLES_OF_A_CHUNK] = [0; SAMPLES_OF_A_CHUNK];
// One more than samples: the time at the end.
static mut NOTES: [u32; SAMPLES_OF_A_CHUNK + 1] = [0; SAMPLES_OF_A_CHUNK + 1];

/// Measures `run` from the state that `start` gives and prints the row that begins with `name`.
pub(crate) fn measure<T: Sample, S>(
    counter: &Counter,
    name: fmt::Arguments<'_>,
    start: impl Fn() -> S,
    run: Loop<S>,
) {
    const { assert!(align_of::<T>() <= align_of::<u32>() && size_of::<T>() <= size_of::<u32>()) };
    let mut row = Row { text: [0; 200], length: 0 };
    let _ = write!(row, "{name}: state {} bytes", size_of::<S>());
    for kind in Kind::ALL {
        let (mut source, mut state) = (Source::new(kind), start());
        let (mut total, mut worst) = (0, 0);
        for _ in 0..CHUNKS {
            let samples: *mut T = (&raw mut SAMPLES).cast();
            for index in 0..SAMPLES_OF_A_CHUNK {
                // SAFETY: there is one thread, nobody else holds the samples, and a sample is no larger than theirs.
                unsafe { samples.add(index).write(T::draw(&mut source)) };
            }
            // SAFETY: the same.
            let notes = unsafe { (&raw mut NOTES).as_mut() }.expect("a static has an address");
            // SAFETY: the end of the samples.
            let end = unsafe { samples.add(SAMPLES_OF_A_CHUNK) }.cast_const().cast();
            let last = samples.wrapping_sub(1).cast();
            let mut feed = Feed { last, note: notes.as_mut_ptr(), clock: Counter::CLOCK, end };
            // SAFETY: the feed stands before the samples, and there is a note for each and the end.
            unsafe { run(&raw mut feed, &raw mut state) };
            for pair in notes.windows(2).skip(1) {
                let tick = counter.between(pair[0], pair[1]) - OF_THE_LOOP;
                total += tick;
                worst = worst.max(tick);
            }
        }
        let _ = write!(row, "; {kind} total {total} worst {worst}");
    }
    say!("{}", row.text());
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
