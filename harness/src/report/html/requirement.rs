//! What is asked, value by value, each with where it comes from.

use maud::html;

use super::{Cell, Section, table};
use crate::requirement::Resolved;

/// Every value of the requirement.
pub(super) fn section(resolved: &Resolved) -> Section {
    let rows: Vec<Vec<Cell>> = resolved
        .rows()
        .into_iter()
        .map(|row| vec![Cell::text(row.key), Cell::text(row.text), Cell::text(row.origin.to_string())])
        .collect();
    let body = html! {
        p { "What nobody stated was taken from the recordings, with the margin added, or from a default." }
        (table("The requirement", &["value", "is", "because"], &rows))
    };
    Section { id: "requirement", heading: "What was asked".to_owned(), body }
}
