//! How the demo recording was made.
//!
//! After a change here, rewrite the file with
//! `HARNESS_REWRITE_DEMO=1 cargo test -p harness demo::vent_button`, and look at what changed.

use std::io;

use debounce_core::PerChange;

use crate::generate::{Between, Bounce, ContactModel, Disturbances, Generated, Scenario, SecondBurst};
use crate::trace::{TraceError, write_vcd};

/// Name of the channel in the file.
pub const CHANNEL: &str = "vent_button";

const US: u64 = 1_000;
const MS: u64 = 1_000_000;

/// The scenario behind the recording.
///
/// It is made so that careless choices fail on it: some disturbances last for more than 2 ms, so that three
/// equal samples at 1 ms prove nothing; bounce and disturbances cross every coarse sampling.
#[must_use]
pub fn scenario() -> Scenario {
    let make = Bounce {
        first_flight_ns: Between(1_400 * US, 1_600 * US),
        restitution_permille: Between(500, 600),
        touch_ns: Between(30 * US, 200 * US),
        shortest_flight_ns: 25 * US,
        second: Some(SecondBurst {
            permille: 300,
            after_ns: Between(400 * US, 800 * US),
            first_flight_ns: Between(200 * US, 400 * US),
        }),
    };
    let break_ = Bounce {
        first_flight_ns: Between(400 * US, 500 * US),
        restitution_permille: Between(400, 550),
        touch_ns: Between(20 * US, 90 * US),
        shortest_flight_ns: 25 * US,
        second: Some(SecondBurst {
            permille: 150,
            after_ns: Between(400 * US, 700 * US),
            first_flight_ns: Between(100 * US, 200 * US),
        }),
    };
    Scenario {
        seed: 0x5EED_0F7E_4711,
        contact: ContactModel { bounce: PerChange { make, break_ } },
        operations: 60,
        closed_ns: Between(80 * MS, 350 * MS),
        open_ns: Between(150 * MS, 1_200 * MS),
        quick_after: vec![(41, 50 * MS)],
        disturbances: Some(Disturbances {
            pulses: Between(1, 1),
            pulse_ns: Between(60 * US, 2_600 * US),
            rest_ns: Between(1, 1),
        }),
        resting_permille: 250,
        after_bounce_permille: 90,
        after_bounce_ns: Between(2 * MS, 4 * MS),
        clear_ns: 40 * MS,
        resolution_ns: US,
    }
}

/// The recording with its truth.
///
/// # Errors
/// Never for this scenario; the error is that of every scenario.
pub fn recording() -> Result<Generated, TraceError> {
    scenario().generate()
}

/// The file, as it stands beside this one.
///
/// # Errors
/// Never for this scenario.
pub fn file() -> io::Result<Vec<u8>> {
    let made = recording().map_err(io::Error::other)?;
    let mut bytes = Vec::new();
    write_vcd(&mut bytes, &[(CHANNEL, &made.trace)], COMMENT)?;
    Ok(bytes)
}

const COMMENT: &str = "invented: the vent push-button of a greenhouse control panel that does not exist, \
                       made by a seeded generator; edges at 1 MHz, 1 is closed";

#[cfg(test)]
mod tests {
    use std::path::Path;

    use debounce_core::{Change, PerPosition};

    use super::*;
    use crate::characterise::{Doubt, Figures, SegmentOptions, segment};
    use crate::conformance;
    use crate::envelope::PhysicalEnvelope;
    use crate::trace::Trace;

    #[test]
    fn demo_recording_is_what_its_generator_makes() {
        let made = file().unwrap();
        if std::env::var_os("HARNESS_REWRITE_DEMO").is_some() {
            let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("src/demo/vent_button.vcd");
            std::fs::write(path, &made).unwrap();
        }
        // After a rewrite this still compares with the file that was compiled in: run the test once more.
        assert!(crate::demo::RECORDING == made, "vent_button.vcd is not what its generator makes");
    }

    #[test]
    fn demo_recording_holds_what_makes_it_hard() {
        let made = recording().unwrap();
        let found = segment(&made.trace, &SegmentOptions::default()).unwrap();
        assert_eq!(found.truth(), made.truth);
        let after_bounce = |o: &&crate::characterise::Operation| matches!(o.ambiguity, Some(a) if a.doubt == Doubt::SecondBurstOrDisturbance);
        let soon = made.noise.iter().filter(|n| {
            made.bounce_ends_ns.iter().any(|&end| n.from_ns > end && n.from_ns - end <= 4 * MS + US)
        });
        assert_eq!(found.operations.iter().filter(after_bounce).count(), soon.count());
        let figures = Figures::of(&found);
        assert_eq!((figures.changes.make.ambiguous, figures.changes.break_.ambiguous), (5, 10));
        assert_eq!((figures.changes.make.count, figures.changes.break_.count), (60, 60));
        assert!(
            figures.changes.make.bounce_ns.unwrap().median
                > 2 * figures.changes.break_.bounce_ns.unwrap().median
        );
        assert!(figures.dwell.open.shortest_ns.unwrap() <= 50 * MS);
        assert!(made.noise.iter().any(|n| n.until_ns - n.from_ns > 2 * MS));
    }

    #[test]
    fn demo_recording_conforms_to_what_it_was_made_in() {
        let made = recording().unwrap();
        let within = PhysicalEnvelope {
            bounce_ns: PerChange { make: 8 * MS, break_: 3 * MS },
            glitch_ns: PerPosition { open: 2_601 * US, closed: 2_601 * US },
            quiet_ns: 39 * MS,
            calm_ns: 0,
            dwell_ns: PerPosition { open: 45 * MS, closed: 79 * MS },
        };
        let answer = conformance::check(&made.trace, &within);
        assert!(answer.conforms(), "{:?}", answer.violations);
        let narrow = PhysicalEnvelope { glitch_ns: PerPosition { open: MS, closed: MS }, ..within };
        assert!(!conformance::check(&made.trace, &narrow).conforms());
    }

    /// The edges of "n equal samples in a row", sampled every `period` from `phase`.
    fn unanimous(trace: &Trace, n: u32, period: u64, phase: u64) -> Vec<Change> {
        let (mut output, mut against) = (trace.initial(), 0);
        let mut edges = Vec::new();
        for at in (phase..trace.end_ns()).step_by(period as usize) {
            against = if trace.position_at(at) == output { 0 } else { against + 1 };
            if against == n {
                output = output.opposite();
                edges.push(output.reached_by());
                against = 0;
            }
        }
        edges
    }

    /// How many of 50 phases report exactly the operations that there were.
    fn faithful_phases(n: u32, period: u64) -> usize {
        let made = recording().unwrap();
        let truth: Vec<Change> = made.truth.iter().map(|t| t.change).collect();
        (0..50).filter(|phase| unanimous(&made.trace, n, period, phase * period / 50) == truth).count()
    }

    #[test]
    fn demo_recording_defeats_careless_choices_but_not_a_careful_one() {
        assert_eq!(faithful_phases(3, MS), 0);
        // One phase in fifty happens to miss every bounce and disturbance; nobody knows which one they will have.
        assert_eq!(faithful_phases(1, 10 * MS), 1);
        assert_eq!(faithful_phases(4, MS), 50);
    }
}
