//! The rows of a recording: times that rise, and what the chosen columns say at each.

use std::io::{self, Read};
use std::ops::Range;

use super::cell::{self, Cell};
use super::header::{Unit, VoltUnit};
use super::layout::Layout;
use super::line::{Lines, is_skipped, split};
use super::number::{self, PER_NS, Yoctoseconds};
use crate::raw_input::quoted;
use crate::trace::builder::{Reading, TraceBuilder};
use crate::trace::error::{Faults, Place};
use crate::trace::range::{VoltRange, is_noise, propose};
use crate::trace::{Channel, Note, ReadOptions, Recording, SamplePeriod, Thresholds, TimeUnit};

/// A column that is followed.
#[derive(Debug)]
struct Lane {
    name: String,
    column: usize,
    unit: VoltUnit,
    /// Whether the header calls it volts, so that even 0 and 1 are no levels.
    is_volts: bool,
    builder: TraceBuilder,
    before: Option<Reading>,
    /// Where the first number stands that is no level, and the range of the column.
    first_number: Option<Place>,
    range: VoltRange,
}

/// The state of reading rows.
#[derive(Debug)]
pub(super) struct Rows<'a> {
    layout: &'a Layout,
    options: &'a ReadOptions,
    lanes: Vec<Lane>,
    unit_power: i32,
    shift: Yoctoseconds,
    before: Option<Yoctoseconds>,
    before_text: Vec<u8>,
    least_step: Yoctoseconds,
    greatest_step: Yoctoseconds,
    last_place: i32,
    rows: u64,
    now_ns: u64,
    /// Some row says the same as the one before: the file holds samples and not only changes.
    repeats: bool,
    was_rounded: bool,
}

/// The beginning of a nanosecond as whole nanoseconds, if it is one that fits.
fn whole_ns(at: Yoctoseconds) -> Option<u64> {
    u64::try_from(at.div_euclid(PER_NS)).ok()
}

impl<'a> Rows<'a> {
    pub(super) fn new(layout: &'a Layout, chosen: &[usize], options: &'a ReadOptions) -> Self {
        let lane = |&column: &usize| {
            let volts = match layout.columns.get(column).and_then(|column| column.unit) {
                Some(Unit::Volts(unit)) => Some(unit),
                _ => None,
            };
            Lane {
                name: layout.name(column),
                column,
                unit: volts.unwrap_or_default(),
                is_volts: volts.is_some(),
                builder: TraceBuilder::new(options.unknown),
                before: None,
                first_number: None,
                range: VoltRange::default(),
            }
        };
        Self {
            layout,
            options,
            lanes: chosen.iter().map(lane).collect(),
            unit_power: match options.sample_period_ns {
                Some(_) => TimeUnit::Nanoseconds,
                None => layout.time_unit.unwrap_or(TimeUnit::Seconds),
            }
            .power_of_ten(),
            shift: 0,
            before: None,
            before_text: Vec::new(),
            least_step: Yoctoseconds::MAX,
            greatest_step: 0,
            last_place: 0,
            rows: 0,
            now_ns: 0,
            repeats: false,
            was_rounded: false,
        }
    }

    pub(super) fn read<R: Read>(&mut self, lines: &mut Lines<R>, faults: &mut Faults) -> io::Result<()> {
        let mut fields: Vec<Range<usize>> = Vec::new();
        while !faults.is_full() {
            let Some((number, line)) = lines.next()? else { break };
            if number < self.layout.first_row || is_skipped(line) {
                continue;
            }
            split(line, self.layout.delimiter, &mut fields);
            self.row(number, line, &fields, faults);
        }
        Ok(())
    }

