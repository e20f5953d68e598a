//! The truth beside a recording, as a file of our own.
//!
//! CSV in UTF-8. Lines that begin with `#` are remarks. The first other line is the header
//! `channel,event,from_ns,until_ns`; every further line is one event:
//!
//! | event | from | until |
//! | --- | --- | --- |
//! | `make`, `break` | the surfaces first touch, or first part | the last edge that this causes |
//! | `disturbed-open`, `disturbed-closed` | first difference from an undisturbed line | last one |
//! | `forward`, `backward` | an encoder was turned by one detent | the same |
//!
//! Times are whole nanoseconds from the start of the recording. The channel is its name in the recording, without
//! the scope that a VCD puts before it. Events of one channel stand together: changes, then disturbances.

use std::fs;
use std::io::{self, Write};
use std::path::Path;

use debounce_core::{Change, Position, Turn};

use super::panel::Made;
use crate::nearest::nearest;
use crate::problem::{Problem, Problems, plain_reason};
use crate::trace::MAX_FAULTS;
use crate::truth::TruthChange;

const HEADER: [&str; 4] = ["channel", "event", "from_ns", "until_ns"];
const EVENTS: [&str; 6] = ["make", "break", "disturbed-open", "disturbed-closed", "forward", "backward"];

/// Writes the truth of an invented recording, with a remark before it.
///
/// # Errors
/// Those of `out`.
pub fn write_truth(out: &mut dyn Write, made: &Made, remark: &str) -> io::Result<()> {
    writeln!(out, "# {}", remark.replace(['\n', '\r'], " "))?;
    let mut rows = csv::Writer::from_writer(out);
    rows.write_record(HEADER)?;
    let mut row = |channel: &str, event: &str, from_ns: u64, until_ns: u64| {
        rows.write_record([channel, event, &from_ns.to_string(), &until_ns.to_string()])
    };
    for line in &made.lines {
        for (change, &end) in line.truth.iter().zip(&line.bounce_ends_ns) {
            let event = if change.change == Change::Make { "make" } else { "break" };
            row(&line.name, event, change.at_ns, end)?;
        }
        for noise in &line.noise {
            let event = if noise.position == Position::Open { "disturbed-open" } else { "disturbed-closed" };
            row(&line.name, event, noise.from_ns, noise.until_ns)?;
        }
    }
    for turn in &made.turns {
        let event = if turn.turn == Turn::Forward { "forward" } else { "backward" };
        row(&turn.name, event, turn.at_ns, turn.at_ns)?;
    }
    rows.flush()
}

/// One event of a truth file.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct TruthRow {
    /// The channel.
    pub channel: String,
    /// What happened: one of the words that the format knows.
    pub event: &'static str,
    /// When it began.
    pub from_ns: u64,
    /// When it was over.
    pub until_ns: u64,
}

/// Reads a truth file.
///
/// # Errors
/// Everything that is wrong with it, each with its place.
pub fn read_truth(path: &Path) -> Result<Vec<TruthRow>, Problems> {
    let bytes = fs::read(path).map_err(|error| {
        Problem::new(format!("the truth cannot be read: {}", plain_reason(&error)))
            .in_file(path)
            .help("check the path; harness generate writes such a file beside a recording")
    })?;
    parse_truth(path, &bytes)
}

/// Reads the bytes of a truth file; `path` is for messages.
///
/// # Errors
/// Everything that is wrong with it, each with its place.
pub fn parse_truth(path: &Path, bytes: &[u8]) -> Result<Vec<TruthRow>, Problems> {
    let mut reader =
        csv::ReaderBuilder::new().comment(Some(b'#')).has_headers(false).flexible(true).from_reader(bytes);
    let (mut rows, mut problems, mut has_header) = (Vec::new(), Vec::new(), false);
    for record in reader.records() {
        if problems.len() >= MAX_FAULTS {
            break;
        }
        let record = match record {
            Ok(record) => record,
            Err(error) => {
                let line = error.position().map_or(1, |position| position.line() as usize);
                let problem = Problem::new("this line is not text in UTF-8").at(path, line, 1);
                problems.push(problem.help("write the truth again with harness generate"));
                continue;
            }
        };
        let line = record.position().map_or(1, |position| position.line() as usize);
        if !has_header {
            has_header = true;
            if record != HEADER[..] {
                let problem = Problem::new("this is no truth file").at(path, line, 1);
                return Err(problem.help(format!("its first line reads {}", HEADER.join(","))).into());
            }
            continue;
        }
        match row(&record) {
            Ok(row) => rows.push(row),
            Err((column, message, help)) => {
                problems.push(Problem::new(message).at(path, line, column).help(help));
            }
        }
    }
    if !has_header {
        let problem = Problem::new("the truth file is empty").in_file(path);
        return Err(problem.help(format!("its first line reads {}", HEADER.join(","))).into());
    }
    match Problems::from_found(problems) {
        Some(problems) => Err(problems),
        None => Ok(rows),
    }
}

