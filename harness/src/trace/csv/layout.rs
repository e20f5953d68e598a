//! Finds out how a file of rows is laid out: delimiter, decimal mark, where the data begin, which columns.
//!
//! A *row* is a line with at least two cells that read as numbers or levels, one of them a number. The
//! delimiter and decimal mark that make the most rows are taken, and of equals those that leave the fewest
//! cells unread. Everything before the first row is preamble, everything after must be rows.

use std::ops::Range;

use super::cell::{self, Cell};
use super::header::{Column, Unit, unit_cell};
use super::line::{decoded, is_skipped, split};
use super::number::{self, Yoctoseconds};
use crate::nearest::nearest_scoped;
use crate::quantity::counted;
use crate::raw_input::quoted;
use crate::trace::channel::listed;
use crate::trace::error::{Faults, Lack};
use crate::trace::{Channel, ChannelKind, DecimalMark, Delimiter, ReadOptions, TimeUnit};

/// How a file is laid out.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Layout {
    pub(super) delimiter: Delimiter,
    pub(super) mark: DecimalMark,
    /// Number of the line of the first row, from 1.
    pub(super) first_row: u64,
    /// Lines before the data that are neither blank nor the header.
    pub(super) preamble: u64,
    pub(super) time_column: usize,
    pub(super) time_unit: Option<TimeUnit>,
    /// Whether the times of the rows seen are all whole numbers, and so might be in any unit.
    pub(super) times_are_whole: bool,
    /// For each column what the header says; with no header as many as the first rows have, without names.
    pub(super) columns: Vec<Column>,
    /// The columns that can be channels, in order.
    pub(super) candidates: Vec<(usize, ChannelKind)>,
}

/// Of fewer lines than this nobody can say that most of them are no rows.
const FEWEST_LINES: usize = 6;

/// The beginning of a file, as far as it shows the layout.
struct Sample<'a> {
    lines: Vec<&'a [u8]>,
    delimiter: Delimiter,
    mark: DecimalMark,
}

impl<'a> Sample<'a> {
    fn cells(&self, index: usize) -> Vec<&'a [u8]> {
        let line = self.lines[index];
        let mut fields: Vec<Range<usize>> = Vec::new();
        split(line, self.delimiter, &mut fields);
        fields.into_iter().map(|field| &line[field]).collect()
    }

    fn reads(&self, cell: &[u8]) -> bool {
        cell::parse(cell, self.mark).is_ok() || number::beyond_range(cell).is_some()
    }

    fn is_row(&self, index: usize) -> bool {
        if is_skipped(self.lines[index]) {
            return false;
        }
        let cells = self.cells(index);
        cells.iter().filter(|cell| self.reads(cell)).count() >= 2
            && cells.iter().any(|cell| number::is_number(cell, self.mark))
    }

    fn rows(&self) -> Vec<usize> {
        (0..self.lines.len()).filter(|&index| self.is_row(index)).collect()
    }

    /// How many rows there are, and how many of them read in every cell.
    fn score(&self) -> (usize, usize) {
        let rows = self.rows();
        let is_whole = |&&row: &&usize| {
            self.cells(row).iter().filter(|cell| !cell.is_empty()).all(|cell| self.reads(cell))
        };
        (rows.len(), rows.iter().filter(is_whole).count())
    }

    /// Whether this is some other text, such as a script, with numbers in it: from the first row on most lines are
    /// none, and nobody said how they are to be read. A recording gone bad has a header or more good rows than that.
    fn is_other_text(&self, rows: &[usize], options: &ReadOptions) -> bool {
        let Some(&first) = rows.first().filter(|_| options.time_column.is_none()) else { return false };
        let lines = (first..self.lines.len()).filter(|&line| !is_skipped(self.lines[line])).count();
        let (header, _) = header_above(self, first, self.rising_column(rows));
        rows.len() * 2 < lines && lines >= FEWEST_LINES && !header.iter().any(Column::is_time)
    }

    fn time(&self, cell: &[u8]) -> Option<Yoctoseconds> {
        number::time(cell, self.mark, 0).ok().map(|time| time.at)
    }

    /// The column whose numbers rise most often from row to row; of equals the first.
    fn rising_column(&self, rows: &[usize]) -> usize {
        let columns = rows.iter().map(|&row| self.cells(row).len()).max().unwrap_or(0);
        let mut before: Vec<Option<Yoctoseconds>> = vec![None; columns];
        let mut rises = vec![0_usize; columns];
        for &row in rows {
            for (column, cell) in self.cells(row).into_iter().enumerate() {
                let Some(value) = self.time(cell) else { continue };
                // The first number counts too, so that a single row shows its first number as its time.
                rises[column] += usize::from(before[column].is_none_or(|before| value > before));
                before[column] = Some(value);
            }
        }
        (0..columns).rev().max_by_key(|&column| rises[column]).unwrap_or(0)
    }
}

