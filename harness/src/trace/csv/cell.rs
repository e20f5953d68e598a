//! What a cell of a channel says: a level, an unknown level, or a number that is neither 0 nor 1.

use super::number::{self, NoNumber};
use crate::trace::{DecimalMark, Level};

/// A cell of a channel without thresholds.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) enum Cell {
    Level(Level),
    Unknown,
    Number(f64),
}

/// Levels in the words and digits that recorders use.
pub(super) fn parse(cell: &[u8], mark: DecimalMark) -> Result<Cell, NoNumber> {
    // Nearly every cell is one of these two.
    match cell {
        b"0" => return Ok(Cell::Level(Level::Low)),
        b"1" => return Ok(Cell::Level(Level::High)),
        _ => {}
    }
    let is_one_of = |words: &[&str]| words.iter().any(|word| cell.eq_ignore_ascii_case(word.as_bytes()));
    if is_one_of(&["low", "l", "false"]) {
        return Ok(Cell::Level(Level::Low));
    }
    if is_one_of(&["high", "h", "true"]) {
        return Ok(Cell::Level(Level::High));
    }
    if is_one_of(&["x", "z", "u", "w", "-", "?"]) {
        return Ok(Cell::Unknown);
    }
    let value = number::real(cell, mark)?;
    Ok(if value == 0.0 {
        Cell::Level(Level::Low)
    } else if value == 1.0 {
        Cell::Level(Level::High)
    } else {
        Cell::Number(value)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn cell_words_and_digits_are_levels() {
        for (low, high) in
            [("0", "1"), ("0.0", "1.000"), ("low", "HIGH"), ("L", "h"), ("False", "true"), ("-0", "1e0")]
        {
            assert_eq!(parse(low.as_bytes(), DecimalMark::Point), Ok(Cell::Level(Level::Low)), "{low}");
            assert_eq!(parse(high.as_bytes(), DecimalMark::Point), Ok(Cell::Level(Level::High)), "{high}");
        }
        for word in ["x", "Z", "?", "-"] {
            assert_eq!(parse(word.as_bytes(), DecimalMark::Point), Ok(Cell::Unknown), "{word}");
        }
        assert_eq!(parse(b"2", DecimalMark::Point), Ok(Cell::Number(2.0)));
        assert_eq!(parse(b"up", DecimalMark::Point), Err(NoNumber::Text));
        assert_eq!(parse(b"", DecimalMark::Point), Err(NoNumber::Text));
    }
}
