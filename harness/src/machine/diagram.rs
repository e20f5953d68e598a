//! A small machine as a state diagram in plain characters.

use std::fmt::Write as _;

use debounce_core::Position;

use super::lanes::{Way, side};
use super::{MachineTable, edge_word, word};

/// The most states that [`terminal_diagram`] draws.
pub const LARGEST_DIAGRAM: usize = 12;

/// The state diagram in ASCII, or `None` for a machine of more than [`LARGEST_DIAGRAM`] states.
///
/// One box a state. Lines on the left are taken at an open sample, lines on the right at a closed one; they leave a
/// box at its lower row and enter at its upper row (`<`, `>`), and lines to the same state join. An edge that is
/// reported stands on its line.
#[must_use]
pub fn terminal_diagram(machine: &MachineTable) -> Option<String> {
    if machine.len() > LARGEST_DIAGRAM {
        return None;
    }
    let [left, right] = Position::BOTH.map(|sample| {
        let way = |state| Way {
            target: machine.next(state, sample),
            label: machine.edge(state, sample).map_or("", edge_word),
        };
        side(&(0..machine.len()).map(way).collect::<Vec<_>>())
    });
    let boxes: Vec<[String; 2]> = (0..machine.len())
        .map(|state| {
            let upper = format!("{} {}", machine.name(state), word(machine.output_of(state)));
            [upper, machine.remark(state).to_owned()]
        })
        .collect();
    let box_width = boxes.iter().flatten().map(|row| row.chars().count()).max().unwrap_or(0);
    const TITLES: [&str; 2] = ["at an open sample", "at a closed sample"];
    let left_width = left.iter().map(String::len).max().unwrap_or(0).max(TITLES[0].len());
    let mut text = format!("{:>left_width$} {:box_width$}   {}\n", TITLES[0], "", TITLES[1]);
    for (row, (left, right)) in left.iter().zip(&right).enumerate() {
        let inside = &boxes[row / 2][row % 2];
        let left = mirrored(left);
        let mut line = String::new();
        // Writing to a string does not fail.
        let _ = write!(line, "{left:>left_width$}[ {inside:box_width$} ]{right}");
        text.push_str(line.trim_end());
        text.push('\n');
    }
    Some(text)
}

/// A line drawn to the right, drawn to the left; its words still read forwards.
fn mirrored(line: &str) -> String {
    let mut mirrored = String::new();
    let mut words = String::new();
    for letter in line.chars().rev() {
        if letter.is_ascii_alphabetic() {
            words.insert(0, letter);
            continue;
        }
        mirrored.push_str(&core::mem::take(&mut words));
        mirrored.push(if letter == '<' { '>' } else { letter });
    }
    mirrored.push_str(&words);
    mirrored
}
