//! KISS2, the open text format for state tables, as used in the benchmark sets of logic synthesis.

use std::fmt::Write as _;

use debounce_core::Position;

use super::check::{self, Line, Named, refused_name};
use super::fault::{Faults, Place, TableFileError};
use super::{MachineTable, Reading, without_mark};
use crate::raw_input::quoted;

/// Reads a table in KISS2.
///
/// One input bit, the sample (1: it reads closed), and one output bit, the debounced position (1: closed):
///
/// ```text
/// .i 1
/// .o 1
/// .p 4            # the number of lines, optional
/// .s 2            # the number of states, optional
/// .r off          # the reset state
/// 0 off off 0     # sample, present state, next state, output
/// 1 off on  0
/// 0 on  off 1
/// 1 on  on  1
/// .e
/// ```
///
/// A sample of `-` stands for both. A next state of `-` or `*`, which leaves the next state open, is refused, and so
/// is an open output: what is not said cannot be proved. `#` begins a comment. To which state or step an output
/// belongs is the [`Reading`].
///
/// # Errors
/// Everything that is wrong with it, each with its place.
pub fn read_kiss2(name: &str, bytes: &[u8], reading: Reading) -> Result<MachineTable, TableFileError> {
    let mut file = File::default();
    for (index, line) in without_mark(bytes).split(|&byte| byte == b'\n').enumerate() {
        let line_number = index + 1;
        let Ok(text) = core::str::from_utf8(line) else {
            file.faults.at(Place { line: line_number, column: 1 }, "this line is not UTF-8 text");
            continue;
        };
        let words = words(text, line_number);
        if words.is_empty() {
            continue;
        }
        if file.ended {
            file.faults.at(words[0].place, "there is more after the end (.e)");
            break;
        }
        if words[0].name.starts_with('.') { file.directive(&words) } else { file.transition(&words) }
    }
    file.finish(name, reading)
}

/// The words of a line before its comment, with their places.
fn words(line: &str, line_number: usize) -> Vec<Named> {
    let mut words: Vec<Named> = Vec::new();
    let mut inside = false;
    for (column, letter) in line.chars().enumerate() {
        match letter {
            '#' => break,
            _ if letter.is_whitespace() => inside = false,
            _ => {
                if !core::mem::replace(&mut inside, true) {
                    let place = Place { line: line_number, column: column + 1 };
                    words.push(Named { name: String::new(), place });
                }
                if let Some(word) = words.last_mut() {
                    word.name.push(letter);
                }
            }
        }
    }
    words
}

/// What a file has said so far.
#[derive(Default)]
struct File {
    lines: Vec<Line>,
    /// Lines that were meant as transitions, good or bad.
    meant: usize,
    inputs: Option<Named>,
    outputs: Option<Named>,
    products: Option<Named>,
    states: Option<Named>,
    reset: Option<Named>,
    ended: bool,
    faults: Faults,
}

impl File {
    fn directive(&mut self, words: &[Named]) {
        let directive = &words[0];
        let slot = match directive.name.as_str() {
            ".i" => &mut self.inputs,
            ".o" => &mut self.outputs,
            ".p" => &mut self.products,
            ".s" => &mut self.states,
            ".r" => &mut self.reset,
            ".e" | ".end" => {
                self.ended = true;
                return;
            }
            // Names of the bits; there is only one of each.
            ".ilb" | ".ob" => return,
            _ => {
                let message = format!("{} is no directive of KISS2", quoted(&directive.name));
                self.faults.at_with_help(directive.place, message, "use .i .o .p .s .r .ilb .ob or .e");
                return;
            }
        };
        if let Some(known) = slot {
            let message = format!("{} was already given in line {}", directive.name, known.place.line);
            self.faults.at(directive.place, message);
        } else if let [_, value] = words {
            *slot = Some(value.clone());
        } else {
            let message = format!("{} takes one value, not {}", directive.name, words.len() - 1);
            self.faults.at(directive.place, message);
        }
    }

