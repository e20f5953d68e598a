//! What is wrong with a network, and what is worth knowing about it.

use debounce_core::{Change, Position};

use super::analysis::Analysis;
use super::model::Input;
use super::series::{Series, not_preferred};
use crate::level::Level;
use crate::quantity::Spread;
use crate::report::si::{at_least, at_most, between, si};
use crate::report::words;
use crate::requirement::ResolvedNetwork;

/// Something that must not be: what, and what to do.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Trouble {
    /// What is wrong, with its figures.
    pub what: String,
    /// What to do instead.
    pub help: &'static str,
}

/// Everything that can be said about a network that was worked out.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Review {
    /// What must not be.
    pub troubles: Vec<Trouble>,
    /// What is worth knowing.
    pub notes: Vec<String>,
}

/// A silver tactile contact asks for this much at 5 V (data sheet Omron B3F); one of gold for a tenth.
const SILVER_AMPERES: f64 = 1e-3;

/// A discharge of less energy than this is not held against a contact, whatever its peak.
///
/// What welds or wears a contact is metal that melts. With all of this energy in the contact and none in any resistor, at
/// most a ball of 4 um of silver melts: 10.5 g/cm3, 235 J/(kg K) over 940 K and 105 J/g of fusion make 3.4 J/mm3
/// (handbook values, from memory). That this is little is our choice; 100 nF at 3.3 V hold five times as much.
const LEAST_JOULES: f64 = 100e-9;

/// Small contacts are rated for 50 mA (data sheet Omron B3F, from memory); a brief peak of twenty times as much is where
/// a note begins, by our choice.
const NOTED_AMPERES: f64 = 1.0;

/// Reviews a network.
#[must_use]
pub fn review(resolved: &ResolvedNetwork, analysis: &Analysis) -> Review {
    let mut review = Review::default();
    review.levels(resolved, analysis);
    review.edges(resolved, analysis);
    review.currents(resolved, analysis);
    review.parts(resolved);
    if resolved.class.is_some_and(|class| class.load.is_some()) {
        review.notes.push(
            "a controller filters its inputs as well, which is no part of the class and not counted here; its data sheet says for how long".to_owned(),
        );
    }
    review
}

impl Review {
    fn trouble(&mut self, what: String, help: &'static str) {
        self.troubles.push(Trouble { what, help });
    }

    fn levels(&mut self, resolved: &ResolvedNetwork, analysis: &Analysis) {
        for change in [Change::Make, Change::Break] {
            let position = change.to();
            let Spread { min, max, .. } = analysis.rest.at(position);
            if analysis.delay.at(change).max.is_finite() {
                continue;
            }
            let thresholds = resolved.network.input.thresholds(resolved.network.supply.typ);
            let is_high = (position == Position::Open) == (resolved.network.closed == Level::Low);
            let needs = if is_high {
                format!("high surely only from {}", at_most(thresholds.rising.max, "V"))
            } else {
                format!("low surely only up to {}", at_least(thresholds.falling.min, "V"))
            };
            self.trouble(
                format!(
                    "while {} the pin rests at {}, and the input reads {needs}: some units never read it",
                    words::position(position),
                    between(min, max, "V")
                ),
                "make pull smaller or series and discharge smaller, or reduce the leakage",
            );
        }
    }

    fn edges(&mut self, resolved: &ResolvedNetwork, analysis: &Analysis) {
        if resolved.network.input.is_schmitt() {
            return;
        }
        let Input::Class(class) = resolved.network.input else {
            self.notes.push("without hysteresis an input may switch several times on a slow edge; the data sheet says how slow it may be".to_owned());
            return;
        };
        let Some(allowed) = class.slowest_edge else { return };
        for change in [Change::Make, Change::Break] {
            let slowest = analysis.slowest_edge.at(change);
            if slowest.is_finite() && slowest > allowed {
                self.trouble(
                    format!(
                        "the edge after a {} takes up to {}, and the plain input {} bears {}: it may switch several times and draw current",
                        words::change(change),
                        at_most(slowest, "s/V"),
                        class.name,
                        si(allowed, "s/V")
                    ),
                    if resolved.network.capacitor.max > 0.0 {
                        "take a Schmitt input, or leave the capacitor out"
                    } else {
                        "take a Schmitt input, or make pull smaller"
                    },
                );
            }
        }
    }