/// Works out the layout from the beginning of the file.
pub(super) fn detect(lines: Vec<&[u8]>, options: &ReadOptions, faults: &mut Faults) -> Option<Layout> {
    let sample = best_dialect(lines, options);
    let rows = sample.rows();
    if rows.is_empty() {
        faults.whole_file("holds no row of a time and a level");
        faults.help("a row is a time and a level or a voltage, as in \"0.001,1\"; give the delimiter if it is unusual");
        faults.lack(Lack::Delimiter);
        return None;
    }
    if sample.is_other_text(&rows, options) {
        let lines = sample.lines.iter().filter(|line| !is_skipped(line)).count();
        faults.whole_file(format!(
            "is no recording that this reads: of its first {} only {} a time and a level",
            counted(lines as u64, "line"),
            if rows.len() == 1 { "1 looks like".to_owned() } else { format!("{} look like", rows.len()) }
        ));
        faults.help(
            "a recording is a VCD, a CSV with a time and a level or a voltage in each row, as in \"0.001,1\", or the \
             text of the firmware's own recorder",
        );
        return None;
    }
    let guess = sample.rising_column(&rows);
    let first = first_row(&sample, &rows, guess);
    let (columns, header) = header_above(&sample, first, guess);
    let columns = pad(columns, &sample, &rows);
    let time_column = match &options.time_column {
        Some(wanted) => find(&columns, wanted).or_else(|| {
            no_column("time column", wanted, &columns, |_| Lack::TimeColumn, faults);
            None
        })?,
        None => columns.iter().position(Column::is_time).unwrap_or(guess),
    };
    let first = header.last().map_or_else(|| first_row(&sample, &rows, time_column), |last| last + 1);
    let rows: Vec<usize> = rows.into_iter().filter(|&row| row >= first).collect();
    let time_unit = options.time_unit.or(match columns.get(time_column).and_then(|column| column.unit) {
        Some(Unit::Time(unit)) => Some(unit),
        _ => None,
    });
    let is_whole = |cell: &[u8]| cell.iter().all(|byte| byte.is_ascii_digit() || matches!(byte, b'+' | b'-'));
    let times_are_whole =
        rows.iter().all(|&row| sample.cells(row).get(time_column).is_none_or(|cell| is_whole(cell)));
    let preamble =
        (0..first).filter(|line| !header.contains(line) && !is_skipped(sample.lines[*line])).count();
    let candidates = candidates(&sample, &rows, &columns, time_column);
    Some(Layout {
        delimiter: sample.delimiter,
        mark: sample.mark,
        first_row: first as u64 + 1,
        preamble: preamble as u64,
        time_column,
        time_unit,
        times_are_whole,
        columns,
        candidates,
    })
}

fn best_dialect<'a>(lines: Vec<&'a [u8]>, options: &ReadOptions) -> Sample<'a> {
    use DecimalMark as Mark;
    // The rarer a delimiter is inside text, the earlier it stands: of equals the first is taken.
    let dialects = [
        (Delimiter::Tab, Mark::Point),
        (Delimiter::Tab, Mark::Comma),
        (Delimiter::Semicolon, Mark::Point),
        (Delimiter::Semicolon, Mark::Comma),
        (Delimiter::Comma, Mark::Point),
        (Delimiter::Space, Mark::Point),
        (Delimiter::Space, Mark::Comma),
        // Only legible with quoted cells, hence last.
        (Delimiter::Comma, Mark::Comma),
    ];
    let mut best = Sample {
        lines,
        delimiter: options.delimiter.unwrap_or(Delimiter::Comma),
        mark: options.decimal_mark.unwrap_or(Mark::Point),
    };
    let mut best_score = (0, 0);
    for (delimiter, mark) in dialects {
        if options.delimiter.is_some_and(|given| given != delimiter)
            || options.decimal_mark.is_some_and(|given| given != mark)
        {
            continue;
        }
        let sample = Sample { lines: std::mem::take(&mut best.lines), delimiter, mark };
        let score = sample.score();
        if score > best_score {
            best_score = score;
            best = sample;
        } else {
            best.lines = sample.lines;
        }
    }
    best
}