    fn transition(&mut self, words: &[Named]) {
        self.meant += 1;
        let [input, state, next, output] = words else {
            let message = format!("a line of a table has 4 words, not {}", words.len());
            self.faults.at_with_help(
                words[0].place,
                message,
                "write: sample, present state, next state, output",
            );
            return;
        };
        let before = self.faults.count();
        let sample = match input.name.as_str() {
            "0" => Some(Position::Open),
            "1" => Some(Position::Closed),
            "-" => None,
            other => {
                let message = format!("{} is no sample", quoted(other));
                self.faults.at_with_help(input.place, message, "use 0 (open), 1 (closed) or - (either)");
                None
            }
        };
        if matches!(state.name.as_str(), "-" | "*") {
            let message = format!("{} leaves the present state open", quoted(&state.name));
            self.faults.at_with_help(state.place, message, "write a line for each state");
        } else if let Some(message) = refused_name(&state.name) {
            self.faults.at(state.place, message);
        }
        if matches!(next.name.as_str(), "-" | "*") {
            let message = format!("the next state of {} is left open", quoted(&state.name));
            self.faults.at_with_help(
                next.place,
                message,
                "name the state: what is not said cannot be proved",
            );
        } else if let Some(message) = refused_name(&next.name) {
            self.faults.at(next.place, message);
        }
        let bit = match output.name.as_str() {
            "0" => Position::Open,
            "1" => Position::Closed,
            other => {
                let message = match other {
                    "-" => format!("the output of state {} is left open", quoted(&state.name)),
                    _ => format!("{} is no output", quoted(other)),
                };
                self.faults.at_with_help(output.place, message, "use 0 (open) or 1 (closed)");
                Position::Open
            }
        };
        if before != self.faults.count() {
            return;
        }
        let (state, next) = (state.clone(), next.clone());
        self.lines.push(Line { state, sample, next, output: bit, output_place: output.place });
    }

    fn finish(mut self, name: &str, reading: Reading) -> Result<MachineTable, TableFileError> {
        self.width(".i", "the sample of the contact");
        self.width(".o", "the debounced position");
        if self.meant == 0 {
            self.faults
                .whole_file("the table has no lines", "write: sample, present state, next state, output");
        }
        let mut names: Vec<&str> = self.lines.iter().map(|line| line.state.name.as_str()).collect();
        names.sort_unstable();
        names.dedup();
        // A line that could not be read may have named a state.
        let states = (self.lines.len() == self.meant).then_some(names.len());
        let counted =
            [(".p", &self.products, Some(self.meant), "lines"), (".s", &self.states, states, "states")];
        for (directive, given, found, what) in counted {
            let (Some(given), Some(found)) = (given, found) else { continue };
            if given.name.parse() != Ok(found) {
                let message =
                    format!("{directive} says {} {what}, the table has {found}", quoted(&given.name));
                self.faults.at(given.place, message);
            }
        }
        if self.reset.is_none() {
            let help = match self.lines.first() {
                Some(first) => format!("add a line such as .r {}", first.state.name),
                None => "add a line .r with its name".to_owned(),
            };
            self.faults.whole_file("the table names no reset state", help);
        }
        // A fault in one line must not be reported again as a gap in the table.
        let whole = self.lines.len() == self.meant && self.meant > 0;
        let found = match &self.reset {
            Some(reset) if whole => check::machine(&self.lines, reset, reading, &mut self.faults),
            None if whole => {
                // Everything that does not need the reset state is still said.
                check::states_alone(&self.lines, &mut self.faults);
                None
            }
            _ => None,
        };
        self.faults.or(name, found)
    }

    fn width(&mut self, directive: &str, meaning: &str) {
        let given = if directive == ".i" { &self.inputs } else { &self.outputs };
        match given {
            Some(given) if given.name == "1" => {}
            Some(given) => {
                let message = format!(
                    "{directive} says {} bits; a table for one contact has 1, {meaning}",
                    quoted(&given.name)
                );
                self.faults.at(given.place, message);
            }
            None => {
                self.faults.whole_file(format!("the table has no {directive}"), format!("add {directive} 1"));
            }
        }
    }
}

/// Writes a machine in KISS2; reading it again with the same [`Reading`] gives the same machine.
#[must_use]
pub fn write_kiss2(machine: &MachineTable, reading: Reading) -> String {
    write_named(machine, reading, |state| machine.name(state))
}

/// As [`write_kiss2`], with bare numbers for the names of the states: some readers take nothing else.
#[must_use]
pub fn write_kiss2_numbered(machine: &MachineTable, reading: Reading) -> String {
    write_named(machine, reading, |state| state.to_string())
}

fn write_named(machine: &MachineTable, reading: Reading, name: impl Fn(usize) -> String) -> String {
    let states = machine.len();
    let reset = name(machine.reset());
    let mut text = format!(".i 1\n.o 1\n.p {}\n.s {states}\n.r {reset}\n", 2 * states);
    for state in 0..states {
        for sample in Position::BOTH {
            let next = machine.next(state, sample);
            let output = match reading {
                Reading::Moore => machine.output_of(state),
                Reading::Mealy => machine.output_of(next),
            };
            // Writing to a string does not fail.
            let _ = writeln!(text, "{} {} {} {}", sample as u8, name(state), name(next), output as u8);
        }
    }
    text.push_str(".e\n");
    text
}
