//! The network with its tolerances, and its units at the corners.

use debounce_core::Position;

use super::input_class::{InputClass, Thresholds};
use super::unit::{Junction, LEAST_OHMS, LEAST_SIEMENS, Unit};
use crate::level::Level;
use crate::quantity::Spread;

/// A kind of diode, by two figures of Shockley's equation.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct DiodeFigures {
    /// Saturation current in amperes.
    pub saturation: f64,
    /// Emission coefficient times thermal voltage at 25 degrees, in volts.
    pub slope: f64,
    /// The saturation current varies by this factor either way, with temperature and from unit to unit.
    pub factor: f64,
}

/// A small-signal silicon diode: the usual model of the 1N4148 (from memory); 0.6 V at 1 mA. The factor moves that by
/// 0.15 V, which is 2 mV a kelvin over 75 K (common practice).
pub const SILICON: DiodeFigures = DiodeFigures { saturation: 2.52e-9, slope: 1.752 * 0.02569, factor: 30.0 };

/// A small Schottky diode: 0.24 V at 1 mA, as data sheets of small parts say (from memory). The factor moves that by
/// 0.1 V.
pub const SCHOTTKY: DiodeFigures = DiodeFigures { saturation: 1.4e-7, slope: 1.05 * 0.02569, factor: 40.0 };

/// The diode across the series resistor.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Diode {
    /// What it is.
    pub figures: DiodeFigures,
    /// Whether it makes the edge after a break quicker; else the one after a make.
    pub quickens_break: bool,
}

/// Whose thresholds the pin has.
#[derive(Clone, Copy, PartialEq, Debug)]
pub enum Input {
    /// Those of a class.
    Class(&'static InputClass),
    /// These, at any supply.
    Own(Thresholds),
}

impl Input {
    /// The thresholds at a supply.
    #[must_use]
    pub fn thresholds(&self, supply: f64) -> Thresholds {
        match self {
            Self::Class(class) => class.thresholds(supply),
            Self::Own(thresholds) => *thresholds,
        }
    }

    /// Whether it is sure to switch once on a slow edge.
    #[must_use]
    pub fn is_schmitt(&self) -> bool {
        match self {
            Self::Class(class) => class.is_schmitt(),
            Self::Own(thresholds) => thresholds.falling.typ < thresholds.rising.typ,
        }
    }
}

/// A network, every part with its spread, in ohms, farads, amperes and volts.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Network {
    /// The level of the line while the contact is closed: low with the contact to ground.
    pub closed: Level,
    /// The input.
    pub input: Input,
    /// Supply voltage.
    pub supply: Spread,
    /// Resistor that pulls the line away from the contact's side; `None` where the input does that itself.
    pub pull: Option<Spread>,
    /// Resistor between the contact and the line; 0 for none.
    pub discharge: Spread,
    /// Resistor between the line and the capacitor; 0 for none.
    pub series: Spread,
    /// Capacitor at the pin, without the pin's own; 0 for none.
    pub capacitor: Spread,
    /// Capacitance of the pin.
    pub pin_capacitance: f64,
    /// Capacitance of the cable.
    pub cable: Spread,
    /// Least resistance across the open contact, by dirt, moisture and cable; `None` for none worth a mention.
    pub cable_leakage: Option<f64>,
    /// Greatest leakage of the pin, either way.
    pub pin_leakage: f64,
    /// Resistance of the closed contact.
    pub contact: f64,
    /// Diode across the series resistor.
    pub diode: Option<Diode>,
}

/// What varies: one number of each unit.
const PARTS: usize = 10;

/// The numbers of one unit, in the order of [`Network::spreads`].
type Values = [f64; PARTS];

/// An extreme over all units, and the unit that shows it.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Extreme {
    /// The value; infinite where some unit never gets there.
    pub value: f64,
    /// The unit.
    pub unit: Unit,
}

impl Network {
    fn spreads(&self) -> [Spread; PARTS] {
        let conductance = |ohms: Spread| Spread::new(1.0 / ohms.max, 1.0 / ohms.typ, 1.0 / ohms.min);
        let dirt = LEAST_SIEMENS + self.cable_leakage.map_or(0.0, |ohms| 1.0 / ohms);
        let load = match self.input {
            // The standard gives the least current; that others draw up to twice as much is our choice.
            Input::Class(InputClass { load: Some((amperes, volts)), .. }) => {
                let least = amperes / volts;
                Spread::new(least, 1.2 * least, 2.0 * least)
            }
            _ => Spread::fixed(0.0),
        };
        let junction = self.diode.map_or(1.0, |diode| diode.figures.factor);
        // A pin may have next to none, or twice the usual.
        let pin = Spread::new(
            1e-12_f64.min(self.pin_capacitance),
            self.pin_capacitance,
            2.0 * self.pin_capacitance,
        );
        [
            self.supply,
            self.pull.map_or(Spread::fixed(0.0), conductance),
            self.discharge.map(|ohms| ohms.max(LEAST_OHMS)),
            self.series.map(|ohms| ohms.max(LEAST_OHMS)),
            Spread::new(
                (self.capacitor.min + pin.min).max(1e-13),
                (self.capacitor.typ + pin.typ).max(1e-13),
                (self.capacitor.max + pin.max).max(1e-13),
            ),
            self.cable.map(|farads| farads.max(1e-13)),
            Spread::new(LEAST_SIEMENS, LEAST_SIEMENS, dirt),
            Spread::new(-self.pin_leakage, 0.0, self.pin_leakage),
            load,
            Spread::new(1.0 / junction, 1.0, junction),
        ]
    }

