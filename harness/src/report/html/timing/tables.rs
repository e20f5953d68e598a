//! Every operation and every disturbance of a recording, as tables.

use maud::{Markup, html};

use super::Shown;
use crate::characterise::Ambiguity;
use crate::report::html::{Cell, table};
use crate::report::words;

/// Rows of one table.
const MOST: usize = 400;

/// Every operation with its bounce and, where there is a logic, its latency.
pub(super) fn operations(shown: &Shown<'_>) -> Markup {
    let run = shown.runs.first();
    let mut head = vec!["at", "change", "bounce", "edges"];
    head.extend(run.map(|_| "reported after"));
    head.push("in doubt");
    let all = &shown.one.segmentation.operations;
    let rows = all.iter().take(MOST).map(|operation| {
        let mut row = vec![
            Cell::number(words::instant(operation.burst.first_ns)),
            Cell::text(words::change(operation.change)),
            Cell::number(words::about(operation.bounce_ns())),
            Cell::number(operation.burst.edges.to_string()),
        ];
        row.extend(run.map(|run| {
            let delay = run.delay_of(shown.one, operation.burst.first_ns);
            Cell::number(delay.map_or("-".to_owned(), words::at_most))
        }));
        row.push(doubt(operation.ambiguity));
        row
    });
    let rows: Vec<Vec<Cell>> = rows.collect();
    html! { (shortened(all.len())) (table("Operations", &head, &rows)) }
}

/// Every disturbance with its width.
pub(super) fn disturbances(shown: &Shown<'_>) -> Markup {
    let all = &shown.one.segmentation.disturbances;
    let rows: Vec<Vec<Cell>> = all
        .iter()
        .take(MOST)
        .map(|disturbance| {
            vec![
                Cell::number(words::instant(disturbance.burst.first_ns)),
                Cell::text(words::position(disturbance.position)),
                Cell::number(words::about(disturbance.burst.width_ns())),
                Cell::number(disturbance.burst.edges.to_string()),
                doubt(disturbance.ambiguity),
            ]
        })
        .collect();
    html! {
        @if !rows.is_empty() {
            (shortened(all.len()))
            (table("Disturbances", &["at", "while", "width", "edges", "in doubt"], &rows))
        }
    }
}

fn doubt(ambiguity: Option<Ambiguity>) -> Cell {
    Cell::text(ambiguity.map_or("", |ambiguity| ambiguity.doubt.text()))
}

fn shortened(all: usize) -> Markup {
    html! { @if all > MOST { p class="note" { "The first " (MOST) " of " (all) "." } } }
}
