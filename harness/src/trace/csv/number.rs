//! Numbers as recorders write them: times exactly, by decimal arithmetic, and voltages.

use crate::trace::DecimalMark;
use crate::trace::range::BEYOND_RANGE;

/// A time in units of 10⁻²⁴ s: fine enough for every digit that recorders write, and 2⁶⁴ ns still fit.
pub(super) type Yoctoseconds = i128;

/// So many of them are a nanosecond.
pub(super) const PER_NS: Yoctoseconds = 1_000_000_000_000_000;

const YOCTO: i32 = -24;

/// A time and the worth of its last written digit.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Time {
    pub(super) at: Yoctoseconds,
    /// Power of ten of a second of the last digit.
    pub(super) last_place: i32,
}

impl Time {
    /// So many times as late.
    pub(super) fn times(self, factor: u64) -> Result<Self, NoNumber> {
        let at = self.at.checked_mul(i128::from(factor)).ok_or(NoNumber::TooLarge)?;
        // As in `finish`: room to subtract and to shift.
        if at.abs() > 2 * i128::from(u64::MAX) * PER_NS {
            return Err(NoNumber::TooLarge);
        }
        Ok(Self { at, ..self })
    }
}

/// Why a cell is no number.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum NoNumber {
    /// It is something else.
    Text,
    /// It is NaN or infinite.
    NotFinite,
    /// It does not fit.
    TooLarge,
}

impl NoNumber {
    /// For a message, behind the cell itself.
    pub(super) fn reason(self, wanted: &str) -> String {
        match self {
            Self::Text => format!("is not {wanted}"),
            Self::NotFinite => format!("is not {wanted}: it is not finite"),
            Self::TooLarge => format!("is not {wanted}: it is too large"),
        }
    }
}

/// The parts of a decimal number, none of them worked out yet.
struct Parts<'a> {
    is_negative: bool,
    whole: &'a [u8],
    fraction: &'a [u8],
    exponent: i32,
}

/// Whether a cell is a finite number.
pub(super) fn is_number(cell: &[u8], mark: DecimalMark) -> bool {
    parts(cell, mark).is_ok()
}

fn split_digits(text: &[u8]) -> (&[u8], &[u8]) {
    text.split_at(text.iter().take_while(|byte| byte.is_ascii_digit()).count())
}

fn split_sign(text: &[u8]) -> (bool, &[u8]) {
    match text {
        [b'-', rest @ ..] => (true, rest),
        [b'+', rest @ ..] => (false, rest),
        rest => (false, rest),
    }
}

fn parts(cell: &[u8], mark: DecimalMark) -> Result<Parts<'_>, NoNumber> {
    let mark = match mark {
        DecimalMark::Point => b'.',
        DecimalMark::Comma => b',',
    };
    let (is_negative, text) = split_sign(cell);
    let (whole, text) = split_digits(text);
    let (fraction, text) = match text {
        [first, rest @ ..] if *first == mark => split_digits(rest),
        rest => (&rest[..0], rest),
    };
    if whole.is_empty() && fraction.is_empty() {
        let word = String::from_utf8_lossy(text).to_ascii_lowercase();
        let is_not_finite = word.starts_with("nan") || word.starts_with("inf") || word == "\u{221e}";
        return Err(if is_not_finite { NoNumber::NotFinite } else { NoNumber::Text });
    }
    let exponent = match text {
        [] => 0,
        [b'e' | b'E', rest @ ..] => {
            let (is_negative, rest) = split_sign(rest);
            let (digits, behind) = split_digits(rest);
            if digits.is_empty() || !behind.is_empty() {
                return Err(NoNumber::Text);
            }
            // Beyond any use, but not beyond arithmetic.
            const FAR: i32 = 1_000_000;
            let size = digits.iter().fold(0_i32, |sum, digit| (sum * 10 + i32::from(digit - b'0')).min(FAR));
            if is_negative { -size } else { size }
        }
        _ => return Err(NoNumber::Text),
    };
    Ok(Parts { is_negative, whole, fraction, exponent })
}

/// A time, exact: a digit below 10⁻²⁴ s is the only thing that rounds, and it rounds down.
pub(super) fn time(cell: &[u8], mark: DecimalMark, unit_power: i32) -> Result<Time, NoNumber> {
    let Parts { is_negative, whole, fraction, exponent } = parts(cell, mark)?;
    // A line may be long, but the length of a fraction that matters fits easily.
    let places = i32::try_from(fraction.len()).map_err(|_| NoNumber::TooLarge)?;
    let last_place = exponent + unit_power - places;
    let mut mantissa: i128 = 0;
    let mut place = last_place + places + i32::try_from(whole.len()).map_err(|_| NoNumber::TooLarge)?;
    for digit in whole.iter().chain(fraction) {
        place -= 1;
        if place < YOCTO {
            // Rounding down means away from zero below it.
            if is_negative && *digit != b'0' {
                return finish(-mantissa - 1, YOCTO, last_place);
            }
            continue;
        }
        mantissa = mantissa
            .checked_mul(10)
            .and_then(|sum| sum.checked_add(i128::from(digit - b'0')))
            .ok_or(NoNumber::TooLarge)?;
    }
    finish(if is_negative { -mantissa } else { mantissa }, last_place.max(YOCTO), last_place)
}

