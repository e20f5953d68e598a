//! From the text of a requirement file to a [`Requirement`], or to everything that is wrong with it.

use std::collections::HashMap;
use std::fs;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use debounce_core::{PerChange, PerPosition};
use toml::de::{DeTable, DeValue};

use super::check::check;
use super::network;
use super::section::{Reader, Section};
use super::{
    Budget, Clock, Contact, Figures, Level, Reading, Recording, Requirement, Sourced, Thresholds, TickChoice,
};
use super::{firmware, folder_of};
use crate::problem::{Problem, Problems, SourceText, plain_reason};
use crate::quantity::{Quantity, TickPeriod, Time, Voltage};

/// A requirement file is written by hand; anything larger than this is something else.
const MOST_BYTES: u64 = 1 << 20;

/// Reads a requirement file.
///
/// # Errors
/// Everything that is wrong with it, each with its place and what to write instead.
pub fn read(path: &Path) -> Result<Requirement, Problems> {
    parse(SourceText::new(path, load(path, &REQUIREMENT)?))
}

/// What the messages say about a file of one sort that cannot be read.
pub(crate) struct FileSort {
    /// What it is called: "requirement".
    pub(crate) what: &'static str,
    /// What to do where it is not there.
    pub(crate) missing: &'static str,
    /// What to do where it is far too large.
    pub(crate) too_large: &'static str,
    /// How such a file begins.
    pub(crate) begins: &'static str,
    /// The least to write in it.
    pub(crate) least: &'static str,
}

const REQUIREMENT: FileSort = FileSort {
    what: "requirement",
    missing: "check the path; every value can be given as an option, too",
    too_large: "recordings are given apart from it, under [[recording]] or as arguments",
    begins: "a requirement file begins with [contact], recordings are given apart",
    least: "write at least [required] with latency = \"20 ms\"",
};

/// The text of a file that is written by hand.
pub(crate) fn load(path: &Path, sort: &FileSort) -> Result<String, Problem> {
    let what = sort.what;
    let unreadable = |error: std::io::Error| {
        let help = match error.kind() {
            std::io::ErrorKind::NotFound => sort.missing.to_owned(),
            std::io::ErrorKind::IsADirectory => format!("give the {what} file in this folder"),
            _ => "make the file readable".to_owned(),
        };
        Problem::new(format!("the {what} cannot be read: {}", plain_reason(&error))).in_file(path).help(help)
    };
    let size = fs::metadata(path).map_err(unreadable)?.len();
    if size > MOST_BYTES {
        return Err(Problem::new(format!("{size} bytes are too many for a {what} file"))
            .in_file(path)
            .help(sort.too_large));
    }
    let bytes = fs::read(path).map_err(unreadable)?;
    let text = String::from_utf8(bytes).map_err(|error| {
        let at = error.utf8_error().valid_up_to();
        let before = &error.as_bytes()[..at];
        let line = before.iter().filter(|&&byte| byte == b'\n').count() + 1;
        let start = before.iter().rposition(|&byte| byte == b'\n').map_or(0, |newline| newline + 1);
        let column = String::from_utf8_lossy(&before[start..]).chars().count() + 1;
        Problem::new(format!("the {what} is not text in UTF-8"))
            .at(path, line, column)
            .help(format!("this looks like another sort of file; {}", sort.begins))
    })?;
    if text.trim().is_empty() {
        return Err(Problem::new(format!("the {what} file is empty")).in_file(path).help(sort.least));
    }
    Ok(text)
}

/// Reads the text of a requirement file; paths in it are relative to the folder of the file.
///
/// # Errors
/// Everything that is wrong with it, each with its place and what to write instead.
pub fn parse(source: Arc<SourceText>) -> Result<Requirement, Problems> {
    let (root, broken) = DeTable::parse_recoverable(source.text());
    let problems = broken.iter().map(|error| syntax(&source, error)).collect();
    let mut reader = Reader { source: Arc::clone(&source), problems };
    // After a syntax error the table is a guess: complaints about it would be noise.
    if let Some(problems) = Problems::from_found(std::mem::take(&mut reader.problems)) {
        return Err(problems);
    }
    let requirement = requirement(&mut reader, root.get_ref());
    reader.problems.extend(check(&requirement));
    match Problems::from_found(reader.problems) {
        Some(problems) => Err(problems),
        None => Ok(requirement),
    }
}

