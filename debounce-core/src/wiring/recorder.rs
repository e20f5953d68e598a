//! Edges of a line in RAM: [`Recorder`].

use core::fmt;

use crate::machine::Position;

/// What a [`Recorder`] does when it is full.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum RecorderMode {
    /// Forgets the oldest run: the last stretch is kept.
    Ring,
    /// Stops: the first stretch is kept.
    StopWhenFull,
}

/// Records a line as the lengths of its runs, and writes them out as lines of text.
///
/// # Method
/// Run-length coding, common practice: one number for each run of like samples. The text is one head line and one line
/// of up to 16 lengths each:
///
/// ```text
/// # debounce-core recorder 1
/// first closed
/// forgotten 0
/// runs 1200 3 1 14 66000
/// end open
/// ```
///
/// `first` is the position of the first run kept, `forgotten` how many runs before it were dropped in ring mode, `end`
/// the position of the last, or `end stopped` where the recorder was full before the line was over. Positions are after
/// polarity; lengths are in ticks, and runs alternate. The run that was going on is the last. A run too long for its
/// count is written as several, with runs of 0 ticks between them, so that alternation and length both stay true.
///
/// # Units
/// One call to [`sample`](Self::sample) takes one raw sample and is one tick. `N` is in runs.
///
/// # Bounds
///
/// | Quantity                                      | Value             | Proof                                    |
/// |-----------------------------------------------|-------------------|------------------------------------------|
/// | samples given back by the runs, until full    | exactly those taken | `recorder_every_history_reads_back`    |
/// | runs kept                                     | the last or first `N` | same                                 |
/// | runs forgotten or a stop, unreported          | none              | same                                     |
///
/// A lost tick is a sample that was never taken; the runs are shorter by it. If that can happen, say so beside the text.
///
/// # State
/// `2 N + 24` bytes at most on a 64-bit host, `2 N + 16` on a 32-bit part; checked by a `const` assertion below the type.
///
/// # Panics
/// Never. `N == 0` does not compile.
///
/// # Examples
/// ```
/// use debounce_core::{Position::{Closed, Open}, Recorder, RecorderMode};
/// let mut recorder = Recorder::<8>::new(RecorderMode::StopWhenFull);
/// for sample in [Open, Open, Closed, Open, Closed, Closed] {
///     recorder.sample(sample);
/// }
/// let mut text = String::new();
/// recorder.dump(&mut text)?;
/// assert_eq!(text, "# debounce-core recorder 1\nfirst open\nforgotten 0\nruns 2 1 1 2\nend closed\n");
/// # Ok::<(), core::fmt::Error>(())
/// ```
#[derive(Clone, PartialEq, Eq, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Recorder<const N: usize> {
    runs: [u16; N],
    // Where the oldest run is, and how many there are; the newest is the one that goes on.
    oldest: usize,
    length: usize,
    forgotten: u32,
    line: Position,
    mode: RecorderMode,
    stopped: bool,
}

const _: () = assert!(size_of::<Recorder<16>>() <= 32 + 4 + 4 + 2 * size_of::<usize>());

impl<const N: usize> Recorder<N> {
    /// An empty recorder.
    #[must_use]
    pub const fn new(mode: RecorderMode) -> Self {
        const { assert!(N >= 1, "a recorder holds at least 1 run") };
        Self { runs: [0; N], oldest: 0, length: 0, forgotten: 0, line: Position::Open, mode, stopped: false }
    }

    /// Takes one sample.
    #[inline]
    pub fn sample(&mut self, sample: Position) {
        if self.stopped {
            return;
        }
        let room = N.saturating_sub(self.length);
        if self.length > 0 && sample == self.line {
            if let Some(run) = self.newest().filter(|run| **run < u16::MAX) {
                *run += 1;
                return;
            }
            // Too long: a run of 0 ticks at the other position, and another run at this one; both or neither, for
            // the last run kept must be at the position of the line.
            if self.mode == RecorderMode::StopWhenFull && room < 2 {
                self.stopped = true;
                return;
            }
            self.begin(0);
        }
        self.begin(1);
        if !self.stopped {
            self.line = sample;
        }
    }

