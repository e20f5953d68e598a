//! Many pulses in a row: what the capacitor adds up.

use debounce_core::Position;

use super::model::{Network, ReadLevels};
use super::unit::Unit;

/// Pulses of equal width at a fixed rate.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Burst {
    /// How many.
    pub pulses: u32,
    /// From one to the next, in seconds.
    pub period: f64,
    /// What it is.
    pub name: &'static str,
}

impl Burst {
    /// The bursts of fast transients, IEC 61000-4-4: 75 pulses of 50 ns at 100 kHz or at 5 kHz, every 300 ms.
    pub const STANDARD: [Self; 2] = [
        Self { pulses: 75, period: 10e-6, name: "75 pulses at 100 kHz (IEC 61000-4-4)" },
        Self { pulses: 75, period: 200e-6, name: "75 pulses at 5 kHz (IEC 61000-4-4)" },
    ];
}

/// What a network bears of a burst.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct BurstLimit {
    /// The widest pulse of which no unit sees anything, in seconds; at most the period.
    pub widest: f64,
}

/// The widest pulse in `burst` that no unit sees, the line being taken hard to the other position by each pulse.
pub(super) fn limit(network: &Network, burst: Burst, position: Position) -> BurstLimit {
    let widest = |unit: &Unit| widest(network, unit, burst, position);
    if network.diode.is_none() {
        return BurstLimit { widest: network.least(widest).value };
    }
    // Steps cost more than exponentials, so only units that can be worst are tried: those in which a pulse works
    // soonest and those in which it is forgotten slowest, the latter also with less capacitance.
    let first: fn(&ReadLevels) -> f64 = |levels| levels.first;
    let surely: fn(&ReadLevels) -> f64 = |levels| levels.surely;
    let quick = network.least(|unit| network.time_to_read(unit, !position, first)).unit;
    let slow = network.greatest(|unit| network.time_to_read(unit, position, surely)).unit;
    let light = Unit { capacitance: quick.capacitance, ..slow };
    let found = [quick, slow, light].iter().map(widest).fold(f64::INFINITY, f64::min);
    BurstLimit { widest: found }
}

fn widest(network: &Network, unit: &Unit, burst: Burst, position: Position) -> f64 {
    let level = network.levels_to_read(unit, !position).first;
    let is_seen = |pin: f64| if position == Position::Open { pin <= level } else { pin >= level };
    let rest = unit.steady(position);
    let survives = |width: f64| {
        let mut state = rest;
        for _ in 0..burst.pulses {
            let hit = unit.after(!position, state, width);
            if is_seen(hit.pin) {
                return false;
            }
            let back = unit.after(position, hit, burst.period - width);
            // What no longer changes from pulse to pulse will not change any more.
            if (back.pin - state.pin).abs() < 1e-9 * unit.supply {
                return true;
            }
            state = back;
        }
        true
    };
    let lone = network.time_to_read(unit, !position, |levels| levels.first).min(burst.period);
    // Rounded down to a quarter of a percent: a limit must not be too good.
    bisect_steps(400, |share| survives(share * lone)) * lone
}

/// The greatest of `0, 1/steps, .. 1` for which `holds`, which must not come back once it is gone.
fn bisect_steps(steps: u32, holds: impl Fn(f64) -> bool) -> f64 {
    let share = |step: u32| f64::from(step) / f64::from(steps);
    if holds(1.0) {
        return 1.0;
    }
    let (mut good, mut bad) = (0, steps);
    while bad - good > 1 {
        let middle = good + (bad - good) / 2;
        if holds(share(middle)) { good = middle } else { bad = middle }
    }
    share(good)
}
