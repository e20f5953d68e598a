//! What an input takes for low and for high: standard input classes as data, each with its source.

use std::fmt;
use std::str::FromStr;

use crate::nearest::nearest;
use crate::quantity::Spread;

/// The thresholds of an input at one supply voltage, in volts.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Thresholds {
    /// Where a rising voltage is taken for high.
    pub rising: Spread,
    /// Where a falling voltage is taken for low.
    pub falling: Spread,
}

/// How the thresholds follow the supply.
#[derive(Clone, Copy, PartialEq, Debug)]
enum Levels {
    /// Volts, whatever the supply: low up to the first, high from the last, the typical threshold between.
    Fixed(Spread),
    /// The same as shares of the supply.
    Shares(Spread),
    /// Rising and falling threshold as shares of the supply.
    SchmittShares(Spread, Spread),
    /// Rising and falling threshold at several supplies, linear between them.
    Table(&'static [(f64, Spread, Spread)]),
}

/// An input class.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct InputClass {
    /// How it is written.
    pub name: &'static str,
    /// What it is.
    pub about: &'static str,
    /// Where its figures come from.
    pub source: &'static str,
    /// Least, usual and greatest supply, in volts.
    pub supply: Spread,
    levels: Levels,
    /// The slowest edge it tolerates, in seconds a volt; a Schmitt input has no such limit.
    pub slowest_edge: Option<f64>,
    /// Greatest leakage of the pin either way, in amperes.
    pub leakage: f64,
    /// Capacitance of the pin, in farads.
    pub capacitance: f64,
    /// An input that takes current from the contact: that current in amperes, at the voltage in volts from which it
    /// must be taken for on.
    pub load: Option<(f64, f64)>,
}

const fn s(min: f64, typ: f64, max: f64) -> Spread {
    Spread::new(min, typ, max)
}

/// A plain input on its own.
const PLAIN: InputClass = InputClass {
    name: "",
    about: "",
    source: "",
    supply: s(0.0, 0.0, 0.0),
    levels: Levels::Fixed(s(0.0, 0.0, 0.0)),
    slowest_edge: None,
    // 1 uA and 5 pF: usual limits of CMOS data sheets (common practice).
    leakage: 1e-6,
    capacitance: 5e-12,
    load: None,
};