fn syntax(source: &Arc<SourceText>, error: &toml::de::Error) -> Problem {
    let message = error.message().lines().next().unwrap_or("not a requirement file").to_owned();
    let end = source.text().len();
    let span = error.span().unwrap_or(end..end);
    let help = match message.as_str() {
        "duplicate key" => "every key stands once; several recordings are each written under [[recording]]",
        _ => "every line is a section such as [required], or a key and a value such as latency = \"20 ms\"",
    };
    Problem::new(message).mark(source, span, "").help(help)
}

fn requirement<'t>(reader: &mut Reader, root: &'t DeTable<'t>) -> Requirement {
    let mut root = Section::new("", root);
    let mut requirement = Requirement { source: Some(Arc::clone(&reader.source)), ..Requirement::default() };
    if let Some(section) = reader.section(&mut root, "contact") {
        requirement.contact = contact(reader, section);
    }
    for section in reader.sections(&mut root, "recording") {
        requirement.recordings.extend(recording(reader, section));
    }
    duplicates(reader, &requirement.recordings);
    if let Some(mut section) = reader.section(&mut root, "required") {
        requirement.required = figures(reader, &mut section);
        requirement.confidence = reader.quantity(&mut section, "confidence");
        requirement.coverage = reader.quantity(&mut section, "coverage");
        requirement.margin = reader.quantity(&mut section, "margin");
        reader.finish(section);
    }
    if let Some(section) = reader.section(&mut root, "clock") {
        requirement.clock = clock(reader, section);
    }
    if let Some(mut section) = reader.section(&mut root, "budget") {
        let ram = reader.quantity(&mut section, "ram");
        let fastest_tick = reader.quantity(&mut section, "fastest_tick");
        let instructions = reader.quantity(&mut section, "instructions");
        let core = reader.word(&mut section, "core");
        requirement.budget = Budget { ram, fastest_tick, instructions, core };
        reader.finish(section);
    }
    if let Some(section) = reader.section(&mut root, "network") {
        requirement.network = Some(network::read(reader, section));
    }
    if let Some(section) = reader.section(&mut root, "firmware") {
        requirement.firmware = firmware::read(reader, section);
    }
    reader.finish(root);
    requirement
}

fn contact(reader: &mut Reader, mut section: Section<'_>) -> Contact {
    let contact = Contact {
        name: reader.text(&mut section, "name", "sluice gate, upper end"),
        kind: reader.word(&mut section, "kind"),
        role: reader.word(&mut section, "role"),
        closed: reader.word(&mut section, "closed"),
    };
    reader.finish(section);
    contact
}

fn recording(reader: &mut Reader, mut section: Section<'_>) -> Option<Recording> {
    let missing = reader.source.text().len();
    let has_path = section.take("path").map(|value| value.span());
    let path = reader.text(&mut section, "path", "gate.vcd");
    let channel = reader.text(&mut section, "channel", "top.gate");
    let closed: Option<Sourced<Level>> = reader.word(&mut section, "closed");
    let taken_at = reader.word(&mut section, "taken_at");
    let thresholds = thresholds(reader, &mut section);
    let reading = Reading::read(reader, &mut section);
    let sha256 = sha256(reader, &mut section);
    if has_path.is_none() {
        // Point at something of this recording, else at the end of the file.
        let near = channel.as_ref().and_then(|channel| channel.origin.span()).unwrap_or(missing..missing);
        reader.problem(near, "a recording has no path", "write path = \"gate.vcd\" under [[recording]]");
    }
    reader.finish(section);
    let folder = folder_of(&reader.source);
    let path: Sourced<PathBuf> = path?.map(|path| folder.join(path));
    Some(Recording { path, channel, thresholds, closed, taken_at, reading, sha256 })
}

fn sha256(reader: &mut Reader, section: &mut Section<'_>) -> Option<Sourced<String>> {
    const EXAMPLE: &str = "9f86d081884c7d659a2feaa0c55ad015a3bf4f1b2b0b822cd15d6c15b0f00a08";
    let text = reader.text(section, "sha256", EXAMPLE)?;
    if text.value.len() == EXAMPLE.len() && text.value.bytes().all(|digit| digit.is_ascii_hexdigit()) {
        return Some(text.map(|digits| digits.to_lowercase()));
    }
    let span = text.origin.span().unwrap_or_default();
    reader.problem(
        span,
        "a SHA-256 has 64 hexadecimal digits",
        "write what `sha256sum` prints, or leave it out: `harness recheck` prints it, too",
    );
    None
}