/// The first row whose time reads.
fn first_row(sample: &Sample<'_>, rows: &[usize], time_column: usize) -> usize {
    let reads = |&&row: &&usize| {
        sample.cells(row).get(time_column).is_some_and(|cell| number::is_number(cell, sample.mark))
    };
    rows.iter().find(reads).or(rows.first()).copied().unwrap_or(0)
}

/// The names and units of the columns, and the lines they stand in.
fn header_above(sample: &Sample<'_>, first: usize, time_column: usize) -> (Vec<Column>, Vec<usize>) {
    let cells = |line: usize| {
        // A header may be marked as a comment.
        let text = sample.lines[line];
        let bare = text.trim_ascii_start();
        let bare = bare.strip_prefix(b"#").or(bare.strip_prefix(b";")).unwrap_or(text);
        let mut fields = Vec::new();
        split(bare, sample.delimiter, &mut fields);
        fields.into_iter().map(|field| &bare[field]).collect::<Vec<_>>()
    };
    let above = |line: usize| (0..line).rev().find(|&line| !sample.lines[line].trim_ascii().is_empty());
    let names =
        |line: usize| cells(line).iter().map(|cell| Column::parse(&decoded(cell))).collect::<Vec<_>>();
    let Some(last) = above(first) else { return Default::default() };
    let last_cells = cells(last);
    if last_cells.len() < 2 {
        return Default::default();
    }
    // Columns that the rows do not have hold something about the whole record, such as its start.
    let row_cells = sample.cells(first);
    let width = row_cells.iter().rposition(|cell| !cell.is_empty()).map_or(0, |last| last + 1);
    let (own, beyond) = last_cells.split_at(width.min(last_cells.len()));
    let holds_values = beyond.iter().any(|cell| number::is_number(cell, sample.mark));
    if holds_values
        && let Some(names_line) = above(last).filter(|&line| cells(line).len() == last_cells.len())
    {
        let is_name = |cell: &&[u8]| !cell.is_empty() && !number::is_number(cell, sample.mark);
        if cells(names_line).iter().take(width).all(is_name) {
            let mut columns: Vec<Column> = names(names_line).into_iter().take(width).collect();
            for (column, cell) in columns.iter_mut().zip(own) {
                column.unit = unit_cell(cell).flatten().or(column.unit);
            }
            return (columns, vec![names_line, last]);
        }
    }
    let units: Option<Vec<_>> = own.iter().map(|cell| unit_cell(cell)).collect();
    if let Some(units) = units.filter(|units| units.iter().any(Option::is_some)) {
        let names_line = above(last).filter(|&line| cells(line).len() > time_column);
        let mut columns = names_line.map_or_else(Vec::new, names);
        columns.resize(columns.len().max(units.len()), Column::default());
        for (column, unit) in columns.iter_mut().zip(units) {
            column.unit = unit.or(column.unit);
        }
        return (columns, names_line.into_iter().chain([last]).collect());
    }
    let columns = names(last);
    if !columns.iter().any(Column::is_time)
        && let Some(earlier) = (0..last).rev().find(|&line| {
            cells(line).len() == last_cells.len()
                && !sample.is_row(line)
                && names(line).iter().any(Column::is_time)
        })
    {
        // What lies between is no preamble but rows gone bad, and they must be said to be.
        return (names(earlier), vec![earlier]);
    }
    let is_named = columns.iter().any(Column::is_time)
        || !last_cells.iter().any(|cell| number::is_number(cell, sample.mark)) && columns.len() > time_column;
    if is_named { (columns, vec![last]) } else { Default::default() }
}

/// One entry for each column that the rows have.
fn pad(mut columns: Vec<Column>, sample: &Sample<'_>, rows: &[usize]) -> Vec<Column> {
    let width = rows.iter().map(|&row| sample.cells(row).len()).max().unwrap_or(0);
    columns.resize(columns.len().max(width), Column::default());
    columns
}

