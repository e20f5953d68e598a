//! A witness as a file: contact, samples and output as three channels of a VCD.

use std::io::{self, Write};

use debounce_core::{Period, Position};

use crate::prove::{Witness, WitnessTick};
use crate::trace::{Trace, write_vcd};

/// Writes a witness as VCD, one tick `period` long, the first after one tick of rest; times are rounded to
/// nanoseconds. `again` is the command that finds it again.
///
/// # Errors
/// Those of `out`.
pub fn write_witness(out: &mut dyn Write, witness: &Witness, period: Period, again: &str) -> io::Result<()> {
    let lane = |of: fn(&WitnessTick) -> Position| lane(witness, period, of).map_err(io::Error::other);
    let contact = lane(|tick| tick.contact)?;
    let samples = lane(|tick| tick.sample)?;
    let output = lane(|tick| tick.output)?;
    let mut out = out;
    write_vcd(
        &mut out,
        &[("witness.contact", &contact), ("witness.samples", &samples), ("witness.output", &output)],
        again,
    )
}

fn lane(
    witness: &Witness,
    period: Period,
    of: fn(&WitnessTick) -> Position,
) -> Result<Trace, crate::trace::TraceError> {
    let at_ns = |tick: usize| {
        let exact = (tick as u128 + 1) * u128::from(period.numerator_ns()) / u128::from(period.denominator());
        u64::try_from(exact).unwrap_or(u64::MAX)
    };
    let mut edges = Vec::new();
    let mut before = witness.start;
    for (index, tick) in witness.ticks.iter().enumerate() {
        if of(tick) != before {
            before = of(tick);
            edges.push(at_ns(index));
        }
    }
    // The last tick is shown at its full length.
    Trace::new(witness.start, 0, at_ns(witness.ticks.len()), edges, 1)
}