    fn row(&mut self, number: u64, line: &[u8], fields: &[Range<usize>], faults: &mut Faults) {
        let place = |column: usize| Place { line: number, column: column as u64 + 1 };
        let needed =
            self.lanes.iter().map(|lane| lane.column).chain([self.layout.time_column]).max().unwrap_or(0);
        if fields.len() <= needed {
            let (has, needs) = (fields.len(), needed + 1);
            faults.at(place(line.len()), format!("the row has {has} of the {needs} fields that it needs"));
            faults.help("write what is missing, or take the row out");
            return;
        }
        let time = &fields[self.layout.time_column];
        if let Err(message) = self.time(&line[time.clone()]) {
            faults.at(place(time.start), message);
            return;
        }
        let mut is_repeat = true;
        for lane in &mut self.lanes {
            let field = &fields[lane.column];
            let cell = &line[field.clone()];
            let reading = match lane.reading(cell, place(field.start), self.layout, self.options) {
                Ok(reading) => reading,
                Err(message) => {
                    faults.at(place(field.start), message);
                    continue;
                }
            };
            is_repeat &= lane.before == Some(reading);
            lane.before = Some(reading);
            if lane.builder.record(self.now_ns, reading).is_err() {
                let cell = quoted(cell);
                faults.at(place(field.start), format!("channel {} has the unknown value {cell}", lane.name));
                faults.help(
                    "unknown values are to be refused here; they could be held, or count as open or closed",
                );
            }
        }
        self.repeats |= is_repeat;
    }

    /// Takes the time of a row, or says what is wrong with it.
    fn time(&mut self, cell: &[u8]) -> Result<(), String> {
        let read = number::time(cell, self.layout.mark, self.unit_power);
        let spaced = read.and_then(|time| match self.options.sample_period_ns {
            // The number of a sample was read as nanoseconds.
            Some(period_ns) => time.times(period_ns),
            None => Ok(time),
        });
        let time = spaced.map_err(|error| {
            format!("{} {}; a time is a number such as 0.001", quoted(cell), error.reason("a time"))
        })?;
        match self.before {
            None => {
                if time.at < 0 {
                    // Up by whole nanoseconds, so that the shift can be told exactly.
                    self.shift = (-time.at.div_euclid(PER_NS)) * PER_NS;
                }
                self.last_place = time.last_place;
            }
            Some(before) if time.at == before => {
                return Err(format!(
                    "time {} is also that of the row before it; export more digits of the times, or leave one of \
                     the two rows out",
                    quoted(cell).trim_matches('"')
                ));
            }
            Some(before) if time.at < before => {
                let before = String::from_utf8_lossy(&self.before_text).into_owned();
                return Err(format!(
                    "time {} is not later than the {before} before it; put the rows in the order of their times",
                    quoted(cell).trim_matches('"')
                ));
            }
            Some(before) => {
                self.least_step = self.least_step.min(time.at - before);
                self.greatest_step = self.greatest_step.max(time.at - before);
            }
        }
        let shifted = time.at.checked_add(self.shift).and_then(|at| Some((at, whole_ns(at)?)));
        let Some((at, now_ns)) = shifted else {
            return Err(format!("time {} exceeds the {} ns that fit 64 bits", quoted(cell), u64::MAX));
        };
        if self.before.is_none() {
            for lane in &mut self.lanes {
                lane.builder.start(now_ns);
            }
        }
        self.last_place = self.last_place.min(time.last_place);
        self.was_rounded |= at % PER_NS != 0;
        self.before = Some(time.at);
        self.before_text.clear();
        self.before_text.extend_from_slice(cell);
        self.now_ns = now_ns;
        self.rows += 1;
        Ok(())
    }

    /// Whether the rows are evenly spaced samples: steps that differ only as rounding makes them differ.
    fn is_sampled(&self) -> bool {
        self.rows >= 3
            && self.greatest_step <= self.least_step + self.least_step / 2
            && (self.repeats || self.options.thresholds.is_some())
    }

    /// The recorder's period: the greatest step of even samples, else the worth of the last digit of the times.
    fn resolution_ns(&self) -> u64 {
        let finest = if self.is_sampled() {
            self.greatest_step
        } else {
            let power = u32::try_from(self.last_place + 24).ok();
            power.and_then(|power| 10_i128.checked_pow(power)).unwrap_or(1)
        };
        whole_ns(finest + PER_NS - 1).unwrap_or(u64::MAX).max(1)
    }

