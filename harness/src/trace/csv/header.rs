//! Column names and units, from the lines above the data.

use super::line::decoded;
use crate::trace::TimeUnit;

/// What the lines above the data say of one column.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(super) struct Column {
    /// The name as it stands, unit and all.
    pub(super) full: String,
    /// The name without its unit.
    pub(super) name: String,
    pub(super) unit: Option<Unit>,
}

/// A unit that a column can have.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Unit {
    Time(TimeUnit),
    Volts(VoltUnit),
}

/// A unit of voltage.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub(super) enum VoltUnit {
    #[default]
    Volts,
    Millivolts,
    Microvolts,
    Kilovolts,
}

impl VoltUnit {
    /// Volts; a division by a whole number, since a factor of 0.001 is not exact.
    pub(super) fn volts(self, value: f64) -> f64 {
        match self {
            Self::Volts => value,
            Self::Millivolts => value / 1e3,
            Self::Microvolts => value / 1e6,
            Self::Kilovolts => value * 1e3,
        }
    }

    fn parse(text: &str) -> Option<Self> {
        match text {
            "V" | "v" | "Volt" | "Volts" | "volt" | "volts" | "VOLTS" => Some(Self::Volts),
            "mV" | "mVolt" | "mVolts" | "millivolts" => Some(Self::Millivolts),
            "uV" | "\u{b5}V" | "\u{3bc}V" | "microvolts" => Some(Self::Microvolts),
            "kV" | "kilovolts" => Some(Self::Kilovolts),
            _ => None,
        }
    }
}

impl Unit {
    fn parse(text: &str) -> Option<Self> {
        let text = text.trim();
        VoltUnit::parse(text).map(Self::Volts).or_else(|| TimeUnit::parse(text).map(Self::Time))
    }
}

fn inside_brackets(text: &str) -> Option<(&str, &str)> {
    let (closing, opening) =
        [(')', '('), (']', '[')].into_iter().find(|(closing, _)| text.ends_with(*closing))?;
    text.strip_suffix(closing)?.rsplit_once(opening)
}

impl Column {
    /// Understands `time (ms)`, `Time [us]`, `t/s`, `CH1 in mV`, `time_ms`, `Time ms` and a bare unit.
    pub(super) fn parse(cell: &str) -> Self {
        let full = cell.trim().to_owned();
        let mut split = vec![inside_brackets(&full)];
        split.extend([" in ", "/", "_", " "].map(|between| full.rsplit_once(between)));
        let named =
            split.into_iter().flatten().find_map(|(name, unit)| Some((name.trim(), Unit::parse(unit)?)));
        let (name, unit) = match named {
            Some((name, unit)) => (name.to_owned(), Some(unit)),
            None => (full.clone(), Unit::parse(&full)),
        };
        Self { full, name, unit }
    }

    /// Whether the name says that these are the times.
    pub(super) fn is_time(&self) -> bool {
        let name = self.name.to_lowercase();
        matches!(self.unit, Some(Unit::Time(_)))
            || matches!(name.as_str(), "t" | "x-axis" | "timestamp" | "timestamps")
            || name
                .split(|letter: char| !letter.is_alphabetic())
                .any(|word| word == "time" || word == "times")
    }
}

/// The unit in a cell of a row of units, such as `(ms)` or `V`; an empty cell is a unit that is not given.
pub(super) fn unit_cell(cell: &[u8]) -> Option<Option<Unit>> {
    let text = decoded(cell);
    let text = text.trim();
    if text.is_empty() {
        return Some(None);
    }
    let bare = inside_brackets(text).filter(|(before, _)| before.is_empty()).map_or(text, |(_, unit)| unit);
    Unit::parse(bare).map(Some)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn column_units_are_found_wherever_they_stand() {
        let time = |unit| Some(Unit::Time(unit));
        let volts = |unit| Some(Unit::Volts(unit));
        for (cell, name, unit) in [
            ("time (ms)", "time", time(TimeUnit::Milliseconds)),
            ("Time [us]", "Time", time(TimeUnit::Microseconds)),
            ("t/s", "t", time(TimeUnit::Seconds)),
            ("CH1 in mV", "CH1", volts(VoltUnit::Millivolts)),
            ("time_ms", "time", time(TimeUnit::Milliseconds)),
            ("Time \u{b5}s", "Time", time(TimeUnit::Microseconds)),
            ("Second", "Second", time(TimeUnit::Seconds)),
            ("CH1(V)", "CH1", volts(VoltUnit::Volts)),
            ("Channel 1", "Channel 1", None),
            ("level", "level", None),
            ("limit_switch", "limit_switch", None),
        ] {
            let column = Column::parse(cell);
            assert_eq!((column.name.as_str(), column.unit), (name, unit), "{cell}");
        }
    }

    #[test]
    fn column_time_is_told_by_name_or_unit() {
        for (cell, is_time) in [
            ("Time", true),
            ("t", true),
            ("x-axis", true),
            ("Sample time", true),
            ("us", true),
            ("timer", false),
            ("CH1 (V)", false),
        ] {
            assert_eq!(Column::parse(cell).is_time(), is_time, "{cell}");
        }
    }

    #[test]
    fn volt_unit_scales_exactly_where_it_can() {
        assert_eq!(VoltUnit::Millivolts.volts(800.0), 0.8);
        assert_eq!(VoltUnit::Microvolts.volts(3.3e6), 3.3);
        assert_eq!(VoltUnit::Kilovolts.volts(0.5), 500.0);
    }
}
