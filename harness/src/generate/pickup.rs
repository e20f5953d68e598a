//! What a line picks up, in volts, and when.

use debounce_core::Position;

use super::arithmetic::{SINE, STEPS_A_TURN};
use super::dice::{Between, Dice};
use super::disturbance::Disturbances;

/// Nanoseconds between two bursts of fast transients (IEC 61000-4-4).
pub const BURST_PERIOD_NS: u64 = 300_000_000;
/// Pulses of one burst of fast transients (IEC 61000-4-4).
pub const BURST_PULSES: u64 = 75;
/// Width of one fast transient at half its height (IEC 61000-4-4).
pub const TRANSIENT_NS: u64 = 50;

/// The pulses of a burst follow one another at this rate (IEC 61000-4-4).
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum BurstRate {
    /// 5 kHz: a burst lasts 15 ms.
    Khz5,
    /// 100 kHz: a burst lasts 0.75 ms.
    Khz100,
}

impl BurstRate {
    /// From pulse to pulse, in nanoseconds.
    #[must_use]
    pub const fn spacing_ns(self) -> u64 {
        match self {
            Self::Khz5 => 200_000,
            Self::Khz100 => 10_000,
        }
    }
}

/// One sort of disturbance. Voltages are those that reach the line, in microvolts, before its input network.
///
/// A wave is a staircase of constant voltages. A transient is a rectangle as wide as the real one at half its height.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Pickup {
    /// Pulses that drive the line all the way to its other level.
    Pulses(Disturbances),
    /// A closed contact that parts for moments, as under vibration; nothing while it is open.
    Vibration(Disturbances),
    /// One burst of fast transients, all of one polarity: 75 pulses of 50 ns at 5 or 100 kHz (IEC 61000-4-4).
    FastTransients {
        /// From pulse to pulse.
        rate: BurstRate,
        /// Height of a pulse.
        peak_uv: i64,
    },
    /// A discharge: a first peak, then 8/15 of it after 30 ns and 4/15 after 60 ns, the currents that IEC 61000-4-2
    /// gives, and as much again for as long dying away (our choice).
    Discharge {
        /// Height of the first peak.
        peak_uv: i64,
    },
    /// Mains pick-up: whole cycles of a sine, in 64 steps each.
    Mains {
        /// One cycle in nanoseconds, at least 64.
        cycle_ns: u64,
        /// How many cycles.
        cycles: Between,
        /// Amplitude.
        peak_uv: i64,
    },
    /// Cross-talk: the line beside this one goes up and down again, and every edge couples a spike that dies away.
    CrossTalk {
        /// How long the neighbour stays up, in nanoseconds.
        width_ns: Between,
        /// Time constant of the spike, in nanoseconds, at least 1.
        tail_ns: u64,
        /// Height of the spike.
        peak_uv: i64,
    },
}

/// When it comes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Timing {
    /// While the contact rests, well clear of bounce.
    Resting {
        /// How many dwells hold one, in thousandths.
        permille: u32,
        /// Least rest between it and any bounce, in nanoseconds.
        clear_ns: u64,
    },
    /// Soon after the end of a bounce.
    AfterBounce {
        /// How many dwells hold one, in thousandths.
        permille: u32,
        /// How soon after the end of the bounce, in nanoseconds.
        after_ns: Between,
    },
    /// At any time, whatever the contact does.
    Every {
        /// From the start of one to the start of the next, in nanoseconds, at least 1.
        period_ns: Between,
    },
}

/// A disturbance and when it comes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Disturber {
    /// What.
    pub pickup: Pickup,
    /// When.
    pub timing: Timing,
}

/// A voltage that a disturbance adds from an instant on, in microvolts.
pub type Push = (u64, i64);

impl Pickup {
    /// The voltages added from `at_ns` on while the contact is in `position`, on a line of this supply; the last
    /// is 0. Empty where this disturbance does nothing there.
    #[must_use]
    pub fn pushes(&self, at_ns: u64, position: Position, supply_uv: i64, dice: &mut Dice) -> Vec<Push> {
        // Open is at the supply and goes down, closed is at ground and goes up.
        let across = if position.is_closed() { supply_uv } else { -supply_uv };
        match *self {
            Self::Pulses(kind) => rectangles(&kind, at_ns, across, dice),
            Self::Vibration(_) if !position.is_closed() => Vec::new(),
            Self::Vibration(kind) => rectangles(&kind, at_ns, across, dice),
            Self::FastTransients { rate, peak_uv } => {
                let peak = if dice.chance(500) { peak_uv } else { -peak_uv };
                let starts = (0..BURST_PULSES).map(|pulse| at_ns + pulse * rate.spacing_ns());
                starts.flat_map(|start| [(start, peak), (start + TRANSIENT_NS, 0)]).collect()
            }
            Self::Discharge { peak_uv } => {
                let peak = if dice.chance(500) { peak_uv } else { -peak_uv };
                let part = |fifteenths: i64| peak / 15 * fifteenths;
                // Between two instants that the standard names the current is taken from the nearer.
                vec![
                    (at_ns, peak),
                    (at_ns + 15, part(8)),
                    (at_ns + 45, part(4)),
                    (at_ns + 75, part(2)),
                    (at_ns + 105, 0),
                ]
            }
            Self::Mains { cycle_ns, cycles, peak_uv } => {
                let steps = dice.draw(cycles).max(1) * STEPS_A_TURN as u64;
                let first = dice.draw(Between(0, STEPS_A_TURN as u64 - 1));
                let at = |step: u64| at_ns + cycle_ns / STEPS_A_TURN as u64 * step;
                let height = |step: u64| {
                    let sine = SINE[((first + step) % STEPS_A_TURN as u64) as usize];
                    // Below the amplitude in size.
                    ((i128::from(peak_uv) * i128::from(sine)) >> 30) as i64
                };
                (0..steps).map(|step| (at(step), height(step))).chain([(at(steps), 0)]).collect()
            }
            Self::CrossTalk { width_ns, tail_ns, peak_uv } => {
                let down = at_ns + dice.draw(width_ns).max(tail_ns * TAIL_STEPS);
                [spike(at_ns, tail_ns, peak_uv), spike(down, tail_ns, -peak_uv)].concat()
            }
        }
    }
}

