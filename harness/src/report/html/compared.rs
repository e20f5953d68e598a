//! The report of a comparison: whether two logics do the same, or the samples that tell them apart.

use debounce_core::{Change, Position};
use maud::{Markup, html};

use super::{Figure, Origin, Page, Section, logic, origin};
use crate::machine::{Apart, MachineTable};
use crate::report::apart::{ApartDiagram, outputs};
use crate::report::plot::px;
use crate::report::words;

/// Two logics with everything a report says of them.
#[derive(Clone, Copy, Debug)]
pub struct Compared<'a> {
    /// What they are called.
    pub names: [&'a str; 2],
    /// The machines behind them.
    pub machines: [&'a MachineTable; 2],
    /// Fewest samples that tell them apart; `None` where none do.
    pub apart: Option<&'a Apart>,
}

/// The report of a comparison.
#[must_use]
pub fn compared(compared: &Compared<'_>, origin: &Origin) -> String {
    let [one, other] = compared.machines.map(|machine| machine.minimised().machine);
    let [first, second] = compared.names;
    let mut sections: Vec<Section> =
        compared.apart.map(|apart| told_apart(compared, apart)).into_iter().collect();
    sections.push(Section { heading: "The one".to_owned(), ..logic::section_as("one", first, &one) });
    sections.push(Section { heading: "The other".to_owned(), ..logic::section_as("other", second, &other) });
    sections.push(origin::section(origin, &[], &method()));
    let page = Page {
        title: format!("{first} and {second}"),
        kind: "Two logics compared".to_owned(),
        invented: false,
        cautions: Vec::new(),
        answer: answered(compared),
        sections,
    };
    page.html()
}

fn answered(compared: &Compared<'_>) -> Markup {
    let Some(apart) = compared.apart else {
        return html! {
            p class="choice holds" { strong { "Equivalent: " } "both report the same at every sample, whatever the samples" }
        };
    };
    let [first, second] = compared.names;
    let [one, other] = apart.edges.map(reports);
    html! {
        p class="choice fails" {
            strong { "Different " } "after " (words::count(apart.samples.len(), "sample")) " from rest "
            (words::position(apart.start)) ", and never after fewer"
        }
        p { "Then " code { (first) } " reports " (one) ", and " code { (second) } " reports " (other) "." }
    }
}

fn reports(edge: Option<Change>) -> String {
    edge.map_or("nothing".to_owned(), |edge| format!("a {}", words::change(edge)))
}

/// The width of a tick, and the room for the names of the lanes.
const TICK: f64 = 20.0;
const NAMES: f64 = 76.0;
/// Ticks in one row.
const ROW: usize = 42;
/// The height of a row.
const HEIGHT: f64 = 166.0;

fn told_apart(compared: &Compared<'_>, apart: &Apart) -> Section {
    let [one, other] = compared.machines.map(|machine| outputs(machine, apart));
    let lanes = [("samples", 30.0, &apart.samples), ("one", 76.0, &one), ("other", 122.0, &other)];
    let rows = apart.samples.len().div_ceil(ROW);
    let figure = Figure {
        id: "apart".to_owned(),
        title: "The fewest samples that tell them apart".to_owned(),
        description: format!(
            "From rest {} the samples {} are read; at the last one the two outputs differ.",
            words::position(apart.start),
            apart.samples.iter().map(|&sample| words::position(sample)).collect::<Vec<_>>().join(", ")
        ),
        view_box: format!("0 0 940 {}", px(HEIGHT * rows as f64)),
        drawing: html! {
            @for row in 0..rows {
                g transform={ "translate(0 " (px(HEIGHT * row as f64)) ")" } {
                    @for tick in row * ROW..apart.samples.len().min((row + 1) * ROW) {
                        @if tick % ROW == 0 || (tick + 1).is_multiple_of(5) {
                            @let middle = NAMES + TICK * (tick % ROW) as f64 + TICK / 2.0;
                            text class="tick" x=(px(middle)) y="16" text-anchor="middle" { (tick + 1) }
                        }
                    }
                    @for (name, top, samples) in lanes {
                        text class="lane" x="0" y=(px(top + 16.0)) { (name) }
                        path class={ "wave" @if name != "samples" { " output" } } d=(lane(apart.start, samples, row, top)) {}
                    }
                }
            }
        },
        caption: html! { "Up is closed; an output is that after the sample." },
        data: Some(html! { pre { (ApartDiagram { apart, machines: compared.machines }) } }),
    };
    Section { id: "samples", heading: "Where they differ".to_owned(), body: figure.wide() }
}

/// One row of a lane, begun with what stood before it.
fn lane(start: Position, samples: &[Position], row: usize, top: f64) -> String {
    let level = |position: Position| px(if position.is_closed() { top } else { top + 24.0 });
    let from = row * ROW;
    let before = if from == 0 { start } else { samples[from - 1] };
    let mut path = format!("M{} {}", px(NAMES - 12.0), level(before));
    let here = &samples[from..samples.len().min(from + ROW)];
    for (place, &position) in here.iter().enumerate() {
        path.push_str(&format!("H{}V{}", px(NAMES + TICK * place as f64), level(position)));
    }
    path + &format!("H{}", px(NAMES + TICK * here.len() as f64))
}

fn method() -> Vec<String> {
    vec![
        "Both logics are followed side by side from rest, through every pair of states that they can be in together, \
         nearest first."
            .to_owned(),
    ]
}
