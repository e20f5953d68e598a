//! The samples that tell two machines apart, as a timing diagram and as a VCD file.

use std::fmt;
use std::io::{self, Write};

use debounce_core::{Law, Machine, Period, Position};

use super::timing::{ROW, level, ruler};
use super::witness::lane_of;
use crate::machine::{Apart, MachineTable};
use crate::trace::write_vcd;

/// What both machines say at each sample that leads to their first difference.
///
/// ```text
/// tick     1
/// reads    ##_##
/// one      ____#
/// other    _____
/// ```
/// `_` is open, `#` is closed; a machine says so after the tick.
#[derive(Clone, Copy, Debug)]
pub struct ApartDiagram<'a> {
    /// The samples.
    pub apart: &'a Apart,
    /// The machines that [`compare`](crate::machine::compare) told apart by them.
    pub machines: [&'a MachineTable; 2],
}

/// The output of a machine after each sample.
pub(super) fn outputs(machine: &MachineTable, apart: &Apart) -> Vec<Position> {
    let mut state = machine.rest(apart.start);
    let mut one = |&sample: &Position| {
        let _edge = machine.step(&mut state, sample);
        machine.output(&state)
    };
    apart.samples.iter().map(&mut one).collect()
}

impl fmt::Display for ApartDiagram<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let [one, other] = self.machines.map(|machine| outputs(machine, self.apart));
        let drawn = |row: &[Position]| row.iter().copied().map(level).collect::<String>();
        let rows = self.apart.samples.chunks(ROW).zip(one.chunks(ROW).zip(other.chunks(ROW)));
        for (row, (samples, (one, other))) in rows.enumerate() {
            if row > 0 {
                writeln!(f)?;
            }
            writeln!(f, "tick     {}", ruler(row * ROW + 1, samples.len()))?;
            writeln!(f, "reads    {}", drawn(samples))?;
            writeln!(f, "one      {}", drawn(one))?;
            writeln!(f, "other    {}", drawn(other))?;
        }
        Ok(())
    }
}

/// Writes the samples and both outputs as three channels of a VCD, one tick `period` long, the first after one tick
/// of rest. `again` is the command that finds them again.
///
/// # Errors
/// Those of `out`.
pub fn write_apart(
    out: &mut dyn Write,
    apart: &Apart,
    machines: [&MachineTable; 2],
    period: Period,
    again: &str,
) -> io::Result<()> {
    let lane = |row: &[Position]| lane_of(apart.start, row, period).map_err(io::Error::other);
    let [one, other] = machines.map(|machine| outputs(machine, apart));
    let (samples, one, other) = (lane(&apart.samples)?, lane(&one)?, lane(&other)?);
    let mut out = out;
    write_vcd(&mut out, &[("apart.samples", &samples), ("apart.one", &one), ("apart.other", &other)], again)
}
