//! Reads rows of a time and levels or voltages, as oscilloscopes, logic analysers and scripts write them.
//!
//! What such files leave open is decided so:
//! * Times are exact to the nanosecond and rounded down to it; they must rise from row to row. Times that begin
//!   below zero are moved up by whole nanoseconds until they do not.
//! * A unit in the header counts; without one, times with a fraction are seconds, and whole numbers are refused.
//! * With a sample period the column of times holds the numbers of samples that lie so far apart.
//! * Evenly spaced rows are samples: each stands for one period, which is the resolution. Otherwise rows are
//!   changes, the last row is the end, and the resolution is the worth of the last digit of the times.
//! * A voltage is high at or above the rising threshold, low at or below the falling one, else as before.
//! * Infinity stands for a voltage beyond the recorder's range: the level is known, the voltage is not.
//! * Blank lines and lines that begin with `#` are skipped.

mod cell;
mod header;
mod layout;
mod line;
mod number;
mod rows;
#[cfg(test)]
mod tests;

use std::io::Read;

use self::layout::Layout;
pub(super) use self::line::Lines;
use self::rows::Rows;
use super::error::{Faults, Lack};
use super::open::PREFIX;
use super::{Channel, ReadOptions, Recording};

/// Reads the named channels, or the only one. Nothing returned is worth anything once `faults` holds some.
///
/// `prefix` is what `input` begins with.
pub(super) fn read<R: Read>(
    input: R,
    prefix: &[u8],
    wanted: &[&str],
    options: &ReadOptions,
    faults: &mut Faults,
) -> Vec<Recording> {
    let Some(layout) = layout_of(prefix, options, faults) else { return Vec::new() };
    if layout.time_unit.is_none() && layout.times_are_whole && options.sample_period_ns.is_none() {
        faults.whole_file("has whole numbers as times and does not say in which unit");
        faults.help("give the unit, or name it in the header, as in \"time (us),level\"; or the sample period, where they count samples");
        faults.lack(Lack::TimeUnit);
    }
    let mut chosen = Vec::new();
    if wanted.is_empty() {
        chosen.extend(layout.select(options.channel.as_deref(), faults));
    }
    for name in wanted {
        chosen.extend(layout.select(Some(name), faults));
    }
    if !faults.is_empty() {
        return Vec::new();
    }
    let mut rows = Rows::new(&layout, &chosen, options);
    if let Err(error) = rows.read(&mut Lines::new(input, line::terminator(prefix)), faults) {
        faults.io(error);
        return Vec::new();
    }
    rows.finish(faults)
}

/// The channels that the beginning of a file shows.
pub(super) fn channels(prefix: &[u8], options: &ReadOptions, faults: &mut Faults) -> Vec<Channel> {
    layout_of(prefix, options, faults).map_or_else(Vec::new, |layout| layout.channels())
}

fn layout_of(prefix: &[u8], options: &ReadOptions, faults: &mut Faults) -> Option<Layout> {
    let terminator = line::terminator(prefix);
    let mut lines: Vec<&[u8]> = prefix.split(|&byte| byte == terminator).collect();
    // The last line of a long file is probably cut.
    if prefix.len() + 3 >= PREFIX && lines.len() > 1 {
        lines.pop();
    }
    layout::detect(lines, options, faults)
}