/// One row, or what is wrong with it and in which column of the text its field begins.
fn row(record: &csv::StringRecord) -> Result<TruthRow, (usize, String, String)> {
    let column =
        |field: usize| 1 + record.iter().take(field).map(|text| text.chars().count() + 1).sum::<usize>();
    let [Some(channel), Some(event), Some(from), Some(until), None] =
        [0, 1, 2, 3, 4].map(|field| record.get(field))
    else {
        let message = format!("this line has {} fields and not 4", record.len());
        return Err((1, message, format!("write {}", HEADER.join(","))));
    };
    let known = EVENTS.into_iter().find(|&known| known == event).ok_or_else(|| {
        let help = nearest(event, EVENTS)
            .map_or_else(|| format!("write one of {}", EVENTS.join(", ")), |word| format!("write {word}"));
        (column(1), format!("\"{event}\" is not an event"), help)
    })?;
    let time = |text: &str, field: usize| {
        text.trim().parse::<u64>().map_err(|_| {
            let message = format!("\"{text}\" is not a time in nanoseconds");
            (column(field), message, "write a whole number from 0".to_owned())
        })
    };
    Ok(TruthRow {
        channel: channel.to_owned(),
        event: known,
        from_ns: time(from, 2)?,
        until_ns: time(until, 3)?,
    })
}

/// The changes of a channel, which may carry the scope that a VCD puts before its name.
#[must_use]
pub fn changes_of(rows: &[TruthRow], channel: &str) -> Vec<TruthChange> {
    let is_meant =
        |name: &str| channel == name || channel.strip_suffix(name).is_some_and(|scope| scope.ends_with('.'));
    let change = |event: &str| match event {
        "make" => Some(Change::Make),
        "break" => Some(Change::Break),
        _ => None,
    };
    let meant = rows.iter().filter(|row| is_meant(&row.channel));
    meant.filter_map(|row| Some(TruthChange { change: change(row.event)?, at_ns: row.from_ns })).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::generate::{Actuation, Habit, Panel, PanelContact, Preset, write_levels_csv, write_volts_csv};
    use crate::level::Level;
    use crate::trace::{Polarity, ReadOptions, Thresholds, read_bytes, write_vcd};

    fn made() -> Made {
        let contact = |name: &str, preset: &str| {
            let preset = Preset::find(preset).unwrap();
            PanelContact {
                routines: vec![Habit::find("presses").unwrap().routine(9, Actuation::Fast)],
                detent_ns: preset.detent_ns,
                ..PanelContact::new(name, preset.specimen(2))
            }
        };
        let contacts = vec![contact("vent, upper", "rocker"), contact("knob", "encoder")];
        Panel { seed: 2, resolution_ns: 1, contacts }.generate(true).unwrap()
    }

    fn bytes(write: impl FnOnce(&mut dyn Write) -> io::Result<()>) -> Vec<u8> {
        let mut bytes = Vec::new();
        write(&mut bytes).unwrap();
        bytes
    }

    #[test]
    fn truth_written_is_read_back() {
        let made = made();
        let text = bytes(|out| write_truth(out, &made, "two\nlines"));
        let rows = parse_truth(Path::new("t.csv"), &text).unwrap();
        for line in &made.lines {
            assert_eq!(changes_of(&rows, &line.name), line.truth);
            assert_eq!(changes_of(&rows, &format!("harness.{}", line.name)), line.truth);
        }
        assert_eq!(changes_of(&rows, "other"), []);
        assert_eq!(rows.iter().filter(|row| row.event.ends_with("ward")).count(), 9);
    }

    /// The same recording in three formats reads as the same trace.
    #[test]
    fn recording_written_in_each_format_is_read_back() {
        let made = made();
        let named: Vec<_> = made.lines.iter().map(|line| (line.name.as_str(), &line.trace)).collect();
        let vcd = bytes(|mut out| write_vcd(&mut out, &named, "invented"));
        let levels = bytes(|out| write_levels_csv(out, &made.lines));
        let volts = bytes(|out| write_volts_csv(out, &made.lines));
        let mut options = ReadOptions {
            resolution_ns: Some(1),
            channel: Some("knob.b".to_owned()),
            polarity: Polarity::closed_is(Level::High),
            ..ReadOptions::default()
        };
        let expected = &made.lines[2].trace;
        assert!(read_bytes("a.vcd", &vcd, &options).unwrap().trace == *expected);
        assert!(read_bytes("a.csv", &levels, &options).unwrap().trace == *expected);
        options.channel = Some("knob.b (V)".to_owned());
        options.polarity = Polarity::closed_is(Level::Low);
        options.thresholds = Some(Thresholds::try_new(0.8, 2.0).unwrap());
        assert!(read_bytes("v.csv", &volts, &options).unwrap().trace == *expected);
    }

    #[test]
    fn truth_that_is_none_is_refused_with_its_place() {
        let refused =
            |text: &str| parse_truth(Path::new("t.csv"), text.as_bytes()).expect_err(text).to_string();
        assert_eq!(
            refused("time,level\n0,1\n"),
            "t.csv:1:1: this is no truth file; its first line reads channel,event,from_ns,until_ns"
        );
        assert_eq!(
            refused("# x\nchannel,event,from_ns,until_ns\na,mak,1,2\na,make,1.5,2\na,make,1\n"),
            "t.csv:3:3: \"mak\" is not an event; write make\n\
             t.csv:4:8: \"1.5\" is not a time in nanoseconds; write a whole number from 0\n\
             t.csv:5:1: this line has 3 fields and not 4; write channel,event,from_ns,until_ns"
        );
        assert!(refused("").contains("the truth file is empty"));
    }
}
