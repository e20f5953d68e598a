//! What a network does: levels, delays, currents, what it lets through.

use debounce_core::{Change, PerChange, PerPosition, Position};

use super::burst::{Burst, BurstLimit};
use super::model::{Network, ReadLevels};
use super::unit::{State, Unit};
use crate::quantity::Spread;

/// Times from the change of the contact to that of the reading, in seconds.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Delay {
    /// No unit is quicker.
    pub min: f64,
    /// The typical unit; infinite where it never reads the change.
    pub typ: f64,
    /// No unit is slower; infinite where some unit never reads the change.
    pub max: f64,
}

/// What a network does, over all its tolerances.
#[derive(Clone, PartialEq, Debug)]
pub struct Analysis {
    /// Voltage of the pin at rest, on the board.
    pub rest: PerPosition<Spread>,
    /// Time to threshold at make and break, from rest.
    pub delay: PerChange<Delay>,
    /// How long the slowest unit takes for a volt at its last threshold, in seconds a volt.
    pub slowest_edge: PerChange<f64>,
    /// Current through the contact just after it made, in amperes, without what the cable adds.
    pub inrush: Spread,
    /// At the greatest inrush the charge of capacitor and pin would be gone in this time, in seconds; with a resistor
    /// in its way it is the time constant.
    pub inrush_lasts: f64,
    /// What the empty cable can add for a moment: the supply over its wave resistance.
    pub cable_inrush: f64,
    /// Energy that the contact takes at a make, in joules; a resistor in its way takes most of it instead.
    pub energy: f64,
    /// Current through the contact at rest, in amperes.
    pub steady: Spread,
    /// Power from the supply while the contact is held closed, in watts.
    pub held_power: Spread,
    /// After this time in the new position no unit shows anything of the old: the slower of both edges.
    pub recovery: f64,
    /// The widest lone pulse, from rest, that no unit sees; in the position it begins in.
    pub lone_pulse: PerPosition<f64>,
    /// The same in bursts of many.
    pub bursts: Vec<(Burst, PerPosition<BurstLimit>)>,
}

/// No cable has a wave resistance much below this (common practice: 50 to 120 ohm).
const WAVE_RESISTANCE: f64 = 50.0;

impl Network {
    /// Works out what the network does.
    #[must_use]
    pub fn analysis(&self) -> Analysis {
        let delay = PerChange { make: self.delay(Change::Make), break_: self.delay(Change::Break) };
        let bursts = Burst::STANDARD
            .iter()
            .map(|&burst| {
                let limit = |position| super::burst::limit(self, burst, position);
                (burst, PerPosition { open: limit(Position::Open), closed: limit(Position::Closed) })
            })
            .collect();
        let steady = |unit: &Unit| unit.steady(Position::Closed).contact / unit.contact;
        let stored = |unit: &Unit| {
            let State { contact, pin } = unit.steady(Position::Open);
            (unit.cable * contact * contact + unit.capacitance * pin * pin) / 2.0
        };
        Analysis {
            rest: PerPosition { open: self.rest(Position::Open), closed: self.rest(Position::Closed) },
            slowest_edge: PerChange {
                make: self.slowest_edge(Change::Make),
                break_: self.slowest_edge(Change::Break),
            },
            inrush: self.spread_of(|unit| self.inrush(unit)),
            inrush_lasts: self
                .greatest(|unit| unit.capacitance * unit.steady(Position::Open).pin / self.inrush(unit))
                .value,
            cable_inrush: if self.cable.max > 0.0 { self.supply.max / WAVE_RESISTANCE } else { 0.0 },
            energy: self.greatest(stored).value,
            steady: self.spread_of(steady),
            held_power: self.spread_of(|unit| unit.supply * steady(unit)),
            recovery: delay.make.max.max(delay.break_.max),
            // While open a pulse closes the line, and is seen as soon as a make would be.
            lone_pulse: PerPosition { open: delay.make.min, closed: delay.break_.min },
            delay,
            bursts,
        }
    }

    /// Just after a make: what the parts allow, or less, where nothing is there to discharge but strays. Those lie along
    /// wires, which let no more through than the voltage over their wave resistance.
    fn inrush(&self, unit: &Unit) -> f64 {
        let open = unit.steady(Position::Open);
        let by_parts = unit.inrush(open);
        if self.capacitor.max > 0.0 {
            return by_parts;
        }
        let steady = unit.steady(Position::Closed).contact / unit.contact;
        by_parts.min(open.pin / WAVE_RESISTANCE + steady)
    }