    pub(super) fn finish(self, faults: &mut Faults) -> Vec<Recording> {
        if self.rows == 0 {
            faults.whole_file("holds no row that can be read");
            return Vec::new();
        }
        // Each of even samples stands for one period, the last one too.
        let tail_ns = if self.is_sampled() { whole_ns(self.least_step).unwrap_or(0) } else { 0 };
        let end_ns = self.now_ns.saturating_add(tail_ns);
        let stated = self.options.resolution_ns.or(self.options.sample_period_ns);
        let resolution_ns = stated.unwrap_or_else(|| self.resolution_ns());
        let period = match stated {
            Some(_) => SamplePeriod::Stated,
            None if self.is_sampled() => SamplePeriod::Spacing,
            None => SamplePeriod::Digits,
        };
        let shift = whole_ns(self.shift).filter(|&by_ns| by_ns > 0).map(|by_ns| Note::Shifted { by_ns });
        let is_assumed = self.layout.time_unit.is_none() && self.options.sample_period_ns.is_none();
        let assumed = is_assumed.then_some(Note::SecondsAssumed);
        let preamble = Some(self.layout.preamble)
            .filter(|&lines| lines > 0)
            .map(|lines| Note::PreambleSkipped { lines });
        let rounded = self.was_rounded.then_some(Note::RoundedTimes);
        let mut recordings = Vec::new();
        for lane in self.lanes {
            if lane.lacks_thresholds(self.options.thresholds, &self.layout.channels(), faults) {
                continue;
            }
            // What is wrong with each cell stands in the list already.
            if let Some(pair) = self.options.thresholds
                && (!faults.is_empty()
                    || lane.range.misses(&lane.name, pair, &self.layout.channels(), faults))
            {
                continue;
            }
            let clipped = Some(lane.range.clipped()).filter(|&readings| readings > 0);
            let clipped = clipped.map(|readings| Note::Clipped { readings });
            match lane.builder.finish(end_ns, resolution_ns) {
                Some((trace, mut notes)) => {
                    notes.extend([shift, assumed, preamble, rounded, clipped].into_iter().flatten());
                    recordings.push(Recording { channel: lane.name, trace, period, notes });
                }
                None if !faults.is_empty() => {}
                None => faults.whole_file(format!("channel {} never has a known value", lane.name)),
            }
        }
        recordings
    }
}

impl Lane {
    fn reading(
        &mut self,
        cell: &[u8],
        place: Place,
        layout: &Layout,
        options: &ReadOptions,
    ) -> Result<Reading, String> {
        let known = |level| Reading::Known(options.polarity.position(level));
        if let Some(thresholds) = options.thresholds {
            let volts = match number::beyond_range(cell) {
                Some(volts) => volts,
                None => self.unit.volts(number::real(cell, layout.mark).map_err(|error| {
                    format!(
                        "{} {}; a voltage is a number such as 3.3",
                        quoted(cell),
                        error.reason("a voltage")
                    )
                })?),
            };
            self.range
                .see(volts)
                .map_err(|why| format!("{} {why}; a voltage is a number such as 3.3", quoted(cell)))?;
            return Ok(thresholds.level(volts).map_or(Reading::Between, known));
        }
        if self.is_volts && number::beyond_range(cell).is_some() {
            self.first_number.get_or_insert(place);
            return Ok(Reading::Between);
        }
        let cell = cell::parse(cell, layout.mark).map_err(|error| {
            let (wanted, instead) = match self.is_volts {
                true => ("a voltage", "a voltage is a number such as 3.3"),
                false => ("a level", "use 0 or 1, or low or high"),
            };
            format!("{} {}; {instead}", quoted(cell), error.reason(wanted))
        })?;
        let (reading, number) = match cell {
            Cell::Unknown => return Ok(Reading::Unknown),
            Cell::Level(level) => (known(level), f64::from(u8::from(level == crate::trace::Level::High))),
            Cell::Number(number) => (Reading::Between, number),
        };
        // Without thresholds the range only serves the message that asks for them.
        let _ = self.range.see(self.unit.volts(number));
        if self.is_volts || matches!(cell, Cell::Number(_)) {
            self.first_number.get_or_insert(place);
        }
        Ok(reading)
    }

    /// Says so when the column holds voltages and there is nothing to turn them into levels.
    fn lacks_thresholds(
        &self,
        thresholds: Option<Thresholds>,
        channels: &[Channel],
        faults: &mut Faults,
    ) -> bool {
        let Some(place) = self.first_number.filter(|_| thresholds.is_none()) else { return false };
        let (name, least, greatest) = (&self.name, self.range.least, self.range.greatest);
        let holds = format!("channel {name} holds voltages, from {least} V to {greatest} V");
        faults.at(
            place,
            match is_noise(least, greatest) {
                true => format!("{holds}, which look like noise"),
                false => format!("{holds}; levels need two thresholds"),
            },
        );
        propose(name, (least, greatest), channels, faults);
        true
    }
}