    fn unit(&self, values: &Values) -> Unit {
        let [supply, pull, discharge, series, capacitance, cable, dirt, leakage, load, junction] = *values;
        let diode = self.diode.map(|diode| Junction {
            charges: diode.quickens_break,
            saturation: diode.figures.saturation * junction,
            slope: diode.figures.slope,
        });
        let contact = self.contact.max(LEAST_OHMS);
        Unit { supply, pull, discharge, series, capacitance, cable, dirt, contact, leakage, load, diode }
    }

    /// The unit with the typical value of every part.
    #[must_use]
    pub fn typical(&self) -> Unit {
        self.unit(&self.spreads().map(|spread| spread.typ))
    }

    /// Every unit with each part at its least or greatest value.
    #[must_use]
    pub fn corners(&self) -> Vec<Unit> {
        let spreads = self.spreads();
        let varying: Vec<usize> = (0..PARTS).filter(|&part| spreads[part].varies()).collect();
        (0..1_usize << varying.len())
            .map(|corner| {
                let mut values = spreads.map(|spread| spread.min);
                for (bit, &part) in varying.iter().enumerate() {
                    if corner >> bit & 1 == 1 {
                        values[part] = spreads[part].max;
                    }
                }
                self.unit(&values)
            })
            .collect()
    }

    /// A unit part of the way from least to greatest, one share for each part; for trying units between the corners.
    #[must_use]
    pub fn between(&self, shares: [f64; PARTS]) -> Unit {
        let spreads = self.spreads();
        let mut values = shares;
        for (value, spread) in values.iter_mut().zip(spreads) {
            *value = spread.min + *value * (spread.max - spread.min);
        }
        self.unit(&values)
    }

    /// The greatest value of `of` over the tolerances.
    #[must_use]
    pub fn greatest(&self, of: impl Fn(&Unit) -> f64) -> Extreme {
        self.extreme(of)
    }

    /// The least value of `of` over the tolerances.
    #[must_use]
    pub fn least(&self, of: impl Fn(&Unit) -> f64) -> Extreme {
        let found = self.extreme(|unit| -of(unit));
        Extreme { value: -found.value, ..found }
    }

    /// The greatest value, by moving one part at a time to its least, typical or greatest value as long as that helps,
    /// from three starts.
    ///
    /// Where a part acts one way only (more capacitance, later; more resistance in the path of the current, later;
    /// more leakage towards a level, sooner there), its extreme lies at one of its ends, and one part at a time finds
    /// it. With a single capacitance that follows from `t = R C ln(..)`. With a cable capacitance behind a resistor it
    /// need not hold, and then this is a search; a test compares it with all corners and with units between them.
    fn extreme(&self, of: impl Fn(&Unit) -> f64) -> Extreme {
        let spreads = self.spreads();
        let starts: [fn(&Spread) -> f64; 3] = [|s| s.typ, |s| s.min, |s| s.max];
        let mut best = Extreme { value: f64::NEG_INFINITY, unit: self.typical() };
        for start in starts {
            let mut values: Values = std::array::from_fn(|part| start(&spreads[part]));
            let mut value = of(&self.unit(&values));
            let mut improves = true;
            while improves {
                improves = false;
                for (part, spread) in spreads.iter().enumerate().filter(|(_, spread)| spread.varies()) {
                    for tried in [spread.min, spread.typ, spread.max] {
                        let kept = std::mem::replace(&mut values[part], tried);
                        let found = if tried == kept { value } else { of(&self.unit(&values)) };
                        // Rounding must not send it round in circles.
                        if found > value + 1e-12 * value.abs() {
                            (value, improves) = (found, true);
                        } else {
                            values[part] = kept;
                        }
                    }
                }
            }
            if value > best.value {
                best = Extreme { value, unit: self.unit(&values) };
            }
        }
        best
    }

    /// The voltage on the board for one in the drawing, where the contact leads to ground.
    #[must_use]
    pub fn volts(&self, unit: &Unit, drawn: f64) -> f64 {
        match self.closed {
            Level::Low => drawn,
            Level::High => unit.supply - drawn,
        }
    }

    /// What the pin must reach in the drawing to be read in `position`: the threshold that lets it read so soonest, the
    /// typical one, and the one that makes all units read so.
    #[must_use]
    pub fn levels_to_read(&self, unit: &Unit, position: Position) -> ReadLevels {
        let Thresholds { rising, falling } = self.input.thresholds(unit.supply);
        let turned = |spread: Spread| {
            Spread::new(unit.supply - spread.max, unit.supply - spread.typ, unit.supply - spread.min)
        };
        let (up, down) = match self.closed {
            Level::Low => (rising, falling),
            Level::High => (turned(falling), turned(rising)),
        };
        match position {
            Position::Open => ReadLevels { first: up.min, typical: up.typ, surely: up.max },
            Position::Closed => ReadLevels { first: down.max, typical: down.typ, surely: down.min },
        }
    }
}

/// The levels at which a pin changes its reading, in the order in which an edge meets them.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct ReadLevels {
    /// The first that may do it.
    pub first: f64,
    /// The typical one.
    pub typical: f64,
    /// The last, by which it is done.
    pub surely: f64,
}