    fn spread_of(&self, of: impl Fn(&Unit) -> f64) -> Spread {
        Spread::new(self.least(&of).value, of(&self.typical()), self.greatest(&of).value)
    }

    fn rest(&self, position: Position) -> Spread {
        self.spread_of(|unit| self.volts(unit, unit.steady(position).pin))
    }

    /// From rest to the reading, the earliest, typical and latest.
    fn delay(&self, change: Change) -> Delay {
        let time = |unit: &Unit, level: fn(&ReadLevels) -> f64| self.time_to_read(unit, change.to(), level);
        Delay {
            min: self.least(|unit| time(unit, |levels| levels.first)).value,
            typ: time(&self.typical(), |levels| levels.typical),
            max: self.greatest(|unit| time(unit, |levels| levels.surely)).value,
        }
    }

    /// Time of one unit from rest in the other position until it is read in `position`; infinite for never.
    pub(super) fn time_to_read(&self, unit: &Unit, position: Position, level: fn(&ReadLevels) -> f64) -> f64 {
        let level = level(&self.levels_to_read(unit, position));
        unit.time_to(position, unit.steady(!position), level).unwrap_or(f64::INFINITY)
    }

    fn slowest_edge(&self, change: Change) -> f64 {
        let position = change.to();
        let slowness = |unit: &Unit| {
            let from = unit.steady(!position);
            let level = self.levels_to_read(unit, position).surely;
            match unit.time_to(position, from, level) {
                Some(time) => 1.0 / unit.rate(position, unit.after(position, from, time)).abs(),
                None => f64::INFINITY,
            }
        };
        self.greatest(slowness).value
    }
}

#[cfg(test)]
mod tests {
    use super::super::input_class::{InputClass, Thresholds};
    use super::super::model::{Diode, Input, SILICON};
    use super::*;
    use crate::level::Level;

    /// Pull 10 kohm, series 10 kohm, 10 nF, as the data sheet of Bourns PEC11H suggests for an encoder.
    fn encoder() -> Network {
        Network {
            closed: Level::Low,
            input: Input::Class(InputClass::named("schmitt-hc").expect("known")),
            supply: Spread::fixed(4.5),
            pull: Some(Spread::fixed(10e3)),
            discharge: Spread::fixed(0.0),
            series: Spread::fixed(10e3),
            capacitor: Spread::fixed(10e-9),
            pin_capacitance: 0.0,
            cable: Spread::fixed(0.0),
            cable_leakage: None,
            pin_leakage: 0.0,
            contact: 1e-3,
            diode: None,
        }
    }

    #[track_caller]
    fn near(found: f64, expected: f64) {
        assert!((found / expected - 1.0).abs() < 2e-5, "{found} {expected}");
    }

    /// Filter suggested by the data sheet of Bourns PEC11H (10 kohm, 10 kohm, 10 nF: 200 us and 100 us), thresholds of
    /// the 74HC1G14 at 4.5 V (NXP, table 7): t = tau ln(4.5 / (4.5 - VT+)) and tau ln(4.5 / VT-).
    #[test]
    fn encoder_filter_takes_the_times_of_the_worked_example() {
        let found = encoder().analysis();
        near(found.delay.break_.min, 94.892e-6);
        near(found.delay.break_.typ, 148.654e-6);
        near(found.delay.break_.max, 240.795e-6);
        near(found.delay.make.min, 81.093e-6);
        near(found.delay.make.typ, 107.881e-6);
        near(found.delay.make.max, 160.944e-6);
        near(found.lone_pulse.open, 81.093e-6);
        near(found.recovery, 240.795e-6);
        near(found.steady.typ, 4.5 / 10e3);
        near(found.held_power.typ, 4.5 * 4.5 / 10e3);
        // The full capacitor through 10 kohm, and the supply through the other 10 kohm.
        near(found.inrush.typ, 2.0 * 4.5 / 10e3);
    }

