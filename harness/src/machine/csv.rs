//! A next-state table as plain CSV: `state,sample,next,output`, a header and one line for each state and sample.

use debounce_core::Position;

use super::check::{self, Line, Named, refused_name};
use super::fault::{Faults, Place, TableFileError};
use super::{MachineTable, Reading, without_mark};
use crate::raw_input::quoted;

const HEADER: [&str; 4] = ["state", "sample", "next", "output"];

/// Reads a table in CSV.
///
/// Sample and output are 0 or `open`, 1 or `closed`; a sample of `-` stands for both. The state of the first line is
/// the reset state. To which state or step an output belongs is the [`Reading`].
///
/// # Errors
/// Everything that is wrong with it, each with its place.
pub fn read_csv(name: &str, bytes: &[u8], reading: Reading) -> Result<MachineTable, TableFileError> {
    let mut faults = Faults::default();
    let mut reader = csv::ReaderBuilder::new()
        .has_headers(false)
        .flexible(true)
        .comment(Some(b'#'))
        .from_reader(without_mark(bytes));
    let mut lines = Vec::new();
    let mut meant = 0;
    let mut has_header = false;
    for record in reader.byte_records() {
        let record = match record {
            Ok(record) => record,
            Err(error) => {
                faults.whole_file(format!("the table cannot be read as CSV: {error}"), "check its quotes");
                break;
            }
        };
        let line = record.position().map_or(1, |position| position.line() as usize);
        let fields = fields(&record, line);
        if !core::mem::replace(&mut has_header, true) {
            if fields.iter().map(|field| field.name.as_str()).ne(HEADER) {
                faults.at_with_help(
                    Place { line, column: 1 },
                    "the table does not begin with its header",
                    "the first line is state,sample,next,output",
                );
            }
            continue;
        }
        meant += 1;
        lines.extend(transition(&fields, line, &mut faults));
    }
    if meant == 0 {
        faults.whole_file(
            "the table has no lines",
            "write the header state,sample,next,output, then the lines",
        );
    }
    let found = match lines.first() {
        // A fault in one line must not be reported again as a gap in the table.
        Some(first) if lines.len() == meant && faults.is_empty() => {
            let reset = first.state.clone();
            check::machine(&lines, &reset, reading, &mut faults)
        }
        _ => None,
    };
    faults.or(name, found)
}

/// The fields without the spaces around them, each with the place of its first character.
fn fields(record: &csv::ByteRecord, line: usize) -> Vec<Named> {
    let mut column = 1;
    let mut fields = Vec::new();
    for field in record {
        let text = String::from_utf8_lossy(field);
        let indent = text.chars().take_while(|letter| letter.is_whitespace()).count();
        fields.push(Named { name: text.trim().to_owned(), place: Place { line, column: column + indent } });
        // Exact as long as no field before is quoted.
        column += text.chars().count() + 1;
    }
    fields
}

fn transition(fields: &[Named], line: usize, faults: &mut Faults) -> Option<Line> {
    let [state, sample, next, output] = fields else {
        let message = format!("a line of a table has 4 fields, not {}", fields.len());
        faults.at_with_help(Place { line, column: 1 }, message, "write: state,sample,next,output");
        return None;
    };
    let mut good = true;
    for named in [state, next] {
        if let Some(message) = refused_name(&named.name) {
            faults.at(named.place, message);
            good = false;
        }
    }
    let read_sample = match sample.name.as_str() {
        "-" => Some(None),
        other => position(other).map(Some),
    };
    if read_sample.is_none() {
        let message = format!("{} is no sample", quoted(&sample.name));
        faults.at_with_help(sample.place, message, "use 0 (open), 1 (closed) or - (either)");
    }
    let read_output = position(&output.name);
    if read_output.is_none() {
        let message = format!("{} is no output", quoted(&output.name));
        faults.at_with_help(output.place, message, "use 0 (open) or 1 (closed)");
    }
    let (sample, output_bit) = (read_sample?, read_output?);
    good.then(|| Line {
        state: state.clone(),
        sample,
        next: next.clone(),
        output: output_bit,
        output_place: output.place,
    })
}

fn position(text: &str) -> Option<Position> {
    match text {
        "0" | "open" => Some(Position::Open),
        "1" | "closed" => Some(Position::Closed),
        _ => None,
    }
}

/// Writes a machine as CSV, its reset state first; reading it again gives an equivalent machine.
#[must_use]
pub fn write_csv(machine: &MachineTable, reading: Reading) -> String {
    let mut states: Vec<usize> = (0..machine.len()).collect();
    states.sort_by_key(|&state| state != machine.reset());
    let mut writer = csv::Writer::from_writer(Vec::new());
    let mut write = |record: [&str; 4]| {
        writer.write_record(record).expect("writing to memory does not fail");
    };
    write(HEADER);
    for state in states {
        for sample in Position::BOTH {
            let next = machine.next(state, sample);
            let output = match reading {
                Reading::Moore => machine.output_of(state),
                Reading::Mealy => machine.output_of(next),
            };
            let bit = |position| if position == Position::Closed { "1" } else { "0" };
            write([&machine.name(state), bit(sample), &machine.name(next), bit(output)]);
        }
    }
    let bytes = writer.into_inner().expect("writing to memory does not fail");
    String::from_utf8(bytes).expect("names are text")
}
