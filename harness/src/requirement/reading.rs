//! How a recording is read, where its file does not say it itself: keys of `[[recording]]`.

use super::Sourced;
use super::section::{Reader, Section};
use super::words::{Word, word};
use crate::problem::Problem;
use crate::quantity::Time;
use crate::trace::{DecimalMark, Delimiter, ReadOptions, TimeUnit, Unknown};

/// How one recording is read. What is left out is found from the file.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Reading {
    /// The recorder's own sample period, where the file does not show it.
    pub resolution: Option<Sourced<Time>>,
    /// The column of times counts samples, one in so much time.
    pub sample_period: Option<Sourced<Time>>,
    /// The unit of the times.
    pub time_unit: Option<Sourced<TimeUnit>>,
    /// The column of times, by name or number.
    pub time_column: Option<Sourced<String>>,
    /// What stands between the fields of a row.
    pub delimiter: Option<Sourced<Delimiter>>,
    /// What stands before the fraction of a number.
    pub decimal_mark: Option<Sourced<DecimalMark>>,
    /// What to make of values that are neither 0 nor 1.
    pub unknown: Option<Sourced<Unknown>>,
    /// The rest that ends a burst of bounce.
    pub gap: Option<Sourced<Time>>,
}

word! { TimeUnit, "a unit of time", {
    Seconds = "s",
    Milliseconds = "ms",
    Microseconds = "us",
    Nanoseconds = "ns",
    Picoseconds = "ps",
    Femtoseconds = "fs",
} }

word! { Delimiter, "a delimiter", {
    Comma = "comma",
    Semicolon = "semicolon",
    Tab = "tab",
    Space = "space",
} }

word! { DecimalMark, "a decimal mark", { Point = "point", Comma = "comma", } }

word! { Unknown, "a way to take unknown values", {
    Hold = "hold",
    Open = "open",
    Closed = "closed",
    Refuse = "refuse",
} }

impl Reading {
    /// Takes the keys out of the table of a recording.
    pub(super) fn read(reader: &mut Reader, section: &mut Section<'_>) -> Self {
        let reading = Self {
            resolution: longer_than_none(reader, section, "resolution"),
            sample_period: longer_than_none(reader, section, "sample_period"),
            time_unit: reader.word(section, "time_unit"),
            time_column: reader.text(section, "time_column", "Time (s)"),
            delimiter: reader.word(section, "delimiter"),
            decimal_mark: reader.word(section, "decimal_mark"),
            unknown: reader.word(section, "unknown"),
            gap: longer_than_none(reader, section, "gap"),
        };
        if let (Some(unit), Some(period)) = (&reading.time_unit, &reading.sample_period)
            && let (Some(unit), Some(period)) = (unit.origin.span(), period.origin.span())
        {
            let problem = Problem::new("times that are numbers of samples have no unit")
                .mark(&reader.source, unit, "the unit")
                .mark(&reader.source, period, "the time from sample to sample")
                .help("take one of the two out");
            reader.problems.push(problem);
        }
        reading
    }

    /// The options of the reader.
    #[must_use]
    pub fn options(&self) -> ReadOptions {
        let ns = |time: &Option<Sourced<Time>>| time.map(|time| time.value.ns());
        ReadOptions {
            resolution_ns: ns(&self.resolution),
            sample_period_ns: ns(&self.sample_period),
            time_unit: self.time_unit.map(|unit| unit.value),
            time_column: self.time_column.as_ref().map(|column| column.value.clone()),
            delimiter: self.delimiter.map(|delimiter| delimiter.value),
            decimal_mark: self.decimal_mark.map(|mark| mark.value),
            unknown: self.unknown.map_or(Unknown::default(), |unknown| unknown.value),
            ..ReadOptions::default()
        }
    }
}

/// A time that cannot be nothing.
fn longer_than_none(
    reader: &mut Reader,
    section: &mut Section<'_>,
    key: &'static str,
) -> Option<Sourced<Time>> {
    let time = reader.quantity::<Time>(section, key)?;
    if time.value == Time::ZERO {
        let span = time.origin.span().unwrap_or_default();
        let message = format!("a {} of 0 is no time", key.replace('_', " "));
        reader.problem(span, message, format!("write {key} = \"1 us\", or leave it out"));
        return None;
    }
    Some(time)
}
