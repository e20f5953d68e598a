//! Resistance, capacitance, current, and times too short for whole nanoseconds.

use std::fmt;
use std::str::FromStr;

use super::decimal::{Manner, Unit, split};
use super::{Quantity, QuantityError};

/// One quantity that is zero or more, held in whole numbers of its finest unit.
macro_rules! electrical {
    (
        $(#[$doc:meta])* $type:ident, $manner:ident, $units:ident, $shown:ident,
        $name:literal, $named:expr, $finest:literal, $example:literal, $per_base:literal,
        [$($unit:literal = $size:literal),+], [$($show:literal = $show_size:literal),+]
    ) => {
        $(#[$doc])*
        #[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
        pub struct $type(u64);

        const $manner: Manner = Manner { name: $name, units: $named };
        const $units: &[Unit] = &[$(($unit, $size)),+];
        /// The units it is shown in, the largest first.
        const $shown: &[Unit] = &[$(($show, $show_size)),+];

        impl $type {
            /// So many of the finest unit.
            #[must_use]
            pub const fn from_finest(finest: u64) -> Self {
                Self(finest)
            }

            /// The number of the finest unit.
            #[must_use]
            pub const fn finest(self) -> u64 {
                self.0
            }

            /// The quantity in its base unit, for calculations.
            #[must_use]
            pub fn base(self) -> f64 {
                // Beyond 2^53 of the finest unit a double is off by 1e-16 of the value, far below any tolerance.
                self.0 as f64 / $per_base
            }
        }

        impl Quantity for $type {
            const NAME: &'static str = $name;
            const EXAMPLE: &'static str = $example;
        }

        impl FromStr for $type {
            type Err = QuantityError;

            fn from_str(text: &str) -> Result<Self, QuantityError> {
                let written = split(text, &$manner)?;
                let size = written.unit_size($units, &$manner)?;
                written.whole(size, $finest, &$manner).map(Self)
            }
        }

        impl fmt::Display for $type {
            fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                f.write_str(&shown(self.0, $shown))
            }
        }
    };
}

electrical! {
    /// A resistance in whole milliohms, written "10 kohm".
    Resistance, RESISTANCE, RESISTANCE_UNITS, RESISTANCE_SHOWN,
    "a resistance", &["kohm", "ohm", "Mohm", "mohm"], "1 mohm", "10 kohm", 1e3,
    ["ohm" = 1_000, "kohm" = 1_000_000, "Mohm" = 1_000_000_000, "mohm" = 1, "Gohm" = 1_000_000_000_000,
     "Ω" = 1_000, "kΩ" = 1_000_000, "MΩ" = 1_000_000_000, "mΩ" = 1],
    ["Gohm" = 1_000_000_000_000, "Mohm" = 1_000_000_000, "kohm" = 1_000_000, "ohm" = 1_000, "mohm" = 1]
}

electrical! {
    /// A capacitance in whole femtofarads, written "100 nF".
    Capacitance, CAPACITANCE, CAPACITANCE_UNITS, CAPACITANCE_SHOWN,
    "a capacitance", &["nF", "uF", "pF", "mF"], "1 fF", "100 nF", 1e15,
    ["fF" = 1, "pF" = 1_000, "nF" = 1_000_000, "uF" = 1_000_000_000, "µF" = 1_000_000_000,
     "μF" = 1_000_000_000, "mF" = 1_000_000_000_000, "F" = 1_000_000_000_000_000],
    ["F" = 1_000_000_000_000_000, "mF" = 1_000_000_000_000, "uF" = 1_000_000_000, "nF" = 1_000_000,
     "pF" = 1_000, "fF" = 1]
}

electrical! {
    /// A current in whole nanoamperes, written "1 mA".
    Current, CURRENT, CURRENT_UNITS, CURRENT_SHOWN,
    "a current", &["mA", "uA", "nA", "A"], "1 nA", "1 mA", 1e9,
    ["nA" = 1, "uA" = 1_000, "µA" = 1_000, "μA" = 1_000, "mA" = 1_000_000, "A" = 1_000_000_000],
    ["A" = 1_000_000_000, "mA" = 1_000_000, "uA" = 1_000, "nA" = 1]
}

electrical! {
    /// A time in tenths of an attosecond, written "0.31 ns": what a flip-flop takes to make up its mind.
    ShortTime, SHORT_TIME, SHORT_TIME_UNITS, SHORT_TIME_SHOWN,
    "a time", &["ns", "ps", "fs", "as", "us", "ms", "s"], "0.1 as", "0.31 ns", 1e19,
    ["as" = 10, "fs" = 10_000, "ps" = 10_000_000, "ns" = 10_000_000_000, "us" = 10_000_000_000_000,
     "µs" = 10_000_000_000_000, "μs" = 10_000_000_000_000, "ms" = 10_000_000_000_000_000,
     "s" = 10_000_000_000_000_000_000],
    ["s" = 10_000_000_000_000_000_000, "ms" = 10_000_000_000_000_000, "us" = 10_000_000_000_000,
     "ns" = 10_000_000_000, "ps" = 10_000_000, "fs" = 10_000, "as" = 10]
}

/// Every digit, in the largest unit of which there is at least one.
fn shown(finest: u64, units: &[Unit]) -> String {
    // Nothing is nothing of the plain unit, which has the shortest name.
    if finest == 0 {
        return format!("0 {}", units.iter().map(|unit| unit.0).min_by_key(|name| name.len()).unwrap_or(""));
    }
    let Some(&(name, size)) = units.iter().find(|(_, size)| finest >= *size).or(units.last()) else {
        return finest.to_string();
    };
    let (whole, part) = (finest / size, finest % size);
    if part == 0 {
        return format!("{whole} {name}");
    }
    let width = size.ilog10() as usize;
    format!("{whole}.{} {name}", format!("{part:0width$}").trim_end_matches('0'))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn electrical_quantity_with_each_unit_is_read_exactly() {
        let ohm = |text: &str| text.parse::<Resistance>().map(|one| (one.finest(), one.to_string()));
        assert_eq!(ohm("10 kohm"), Ok((10_000_000, "10 kohm".to_owned())));
        assert_eq!(ohm("4.7kΩ"), Ok((4_700_000, "4.7 kohm".to_owned())));
        assert_eq!(ohm("100 mohm"), Ok((100, "100 mohm".to_owned())));
        assert_eq!(ohm("0 ohm"), Ok((0, "0 ohm".to_owned())));
        let farad = |text: &str| text.parse::<Capacitance>().map(|one| (one.finest(), one.to_string()));
        assert_eq!(farad("100 nF"), Ok((100_000_000, "100 nF".to_owned())));
        assert_eq!(farad("0.01 µF"), Ok((10_000_000, "10 nF".to_owned())));
        assert_eq!(farad("1 mF"), Ok((1_000_000_000_000, "1 mF".to_owned())));
        let ampere = |text: &str| text.parse::<Current>().map(|one| (one.finest(), one.to_string()));
        assert_eq!(ampere("0.33 mA"), Ok((330_000, "330 uA".to_owned())));
        let short = |text: &str| text.parse::<ShortTime>().map(|one| (one.finest(), one.to_string()));
        assert_eq!(short("9.6 as"), Ok((96, "9.6 as".to_owned())));
        assert_eq!(short("0.31 ns"), Ok((3_100_000_000, "310 ps".to_owned())));
        assert_eq!(short("0.4 s"), Ok((4_000_000_000_000_000_000, "400 ms".to_owned())));
    }

    #[test]
    fn electrical_quantity_that_is_none_is_refused_with_what_to_write() {
        let refuses = |text: &str| text.parse::<Resistance>().expect_err(text).to_string();
        assert_eq!(refuses("10"), "\"10\" has no unit; write \"10 kohm\" or \"10 ohm\"");
        assert_eq!(refuses("-1 ohm"), "\"-1 ohm\" is below zero; a resistance is zero or more");
        assert_eq!(
            refuses("10 nF"),
            "\"10 nF\" has an unknown unit \"nF\"; the unit of a resistance is kohm, ohm, Mohm or mohm"
        );
        assert_eq!(refuses("10 Kohm"), "\"10 Kohm\" has an unknown unit \"Kohm\"; write \"10 kohm\"");
    }

    #[test]
    fn electrical_quantity_in_its_base_unit_is_what_was_written() {
        assert_eq!("10 kohm".parse::<Resistance>().unwrap().base(), 10e3);
        assert_eq!("100 nF".parse::<Capacitance>().unwrap().base(), 100e-9);
        assert_eq!("2 mA".parse::<Current>().unwrap().base(), 2e-3);
    }
}
