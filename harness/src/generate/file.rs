//! Scenarios as files: contacts, what is done to them, and what their lines pick up.
//!
//! ```toml
//! [scenario]
//! seed = 7
//! resolution = "1 us"              # the recorder's sample period
//!
//! [input]                          # of every line; may be left out
//! supply = "3.3 V"
//! thresholds = { low = "0.8 V", high = "2.0 V" }
//! time_constant = { open = "200 us", closed = "100 us" }
//!
//! [[contact]]
//! name = "vent"
//! preset = "tactile"               # harness generate --list shows them
//! specimen = 3                     # which part of that kind
//! worn = "20 %"                    # share of its rated life that is over
//! make = { first_flight = ["200 us", "240 us"], restitution = ["30 %", "50 %"] }
//!
//! [[operation]]
//! contact = "vent"                 # every contact without it
//! habit = "taps"                   # presses, taps, fastest-taps, double-taps, holds, typing
//! count = 60
//! actuation = "slow"               # slow, usual, fast
//! closed = ["80 ms", "120 ms"]     # over what the habit says; so are open and pause
//!
//! [[disturbance]]
//! kind = "fast-transients"         # pulses, vibration, fast-transients, discharge, mains, cross-talk
//! rate = "100 kHz"
//! peak = "4 V"                     # what reaches the line
//! every = "300 ms"                 # at any time; or share = "25 %" of the dwells, with clear or after
//! ```
//!
//! Every operation is done to every contact and every disturbance reaches every line, unless it names one.

mod contact;
mod disturbance;
mod values;

use std::path::Path;
use std::sync::Arc;

use toml::de::DeTable;

use super::panel::{Panel, PanelContact};
use super::routine::{Habit, Routine};
use super::stage::InputStage;
use crate::nearest::nearest;
use crate::problem::{Problem, Problems, SourceText};
use crate::quantity::{Time, Voltage};
use crate::requirement::read::{FileSort, load};
use crate::requirement::section::{Reader, Section};
use values::{Count, between, choice, integer};

const SCENARIO: FileSort = FileSort {
    what: "scenario",
    missing: "check the path; harness generate --list names the presets that need no file",
    too_large: "recordings come out of a scenario and do not go into it",
    begins: "a scenario file begins with [scenario]",
    least: "write at least [[contact]] with name and preset, and [[operation]] with habit and count",
};

/// The most operations of one scenario: more would not fit into memory.
pub const MOST_OPERATIONS: u64 = 2_000_000;

/// Reads a scenario file; `seed` stands over the one in the file.
///
/// # Errors
/// Everything that is wrong with it, each with its place and what to write instead.
pub fn read(path: &Path, seed: Option<u64>) -> Result<Panel, Problems> {
    parse(SourceText::new(path, load(path, &SCENARIO)?), seed)
}

/// Reads the text of a scenario file; `seed` stands over the one in the text.
///
/// # Errors
/// Everything that is wrong with it, each with its place and what to write instead.
pub fn parse(source: Arc<SourceText>, seed: Option<u64>) -> Result<Panel, Problems> {
    let (root, broken) = DeTable::parse_recoverable(source.text());
    let problems = broken.iter().map(|error| syntax(&source, error)).collect();
    // After a syntax error the table is a guess: complaints about it would be noise.
    if let Some(problems) = Problems::from_found(problems) {
        return Err(problems);
    }
    let mut reader = Reader { source: Arc::clone(&source), problems: Vec::new() };
    let panel = panel(&mut reader, root.get_ref(), seed);
    match Problems::from_found(reader.problems) {
        Some(problems) => Err(problems),
        None => Ok(panel),
    }
}

fn syntax(source: &Arc<SourceText>, error: &toml::de::Error) -> Problem {
    let message = error.message().lines().next().unwrap_or("not a scenario file").to_owned();
    let end = source.text().len();
    let help = match message.as_str() {
        "duplicate key" => "every key stands once; several contacts are each written under [[contact]]",
        _ => "every line is a section such as [[contact]], or a key and a value such as preset = \"reed\"",
    };
    Problem::new(message).mark(source, error.span().unwrap_or(end..end), "").help(help)
}

/// Something for one contact, by its name and where the name stands, or for all.
type For<T> = (Option<(String, std::ops::Range<usize>)>, T);