    /// Whether the recorder was full and takes nothing more.
    #[must_use]
    pub const fn is_stopped(&self) -> bool {
        self.stopped
    }

    /// The lengths of the runs kept, oldest first.
    pub fn runs(&self) -> impl Iterator<Item = u16> + '_ {
        // The part from the oldest to the end of the store, and the part that went round.
        let (round, straight) = self.runs.split_at_checked(self.oldest).unwrap_or_default();
        straight.iter().chain(round).take(self.length).copied()
    }

    /// The position of the oldest run kept; `None` while there is none.
    #[must_use]
    pub const fn first(&self) -> Option<Position> {
        if self.length == 0 {
            return None;
        }
        Some(if self.length & 1 == 1 { self.line } else { self.line.opposite() })
    }

    /// Runs that were dropped in ring mode; at its maximum, that or more.
    #[must_use]
    pub const fn forgotten(&self) -> u32 {
        self.forgotten
    }

    /// Empties the recorder.
    pub fn clear(&mut self) {
        *self = Self::new(self.mode);
    }

    /// Writes everything out as text.
    ///
    /// # Errors
    /// What the writer says; part of the text may have been written then.
    pub fn dump(&self, out: &mut impl fmt::Write) -> fmt::Result {
        out.write_str("# debounce-core recorder 1\n")?;
        let Some(first) = self.first() else {
            return out.write_str("empty\n");
        };
        writeln!(out, "first {}", name(first))?;
        write!(out, "forgotten {}", self.forgotten)?;
        for (column, run) in (0..16u8).cycle().zip(self.runs()) {
            out.write_str(if column == 0 { "\nruns" } else { "" })?;
            write!(out, " {run}")?;
        }
        writeln!(out, "\nend {}", if self.stopped { "stopped" } else { name(self.line) })
    }

    fn newest(&mut self) -> Option<&mut u16> {
        let last = self.length.checked_sub(1)?;
        let place = self.place(last);
        self.runs.get_mut(place)
    }

    /// Where the run lies that is `nth` from the oldest; neither is more than `N`, so nothing overflows.
    fn place(&self, nth: usize) -> usize {
        let place = self.oldest.wrapping_add(nth);
        if place >= N { place.wrapping_sub(N) } else { place }
    }

    /// Begins a run.
    fn begin(&mut self, ticks: u16) {
        if self.length < N {
            self.length += 1;
        } else if self.mode == RecorderMode::StopWhenFull {
            self.stopped = true;
            return;
        } else {
            self.oldest = self.place(1);
            self.forgotten = self.forgotten.saturating_add(1);
        }
        if let Some(run) = self.newest() {
            *run = ticks;
        }
    }
}