fn thresholds(reader: &mut Reader, section: &mut Section<'_>) -> Option<Sourced<Thresholds>> {
    const EXAMPLE: &str = "thresholds = { low = \"0.8 V\", high = \"2.0 V\" }";
    let value = section.take("thresholds")?;
    let DeValue::Table(table) = value.get_ref() else {
        reader.problem(value.span(), "thresholds are two voltages", format!("write {EXAMPLE}"));
        return None;
    };
    let mut inner = Section::new("thresholds", table);
    let present = table.contains_key("low") && table.contains_key("high");
    let low = reader.quantity::<Voltage>(&mut inner, "low");
    let high = reader.quantity::<Voltage>(&mut inner, "high");
    reader.finish(inner);
    if !present {
        reader.problem(value.span(), "thresholds are two voltages, low and high", format!("write {EXAMPLE}"));
    }
    let (low, high) = (low?.value, high?.value);
    if low >= high {
        let message = format!("the low threshold {low} is not below the high threshold {high}");
        reader.problem(
            value.span(),
            message,
            "between the two the line keeps its level; write low below high",
        );
        return None;
    }
    Some(Sourced::new(Thresholds { low, high }, reader.origin(value.span())))
}

/// The same channel of the same file counts its operations twice, which makes claims look surer than they are.
fn duplicates(reader: &mut Reader, recordings: &[Recording]) {
    let mut seen: HashMap<(&Path, Option<&str>), &Recording> = HashMap::new();
    for recording in recordings {
        let channel = recording.channel.as_ref().map(|channel| channel.value.as_str());
        let Some(first) = seen.insert((&recording.path.value, channel), recording) else { continue };
        let (Some(again), Some(before)) = (recording.path.origin.span(), first.path.origin.span()) else {
            continue;
        };
        let problem = Problem::new("the same recording is given twice")
            .mark(&reader.source, again, "again here")
            .mark(&reader.source, before, "first here")
            .help("take one of them out, or give each its own channel");
        reader.problems.push(problem);
    }
}

fn figures(reader: &mut Reader, section: &mut Section<'_>) -> Figures<Option<Sourced<Time>>> {
    let changes = |[make, break_]: [_; 2]| PerChange { make, break_ };
    let positions = |[open, closed]: [_; 2]| PerPosition { open, closed };
    Figures {
        latency: changes(reader.pair(section, "latency", ["make", "break"])),
        shortest: PerPosition {
            closed: reader.quantity(section, "shortest_closed"),
            open: reader.quantity(section, "shortest_open"),
        },
        bounce: changes(reader.pair(section, "bounce", ["make", "break"])),
        disturbance: positions(reader.pair(section, "disturbance", ["open", "closed"])),
        quiet: reader.quantity(section, "quiet"),
        calm: reader.quantity(section, "calm"),
    }
}

fn clock(reader: &mut Reader, mut section: Section<'_>) -> Clock {
    let ticks = ticks(reader, &mut section);
    let clock = Clock {
        ticks,
        tolerance: reader.quantity(&mut section, "tolerance"),
        jitter: reader.quantity(&mut section, "jitter"),
        lost: reader.quantity(&mut section, "lost"),
    };
    reader.finish(section);
    clock
}

fn ticks(reader: &mut Reader, section: &mut Section<'_>) -> Option<Sourced<TickChoice>> {
    let value = section.take("tick")?;
    let origin = reader.origin(value.span());
    let choice = match value.get_ref() {
        DeValue::Table(table) => {
            let mut inner = Section::new("tick", table);
            let present = table.contains_key("from") && table.contains_key("to");
            let from = reader.quantity::<TickPeriod>(&mut inner, "from");
            let to = reader.quantity::<TickPeriod>(&mut inner, "to");
            reader.finish(inner);
            if !present {
                let help = "write tick = { from = \"500 us\", to = \"5 ms\" }";
                reader.problem(value.span(), "a range of tick periods has two ends, from and to", help);
            }
            let (from, to) = (from?.value, to?.value);
            TickChoice::Range(from.min(to), from.max(to))
        }
        DeValue::Array(items) => {
            let mut periods: Vec<TickPeriod> = Vec::new();
            for item in items {
                let Some(period) = reader.quantity_of::<TickPeriod>(item) else { continue };
                if periods.contains(&period.value) {
                    let message = format!("the tick period {} is given twice", period.value);
                    reader.problem(item.span(), message, "write each tick period once");
                }
                periods.push(period.value);
            }
            if items.is_empty() {
                let help = format!("write tick = [\"{}\"]", TickPeriod::EXAMPLE);
                reader.problem(value.span(), "the list of tick periods is empty", help);
            }
            TickChoice::OneOf(periods)
        }
        _ => TickChoice::OneOf(vec![reader.quantity_of::<TickPeriod>(value)?.value]),
    };
    Some(Sourced::new(choice, origin))
}
