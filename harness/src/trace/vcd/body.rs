//! The value changes of a VCD: the part that may be gigabytes long.

use std::io::{self, Read};

use super::header::{Header, Scale, section};
use super::select::{Part, Selected, channels};
use super::tokens::Tokens;
use crate::raw_input::quoted;
use crate::trace::builder::{Reading, TraceBuilder};
use crate::trace::error::{Faults, Place};
use crate::trace::range::VoltRange;
use crate::trace::{Level, Note, ReadOptions, Recording, SamplePeriod};

/// No (further) target.
const NONE: u32 = u32::MAX;

/// One channel that is followed.
#[derive(Debug)]
struct Target {
    name: String,
    part: Part,
    builder: TraceBuilder,
    range: VoltRange,
    /// The next target with the same code.
    next: u32,
}

/// The state of reading value changes.
#[derive(Debug)]
pub(super) struct Body<'a> {
    header: &'a Header,
    options: &'a ReadOptions,
    scale: Scale,
    /// For each code the first target, or `NONE`.
    first: Vec<u32>,
    targets: Vec<Target>,
    /// The last time mark, in units of the time scale.
    mark: Option<u64>,
    now_ns: u64,
    has_started: bool,
    was_rounded: bool,
}

impl<'a> Body<'a> {
    pub(super) fn new(
        header: &'a Header,
        scale: Scale,
        selected: Vec<Selected>,
        options: &'a ReadOptions,
    ) -> Self {
        let mut first = vec![NONE; header.codes.count()];
        let mut targets = Vec::with_capacity(selected.len());
        for (number, Selected { name, code, part }) in (0..).zip(selected) {
            let next = std::mem::replace(&mut first[code as usize], number);
            targets.push(Target {
                name,
                part,
                builder: TraceBuilder::new(options.unknown),
                range: VoltRange::default(),
                next,
            });
        }
        Self {
            header,
            options,
            scale,
            first,
            targets,
            mark: None,
            now_ns: 0,
            has_started: false,
            was_rounded: false,
        }
    }

    /// Reads to the end of the stream, or until no more faults are listed.
    pub(super) fn read<R: Read>(&mut self, tokens: &mut Tokens<R>, faults: &mut Faults) -> io::Result<()> {
        // The value of a vector has to wait for the code behind it.
        let mut value: Vec<u8> = Vec::new();
        while !faults.is_full() {
            let Some(token) = tokens.next()? else { break };
            let place = token.place;
            match token.text[0] {
                b'#' => self.time(&token.text[1..], place, faults),
                b'0' | b'1' | b'x' | b'X' | b'z' | b'Z' | b'u' | b'U' | b'w' | b'W' | b'l' | b'L' | b'h'
                | b'H' | b'-' => {
                    let (value, code) = token.text.split_at(1);
                    if code.is_empty() {
                        faults.at(place, format!("value {} has no identifier code behind it", quoted(value)));
                        faults.help("a scalar value and its identifier code stand together, as in \"1!\"");
                    } else {
                        self.bits(code, value, place, place, faults);
                    }
                }
                kind @ (b'b' | b'B' | b'r' | b'R' | b's' | b'S') => {
                    value.clear();
                    value.extend_from_slice(&token.text[1..]);
                    let Some(code) = tokens.next()? else {
                        faults.at(place, format!("the file ends after the value {}", quoted(&value)));
                        break;
                    };
                    match kind {
                        b'b' | b'B' => self.vector(code.text, &value, code.place, place, faults),
                        b'r' | b'R' => self.real(code.text, &value, code.place, place, faults),
                        _ => {
                            self.first_target(code.text, code.place, faults);
                        }
                    }
                }
                b'$' => {
                    let keyword = token.text[1..].to_vec();
                    match keyword.as_slice() {
                        // Their contents are ordinary value changes.
                        b"dumpvars" | b"dumpall" | b"dumpon" | b"dumpoff" | b"end" => {}
                        b"var" | b"scope" | b"upscope" | b"timescale" | b"enddefinitions" => {
                            faults.at(place, format!("{} comes after $enddefinitions", quoted(token.text)));
                            section(tokens, &keyword, place, faults)?;
                        }
                        _ => {
                            section(tokens, &keyword, place, faults)?;
                        }
                    }
                }
                b'p' => {
                    faults.at(place, "port values of the extended format are not read");
                    faults.help("export a four-state VCD");
                    break;
                }
                _ => {
                    faults.at(place, format!("{} is no value change and no time", quoted(token.text)));
                    faults.help("a value change is a value and an identifier code, as in \"1!\"; a time is as in \"#100\"");
                }
            }
        }
        Ok(())
    }