    fn single(supply: f64, ohms: f64, farads: f64, level: f64) -> f64 {
        let own = Spread::fixed(level);
        let network = Network {
            supply: Spread::fixed(supply),
            pull: Some(Spread::fixed(ohms)),
            series: Spread::fixed(0.0),
            capacitor: Spread::fixed(farads),
            input: Input::Own(Thresholds { rising: own, falling: own }),
            ..encoder()
        };
        network.delay(Change::Break).typ
    }

    /// Worked examples: 10 kohm and 5 uF take 34.65 ms to half (homeworksource.com); 1 kohm and 1 mF reach 3.16 V of
    /// 5 V in one time constant (heliosstemlab.com, RC module); of a time constant, 0.65 of the supply takes 1.049822,
    /// 0.7 takes 1.203973, 2.0 V of 3.3 V takes 0.931558 (by `ln`).
    #[test]
    fn single_capacitor_takes_the_times_of_worked_examples() {
        near(single(5.0, 10e3, 5e-6, 2.5), 34.657e-3);
        near(single(5.0, 1e3, 1e-3, 5.0 * (1.0 - (-1.0_f64).exp())), 1.0);
        near(single(1.0, 1e3, 1e-3, 0.65), 1.049_822);
        near(single(1.0, 1e3, 1e-3, 0.7), 1.203_973);
        near(single(3.3, 1e3, 1e-3, 2.0), 0.931_558);
    }

    fn loose() -> Network {
        let off = |value: f64, share: f64| Spread::new(value * (1.0 - share), value, value * (1.0 + share));
        Network {
            input: Input::Class(InputClass::named("schmitt-pin").expect("known")),
            supply: off(3.3, 0.05),
            pull: Some(off(10e3, 0.05)),
            discharge: off(1e3, 0.05),
            series: off(10e3, 0.05),
            capacitor: off(10e-9, 0.2),
            pin_capacitance: 5e-12,
            cable: off(5e-9, 0.5),
            cable_leakage: Some(500e3),
            pin_leakage: 1e-6,
            contact: 0.1,
            ..encoder()
        }
    }

    /// The search against every corner, and against units between the corners, drawn by a fixed rule.
    #[test]
    fn extremes_over_tolerances_hold_at_every_corner_and_between() {
        let network = loose();
        let found = network.analysis();
        let mut units = network.corners();
        let share = |index: u32, part: u32| {
            let drawn = (f64::from(index) * 0.618_034 + f64::from(part * part) * 0.414_214) * 7.3;
            drawn - drawn.floor()
        };
        units.extend(
            (0..500).map(|index| network.between(std::array::from_fn(|part| share(index, part as u32 + 1)))),
        );
        let (mut latest, mut earliest) = (0.0_f64, f64::INFINITY);
        for unit in &units {
            for change in [Change::Make, Change::Break] {
                let first = network.time_to_read(unit, change.to(), |levels| levels.first);
                let last = network.time_to_read(unit, change.to(), |levels| levels.surely);
                let delay = found.delay.at(change);
                assert!(delay.min <= first * (1.0 + 1e-9), "{change:?} {first} {delay:?}");
                assert!(last <= delay.max * (1.0 + 1e-9), "{change:?} {last} {delay:?}");
            }
            latest = latest.max(network.time_to_read(unit, Position::Open, |levels| levels.surely));
            earliest = earliest.min(network.time_to_read(unit, Position::Open, |levels| levels.first));
        }
        near(found.delay.break_.max, latest);
        near(found.delay.break_.min, earliest);
    }

    #[test]
    fn diode_and_turned_contact_move_the_right_edge() {
        let plain = loose();
        let diode = Some(Diode { figures: SILICON, quickens_break: true });
        let (a, b) = (plain.analysis(), Network { diode, ..plain }.analysis());
        assert!(b.delay.break_.max < a.delay.break_.max && b.delay.make.max > 0.99 * a.delay.make.max);
        // Thresholds in the middle make the turned network the same network.
        let middle = Spread::new(0.3 * 3.3, 0.5 * 3.3, 0.7 * 3.3);
        let input = Input::Own(Thresholds { rising: middle, falling: middle });
        let fixed = Network { input, supply: Spread::fixed(3.3), ..plain };
        let turned = Network { closed: Level::High, ..fixed };
        let (a, b) = (fixed.delay(Change::Make), turned.delay(Change::Make));
        near(a.max, b.max);
        near(a.min, b.min);
        assert!(turned.rest(Position::Open).max < turned.rest(Position::Closed).min);
    }
}
