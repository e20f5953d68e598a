//! Reads what the recorder of `debounce-core` writes: a line as runs of ticks.
//!
//! * Tick k of the recording lies k periods behind its start, rounded down to the nanosecond. The line is known at the
//!   ticks only, so the period is the resolution.
//! * Polarity was turned by the firmware; the polarity of the options is not applied again.
//! * Lost ticks are values that are neither 0 nor 1, with which the options say what to do.
//! * The text is one channel, named [`CHANNEL`].

use std::io::Read;

use debounce_core::{Period, Position};

use super::builder::{Reading, TraceBuilder};
use super::channel::{Channel, ChannelKind};
use super::csv::Lines;
use super::error::{Faults, Place};
use super::{Note, ReadOptions, Recording, SamplePeriod};
use crate::raw_input::quoted;

/// What a file of this kind begins with.
pub(super) const MAGIC: &[u8] = b"debounce-core recorder";
/// The one channel of such a file.
const CHANNEL: &str = "contact";

/// What the head of the text and its end say.
#[derive(Debug, Default)]
struct Frame {
    tick: Option<Period>,
    forgotten: Option<u64>,
    end: Option<(u64, End)>,
}

#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum End {
    Running,
    Stopped,
}

/// One run, and where it stands.
#[derive(Debug)]
struct Run {
    reading: Reading,
    ticks: u64,
    place: Place,
}

/// Reads the recording, once for each wanted name. Nothing returned is worth anything once `faults` holds some.
pub(super) fn read<R: Read>(
    input: R,
    wanted: &[&str],
    options: &ReadOptions,
    faults: &mut Faults,
) -> Vec<Recording> {
    let named = wanted.iter().copied().chain(options.channel.as_deref().filter(|_| wanted.is_empty()));
    for name in named.filter(|name| *name != CHANNEL && *name != "1") {
        faults.whole_file(format!("has no channel {}", quoted(name.as_bytes())));
        faults.help(format!("its only channel is {CHANNEL}"));
    }
    let (frame, runs) = match text(input, faults) {
        Ok(read) => read,
        Err(error) => {
            faults.io(error);
            return Vec::new();
        }
    };
    if !faults.is_empty() {
        return Vec::new();
    }
    recording(&frame, &runs, options, faults)
        .map_or_else(Vec::new, |recording| vec![recording; wanted.len().max(1)])
}

/// The channels of such a file.
pub(super) fn channels() -> Vec<Channel> {
    vec![Channel { name: CHANNEL.to_owned(), kind: ChannelKind::Levels }]
}

/// All lines, each fault at its place.
fn text<R: Read>(input: R, faults: &mut Faults) -> std::io::Result<(Frame, Vec<Run>)> {
    let mut lines = Lines::new(input, b'\n');
    let mut frame = Frame::default();
    let mut runs = Vec::new();
    let mut expected = 0;
    let mut last = 0;
    while let Some((number, line)) = lines.next()? {
        last = number;
        if faults.is_full() {
            return Ok((frame, runs));
        }
        if line.trim_ascii().is_empty() {
            continue;
        }
        let mut words = Words::new(line, number);
        if frame.end.is_some() {
            faults.at(words.place(), "stands behind the end of the recording");
            faults.help("give each recording a file of its own");
            return Ok((frame, runs));
        }
        match expected {
            0 => version(&mut words, faults),
            1 => frame.tick = tick(&mut words, faults),
            2 => frame.forgotten = forgotten(&mut words, faults),
            _ if line.trim_ascii_start().starts_with(b"end") => {
                frame.end = end(&mut words, runs.len() as u64, faults);
                if frame.end.is_none() {
                    return Ok((frame, runs));
                }
            }
            _ => run_line(&mut words, &mut runs, faults),
        }
        expected += 1;
        // With another version nothing that follows can be judged.
        if expected == 1 && !faults.is_empty() {
            return Ok((frame, runs));
        }
    }
    if frame.end.is_none() && faults.is_empty() {
        let place = Place { line: last + 1, column: 1 };
        faults.at(place, "the recording stops before its end line");
        faults.help("it was cut; write it out again");
    }
    Ok((frame, runs))
}

fn version(words: &mut Words<'_>, faults: &mut Faults) {
    let place = words.place();
    let (name, kind) = (words.next(), words.next());
    if (name, kind) != (Some(b"debounce-core"), Some(b"recorder")) {
        faults.at(place, "is not the first line of a recording; it begins with \"debounce-core recorder 1\"");
        return;
    }
    let place = words.place();
    match words.next() {
        Some(b"1") => words.done(faults),
        Some(other) => {
            faults.at(place, format!("format {} of the recorder is not known; 1 is", quoted(other)));
        }
        None => faults.at(place, "the format of the recorder is missing; 1 is known"),
    }
}

fn tick(words: &mut Words<'_>, faults: &mut Faults) -> Option<Period> {
    words.keyword("tick", faults)?;
    let place = words.place();
    let text = words.next().unwrap_or_default();
    let period = std::str::from_utf8(text).ok().and_then(|text| {
        let (numerator, denominator) = text.split_once('/').unwrap_or((text, "1"));
        Period::try_from_ratio(
            digits(numerator.as_bytes())?,
            digits(denominator.as_bytes())?.try_into().ok()?,
        )
    });
    if period.is_none() {
        let example = "write nanoseconds, as in 1000000 or 100000000/3";
        faults.at(place, format!("{} is not a tick period; {example}", quoted(text)));
        return None;
    }
    let place = words.place();
    match words.next() {
        Some(b"ns") => words.done(faults),
        other => {
            let unit = quoted(other.unwrap_or_default());
            faults.at(place, format!("{unit} is not the unit of the tick period; write ns"));
        }
    }
    period
}