    /// A time mark, IEEE 1364-2005 clause 18.2.1: a decimal number that never falls.
    fn time(&mut self, digits: &[u8], place: Place, faults: &mut Faults) {
        if digits.is_empty() || !digits.iter().all(u8::is_ascii_digit) {
            faults.at(place, format!("{} is not a time; use # and a whole number", quoted(digits)));
            return;
        }
        // Nineteen digits always fit, and so need no check at each.
        let value = |sum: u64, digit: &u8| sum * 10 + u64::from(digit - b'0');
        let mark = match digits {
            short if short.len() <= 19 => Some(short.iter().fold(0, value)),
            long => long
                .iter()
                .try_fold(0_u64, |sum, digit| sum.checked_mul(10)?.checked_add(u64::from(digit - b'0'))),
        };
        let Scale { multiply, divide } = self.scale;
        let parsed = mark.and_then(|mark| {
            // Division is slow, and most files need none.
            let whole = if divide == 1 { mark } else { mark / divide };
            self.was_rounded |= whole * divide != mark;
            Some((mark, whole.checked_mul(multiply)?))
        });
        let Some((mark, now_ns)) = parsed else {
            let digits = String::from_utf8_lossy(&digits[..digits.len().min(32)]).into_owned();
            faults.at(place, format!("time {digits} exceeds the {} ns that fit 64 bits", u64::MAX));
            return;
        };
        if let Some(before) = self.mark.filter(|&before| mark < before) {
            faults.at(place, format!("time goes back from {before} to {mark}"));
            faults.help("put the changes in the order of their times, or export the recording again");
            return;
        }
        self.mark = Some(mark);
        self.now_ns = now_ns;
        self.start();
    }

    /// The recording starts at the first time mark; values before any mark start it at 0.
    #[inline]
    fn start(&mut self) {
        if !self.has_started {
            self.has_started = true;
            for target in &mut self.targets {
                target.builder.start(self.now_ns);
            }
        }
    }

    /// The first target of a code; an undeclared code is a fault.
    #[inline]
    fn first_target(&mut self, code: &[u8], place: Place, faults: &mut Faults) -> u32 {
        match self.header.codes.number(code) {
            Some(number) => self.first[number as usize],
            None => {
                faults.at(place, format!("identifier code {} was not declared", quoted(code)));
                faults.help("declare it with $var before $enddefinitions, or take its changes out");
                NONE
            }
        }
    }

    fn vector(&mut self, code: &[u8], value: &[u8], code_place: Place, place: Place, faults: &mut Faults) {
        if value.is_empty() {
            faults.at(place, "a vector value has no digits");
        } else if let Some(bad) = value.iter().position(|&digit| bit(digit).is_none()) {
            let column = place.column + 1 + bad as u64;
            let digit = quoted(&value[bad..=bad]);
            faults.at(
                Place { column, ..place },
                format!("{digit} is not a digit of a vector; use 0, 1, x or z"),
            );
        } else {
            self.bits(code, value, code_place, place, faults);
        }
    }

