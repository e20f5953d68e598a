//! Edges of a line in RAM: [`Recorder`].

use crate::machine::Position;
use crate::time::Period;

use super::recorder_text::RecorderText;

/// What a [`Recorder`] does when it is full.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum RecorderMode {
    /// Forgets the oldest run: the last stretch is kept.
    Ring,
    /// Stops: the first stretch is kept.
    StopWhenFull,
}

/// What the line was in one run of a [`Recorder`].
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Recorded {
    /// It read this position throughout.
    At(Position),
    /// Ticks were lost: nothing is known.
    Lost,
}

/// One run of a [`Recorder`].
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct RecordedRun {
    /// What the line was.
    pub recorded: Recorded,
    /// For how many ticks, 1 to 268 435 455.
    pub ticks: u32,
}

/// Records a line as the lengths of its runs, to be written out as a few lines of text that the `harness` reads.
///
/// # Method
/// Run-length coding, common practice. A run takes one entry of 16 bits: 2 bits for what the line was and 14 bits for its
/// ticks; from 16 384 ticks on it takes a second entry for 14 bits more, so that a long rest costs a ring two entries and
/// not its contents. Ticks that the program knows to be lost are runs of their own.
///
/// The text, written by [`text`](Self::text), is the same over every [`core::fmt::Write`] and over defmt:
///
/// ```text
/// debounce-core recorder 1
/// tick 1000000 ns
/// forgotten 0
/// o1200 c3 o1 c14 l2 c66000
/// end 6 running
/// ```
///
/// * The first line names the format and its version, 1.
/// * `tick` is the period in nanoseconds, or a fraction such as `100000000/3 ns` for 30 Hz.
/// * `forgotten` says how many runs a ring has dropped before the first; at 4294967295 that or more.
/// * Then come the runs, oldest first, up to 16 a line: `o` open, `c` closed (polarity is turned already), `l` lost, each
///   with its ticks. The last may still have gone on. Runs of one kind that follow each other are one run.
/// * `end` counts the runs, so that a text that was cut is found out, and says whether the recorder was `running` or
///   had `stopped`, being full.
///
/// # Units
/// One call to [`sample`](Self::sample) takes one raw sample and is one tick. `N` is in entries.
///
/// # Bounds
///
/// | Quantity                                      | Value               | Proof                                        |
/// |-----------------------------------------------|---------------------|----------------------------------------------|
/// | samples that the runs stand for, until full   | exactly those taken | `recorder_every_history_reads_back`          |
/// | runs shorter than 16 384 ticks kept           | the last or first `N` | same                                       |
/// | runs forgotten, or a stop, unreported         | none                | same                                         |
///
/// A lost tick that the program does not know of is a sample that was never taken: the runs are shorter by it.
///
/// # State
/// `2 N` bytes, two words and 8 bytes; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never. `N` below 2 does not compile.
///
/// # Examples
/// ```
/// use debounce_core::{Period, Position::{Closed, Open}, Recorder, RecorderMode};
/// let mut recorder = Recorder::<8>::new(RecorderMode::StopWhenFull);
/// for sample in [Open, Open, Closed, Open] {
///     recorder.sample(sample);
/// }
/// recorder.lost(3);
/// recorder.sample(Closed);
/// assert_eq!(
///     recorder.text(Period::from_ms(1)).to_string(),
///     "debounce-core recorder 1\ntick 1000000 ns\nforgotten 0\no2 c1 o1 l3 c1\nend 5 running\n"
/// );
/// ```
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Recorder<const N: usize> {
    entries: [Entry; N],
    // Where the oldest entry is, and how many there are; the newest is the one that goes on.
    oldest: usize,
    length: usize,
    forgotten: u32,
    mode: RecorderMode,
    stopped: bool,
}

/// Two bits of kind above fourteen bits of ticks.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
struct Entry(u16);

const OPEN: u16 = 0;
const CLOSED: u16 = 1;
const LOST: u16 = 2;
/// The upper fourteen bits of the run that the entry before began.
const MORE: u16 = 3;

const BITS: u32 = 14;
const MOST_LOW: u32 = (1 << BITS) - 1;
const MOST: u32 = (1 << (2 * BITS)) - 1;

impl Entry {
    /// The lower fourteen bits of `ticks`.
    const fn new(kind: u16, ticks: u32) -> Self {
        // The mask makes the cast keep its value.
        Self(kind << BITS | (ticks & MOST_LOW) as u16)
    }

    const fn kind(self) -> u16 {
        self.0 >> BITS
    }

    const fn ticks(self) -> u32 {
        self.0 as u32 & MOST_LOW
    }
}

const _: () = assert!(size_of::<Recorder<16>>() <= 2 * 16 + 2 * size_of::<usize>() + 8);

impl<const N: usize> Recorder<N> {
    /// An empty recorder.
    #[must_use]
    pub const fn new(mode: RecorderMode) -> Self {
        const { assert!(N >= 2, "a recorder holds at least 2 entries") };
        Self { entries: [Entry(0); N], oldest: 0, length: 0, forgotten: 0, mode, stopped: false }
    }

    /// Takes one sample.
    #[inline]
    pub fn sample(&mut self, sample: Position) {
        let kind = match sample {
            Position::Open => OPEN,
            Position::Closed => CLOSED,
        };
        // Nearly every sample only makes the newest run longer, and that run fits one entry.
        let newest = self.place(self.length.wrapping_sub(1));
        if !self.stopped
            && self.length > 0
            && let Some(entry) = self.entries.get_mut(newest)
            && entry.kind() == kind
            && entry.ticks() < MOST_LOW
        {
            *entry = Entry(entry.0.saturating_add(1));
        } else {
            self.push(kind, 1);
        }
    }

