//! A machine as a plain table.

use debounce_core::Position;

use super::{MachineTable, edge_word, word};

/// One line a state: its output, where each sample leads, and what is special about it.
#[must_use]
pub fn table_text(machine: &MachineTable) -> String {
    let mut rows = vec![["state", "output", "open sample", "closed sample", ""].map(str::to_owned)];
    for state in 0..machine.len() {
        let leads = |sample| {
            let next = machine.name(machine.next(state, sample));
            machine
                .edge(state, sample)
                .map_or_else(|| next.clone(), |edge| format!("{next} {}", edge_word(edge)))
        };
        rows.push([
            machine.name(state),
            word(machine.output_of(state)).to_owned(),
            leads(Position::Open),
            leads(Position::Closed),
            machine.remark(state).to_owned(),
        ]);
    }
    let width = |column: usize| rows.iter().map(|row| row[column].chars().count()).max().unwrap_or(0);
    let widths: [usize; 4] = core::array::from_fn(width);
    let mut text = String::new();
    for row in &rows {
        let mut line = String::new();
        for (cell, width) in row.iter().zip(widths) {
            line.push_str(&format!("{cell:width$}  "));
        }
        line.push_str(&row[4]);
        text.push_str(line.trim_end());
        text.push('\n');
    }
    text
}