    #[inline]
    fn bits(&mut self, code: &[u8], value: &[u8], code_place: Place, place: Place, faults: &mut Faults) {
        self.start();
        let mut number = self.first_target(code, code_place, faults);
        while let Some(target) = self.targets.get_mut(number as usize) {
            number = target.next;
            let Part::Bit(from_right) = target.part else {
                faults.at(place, format!("channel {} is a real number, and this is none", target.name));
                continue;
            };
            let reading = match digit_at(value, from_right).and_then(bit) {
                Some(Bit::Known(level)) => Reading::Known(self.options.polarity.position(level)),
                Some(Bit::Unknown) => Reading::Unknown,
                None => continue, // Every digit was checked before.
            };
            if target.builder.record(self.now_ns, reading).is_err() {
                faults.at(place, format!("channel {} has the unknown value {}", target.name, quoted(value)));
                faults.help(
                    "unknown values are to be refused here; they could be held, or count as open or closed",
                );
            }
        }
    }

    fn real(&mut self, code: &[u8], value: &[u8], code_place: Place, place: Place, faults: &mut Faults) {
        self.start();
        let mut number = self.first_target(code, code_place, faults);
        while let Some(target) = self.targets.get_mut(number as usize) {
            number = target.next;
            let Part::Volts(thresholds) = target.part else {
                faults.at(place, format!("channel {} is a bit, and this is a real number", target.name));
                continue;
            };
            let volts = std::str::from_utf8(value).ok().and_then(|text| text.parse::<f64>().ok());
            let Some(volts) = volts.filter(|volts| volts.is_finite()) else {
                faults.at(place, format!("{} is not a number of volts", quoted(value)));
                continue;
            };
            if let Err(why) = target.range.see(volts) {
                faults.at(place, format!("{} {why}", quoted(value)));
                continue;
            }
            let reading = match thresholds.level(volts) {
                Some(level) => Reading::Known(self.options.polarity.position(level)),
                None => Reading::Between,
            };
            // Neither kind of reading can be refused.
            let _ = target.builder.record(self.now_ns, reading);
        }
    }

    /// One recording for each channel, in the order in which they were chosen.
    pub(super) fn finish(self, faults: &mut Faults) -> Vec<Recording> {
        let mut recordings = Vec::with_capacity(self.targets.len());
        let resolution_ns = self.options.resolution_ns.unwrap_or(self.scale.multiply);
        let period = match self.options.resolution_ns {
            Some(_) => SamplePeriod::Stated,
            None => SamplePeriod::TimeScale,
        };
        for target in self.targets {
            if let Part::Volts(pair) = target.part
                && (!faults.is_empty()
                    || target.range.misses(&target.name, pair, &channels(self.header), faults))
            {
                continue;
            }
            match target.builder.finish(self.now_ns, resolution_ns) {
                Some((trace, mut notes)) => {
                    if self.was_rounded {
                        notes.push(Note::RoundedTimes);
                    }
                    if target.range.clipped() > 0 {
                        notes.push(Note::Clipped { readings: target.range.clipped() });
                    }
                    recordings.push(Recording { channel: target.name, trace, period, notes });
                }
                None => faults.whole_file(format!("channel {} never has a known value", target.name)),
            }
        }
        recordings
    }
}

/// What one digit says.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Bit {
    Known(Level),
    Unknown,
}

/// The nine values of IEEE 1164: weak levels are levels; `x z u w -` are unknown, `z` too, because what an
/// open line would read is for the user to say.
#[inline]
fn bit(digit: u8) -> Option<Bit> {
    match digit {
        b'0' | b'l' | b'L' => Some(Bit::Known(Level::Low)),
        b'1' | b'h' | b'H' => Some(Bit::Known(Level::High)),
        b'x' | b'X' | b'z' | b'Z' | b'u' | b'U' | b'w' | b'W' | b'-' => Some(Bit::Unknown),
        _ => None,
    }
}

/// The digit at a place from the right. A short vector is extended to the left: by 0 when it begins with 0 or
/// 1, else by what it begins with (IEEE 1364-2005 table 18-1).
#[inline]
fn digit_at(value: &[u8], from_right: u64) -> Option<u8> {
    let place =
        usize::try_from(from_right).ok().and_then(|skip| value.len().checked_sub(1)?.checked_sub(skip));
    match (place, value.first()) {
        (Some(place), _) => value.get(place).copied(),
        (None, Some(b'0' | b'1')) => Some(b'0'),
        (None, first) => first.copied(),
    }
}
