//! A machine in DOT, the text format for graphs.

use std::fmt::Write as _;

use debounce_core::{Change, Position};

use super::{MachineTable, edge_word, word};

/// The state diagram in DOT; rests have a double outline, and no colours are chosen.
#[must_use]
pub fn dot(machine: &MachineTable) -> String {
    let mut text = String::from("digraph machine {\n  rankdir=LR;\n  node [shape=ellipse];\n");
    for state in 0..machine.len() {
        let name = escaped(&machine.name(state));
        let outlines = if machine.remark(state).is_empty() { "" } else { ", peripheries=2" };
        let output = word(machine.output_of(state));
        // Writing to a string does not fail.
        let _ = writeln!(text, "  s{state} [label=\"{name}\\n{output}\"{outlines}];");
    }
    text.push_str("  reset [shape=point];\n");
    let _ = writeln!(text, "  reset -> s{};", machine.reset());
    for arrow in arrows(machine) {
        let _ = writeln!(text, "  s{} -> s{} [label=\"{}\"];", arrow.from, arrow.to, arrow.label());
    }
    text.push_str("}\n");
    text
}

/// An arrow of a state diagram: one step, or both where they lead to the same state.
pub(crate) struct Arrow {
    pub(crate) from: usize,
    pub(crate) to: usize,
    /// `None` for both.
    pub(crate) sample: Option<Position>,
    pub(crate) edge: Option<Change>,
}

impl Arrow {
    /// The sample or samples, and the edge that the step reports.
    pub(crate) fn label(&self) -> String {
        let sample = self.sample.map_or("either", word);
        match self.edge {
            Some(edge) => format!("{sample} / {}", edge_word(edge)),
            None => sample.to_owned(),
        }
    }
}

/// Every arrow of the diagram, state by state.
pub(crate) fn arrows(machine: &MachineTable) -> Vec<Arrow> {
    let mut arrows = Vec::new();
    for from in 0..machine.len() {
        let arrow = |sample: Position| Arrow {
            from,
            to: machine.next(from, sample),
            sample: Some(sample),
            edge: machine.edge(from, sample),
        };
        let [open, closed] = Position::BOTH.map(arrow);
        if open.to == closed.to {
            arrows.push(Arrow { sample: None, ..open });
        } else {
            arrows.extend([open, closed]);
        }
    }
    arrows
}

fn escaped(name: &str) -> String {
    name.replace('\\', "\\\\").replace('"', "\\\"")
}
