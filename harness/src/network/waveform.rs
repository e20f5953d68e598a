//! The voltage of the pin after a make and after a break, as points to draw.

use debounce_core::{Change, PerChange, Position};

use super::model::{Network, ReadLevels};
use super::unit::Unit;

/// The pin at one instant.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Point {
    /// Since the change of the contact, in seconds.
    pub seconds: f64,
    /// The lowest of the units drawn, in volts.
    pub lowest: f64,
    /// The typical unit.
    pub typical: f64,
    /// The highest of the units drawn.
    pub highest: f64,
}

/// One edge, ready to be drawn.
#[derive(Clone, PartialEq, Debug)]
pub struct Waveform {
    /// The points, from the change on.
    pub points: Vec<Point>,
    /// Where the reading may change first, typically, and surely, in volts at the typical supply.
    pub thresholds: ReadLevels,
}

/// Points of one edge.
const POINTS: u32 = 81;

impl Network {
    /// Both edges. The band lies between the quickest and the slowest unit; at each instant it holds the typical one.
    #[must_use]
    pub fn waveforms(&self) -> PerChange<Waveform> {
        PerChange { make: self.waveform(Change::Make), break_: self.waveform(Change::Break) }
    }

    fn waveform(&self, change: Change) -> Waveform {
        let position = change.to();
        let first: fn(&ReadLevels) -> f64 = |levels| levels.first;
        let surely: fn(&ReadLevels) -> f64 = |levels| levels.surely;
        let quick = self.least(|unit| self.time_to_read(unit, position, first));
        let slow = self.greatest(|unit| self.time_to_read(unit, position, surely));
        let typical = self.typical();
        let long = [slow.value, quick.value, self.time_to_read(&typical, position, |levels| levels.typical)];
        let end = long.into_iter().filter(|time| time.is_finite()).fold(0.0, f64::max) * 1.6;
        let end = if end > 0.0 { end } else { 5.0 * typical.scale() };
        // Nobody can draw or measure what parts without length do in less.
        let end = end.max(1e-9);
        let units = [quick.unit, slow.unit, typical];
        let step = end / f64::from(POINTS - 1);
        let mut states = units.map(|unit| unit.steady(!position));
        let mut points = Vec::new();
        for index in 0..POINTS {
            if index > 0 {
                for (state, unit) in states.iter_mut().zip(&units) {
                    *state = unit.after(position, *state, step);
                }
            }
            let volts: [f64; 3] = std::array::from_fn(|unit| self.volts(&units[unit], states[unit].pin));
            points.push(Point {
                seconds: step * f64::from(index),
                lowest: volts.into_iter().fold(f64::INFINITY, f64::min),
                typical: volts[2],
                highest: volts.into_iter().fold(f64::NEG_INFINITY, f64::max),
            });
        }
        Waveform { points, thresholds: self.shown_levels(&typical, position) }
    }

    fn shown_levels(&self, unit: &Unit, position: Position) -> ReadLevels {
        let ReadLevels { first, typical, surely } = self.levels_to_read(unit, position);
        let volts = |drawn| self.volts(unit, drawn);
        ReadLevels { first: volts(first), typical: volts(typical), surely: volts(surely) }
    }
}
