//! A measured or calculated quantity with three digits and an ASCII prefix.

/// `value` with its unit: 0.00123 and "A" give "1.23 mA". Infinite is "never", which is what it means of a time.
///
/// Parts without length and inductance say nothing below a nanosecond, a tenth of a millivolt or a nanojoule, so what is
/// smaller is not told in digits.
#[must_use]
pub fn si(value: f64, unit: &str) -> String {
    const PREFIXES: [&str; 9] = ["f", "p", "n", "u", "m", "", "k", "M", "G"];
    if !value.is_finite() {
        return "never".to_owned();
    }
    match unit {
        "s" | "s/V" | "J" if value != 0.0 && value.abs() < LEAST => return format!("less than 1 n{unit}"),
        "V" if value.abs() < 1e-4 => return "0 V".to_owned(),
        _ => {}
    }
    // Rounded to three digits first, so that 999.96 becomes 1.00 k and not 1000.
    let rounded: f64 = format!("{value:.2e}").parse().unwrap_or(value);
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
}