/// Every class.
pub const ALL: &[InputClass] = &[
    InputClass {
        name: "lvcmos-5",
        about: "5 V CMOS, plain",
        source: "JESD7A: 0.3 and 0.7 of the supply (from memory); edge of 500 ns between 0.3 and 0.7 at 4.5 V (from memory)",
        supply: s(4.5, 5.0, 5.5),
        levels: Levels::Shares(s(0.3, 0.5, 0.7)),
        slowest_edge: Some(139e-9),
        ..PLAIN
    },
    InputClass {
        name: "lvcmos-3.3",
        about: "3.3 V LVTTL and LVCMOS, plain",
        source: "JESD8C.01: 0.8 V and 2.0 V (from memory); edge of 10 ns/V as LVC data sheets ask (from memory)",
        supply: s(3.0, 3.3, 3.6),
        levels: Levels::Fixed(s(0.8, 1.5, 2.0)),
        slowest_edge: Some(10e-9),
        ..PLAIN
    },
    InputClass {
        name: "lvcmos-2.5",
        about: "2.5 V LVCMOS, plain",
        source: "JESD8-5: 0.7 V and 1.7 V; edge of 20 ns/V as LVC data sheets ask (from memory)",
        supply: s(2.3, 2.5, 2.7),
        levels: Levels::Fixed(s(0.7, 1.2, 1.7)),
        slowest_edge: Some(20e-9),
        ..PLAIN
    },
    InputClass {
        name: "lvcmos-1.8",
        about: "1.8 V LVCMOS, plain",
        source: "JESD8-7: 0.35 and 0.65 of the supply; edge of 20 ns/V as LVC data sheets ask (from memory)",
        supply: s(1.65, 1.8, 1.95),
        levels: Levels::Shares(s(0.35, 0.5, 0.65)),
        slowest_edge: Some(20e-9),
        ..PLAIN
    },
    InputClass {
        name: "lvcmos-1.5",
        about: "1.5 V LVCMOS, plain",
        source: "JESD8-11: 0.35 and 0.65 of the supply; edge of 20 ns/V as LVC data sheets ask (from memory)",
        supply: s(1.4, 1.5, 1.6),
        levels: Levels::Shares(s(0.35, 0.5, 0.65)),
        slowest_edge: Some(20e-9),
        ..PLAIN
    },
    InputClass {
        name: "ttl",
        about: "5 V TTL levels (CMOS with TTL inputs), plain",
        source: "series 74 data sheets: 0.8 V and 2.0 V; typical 1.4 V, edge of 139 ns/V as HCT (from memory)",
        supply: s(4.5, 5.0, 5.5),
        levels: Levels::Fixed(s(0.8, 1.4, 2.0)),
        slowest_edge: Some(139e-9),
        ..PLAIN
    },
    InputClass {
        name: "schmitt-hc",
        about: "74HC Schmitt trigger, one gate",
        source: "74HC1G14 data sheet (NXP), table 7, at 2.0, 4.5 and 6.0 V; linear between",
        supply: s(2.0, 5.0, 6.0),
        levels: Levels::Table(&[
            (2.0, s(0.7, 1.09, 1.5), s(0.3, 0.60, 0.9)),
            (4.5, s(1.7, 2.36, 3.15), s(0.9, 1.53, 2.0)),
            (6.0, s(2.1, 3.12, 4.2), s(1.2, 2.08, 2.6)),
        ]),
        ..PLAIN
    },
    InputClass {
        name: "schmitt-hc-hex",
        about: "74HC Schmitt trigger, six gates",
        source: "MC74HC14A data sheet (onsemi): 3.0 V read, 2.0, 4.5 and 6.0 V from memory; linear between, typical in the middle",
        supply: s(2.0, 3.3, 6.0),
        levels: Levels::Table(&[
            (2.0, s(1.0, 1.25, 1.5), s(0.3, 0.6, 0.9)),
            (3.0, s(1.5, 1.825, 2.15), s(0.5, 0.95, 1.4)),
            (4.5, s(2.3, 2.725, 3.15), s(0.9, 1.45, 2.0)),
            (6.0, s(3.0, 3.6, 4.2), s(1.2, 1.9, 2.6)),
        ]),
        ..PLAIN
    },
    InputClass {
        name: "schmitt-hct",
        about: "74HCT Schmitt trigger (TTL levels)",
        source: "74HCT14 data sheets at 4.5 and 5.5 V (from memory); linear between",
        supply: s(4.5, 5.0, 5.5),
        levels: Levels::Table(&[
            (4.5, s(1.2, 1.41, 1.9), s(0.5, 0.85, 1.2)),
            (5.5, s(1.4, 1.59, 2.1), s(0.6, 0.99, 1.4)),
        ]),
        ..PLAIN
    },
    InputClass {
        name: "schmitt-pin",
        about: "Schmitt-trigger pin of a microcontroller",
        source: "common practice: 0.3 and 0.7 of the supply, hysteresis of at least 0.05 of it (from memory)",
        supply: s(1.62, 3.3, 5.5),
        levels: Levels::SchmittShares(s(0.35, 0.55, 0.7), s(0.3, 0.45, 0.65)),
        ..PLAIN
    },
    InputClass {
        name: "industrial-1",
        about: "24 V input of a controller, type 1 (mechanical contacts)",
        source: "IEC 61131-2: off up to 5 V, on from 15 V with more than 2 mA; supply 24 V -15/+20 %",
        supply: s(20.4, 24.0, 28.8),
        levels: Levels::Fixed(s(5.0, 10.0, 15.0)),
        leakage: 0.0,
        capacitance: 10e-12,
        load: Some((2e-3, 15.0)),
        ..PLAIN
    },
    InputClass {
        name: "industrial-2",
        about: "24 V input of a controller, type 2 (two-wire sensors of more current)",
        source: "IEC 61131-2: off up to 5 V, on from 11 V with at least 6 mA (from memory); supply 24 V -15/+20 %",
        supply: s(20.4, 24.0, 28.8),
        levels: Levels::Fixed(s(5.0, 8.0, 11.0)),
        leakage: 0.0,
        capacitance: 10e-12,
        load: Some((6e-3, 11.0)),
        ..PLAIN
    },
    InputClass {
        name: "industrial-3",
        about: "24 V input of a controller, type 3 (contacts and sensors of little current)",
        source: "IEC 61131-2: off up to 5 V, on from 11 V with 2 mA or a little more; supply 24 V -15/+20 %",
        supply: s(20.4, 24.0, 28.8),
        levels: Levels::Fixed(s(5.0, 8.0, 11.0)),
        leakage: 0.0,
        capacitance: 10e-12,
        load: Some((2e-3, 11.0)),
        ..PLAIN
    },
];

