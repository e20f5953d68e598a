//! A measured or calculated quantity with three digits and an ASCII prefix.

use crate::quantity::Rounding;

/// `value` with its unit, rounded to the nearest: 0.00123 and "A" give "1.23 mA". Infinite is "never", which is what it
/// means of a time.
///
/// Parts without length and inductance say nothing below a nanosecond, a tenth of a millivolt or a nanojoule, so what is
/// smaller is not told in digits.
#[must_use]
pub fn si(value: f64, unit: &str) -> String {
    shown(value, unit, Rounding::Nearest)
}

/// A quantity that must not be understated.
#[must_use]
pub fn at_most(value: f64, unit: &str) -> String {
    shown(value, unit, Rounding::Up)
}

/// A quantity that must not be overstated.
#[must_use]
pub fn at_least(value: f64, unit: &str) -> String {
    shown(value, unit, Rounding::Down)
}

/// The least and the greatest of a quantity, rounded away from each other; a single value is shown as one.
#[must_use]
pub fn between(least: f64, most: f64, unit: &str) -> String {
    if (most - least).abs() <= SAME * most.abs() {
        return si(least, unit);
    }
    let (least, most) = (at_least(least, unit), at_most(most, unit));
    if least == most { least } else { format!("{least} to {most}") }
}

fn shown(value: f64, unit: &str, rounding: Rounding) -> String {
    const PREFIXES: [&str; 9] = ["f", "p", "n", "u", "m", "", "k", "M", "G"];
    if !value.is_finite() {
        return "never".to_owned();
    }
    match unit {
        // What is too small to be told is nothing where it must not be overstated.
        "s" | "s/V" | "J" if value != 0.0 && value.abs() < LEAST && rounding == Rounding::Down => {
            return format!("0 {unit}");
        }
        "s" | "s/V" | "J" if value != 0.0 && value.abs() < LEAST => return format!("less than 1 n{unit}"),
        "V" if value.abs() < 1e-4 => return "0 V".to_owned(),
        _ => {}
    }
    // Rounded to three digits first, so that 999.96 becomes 1.00 k and not 1000.
    let rounded = three_digits(value, rounding);
    if rounded.abs() < 1e-15 {
        return format!("0 {unit}");
    }
    let group = (rounded.abs().log10() + 1e-9).div_euclid(3.0).clamp(-5.0, 3.0) as i32;
    let shown = rounded / 10_f64.powi(group * 3);
    let decimals = if shown.abs() >= 99.95 {
        0
    } else if shown.abs() >= 9.995 {
        1
    } else {
        2
    };
    // The group is between -5 and 3, so the index is inside.
    format!("{shown:.decimals$} {}{unit}", PREFIXES[(group + 5) as usize])
}

/// The value nearest to `value` with three digits, or the next one on the side that is asked for.
fn three_digits(value: f64, rounding: Rounding) -> f64 {
    let text = format!("{value:.2e}");
    let nearest: f64 = text.parse().unwrap_or(value);
    let is_safe = match rounding {
        Rounding::Nearest => true,
        Rounding::Up => nearest >= value - SAME * value.abs(),
        Rounding::Down => nearest <= value + SAME * value.abs(),
    };
    let exponent: i32 = text.split_once('e').and_then(|(_, digits)| digits.parse().ok()).unwrap_or(0);
    if is_safe {
        return nearest;
    }
    let step = if rounding == Rounding::Down { -1.0 } else { 1.0 };
    // Below a power of ten the digits are finer: 1.00 k is followed by 999.
    let is_power = nearest.abs() == 10_f64.powi(exponent) && nearest * step < 0.0;
    let last = exponent - if is_power { 3 } else { 2 };
    // Counted in units of the last digit, so that the sum is exact.
    ((nearest / 10_f64.powi(last)).round() + step) * 10_f64.powi(last)
}

/// Two values that differ by less than this part of them are the same: the sums behind them are no better.
const SAME: f64 = 1e-9;

/// A nanosecond, or a nanojoule.
const LEAST: f64 = 1e-9;

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quantity_is_shown_with_three_digits_and_the_fitting_prefix() {
        for (value, unit, expected) in [
            (0.00123, "A", "1.23 mA"),
            (999.96, "ohm", "1.00 kohm"),
            (1000.0, "ohm", "1.00 kohm"),
            (-0.05, "V", "-50.0 mV"),
            (3.3, "V", "3.30 V"),
            (0.0, "V", "0 V"),
            (76.5e-9, "V", "0 V"),
            (-1.02e-3, "V", "-1.02 mV"),
            (30.5e-12, "s", "less than 1 ns"),
            (0.0, "s", "0 s"),
            (1e-9, "s/V", "1.00 ns/V"),
            (61e-12, "J", "less than 1 nJ"),
            (148.654e-6, "s", "149 us"),
            (1e12, "s", "1000 Gs"),
            (f64::INFINITY, "s", "never"),
        ] {
            assert_eq!(si(value, unit), expected);
        }
    }
    #[test]
    fn quantity_that_bounds_is_rounded_to_the_safe_side() {
        for (value, unit, least, most) in [
            (793.24e-6, "s", "793 us", "794 us"),
            (147.51e-6, "s", "147 us", "148 us"),
            (16.23e-6, "s", "16.2 us", "16.3 us"),
            (999.96, "ohm", "999 ohm", "1.00 kohm"),
            (0.999_5, "A", "999 mA", "1.00 A"),
            (1.000_1, "A", "1.00 A", "1.01 A"),
            (-1.024e-3, "V", "-1.03 mV", "-1.02 mV"),
            (30.5e-12, "s", "0 s", "less than 1 ns"),
            (0.0, "s", "0 s", "0 s"),
            // What a sum leaves behind the last digit moves nothing.
            (0.1 + 0.2, "V", "300 mV", "300 mV"),
            (0.3 - 1e-12, "V", "300 mV", "300 mV"),
        ] {
            assert_eq!(
                (at_least(value, unit).as_str(), at_most(value, unit).as_str()),
                (least, most),
                "{value}"
            );
        }
    }

    #[test]
    fn quantity_between_two_bounds_is_rounded_away_from_both() {
        assert_eq!(between(3.084, 3.516, "V"), "3.08 V to 3.52 V");
        assert_eq!(between(3.086, 3.514, "V"), "3.08 V to 3.52 V");
        assert_eq!(between(1.0 / 3.0, 1.0 / 3.0, "A"), "333 mA");
    }
}
