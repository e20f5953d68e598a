//! One unit of the network: every part with the value it happens to have.
//!
//! Everything is drawn with the contact to ground; a network with its contact to the supply is the same network seen
//! from the supply, so its voltages are the supply less those here.
//!
//! ```text
//!             supply          supply
//!               |               |
//!             pull            load
//!               |               |
//!  contact -+- discharge -+- series -+------+---- pin
//!     |     |                 |diode| |      |
//!   ground  cable, dirt               C    leakage
//! ```

use debounce_core::Position;

/// A diode across the series resistor.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Junction {
    /// Whether it carries the current that charges the capacitor after a break; else the one that discharges it
    /// after a make.
    pub charges: bool,
    /// Saturation current in amperes.
    pub saturation: f64,
    /// Emission coefficient times thermal voltage, in volts.
    pub slope: f64,
}

/// Values of one unit, in ohms, farads, amperes, volts and siemens.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Unit {
    /// Supply voltage.
    pub supply: f64,
    /// Conductance from the supply to the line; 0 without a pull resistor.
    pub pull: f64,
    /// Resistance between the contact and the line.
    pub discharge: f64,
    /// Resistance between the line and the capacitor.
    pub series: f64,
    /// Capacitor and pin together.
    pub capacitance: f64,
    /// Capacitance of the cable, at the contact.
    pub cable: f64,
    /// Conductance across the open contact.
    pub dirt: f64,
    /// Resistance of the closed contact.
    pub contact: f64,
    /// Current that the pin draws towards the closed level; below zero where it pushes.
    pub leakage: f64,
    /// Conductance from the pin to the supply, of an input that needs current.
    pub load: f64,
    /// Diode across the series resistor.
    pub diode: Option<Junction>,
}

/// Voltages of the two capacitances.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct State {
    /// At the contact.
    pub contact: f64,
    /// At the pin.
    pub pin: f64,
}

/// No wire is shorter than this many ohms, and no dirt better than this many siemens: both keep the equations regular
/// and change no time by more than a millionth.
pub(super) const LEAST_OHMS: f64 = 1e-3;
pub(super) const LEAST_SIEMENS: f64 = 1e-12;

impl Unit {
    /// Conductance from the contact's end of the line to ground.
    pub(super) fn ground_conductance(&self, position: Position) -> f64 {
        match position {
            Position::Open => self.dirt,
            Position::Closed => self.dirt + 1.0 / self.contact,
        }
    }

    /// The voltages after the contact has rested long in a position.
    #[must_use]
    pub fn steady(&self, position: Position) -> State {
        match self.diode {
            None => super::linear::Linear::new(self, position).steady,
            Some(_) => super::nonlinear::steady(self, position),
        }
    }

    /// The voltages `seconds` after `from`, the contact resting.
    #[must_use]
    pub fn after(&self, position: Position, from: State, seconds: f64) -> State {
        match self.diode {
            None => super::linear::Linear::new(self, position).after(from, seconds),
            Some(_) => super::nonlinear::after(self, position, from, seconds),
        }
    }

    /// When the pin first reaches `level` from its far side, in seconds; 0 if it is there, `None` if it never is.
    #[must_use]
    pub fn time_to(&self, position: Position, from: State, level: f64) -> Option<f64> {
        let is_there = match position {
            Position::Open => from.pin >= level,
            Position::Closed => from.pin <= level,
        };
        if is_there {
            return Some(0.0);
        }
        match self.diode {
            None => super::linear::Linear::new(self, position).time_to(from, level),
            Some(_) => super::nonlinear::time_to(self, position, from, level),
        }
    }

    /// How fast the pin moves, in volts a second.
    #[must_use]
    pub fn rate(&self, position: Position, at: State) -> f64 {
        super::nonlinear::Flow::new(self, position).rates(at).1
    }

    /// Current through the contact just after it made, in amperes, the cable already empty: the capacitor through
    /// the series resistor or the diode, and the supply through the pull resistor.
    #[must_use]
    pub fn inrush(&self, from: State) -> f64 {
        let ground = 1.0 / (self.discharge + self.contact);
        super::nonlinear::branch(self, ground, 0.0, from.pin).1 * ground
    }

    /// Longest time constant to be expected, in seconds: a scale for searches, not a result.
    pub(super) fn scale(&self) -> f64 {
        let source = 1.0 / (self.pull + self.load + self.dirt).max(LEAST_SIEMENS);
        (source + self.discharge + self.series + self.contact) * (self.capacitance + self.cable)
    }
}