fn panel(reader: &mut Reader, root: &DeTable<'_>, seed: Option<u64>) -> Panel {
    let mut root = Section::new("", root);
    let (mut in_file, mut resolution) = (None, None);
    if let Some(mut section) = reader.section(&mut root, "scenario") {
        in_file = integer(reader, &mut section, "seed", Count { least: 0, most: i64::MAX as u64 });
        resolution = reader.quantity::<Time>(&mut section, "resolution").map(|time| time.value.ns());
        reader.finish(section);
    }
    let seed = seed.or(in_file).unwrap_or(1);
    let stage = match reader.section(&mut root, "input") {
        Some(section) => stage(reader, section),
        None => InputStage::default(),
    };
    let mut contacts: Vec<PanelContact> = Vec::new();
    for (index, section) in reader.sections(&mut root, "contact").into_iter().enumerate() {
        contacts.extend(contact::contact(reader, section, (seed, index), stage, &contacts));
    }
    let has_contacts = root.has("contact");
    for section in reader.sections(&mut root, "operation") {
        let Some(done) = operation(reader, section) else { continue };
        for one in meant(reader, &mut contacts, &done.0) {
            one.routines.push(done.1);
        }
    }
    let has_operations = root.has("operation");
    for section in reader.sections(&mut root, "disturbance") {
        let Some(found) = disturbance::disturbance(reader, section) else { continue };
        for one in meant(reader, &mut contacts, &found.0) {
            one.disturbers.push(found.1);
        }
    }
    reader.finish(root);
    let end = reader.source.text().len();
    if !has_contacts {
        let help = "write [[contact]] with name = \"vent\" and preset = \"tactile\"";
        reader.problem(end..end, "there is no contact", help);
    }
    if !has_operations {
        let help = "write [[operation]] with habit = \"presses\" and count = 60";
        reader.problem(end..end, "there is no operation", help);
    }
    let all = contacts.iter().flat_map(|one| &one.routines).map(|routine| routine.operations).sum::<u64>();
    if all > MOST_OPERATIONS {
        let message = format!("{all} operations of all contacts are more than fit into memory");
        reader.problem(end..end, message, format!("ask for {MOST_OPERATIONS} in all at most"));
    }
    Panel { seed, resolution_ns: resolution.unwrap_or(1_000).max(1), contacts }
}

/// The contacts that an operation or a disturbance is meant for.
fn meant<'a>(
    reader: &mut Reader,
    contacts: &'a mut [PanelContact],
    name: &Option<(String, std::ops::Range<usize>)>,
) -> impl Iterator<Item = &'a mut PanelContact> + use<'a> {
    let name = name.clone();
    if let Some((name, span)) = &name
        && !contacts.iter().any(|contact| contact.name == *name)
    {
        let help = match nearest(name, contacts.iter().map(|contact| contact.name.as_str())) {
            Some(known) => format!("write \"{known}\""),
            None => "name one of the contacts of this file, or leave contact out to mean all".to_owned(),
        };
        reader.problem(span.clone(), format!("no contact is called \"{name}\""), help);
    }
    contacts.iter_mut().filter(move |contact| name.as_ref().is_none_or(|(name, _)| contact.name == *name))
}

fn stage(reader: &mut Reader, mut section: Section<'_>) -> InputStage {
    let plain = InputStage::default();
    let span = section.span();
    let supply = reader.quantity::<Voltage>(&mut section, "supply").map(|volts| volts.value.microvolts());
    let [low, high] = reader.pair::<Voltage>(&mut section, "thresholds", ["low", "high"]);
    let [apart, touching] = reader.pair::<Time>(&mut section, "time_constant", ["open", "closed"]);
    reader.finish(section);
    let stage = InputStage {
        supply_uv: supply.unwrap_or(plain.supply_uv),
        low_uv: low.map_or(plain.low_uv, |volts| volts.value.microvolts()),
        high_uv: high.map_or(plain.high_uv, |volts| volts.value.microvolts()),
        apart_ns: apart.map_or(0, |time| time.value.ns()),
        touching_ns: touching.map_or(0, |time| time.value.ns()),
        ..plain
    };
    if !(0 < stage.low_uv && stage.low_uv < stage.high_uv && stage.high_uv < stage.supply_uv) {
        let volts = |uv| Voltage::from_microvolts(uv);
        let message = format!(
            "thresholds of {} and {} do not lie between 0 V and the supply of {}, the low one below the high one",
            volts(stage.low_uv),
            volts(stage.high_uv),
            volts(stage.supply_uv)
        );
        let help = "write supply = \"3.3 V\" and thresholds = { low = \"0.8 V\", high = \"2.0 V\" }";
        reader.problem(span.clone(), message, help);
    }
    if stage.supply_uv > 1_000_000_000 {
        reader.problem(
            span.clone(),
            "a supply of more than 1 kV is none of a contact input",
            "write such as \"24 V\"",
        );
    }
    if stage.apart_ns.max(stage.touching_ns) > 3_600_000_000_000 {
        reader.problem(span, "a time constant of more than an hour is none", "write such as \"200 us\"");
    }
    stage
}

fn operation(reader: &mut Reader, mut section: Section<'_>) -> Option<For<Routine>> {
    let span = section.span();
    let name = values::name(reader, &mut section);
    let habit = choice(reader, &mut section, "habit", "a habit", Habit::ALL.iter().map(|habit| habit.name))
        .and_then(|name| Habit::find(&name))
        .unwrap_or(&Habit::ALL[0]);
    let count = integer(reader, &mut section, "count", Count { least: 1, most: MOST_OPERATIONS });
    if count.is_none() && !section.has("count") {
        reader.problem(span, "an operation has no count", "write count = 60");
    }
    let actuation = values::actuation(reader, &mut section);
    let mut routine = habit.routine(count.unwrap_or(1), actuation);
    for (key, target) in
        [("closed", &mut routine.closed_ns), ("open", &mut routine.open_ns), ("pause", &mut routine.pause_ns)]
    {
        if let Some(range) = between(reader, &mut section, key) {
            *target = range;
        }
    }
    // Who says how long it stays open, and nothing of a pause, means both.
    if section.has("open") && !section.has("pause") && habit.group == 1 {
        routine.pause_ns = routine.open_ns;
    }
    reader.finish(section);
    Some((name, routine))
}

#[cfg(test)]
mod tests;