/// A spike is followed for this many time constants.
const TAIL_STEPS: u64 = 5;

/// A spike that dies away, one step a quarter of its time constant, each at the height of its middle.
fn spike(at_ns: u64, tail_ns: u64, peak_uv: i64) -> Vec<Push> {
    let quarter = (tail_ns / 4).max(1);
    let steps = (0..TAIL_STEPS * 4).map(|step| {
        let middle = step * quarter + quarter / 2;
        (at_ns + step * quarter, super::arithmetic::decayed(peak_uv, middle, tail_ns.max(1)))
    });
    steps.chain([(at_ns + TAIL_STEPS * 4 * quarter, 0)]).collect()
}

fn rectangles(kind: &Disturbances, at_ns: u64, height: i64, dice: &mut Dice) -> Vec<Push> {
    let edges = kind.edges(at_ns, dice);
    edges.into_iter().enumerate().map(|(index, at)| (at, if index % 2 == 0 { height } else { 0 })).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn pushes(pickup: Pickup, position: Position) -> Vec<Push> {
        let pushes = pickup.pushes(1_000, position, 3_300_000, &mut Dice::new(1, 1));
        assert!(pushes.is_sorted_by(|a, b| a.0 < b.0), "{pushes:?}");
        assert!(pushes.last().is_none_or(|push| push.1 == 0));
        pushes
    }

    /// IEC 61000-4-4: 75 pulses of 50 ns; at 5 kHz a burst lasts 15 ms, at 100 kHz 0.75 ms, every 300 ms.
    #[test]
    fn fast_transients_have_the_timing_of_the_standard() {
        for (rate, spacing, lasts) in
            [(BurstRate::Khz5, 200_000, 15_000_000), (BurstRate::Khz100, 10_000, 750_000)]
        {
            let found = pushes(Pickup::FastTransients { rate, peak_uv: 4_000_000 }, Position::Open);
            let starts: Vec<u64> = found.iter().filter(|push| push.1 != 0).map(|push| push.0).collect();
            assert_eq!(starts.len(), 75);
            assert!(starts.windows(2).all(|pair| pair[1] - pair[0] == spacing));
            assert_eq!(starts[74] - starts[0] + spacing, lasts);
            assert!(found.chunks(2).all(|pulse| pulse[1].0 - pulse[0].0 == 50));
        }
        assert_eq!(BURST_PERIOD_NS, 300_000_000);
    }

    /// IEC 61000-4-2 at 8 kV: 30 A at the first peak, 16 A at 30 ns, 8 A at 60 ns (as a transceiver's data sheet
    /// quotes it).
    #[test]
    fn discharge_has_the_proportions_of_the_standard() {
        let found = pushes(Pickup::Discharge { peak_uv: 30 }, Position::Open);
        let at = |ns: u64| found.iter().rfind(|push| push.0 <= 1_000 + ns).unwrap().1.abs();
        assert_eq!((at(1), at(30), at(60), at(200)), (30, 16, 8, 0));
    }

    #[test]
    fn mains_pick_up_has_its_period_and_amplitude() {
        let hum = Pickup::Mains { cycle_ns: 20_000_000, cycles: Between(3, 3), peak_uv: 2_500_000 };
        let found = pushes(hum, Position::Open);
        assert_eq!(found.last().unwrap().0 - found[0].0, 60_000_000);
        let most = found.iter().map(|push| push.1).max().unwrap();
        assert!((2_499_990..=2_500_000).contains(&most), "{most}");
        assert_eq!(found.iter().filter(|push| push.1 == most).count(), 3, "once a cycle");
    }

    #[test]
    fn cross_talk_couples_both_edges_of_the_neighbour() {
        let talk =
            Pickup::CrossTalk { width_ns: Between(50_000, 60_000), tail_ns: 1_000, peak_uv: 2_000_000 };
        let found = pushes(talk, Position::Closed);
        let (up, down) = (found.iter().map(|push| push.1).max(), found.iter().map(|push| push.1).min());
        assert!(up.unwrap() > 1_700_000 && down.unwrap() < -1_700_000);
    }

    #[test]
    fn vibration_opens_a_closed_contact_only() {
        let kind = Disturbances { pulses: Between(1, 3), pulse_ns: Between(10, 20), rest_ns: Between(5, 9) };
        assert!(pushes(Pickup::Vibration(kind), Position::Open).is_empty());
        assert_eq!(pushes(Pickup::Vibration(kind), Position::Closed)[0], (1_000, 3_300_000));
        assert_eq!(pushes(Pickup::Pulses(kind), Position::Open)[0], (1_000, -3_300_000));
    }
}
