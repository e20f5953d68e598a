//! A recording as text: [`RecorderText`].

use core::fmt;

use super::recorder::{Recorded, RecordedRun, Recorder};
use crate::machine::Position;
use crate::time::Period;

/// The text of a [`Recorder`], in the format that stands there; made by [`Recorder::text`].
#[derive(Clone, Copy, Debug)]
pub struct RecorderText<'a, const N: usize> {
    recorder: &'a Recorder<N>,
    tick: Period,
}

/// Runs in one line.
const COLUMNS: u8 = 16;

impl<'a, const N: usize> RecorderText<'a, N> {
    pub(super) const fn new(recorder: &'a Recorder<N>, tick: Period) -> Self {
        Self { recorder, tick }
    }

    /// The runs, each with what stands between it and the next.
    fn runs(&self) -> impl Iterator<Item = (char, u32, &'static str)> {
        let mut runs = self.recorder.runs().peekable();
        let mut column = 0;
        core::iter::from_fn(move || {
            let RecordedRun { recorded, ticks } = runs.next()?;
            column = if column == COLUMNS { 1 } else { column + 1 };
            let ends_line = column == COLUMNS || runs.peek().is_none();
            Some((letter(recorded), ticks, if ends_line { "\n" } else { " " }))
        })
    }

    fn end(&self) -> &'static str {
        if self.recorder.is_stopped() { "stopped" } else { "running" }
    }
}

const fn letter(recorded: Recorded) -> char {
    match recorded {
        Recorded::At(Position::Open) => 'o',
        Recorded::At(Position::Closed) => 'c',
        Recorded::Lost => 'l',
    }
}

impl<const N: usize> fmt::Display for RecorderText<'_, N> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "debounce-core recorder 1\ntick {}", self.tick.numerator_ns())?;
        if self.tick.denominator() != 1 {
            write!(f, "/{}", self.tick.denominator())?;
        }
        writeln!(f, " ns\nforgotten {}", self.recorder.forgotten())?;
        for (letter, ticks, between) in self.runs() {
            write!(f, "{letter}{ticks}{between}")?;
        }
        writeln!(f, "end {} {}", self.recorder.runs().count(), self.end())
    }
}

#[cfg(feature = "defmt")]
impl<const N: usize> defmt::Format for RecorderText<'_, N> {
    fn format(&self, f: defmt::Formatter<'_>) {
        defmt::write!(f, "debounce-core recorder 1\ntick {=u64}", self.tick.numerator_ns());
        if self.tick.denominator() != 1 {
            defmt::write!(f, "/{=u32}", self.tick.denominator());
        }
        defmt::write!(f, " ns\nforgotten {=u32}\n", self.recorder.forgotten());
        for (letter, ticks, between) in self.runs() {
            defmt::write!(f, "{=char}{=u32}{=str}", letter, ticks, between);
        }
        defmt::write!(f, "end {=usize} {=str}\n", self.recorder.runs().count(), self.end());
    }
}
