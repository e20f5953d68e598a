//! Whether the recordings lie inside the envelope, and every place where they do not.

use maud::html;

use super::{Cell, Section, table};
use crate::conformance::Search;
use crate::report::words;
use crate::study::Study;

/// Places that are listed.
const MOST: usize = 200;

/// One paragraph for each recording; `None` without one.
pub(super) fn section(study: &Study) -> Option<Section> {
    if study.observed.is_empty() {
        return None;
    }
    let body = html! {
        p { "What is proved speaks of a recording only if the recording lies inside the envelope." }
        @for (one, found) in study.observed.iter().zip(&study.conformance) {
            @let number = found.violations.len();
            @if number == 0 {
                p class="holds" { strong { (one.name) } " lies inside: every edge is explained by the envelope." }
            } @else {
                p class="fails" {
                    strong { (one.name) } " leaves the envelope at " (words::count(number, "place")) "."
                    @if found.search == Search::Narrowed {
                        " There were too many readings to follow them all, so some of these may be explained after all."
                    }
                }
                @let rows: Vec<Vec<Cell>> = found.violations.iter().take(MOST).map(|violation| vec![
                    Cell::number(words::instant(violation.at_ns)),
                    Cell::text(violation.clause.text()),
                    Cell::number(words::about(violation.found_ns)),
                    Cell::number(words::about(violation.allowed_ns)),
                ]).collect();
                (table(&format!("Places outside, {}", one.name), &["at", "what", "found", "allowed"], &rows))
                @if number > MOST { p class="note" { "The first " (MOST) "; " code { "--json" } " lists them all." } }
            }
        }
    };
    Some(Section { id: "conformance", heading: "Do the recordings fit?".to_owned(), body })
}
