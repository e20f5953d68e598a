//! One line for each operation of a recording.

use std::io;

use super::lines::Lines;
use crate::characterise::{Extent, Operation};
use crate::report::words;
use crate::study::Observed;

const HEADING: &str = "number kind             at   bounce edges  longest shortest   before    after\n\
     .                                          gap    pulse    dwell    dwell\n";

/// The table of one recording; it fits 80 columns.
pub(super) fn operations(lines: &mut Lines<'_>, one: &Observed) -> io::Result<()> {
    lines.plain(&format!("\nOperations of {}, channel {}\n", one.name, one.recording.channel))?;
    lines.plain(&HEADING.replace("\n.", "\n "))?;
    let resolution_ns = one.segmentation.resolution_ns;
    let seen = |ns: u64| words::seen(ns, resolution_ns);
    for (index, operation) in one.segmentation.operations.iter().enumerate() {
        let Operation { change, burst, dwell_before, dwell_after, ambiguity } = operation;
        let dash = || "-".to_owned();
        let gap = if burst.longest_gap_ns > 0 { seen(burst.longest_gap_ns) } else { dash() };
        lines.plain(&format!(
            "{:>6} {:<5} {:>13} {:>8} {:>5} {:>8} {:>8} {:>8} {:>8}{}\n",
            index + 1,
            words::change(*change),
            words::instant(burst.first_ns),
            seen(operation.bounce_ns()),
            burst.edges,
            gap,
            burst.shortest_pulse_ns.map_or_else(dash, seen),
            dwell(*dwell_before),
            dwell(*dwell_after),
            if ambiguity.is_some() { " ?" } else { "" },
        ))?;
    }
    let mut shown = false;
    for (index, operation) in one.segmentation.operations.iter().enumerate() {
        if let Some(found) = operation.ambiguity {
            if !shown {
                lines.plain("in doubt (?):\n")?;
                shown = true;
            }
            lines.item(
                &format!("{:>6}", index + 1),
                &format!(
                    "{}, by a rest of {} at {}",
                    found.doubt.text(),
                    words::about(found.run_ns),
                    words::instant(found.at_ns)
                ),
            )?;
        }
    }
    Ok(())
}

fn dwell(extent: Extent) -> String {
    match extent {
        Extent::Exactly(ns) => words::about(ns),
        Extent::AtLeast(ns) => format!(">{}", words::at_least(ns)),
    }
}
