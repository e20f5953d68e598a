//! A witness as a file: contact, samples and output as three channels of a VCD.

use std::io::{self, Write};

use debounce_core::{Period, Position};

use crate::prove::{Witness, WitnessTick};
use crate::trace::{Trace, TraceError, write_vcd};

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

fn lane(witness: &Witness, period: Period, of: fn(&WitnessTick) -> Position) -> Result<Trace, TraceError> {
    let row: Vec<Position> = witness.ticks.iter().map(of).collect();
    lane_of(witness.start, &row, period)
}

/// One position a tick as a trace, after one tick at `start`.
pub(super) fn lane_of(start: Position, row: &[Position], period: Period) -> Result<Trace, TraceError> {
    let at_ns = |tick: usize| {
        let exact = (tick as u128 + 1) * u128::from(period.numerator_ns()) / u128::from(period.denominator());
        u64::try_from(exact).unwrap_or(u64::MAX)
    };
    let mut edges = Vec::new();
    let mut before = start;
    for (index, &now) in row.iter().enumerate() {
        if now != before {
            before = now;
            edges.push(at_ns(index));
        }
    }
    // The last tick is shown at its full length.
    Trace::new(start, 0, at_ns(row.len()), edges, 1)
}