/// The columns that read in at least half of the rows, but for the times.
fn candidates(
    sample: &Sample<'_>,
    rows: &[usize],
    columns: &[Column],
    time_column: usize,
) -> Vec<(usize, ChannelKind)> {
    let mut found = Vec::new();
    for (index, column) in columns.iter().enumerate().filter(|&(index, _)| index != time_column) {
        let mut read = 0;
        let mut kind = if matches!(column.unit, Some(Unit::Volts(_))) {
            ChannelKind::Volts
        } else {
            ChannelKind::Levels
        };
        for &row in rows {
            match sample.cells(row).get(index).map(|cell| cell::parse(cell, sample.mark)) {
                Some(Ok(Cell::Number(_))) => {
                    read += 1;
                    kind = ChannelKind::Volts;
                }
                Some(Ok(_)) => read += 1,
                _ => {}
            }
        }
        if 2 * read >= rows.len() {
            found.push((index, kind));
        }
    }
    found
}

/// A column by name, as written or without its unit, else by its number from 1.
fn find(columns: &[Column], wanted: &str) -> Option<usize> {
    let wanted = wanted.trim();
    let by = |matches: &dyn Fn(&Column) -> bool| columns.iter().position(matches);
    by(&|column| column.full == wanted)
        .or_else(|| by(&|column| column.name == wanted))
        .or_else(|| by(&|column| column.name.eq_ignore_ascii_case(wanted)))
        .or_else(|| {
            let number: usize = wanted.strip_prefix("column").unwrap_or(wanted).trim().parse().ok()?;
            number.checked_sub(1).filter(|&index| index < columns.len())
        })
}

fn no_column(
    what: &str,
    wanted: &str,
    columns: &[Column],
    lack: impl FnOnce(Option<String>) -> Lack,
    faults: &mut Faults,
) {
    let names: Vec<String> = (0..columns.len()).map(|index| name_of(columns, index)).collect();
    let mut message = format!("has no {what} {}", quoted(wanted.as_bytes()));
    let near = nearest_scoped(wanted, names.iter().map(String::as_str));
    if let Some(near) = near {
        message.push_str(&format!("; did you mean \"{near}\"?"));
    }
    faults.lack(lack(near.map(str::to_owned)));
    faults.whole_file(message);
    faults.help(format!("the columns are: {}; a number from 1 does as well", names.join(", ")));
}

fn name_of(columns: &[Column], index: usize) -> String {
    match columns.get(index) {
        Some(column) if !column.name.is_empty() => column.name.clone(),
        _ => format!("column {}", index + 1),
    }
}

impl Layout {
    /// The name of a column, or its number.
    pub(super) fn name(&self, index: usize) -> String {
        name_of(&self.columns, index)
    }

    pub(super) fn channels(&self) -> Vec<Channel> {
        self.candidates.iter().map(|&(index, kind)| Channel { name: self.name(index), kind }).collect()
    }

    /// The column of a channel; with no name, that of the only one.
    pub(super) fn select(&self, wanted: Option<&str>, faults: &mut Faults) -> Option<usize> {
        match (wanted, self.candidates.as_slice()) {
            (Some(wanted), _) => match find(&self.columns, wanted) {
                Some(index) if index == self.time_column => {
                    faults.whole_file(format!("{} is the column of times", quoted(wanted.as_bytes())));
                    faults.help(format!("the channels are: {}", listed(&self.channels())));
                    None
                }
                Some(index) => Some(index),
                None => {
                    no_column("channel", wanted, &self.columns, |such_as| Lack::Channel { such_as }, faults);
                    None
                }
            },
            (None, [(only, _)]) => Some(*only),
            (None, []) => {
                faults.whole_file("has no column of levels or voltages beside the times");
                faults.help("a row is a time and a level or a voltage, as in \"0.001,1\"");
                None
            }
            (None, several) => {
                faults.whole_file(format!("has {} channels; choose one", several.len()));
                faults.help(format!("the channels are: {}", listed(&self.channels())));
                faults.lack(Lack::Channel { such_as: several.first().map(|&(index, _)| self.name(index)) });
                None
            }
        }
    }
}
