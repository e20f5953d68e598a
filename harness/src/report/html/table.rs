//! Tables.

use maud::{Markup, html};

/// A cell of a table.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Cell {
    /// Words, set to the left.
    Text(String),
    /// A number with its unit, set to the right.
    Number(String),
}

impl Cell {
    /// Words.
    #[must_use]
    pub fn text(text: impl Into<String>) -> Self {
        Self::Text(text.into())
    }

    /// A number.
    #[must_use]
    pub fn number(text: impl Into<String>) -> Self {
        Self::Number(text.into())
    }
}

/// A table whose first column names its rows. A column is set as its cells in the first row are.
#[must_use]
pub fn table(caption: &str, head: &[&str], rows: &[Vec<Cell>]) -> Markup {
    let class = |column: usize| match rows.first().and_then(|row| row.get(column)) {
        Some(Cell::Number(_)) => Some("number"),
        _ => None,
    };
    html! {
        // A table may be wider than a phone; then it is moved sideways, by keyboard as well.
        div class="scroll" tabindex="0" role="region" aria-label=(caption) {
            table {
                caption { (caption) }
                thead {
                    tr { @for (column, name) in head.iter().enumerate() { th scope="col" class=[class(column)] { (name) } } }
                }
                tbody {
                    @for row in rows {
                        tr {
                            @for (column, cell) in row.iter().enumerate() {
                                @match cell {
                                    Cell::Text(text) if column == 0 => th scope="row" { (text) },
                                    Cell::Number(text) if column == 0 => th scope="row" class="number" { (text) },
                                    Cell::Text(text) => td { (text) },
                                    Cell::Number(text) => td class="number" { (text) },
                                }
                            }
                        }
                    }
                }
            }
        }
    }
}