fn forgotten(words: &mut Words<'_>, faults: &mut Faults) -> Option<u64> {
    words.keyword("forgotten", faults)?;
    let runs = words.number("a number of runs", faults);
    words.done(faults);
    runs
}

fn end(words: &mut Words<'_>, found: u64, faults: &mut Faults) -> Option<(u64, End)> {
    words.keyword("end", faults)?;
    let place = words.place();
    let runs = words.number("a number of runs", faults)?;
    if runs != found && faults.is_empty() {
        faults.at(place, format!("the recording should hold {runs} runs, but {found} stand here"));
        faults.help("a line was lost on the way; write it out again");
    }
    let place = words.place();
    let end = match words.next() {
        Some(b"running") => End::Running,
        Some(b"stopped") => End::Stopped,
        other => {
            let word = quoted(other.unwrap_or_default());
            faults.at(place, format!("{word} is not how a recording ends; write running or stopped"));
            return None;
        }
    };
    words.done(faults);
    Some((runs, end))
}

fn run_line(words: &mut Words<'_>, runs: &mut Vec<Run>, faults: &mut Faults) {
    loop {
        let place = words.place();
        let Some(word) = words.next() else { return };
        let reading = match word.first() {
            Some(b'o') => Some(Reading::Known(Position::Open)),
            Some(b'c') => Some(Reading::Known(Position::Closed)),
            Some(b'l') => Some(Reading::Unknown),
            _ => None,
        };
        let ticks = word.get(1..).and_then(digits).filter(|&ticks| ticks > 0);
        match (reading, ticks) {
            (Some(reading), Some(ticks)) => runs.push(Run { reading, ticks, place }),
            _ => {
                let example = "write o (open), c (closed) or l (lost) and the ticks, as in c14";
                faults.at(place, format!("{} is not a run; {example}", quoted(word)));
            }
        }
    }
}

fn recording(frame: &Frame, runs: &[Run], options: &ReadOptions, faults: &mut Faults) -> Option<Recording> {
    let (period, forgotten, (_, end)) = (frame.tick?, frame.forgotten?, frame.end?);
    let at_ns = |tick: u64| {
        let ns = u128::from(tick) * u128::from(period.numerator_ns()) / u128::from(period.denominator());
        u64::try_from(ns).ok()
    };
    let mut builder = TraceBuilder::new(options.unknown);
    let mut tick = 0_u64;
    for run in runs {
        let now = at_ns(tick);
        let Some((now, next)) =
            now.zip(tick.checked_add(run.ticks)).filter(|&(_, next)| at_ns(next).is_some())
        else {
            faults.at(run.place, "the recording is longer than 584 years");
            return None;
        };
        if builder.record(now, run.reading).is_err() {
            let ticks = run.ticks;
            faults
                .at(run.place, format!("{ticks} ticks were lost here, and unknown values are to be refused"));
            return None;
        }
        tick = next;
    }
    let resolution = options
        .resolution_ns
        .unwrap_or_else(|| period.numerator_ns().div_ceil(u64::from(period.denominator())));
    let Some((trace, mut notes)) = builder.finish(at_ns(tick)?, resolution) else {
        faults.whole_file("holds no sample whose position is known");
        return None;
    };
    if forgotten > 0 {
        notes.push(Note::RunsForgotten { runs: forgotten });
    }
    if end == End::Stopped {
        notes.push(Note::RecorderStopped);
    }
    Some(Recording { channel: CHANNEL.to_owned(), trace, period: SamplePeriod::Stated, notes })
}

/// The words of one line, each with its column.
struct Words<'a> {
    line: &'a [u8],
    number: u64,
    at: usize,
}

impl<'a> Words<'a> {
    fn new(line: &'a [u8], number: u64) -> Self {
        let mut words = Self { line, number, at: 0 };
        words.skip(true);
        words
    }

    /// Where the next word begins, or the line ends.
    fn place(&self) -> Place {
        Place { line: self.number, column: self.at as u64 + 1 }
    }

    fn next(&mut self) -> Option<&'a [u8]> {
        let from = self.at;
        self.skip(false);
        let word = &self.line[from..self.at];
        self.skip(true);
        (!word.is_empty()).then_some(word)
    }

    /// Goes on over white space, or over everything else.
    fn skip(&mut self, white_space: bool) {
        let rest = &self.line[self.at..];
        self.at += rest.iter().take_while(|byte| byte.is_ascii_whitespace() == white_space).count();
    }

    fn keyword(&mut self, expected: &str, faults: &mut Faults) -> Option<()> {
        let place = self.place();
        let word = self.next().unwrap_or_default();
        if word == expected.as_bytes() {
            return Some(());
        }
        faults.at(place, format!("{} stands where the line must begin with {expected}", quoted(word)));
        None
    }

    fn number(&mut self, what: &str, faults: &mut Faults) -> Option<u64> {
        let place = self.place();
        let word = self.next().unwrap_or_default();
        let number = digits(word);
        if number.is_none() {
            faults.at(place, format!("{} is not {what}", quoted(word)));
        }
        number
    }

    /// Nothing may follow.
    fn done(&mut self, faults: &mut Faults) {
        let place = self.place();
        if let Some(word) = self.next() {
            faults.at(place, format!("{} is one word too many", quoted(word)));
        }
    }
}

/// A number of digits only; the usual parsing would take a sign as well.
fn digits(text: &[u8]) -> Option<u64> {
    if text.is_empty() || !text.iter().all(u8::is_ascii_digit) {
        return None;
    }
    std::str::from_utf8(text).ok()?.parse().ok()
}

#[cfg(test)]
mod tests;
