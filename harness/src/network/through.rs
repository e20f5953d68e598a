//! A recording of the contact, as the pin sees it.

use debounce_core::Position;

use super::model::{Network, ReadLevels};
use super::unit::Unit;
use crate::trace::{Trace, TraceError};

impl Network {
    /// The trace that the typical unit shows at its pin, the recording being one of the contact.
    ///
    /// The line starts at rest. Edges are rounded to whole nanoseconds, and of several in one nanosecond the last counts.
    ///
    /// # Errors
    /// None that a trace in order can cause.
    pub fn through(&self, contact: &Trace) -> Result<Trace, TraceError> {
        through_unit(self, &self.typical(), |levels| levels.typical, contact)
    }
}

/// As [`Network::through`], for one unit and one of its levels.
pub(super) fn through_unit(
    network: &Network,
    unit: &Unit,
    level: fn(&ReadLevels) -> f64,
    contact: &Trace,
) -> Result<Trace, TraceError> {
    let level_to = |position: Position| level(&network.levels_to_read(unit, position));
    let mut state = unit.steady(contact.initial());
    let (mut reading, mut edges): (Position, Vec<u64>) = (contact.initial(), Vec::new());
    for run in contact.runs() {
        if reading != run.position {
            let last = run.until_ns >= contact.end_ns();
            let crossing = unit.time_to(run.position, state, level_to(run.position));
            if let Some(seconds) = crossing
                && let at_ns = run.from_ns.saturating_add((seconds * 1e9).round() as u64)
                && (at_ns < run.until_ns || (last && at_ns <= contact.end_ns()))
            {
                reading = run.position;
                match edges.last() {
                    // Both directions within one nanosecond leave nothing that a clock could see.
                    Some(&before) if before >= at_ns => drop(edges.pop()),
                    _ if at_ns > contact.start_ns() => edges.push(at_ns),
                    _ => {}
                }
            }
        }
        state = unit.after(run.position, state, (run.until_ns - run.from_ns) as f64 / 1e9);
    }
    Trace::new(contact.initial(), contact.start_ns(), contact.end_ns(), edges, contact.resolution_ns())
}

#[cfg(test)]
mod tests {
    use debounce_core::{PerChange, PerPosition};

    use super::super::at_pin;
    use super::super::fixture::button;
    use super::*;
    use crate::conformance;
    use crate::envelope::PhysicalEnvelope;

    const US: u64 = 1_000;

    /// A contact at the edge of its envelope: bounce, disturbances at the least quiet, at the worst places.
    fn contact() -> (PhysicalEnvelope, Trace) {
        let envelope = PhysicalEnvelope {
            bounce_ns: PerChange { make: 1_000 * US, break_: 500 * US },
            glitch_ns: PerPosition { open: 50 * US, closed: 100 * US },
            quiet_ns: 3_000 * US,
            calm_ns: 0,
            dwell_ns: PerPosition { open: 20_000 * US, closed: 20_000 * US },
        };
        let mut edges = Vec::new();
        for operation in 0..40 {
            let make = (50_000 + 80_000 * operation + 37 * operation * operation) * US;
            let pulse = |edges: &mut Vec<u64>, at: u64, width: u64| edges.extend([at, at + width]);
            edges.push(make);
            for step in 0..5 {
                pulse(&mut edges, make + (100 + 170 * step) * US, 60 * US);
            }
            // Just after the bounce, then as often as quiet allows.
            let first = make + (1_000 + 29 * operation % 700) * US;
            for step in 0..6 {
                pulse(&mut edges, first + step * 3_100 * US, 100 * US);
            }
            let break_ = make + 40_000 * US;
            edges.push(break_);
            pulse(&mut edges, break_ + 200 * US, 90 * US);
            pulse(&mut edges, break_ + 400 * US, 90 * US);
            // A bounce that ran into a disturbance on the pin would be inside, but the search cannot part one run.
            let first = break_ + (1_200 + 31 * operation % 900) * US;
            for step in 0..6 {
                pulse(&mut edges, first + step * 3_050 * US, 50 * US);
            }
        }
        (envelope, Trace::new(Position::Open, 0, 4_000_000 * US, edges, 1).expect("in order"))
    }

    /// Every corner unit, at its first and at its last thresholds: what the pin shows of a contact inside its
    /// envelope lies inside the envelope that is promised for the pin.
    #[test]
    fn pin_of_every_unit_stays_inside_the_promised_envelope() {
        let (envelope, trace) = contact();
        assert!(conformance::check(&trace, &envelope).conforms(), "the contact itself");
        for capacitor in [1e-9, 22e-9, 100e-9] {
            let network = button(capacitor);
            let promised = at_pin(&network, &envelope).expect("fits").physical;
            for unit in network.corners().iter().step_by(5) {
                let first: fn(&ReadLevels) -> f64 = |levels| levels.first;
                let surely: fn(&ReadLevels) -> f64 = |levels| levels.surely;
                for level in [first, surely] {
                    let pin = through_unit(&network, unit, level, &trace).expect("in order");
                    let found = conformance::check(&pin, &promised);
                    assert!(found.conforms(), "{capacitor}: {:?} {unit:?}", found.violations.first());
                    assert!(pin.edges().len() >= 80);
                }
            }
        }
    }

    #[test]
    fn pulse_shorter_than_the_time_to_threshold_does_not_reach_the_pin() {
        let network = button(100e-9);
        let time = network.time_to_read(&network.typical(), Position::Closed, |levels| levels.typical);
        let ns = (time * 1e9) as u64;
        let pin = |width: u64| {
            let trace = Trace::new(Position::Open, 0, 100_000 * US, vec![1_000, 1_000 + width], 1);
            network.through(&trace.expect("in order")).expect("in order").edges().len()
        };
        assert_eq!((pin(ns - 1_000), pin(ns + 1_000)), (0, 2));
    }
}
