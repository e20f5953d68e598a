//! The logic itself: state diagram and next-state table.

use debounce_core::Position;
use maud::{Markup, PreEscaped, html};

use super::{Cell, Section, table};
use crate::machine::MachineTable;
use crate::report::state_diagram::state_diagram_downward;
use crate::report::words;

/// States whose rows are shown; a table of more is better read from a file.
const MOST_STATES: usize = 200;

/// States of a machine whose table stands beside its diagram.
const BESIDE: usize = 12;

/// The machine behind a logic, minimised.
pub(super) fn section(name: &str, machine: &MachineTable) -> Section {
    section_as("logic", name, machine)
}

/// The same where a page has several; `id` is that of the section.
pub(super) fn section_as(id: &'static str, name: &str, machine: &MachineTable) -> Section {
    let counts = machine.counts();
    let body = html! {
        p {
            code { (name) } " as a machine: " (words::count(counts.states, "state")) ", which take "
            (words::count(counts.state_bits as usize, "bit")) "; states that behave alike are one. A double outline \
             is rest; an arrow is one sample, open or closed, with the edge it reports."
        }
        div class=[(machine.len() <= BESIDE).then_some("pair logic")] {
        @match state_diagram_downward(machine, id) {
            Some(diagram) => figure class="figure" id={ (id) "-diagram" } {
                h3 { "State diagram" }
                div class={ "picture scroll" @if machine.len() > BESIDE { " tall" } } tabindex="0" role="region" aria-label="State diagram" { (PreEscaped(diagram)) }
                figcaption { "The next-state table says the same." }
            },
            None => p class="note" {
                "A diagram of " (counts.states) " states cannot be read. "
                code { "harness prove --machine logic.kiss2" } " writes the machine to a file."
            },
        }
        @if machine.len() <= MOST_STATES {
            details open[machine.len() <= 24] { summary { "Next-state table" } (states(machine)) }
        }
        }
    };
    Section { id, heading: "The logic".to_owned(), body }
}

fn states(machine: &MachineTable) -> Markup {
    let rows: Vec<Vec<Cell>> = (0..machine.len())
        .map(|state| {
            let leads = |sample| {
                let next = machine.name(machine.next(state, sample));
                match machine.edge(state, sample) {
                    Some(edge) => format!("{next}, {}", words::change(edge)),
                    None => next,
                }
            };
            let rests = Position::BOTH.iter().any(|&position| machine.resting(position) == state);
            let remark = match (rests, machine.reset() == state) {
                (_, true) => " (rest, reset)",
                (true, false) => " (rest)",
                (false, false) => "",
            };
            vec![
                Cell::text(machine.name(state) + remark),
                Cell::text(words::position(machine.output_of(state))),
                Cell::text(leads(Position::Open)),
                Cell::text(leads(Position::Closed)),
            ]
        })
        .collect();
    let head = ["state", "output", "open sample", "closed sample"];
    table("Next state by sample, with the edge it reports", &head, &rows)
}