fn finish(mantissa: i128, place: i32, last_place: i32) -> Result<Time, NoNumber> {
    if mantissa == 0 {
        return Ok(Time { at: 0, last_place });
    }
    let power = place.checked_sub(YOCTO).and_then(|power| 10_i128.checked_pow(power.unsigned_abs()));
    let at = power.and_then(|power| mantissa.checked_mul(power)).ok_or(NoNumber::TooLarge)?;
    // Twice what a trace holds: room to subtract and to shift without overflow.
    if at.abs() > 2 * i128::from(u64::MAX) * PER_NS {
        return Err(NoNumber::TooLarge);
    }
    Ok(Time { at, last_place })
}

/// What some instruments write where the voltage lies beyond their range; its sign says on which side.
pub(super) fn beyond_range(cell: &[u8]) -> Option<f64> {
    let (is_negative, word) = split_sign(cell);
    let is_infinite = word == "\u{221e}".as_bytes()
        || word.eq_ignore_ascii_case(b"inf")
        || word.eq_ignore_ascii_case(b"infinity");
    is_infinite.then_some(if is_negative { -BEYOND_RANGE } else { BEYOND_RANGE })
}

/// A voltage, correctly rounded.
pub(super) fn real(cell: &[u8], mark: DecimalMark) -> Result<f64, NoNumber> {
    parts(cell, mark)?;
    let text = String::from_utf8_lossy(cell);
    let value = match mark {
        DecimalMark::Point => text.parse::<f64>(),
        DecimalMark::Comma => text.replacen(',', ".", 1).parse(),
    };
    match value {
        Ok(value) if value.is_finite() => Ok(value),
        Ok(_) => Err(NoNumber::TooLarge),
        Err(_) => Err(NoNumber::Text),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use DecimalMark::{Comma, Point};

    #[test]
    fn beyond_range_is_a_side_and_no_number() {
        for (cell, side) in
            [("inf", 1.0), ("+Infinity", 1.0), ("\u{221e}", 1.0), ("-\u{221e}", -1.0), ("-INF", -1.0)]
        {
            assert_eq!(beyond_range(cell.as_bytes()), Some(side * BEYOND_RANGE), "{cell}");
        }
        for cell in ["nan", "3.3", "", "-", "information"] {
            assert_eq!(beyond_range(cell.as_bytes()), None, "{cell}");
        }
    }

    #[track_caller]
    fn check(cell: &str, unit_power: i32, expected: Result<i128, NoNumber>) {
        assert_eq!(time(cell.as_bytes(), Point, unit_power).map(|time| time.at), expected, "{cell}");
    }

    #[test]
    fn time_decimals_are_exact() {
        let ns = PER_NS;
        check("0", 0, Ok(0));
        check("1", -9, Ok(ns));
        check("-1.5", -9, Ok(-3 * ns / 2));
        check("0.1", 0, Ok(100_000_000 * ns));
        check("1.23456789012345e-3", 0, Ok(1_234_567_890_123_450_000_000));
        check("+12E+2", -6, Ok(1_200_000 * ns));
        check(".5", -3, Ok(500_000 * ns));
        check("5.", -3, Ok(5_000_000 * ns));
        // No binary fraction holds these; 0.3 s read as a double and scaled would be 299999999.99999994 ns.
        check("0.3", 0, Ok(300_000_000 * ns));
        check("18446744073.709551615", 0, Ok(i128::from(u64::MAX) * ns));
        check("1e-24", 0, Ok(1));
        check("9.9e-25", 0, Ok(0));
        check("-1e-25", 0, Ok(-1));
        check("-1.5e-24", 0, Ok(-2));
        check("0e999999999999", 0, Ok(0));
        check("1e-999999999999", 0, Ok(0));
    }

    #[test]
    fn time_what_is_no_number_is_refused() {
        for text in ["", "-", ".", "e5", "1e", "1e+", "1.2.3", "1,5", "0x10", "1 ms", "one", "--1"] {
            check(text, 0, Err(NoNumber::Text));
        }
        for text in ["nan", "NaN", "-inf", "Infinity", "+INF", "\u{221e}"] {
            check(text, 0, Err(NoNumber::NotFinite));
        }
        check("1e999999999999", 0, Err(NoNumber::TooLarge));
        check("1e15", 0, Err(NoNumber::TooLarge));
        check(&"9".repeat(60), -9, Err(NoNumber::TooLarge));
    }

    #[test]
    fn time_last_place_is_that_of_the_last_digit() {
        for (cell, unit_power, place) in [("5", 0, 0), ("5.00", -3, -5), ("1.5e-3", 0, -4)] {
            assert_eq!(
                time(cell.as_bytes(), Point, unit_power).expect("a number").last_place,
                place,
                "{cell}"
            );
        }
    }

    #[test]
    fn real_decimal_comma_is_understood() {
        assert_eq!(real(b"-1,5e1", Comma), Ok(-15.0));
        assert_eq!(real(b"3.25", Point), Ok(3.25));
        assert_eq!(real(b"3.25", Comma), Err(NoNumber::Text));
        assert_eq!(real(b"1e400", Point), Err(NoNumber::TooLarge));
    }
}