const fn name(position: Position) -> &'static str {
    match position {
        Position::Open => "open",
        Position::Closed => "closed",
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use std::string::String;
    use std::vec::Vec;

    /// The samples that the runs stand for.
    fn read_back<const N: usize>(recorder: &Recorder<N>) -> Vec<Position> {
        let mut position = recorder.first().unwrap_or(Position::Open);
        let mut samples = Vec::new();
        for run in recorder.runs() {
            samples.extend(std::iter::repeat_n(position, usize::from(run)));
            position = !position;
        }
        samples
    }

    #[test]
    fn recorder_every_history_reads_back() {
        for bits in 0..1u32 << 12 {
            let history: Vec<_> = (0..12).map(|i| Position::closed_if(bits >> i & 1 == 1)).collect();
            for taken in 0..=12 {
                let (mut ring, mut stop) =
                    (Recorder::<4>::new(RecorderMode::Ring), Recorder::<4>::new(RecorderMode::StopWhenFull));
                history[..taken].iter().for_each(|&s| {
                    ring.sample(s);
                    stop.sample(s);
                });
                let runs: Vec<_> = history[..taken].chunk_by(|a, b| a == b).collect();
                let last = runs[runs.len().saturating_sub(4)..].concat();
                let first = runs[..runs.len().min(4)].concat();
                assert_eq!(read_back(&ring), last);
                assert_eq!(read_back(&stop), first);
                assert_eq!(ring.first(), last.first().copied());
                assert_eq!(usize::try_from(ring.forgotten()), Ok(runs.len().saturating_sub(4)));
                assert_eq!((stop.is_stopped(), stop.forgotten()), (runs.len() > 4, 0));
            }
        }
    }

    #[test]
    fn recorder_run_longer_than_count_keeps_length_and_alternation() {
        for extra in [0, 1, 70_000usize] {
            let mut recorder = Recorder::<8>::new(RecorderMode::StopWhenFull);
            recorder.sample(Position::Open);
            (0..65_535 + extra).for_each(|_| recorder.sample(Position::Closed));
            recorder.sample(Position::Open);
            let samples = read_back(&recorder);
            assert_eq!(samples.len(), 65_537 + extra);
            assert!(samples[1..65_536 + extra].iter().all(|s| s.is_closed()));
            assert_eq!((samples[0], samples.last()), (Position::Open, Some(&Position::Open)));
        }
    }

    #[test]
    fn recorder_run_longer_than_count_stops_or_forgets_in_whole_pairs() {
        fn check<const N: usize>() {
            for mode in [RecorderMode::Ring, RecorderMode::StopWhenFull] {
                for before in [0u8, 1, 2] {
                    let mut truth: Vec<_> =
                        (0..before).map(|i| Position::closed_if((before - i) & 1 == 0)).collect();
                    truth.resize(140_000, Position::Closed);
                    let mut recorder = Recorder::<N>::new(mode);
                    truth.iter().for_each(|&sample| recorder.sample(sample));
                    let kept = read_back(&recorder);
                    match mode {
                        RecorderMode::Ring => assert!(!kept.is_empty() && truth.ends_with(&kept)),
                        RecorderMode::StopWhenFull => {
                            assert!(!kept.is_empty() && truth.starts_with(&kept));
                            assert_eq!(recorder.is_stopped(), kept.len() < truth.len());
                        }
                    }
                }
            }
        }
        check::<1>();
        check::<2>();
        check::<3>();
        check::<4>();
        check::<5>();
        check::<9>();
    }

    #[test]
    fn recorder_dump_says_what_is_missing() {
        let dump = |recorder: &Recorder<3>| {
            let mut text = String::new();
            recorder.dump(&mut text).unwrap();
            text
        };
        let mut ring = Recorder::<3>::new(RecorderMode::Ring);
        assert_eq!(dump(&ring), "# debounce-core recorder 1\nempty\n");
        let mut stop = Recorder::<3>::new(RecorderMode::StopWhenFull);
        for i in 0..5 {
            ring.sample(Position::closed_if(i & 1 == 1));
            stop.sample(Position::closed_if(i & 1 == 1));
        }
        assert_eq!(
            dump(&ring),
            "# debounce-core recorder 1\nfirst open\nforgotten 2\nruns 1 1 1\nend open\n"
        );
        assert_eq!(
            dump(&stop),
            "# debounce-core recorder 1\nfirst open\nforgotten 0\nruns 1 1 1\nend stopped\n"
        );
        ring.clear();
        assert_eq!(dump(&ring), "# debounce-core recorder 1\nempty\n");
    }

    #[test]
    fn recorder_dump_breaks_lines_after_sixteen_runs() {
        let mut recorder = Recorder::<40>::new(RecorderMode::Ring);
        (0..33).for_each(|i| recorder.sample(Position::closed_if(i & 1 == 1)));
        let mut text = String::new();
        recorder.dump(&mut text).unwrap();
        let counts: Vec<_> =
            text.lines().filter_map(|l| l.strip_prefix("runs ")).map(|l| l.split(' ').count()).collect();
        assert_eq!(counts, [16, 16, 1]);
    }
}