    fn currents(&mut self, resolved: &ResolvedNetwork, analysis: &Analysis) {
        let steady = analysis.steady;
        if let Some(least) = resolved.least_current.filter(|least| steady.min < least.base()) {
            self.trouble(
                format!(
                    "the closed contact carries as little as {}, and needs {least} to stay clean",
                    at_least(steady.min, "A")
                ),
                "make pull smaller, raise the supply, or take a contact for smaller currents",
            );
        }
        if resolved.least_current.is_none() && steady.min < SILVER_AMPERES {
            self.notes.push(format!(
                "the closed contact carries as little as {}; a silver contact asks for 1 mA at 5 V, one of gold for 0.1 mA (data sheet Omron B3F); say what yours needs with least_current",
                at_least(steady.min, "A")
            ));
        }
        self.rushes(resolved, analysis);
    }

    /// The current just after a make, where there is energy behind it.
    fn rushes(&mut self, resolved: &ResolvedNetwork, analysis: &Analysis) {
        let most = resolved.most_current.map(|most| most.base());
        if let Some(most) = most.filter(|most| analysis.steady.max > *most) {
            self.trouble(
                format!(
                    "the closed contact carries up to {}, and bears {}",
                    at_most(analysis.steady.max, "A"),
                    si(most, "A")
                ),
                "make pull larger, or take a contact for larger currents",
            );
        }
        if analysis.energy < LEAST_JOULES {
            return;
        }
        if let Some(most) = most.filter(|most| analysis.cable_inrush > *most) {
            self.notes.push(format!(
                "the cable alone can put {} through the contact for some nanoseconds (50 ohm of wave resistance assumed), more than the {} it bears",
                at_most(analysis.cable_inrush, "A"),
                si(most, "A")
            ));
        }
        // Without a capacitor only strays discharge, and most of them are the cable.
        if resolved.network.capacitor.max <= 0.0 {
            return;
        }
        let told = format!(
            "for about {}, {} of energy",
            si(analysis.inrush_lasts, "s"),
            at_most(analysis.energy, "J")
        );
        if let Some(most) = most.filter(|most| analysis.inrush.max > *most) {
            self.trouble(
                format!(
                    "at a make the contact carries up to {} ({told}), and bears {}",
                    at_most(analysis.inrush.max, "A"),
                    si(most, "A")
                ),
                "put a resistor between contact and capacitor with discharge or series",
            );
        }
        if most.is_none() && analysis.inrush.max > NOTED_AMPERES {
            self.notes.push(format!(
                "at a make the contact discharges the capacitor with up to {} ({told}), which wears small contacts and can weld them; a discharge or series resistor limits it",
                at_most(analysis.inrush.max, "A")
            ));
        }
    }

    fn parts(&mut self, resolved: &ResolvedNetwork) {
        for (name, part) in &resolved.resistors {
            let ppm = part.tolerance_ppm.map_or(50_000, |(_, plus)| plus);
            // Nobody buys a resistor as loose as this: it is one inside a chip.
            if ppm > 200_000 {
                continue;
            }
            if let Some(near) = not_preferred(part.value.base(), Series::of_tolerance(ppm)) {
                self.notes.push(format!(
                    "{name} of {} is no preferred value (IEC 60063); the nearest of E{} is {}",
                    part.value,
                    Series::of_tolerance(ppm).values(),
                    si(near, "ohm")
                ));
            }
        }
        let Some(part) = &resolved.capacitor else { return };
        if let Some(near) = not_preferred(part.value.base(), Series::of_tolerance(100_000)) {
            self.notes.push(format!(
                "a capacitor of {} is no preferred value (IEC 60063); the nearest of E12 is {}",
                part.value,
                si(near, "F")
            ));
        }
        let loses = part.code.as_ref().is_some_and(|code| code.loses_under_voltage());
        if loses && resolved.bias_loss.is_none() {
            self.notes.push(
                "a class 2 capacitor loses capacitance under voltage, which its code does not say; state it with bias_loss from the data sheet (nothing is taken off here)".to_owned(),
            );
        }
        if part.value.finest() > 0 && part.code.is_none() {
            self.notes.push(
                "no temperature characteristic is given, so only the tolerance counts; write it after the tolerance, such as \"100 nF 10 % X7R\"".to_owned(),
            );
        }
    }
}

/// The caution for wiring that may carry more than a board's supply.
#[must_use]
pub fn caution(resolved: &ResolvedNetwork) -> Option<&'static str> {
    (resolved.network.supply.max > 15.0).then_some(
        "wiring of machines and plants may carry mains or other dangerous voltage, and a fault may bring it to this \
         line: nothing here insulates, limits energy or protects people; that is work for qualified people under the \
         code that applies where it is installed",
    )
}
