//! Coordinates in text.

use std::fmt;

/// A coordinate, shown to a tenth, without a fraction that says nothing.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Px(f64);

/// A coordinate for an attribute of SVG.
#[must_use]
pub const fn px(at: f64) -> Px {
    Px(at)
}

impl fmt::Display for Px {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        // Through whole tenths there is one zero only, and no rounding of the formatter to depend on.
        let tenths = (self.0 * 10.0).round();
        if !tenths.is_finite() {
            return f.write_str("0");
        }
        let sign = if tenths < 0.0 { "-" } else { "" };
        let (whole, tenth) = ((tenths.abs() / 10.0).floor(), tenths.abs() % 10.0);
        if tenth == 0.0 { write!(f, "{sign}{whole:.0}") } else { write!(f, "{sign}{whole:.0}.{tenth:.0}") }
    }
}

impl maud::Render for Px {
    fn render_to(&self, buffer: &mut String) {
        use fmt::Write as _;
        // Writing to a string does not fail.
        let _ = write!(buffer, "{self}");
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn coordinate_is_shown_to_a_tenth() {
        let shown = |at: f64| px(at).to_string();
        assert_eq!([0.0, -0.04, 12.0, 12.34, -7.96, 99.99].map(shown), ["0", "0", "12", "12.3", "-8", "100"]);
        assert_eq!([f64::NAN, f64::INFINITY].map(shown), ["0", "0"]);
    }
}