    /// Marks that so many ticks were lost here, for example as an overrun of the handler tells.
    pub fn lost(&mut self, ticks: u32) {
        // A run holds less than a number of ticks may be; the rest begins a run of its own.
        let mut left = ticks;
        while left > 0 {
            let part = left.min(MOST);
            self.push(LOST, part);
            left = left.saturating_sub(part);
        }
    }

    /// Whether the recorder was full and takes nothing more.
    #[must_use]
    pub const fn is_stopped(&self) -> bool {
        self.stopped
    }

    /// Runs that were dropped in ring mode; at its maximum, that or more.
    #[must_use]
    pub const fn forgotten(&self) -> u32 {
        self.forgotten
    }

    /// The runs kept, oldest first; the last is the one that goes on.
    pub fn runs(&self) -> impl Iterator<Item = RecordedRun> + '_ {
        let mut nth = 0;
        core::iter::from_fn(move || {
            let entry = self.entry(nth)?;
            nth = nth.saturating_add(1);
            let recorded = match entry.kind() {
                OPEN => Recorded::At(Position::Open),
                CLOSED => Recorded::At(Position::Closed),
                _ => Recorded::Lost,
            };
            let more = self.entry(nth).filter(|entry| entry.kind() == MORE);
            let upper = more.map_or(0, Entry::ticks);
            nth = nth.saturating_add(usize::from(more.is_some()));
            Some(RecordedRun { recorded, ticks: upper << BITS | entry.ticks() })
        })
    }

    /// The recording as text, for `write!` or for defmt; `tick` is the period of the samples.
    #[must_use]
    pub const fn text(&self, tick: Period) -> RecorderText<'_, N> {
        RecorderText::new(self, tick)
    }

    /// Empties the recorder.
    pub const fn clear(&mut self) {
        (self.oldest, self.length, self.forgotten, self.stopped) = (0, 0, 0, false);
    }

    fn push(&mut self, kind: u16, ticks: u32) {
        if self.stopped {
            return;
        }
        let last = self.length.wrapping_sub(1);
        // The run that goes on is the last entry, or the last two.
        let (first, upper) = match self.entry(last) {
            Some(entry) if entry.kind() == MORE => (last.wrapping_sub(1), Some(entry.ticks())),
            _ => (last, None),
        };
        let same = self.entry(first).filter(|entry| entry.kind() == kind);
        let sum = same.map(|entry| (upper.unwrap_or(0) << BITS | entry.ticks()).saturating_add(ticks));
        let done = match (sum, upper) {
            (Some(sum @ ..=MOST_LOW), None) => {
                self.set(first, Entry::new(kind, sum));
                true
            }
            (Some(sum @ ..=MOST), Some(_)) => {
                self.set(first, Entry::new(kind, sum));
                self.set(last, Entry::new(MORE, sum >> BITS));
                true
            }
            // The second entry goes first: it may move the run, which then is the last but one.
            (Some(sum @ ..=MOST), None) => {
                let added = self.add(Entry::new(MORE, sum >> BITS));
                if added {
                    self.set(self.length.wrapping_sub(2), Entry::new(kind, sum));
                }
                added
            }
            _ if ticks <= MOST_LOW => self.add(Entry::new(kind, ticks)),
            _ => self.add_two(kind, ticks),
        };
        self.stopped = !done;
    }

    /// A new run of two entries: both or neither.
    fn add_two(&mut self, kind: u16, ticks: u32) -> bool {
        let fits = self.mode == RecorderMode::Ring || N.saturating_sub(self.length) >= 2;
        fits && self.add(Entry::new(kind, ticks)) && self.add(Entry::new(MORE, ticks >> BITS))
    }

    /// Adds an entry, in ring mode at the cost of the oldest run; whether there was room.
    fn add(&mut self, entry: Entry) -> bool {
        if self.length >= N {
            if self.mode == RecorderMode::StopWhenFull {
                return false;
            }
            self.forget();
        }
        self.length = self.length.saturating_add(1);
        self.set(self.length.wrapping_sub(1), entry);
        true
    }

    /// Drops the oldest run with all its entries.
    fn forget(&mut self) {
        let entries = match self.entry(1) {
            Some(entry) if entry.kind() == MORE => 2,
            _ => 1,
        };
        self.oldest = self.place(entries);
        self.length = self.length.saturating_sub(entries);
        self.forgotten = self.forgotten.saturating_add(1);
    }

    fn entry(&self, nth: usize) -> Option<Entry> {
        if nth < self.length { self.entries.get(self.place(nth)).copied() } else { None }
    }

    fn set(&mut self, nth: usize, entry: Entry) {
        let place = self.place(nth);
        if let Some(slot) = self.entries.get_mut(place) {
            *slot = entry;
        }
    }

    /// Where the entry lies that is `nth` from the oldest; neither is more than `N`, so nothing overflows.
    fn place(&self, nth: usize) -> usize {
        let place = self.oldest.wrapping_add(nth);
        if place >= N { place.wrapping_sub(N) } else { place }
    }
}

#[cfg(test)]
#[path = "recorder_tests.rs"]
mod tests;