impl InputClass {
    /// The class written as `name`.
    #[must_use]
    pub fn named(name: &str) -> Option<&'static Self> {
        ALL.iter().find(|class| class.name == name)
    }

    /// Whether rising and falling edges have thresholds of their own.
    #[must_use]
    pub const fn is_schmitt(&self) -> bool {
        matches!(self.levels, Levels::SchmittShares(..) | Levels::Table(_))
    }

    /// The thresholds at a supply; of a table beyond its ends, those at the nearer end.
    #[must_use]
    pub fn thresholds(&self, supply: f64) -> Thresholds {
        match self.levels {
            Levels::Fixed(both) => Thresholds { rising: both, falling: both },
            Levels::Shares(both) => {
                let both = both.map(|share| share * supply);
                Thresholds { rising: both, falling: both }
            }
            Levels::SchmittShares(rising, falling) => Thresholds {
                rising: rising.map(|share| share * supply),
                falling: falling.map(|share| share * supply),
            },
            Levels::Table(rows) => between(rows, supply),
        }
    }
}

fn between(rows: &[(f64, Spread, Spread)], supply: f64) -> Thresholds {
    let above = rows.iter().position(|row| row.0 >= supply).unwrap_or(rows.len() - 1);
    let (low, high) = (&rows[above.saturating_sub(1)], &rows[above]);
    let part = if high.0 > low.0 { ((supply - low.0) / (high.0 - low.0)).clamp(0.0, 1.0) } else { 0.0 };
    let mix = |a: f64, b: f64| a + part * (b - a);
    let mixed = |a: Spread, b: Spread| s(mix(a.min, b.min), mix(a.typ, b.typ), mix(a.max, b.max));
    Thresholds { rising: mixed(low.1, high.1), falling: mixed(low.2, high.2) }
}

/// The name of a class, as an option or a value of the requirement file.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct ClassName(pub &'static InputClass);

/// Why a text names no class.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[error("{message}; {help}")]
pub struct ClassNameError {
    /// What is wrong.
    pub message: String,
    /// What to write instead.
    pub help: String,
}

impl FromStr for ClassName {
    type Err = ClassNameError;

    fn from_str(text: &str) -> Result<Self, ClassNameError> {
        InputClass::named(text).map(Self).ok_or_else(|| {
            let names = || ALL.iter().map(|class| class.name);
            let help = match nearest(text, names()) {
                Some(name) => format!("write \"{name}\""),
                None => format!("write one of {}", names().collect::<Vec<_>>().join(", ")),
            };
            ClassNameError { message: format!("\"{text}\" is no input class"), help }
        })
    }
}

impl fmt::Display for ClassName {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.0.name)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn at(name: &str, supply: f64) -> Thresholds {
        InputClass::named(name).expect(name).thresholds(supply)
    }

    #[test]
    fn classes_have_ordered_thresholds_within_their_supply() {
        for class in ALL {
            for supply in [class.supply.min, class.supply.typ, class.supply.max] {
                let Thresholds { rising, falling } = class.thresholds(supply);
                for one in [rising, falling] {
                    assert!(0.0 < one.min && one.min <= one.typ && one.typ <= one.max, "{}", class.name);
                    assert!(one.max < supply, "{} at {supply}", class.name);
                }
                assert!(falling.min <= rising.min && falling.typ <= rising.typ && falling.max <= rising.max);
                assert_eq!(class.is_schmitt(), falling.typ < rising.typ, "{}", class.name);
            }
            assert_eq!(ALL.iter().filter(|other| other.name == class.name).count(), 1);
            assert!(!class.source.is_empty() && !class.about.is_empty());
        }
    }

    /// 74HC1G14 data sheet, table 7, at 4.5 V; halfway between 4.5 V and 6.0 V the mean of both.
    #[test]
    fn schmitt_thresholds_are_those_of_the_data_sheet_and_linear_between() {
        let found = at("schmitt-hc", 4.5);
        assert!((found.rising.typ - 2.36).abs() < 1e-12 && (found.rising.max - 3.15).abs() < 1e-12);
        assert!((found.falling.min - 0.9).abs() < 1e-12 && (found.falling.max - 2.0).abs() < 1e-12);
        let middle = at("schmitt-hc", 5.25);
        assert!((middle.rising.typ - 2.74).abs() < 1e-12 && (middle.falling.max - 2.3).abs() < 1e-12);
    }

    #[test]
    fn class_name_with_a_slip_is_corrected() {
        let refuses = |text: &str| text.parse::<ClassName>().expect_err(text).to_string();
        assert_eq!(refuses("schmit-hc"), "\"schmit-hc\" is no input class; write \"schmitt-hc\"");
        assert!(refuses("").contains("write one of lvcmos-5, lvcmos-3.3"));
    }
}
