//! The network that tests of the network share.

use super::input_class::InputClass;
use super::model::{Input, Network};
use crate::level::Level;
use crate::quantity::Spread;

/// A button at the end of a cable, with a capacitor of so many farads at the pin.
pub(super) fn button(capacitor: f64) -> Network {
    let off = |value: f64, share: f64| Spread::new(value * (1.0 - share), value, value * (1.0 + share));
    Network {
        closed: Level::Low,
        input: Input::Class(InputClass::named("schmitt-pin").expect("known")),
        supply: off(3.3, 0.05),
        pull: Some(off(10e3, 0.05)),
        discharge: off(100.0, 0.05),
        series: off(4.7e3, 0.05),
        capacitor: off(capacitor, 0.1),
        pin_capacitance: 5e-12,
        cable: Spread::fixed(1e-9),
        cable_leakage: Some(1e6),
        pin_leakage: 1e-6,
        contact: 0.1,
        diode: None,
    }
}
