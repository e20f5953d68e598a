//! The network between a contact and a pin: resistors, capacitor, diode, cable and input, with their tolerances.
//!
//! [`Network::analysis`] works out time to threshold at make and break, currents, and which pulses get through;
//! [`Network::waveforms`] gives the points to draw; [`at_pin()`] turns an envelope of the contact into the one that the
//! pin shows, always toward the safe side; [`Network::through`] filters a recording. Without a diode everything is exact
//! (two exponentials); with one it is stepped, with the error of every step bounded.

mod analysis;
mod at_pin;
mod burst;
#[cfg(test)]
mod fixture;
mod input_class;
mod linear;
mod metastable;
mod model;
mod nonlinear;
mod review;
mod series;
mod through;
mod unit;
mod waveform;

pub use analysis::{Analysis, Delay};
pub use at_pin::{AtPin, AtPinError, Disturbed, at_pin};
pub use burst::{Burst, BurstLimit};
pub use input_class::{ALL as INPUT_CLASSES, ClassName, ClassNameError, InputClass, Thresholds};
pub use metastable::Synchroniser;
pub use model::{Diode, DiodeFigures, Extreme, Input, Network, ReadLevels, SCHOTTKY, SILICON};
pub use review::{Review, Trouble, caution, review};
pub use series::{Series, not_preferred};
pub use unit::{Junction, State, Unit};
pub use waveform::{Point, Waveform};
