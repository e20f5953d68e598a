//! Reads the value change dump of IEEE 1364-2005 clause 18, in one pass and in bounded memory.
//!
//! Memory holds one block of the file, the declarations, and the edges of the channels that were asked for.
//!
//! What the standard leaves open is decided so:
//! * Times are rounded down to whole nanoseconds; of the values in one nanosecond the last counts.
//! * The recording starts at the first time mark, or at 0 where values stand before any mark, and ends at the
//!   last time mark.
//! * A channel without a known value at the start has its first known one from the start.
//! * A file without a time scale is refused unless the options give the unit.
//! * A vector with more digits than its variable is read from the right.
//! * Reals and texts are skipped unchecked unless chosen.

mod body;
mod codes;
mod header;
mod select;
#[cfg(test)]
mod tests;
mod tokens;

use std::io::{self, Read};

use self::body::Body;
use self::header::Scale;
use self::tokens::Tokens;
use super::channel::Channel;
use super::error::{Faults, Lack};
use super::{ReadOptions, Recording};

/// Reads the named channels, or the only one. Nothing returned is worth anything once `faults` holds some.
pub(super) fn read<R: Read>(
    input: R,
    wanted: &[&str],
    options: &ReadOptions,
    faults: &mut Faults,
) -> Vec<Recording> {
    try_read(input, wanted, options, faults).unwrap_or_else(|error| {
        faults.io(error);
        Vec::new()
    })
}

fn try_read<R: Read>(
    input: R,
    wanted: &[&str],
    options: &ReadOptions,
    faults: &mut Faults,
) -> io::Result<Vec<Recording>> {
    let mut tokens = Tokens::new(input);
    let header = header::read(&mut tokens, faults)?;
    // With half of the declarations missing, all that could follow are faults that are none.
    if !faults.is_empty() {
        return Ok(Vec::new());
    }
    let mut selected = Vec::new();
    if wanted.is_empty() {
        selected.extend(select::select(&header, options.channel.as_deref(), options, faults));
    }
    for name in wanted {
        selected.extend(select::select(&header, Some(name), options, faults));
    }
    let Some(scale) = options.time_unit.map(Scale::one).or(header.scale) else {
        faults.whole_file("has no $timescale, so its times have no unit");
        faults.help("give the unit of the times, or add \"$timescale 1 ns $end\" to the file");
        faults.lack(Lack::TimeUnit);
        return Ok(Vec::new());
    };
    if !faults.is_empty() {
        return Ok(Vec::new());
    }
    let mut body = Body::new(&header, scale, selected, options);
    body.read(&mut tokens, faults)?;
    Ok(body.finish(faults))
}

/// The channels that a file declares.
pub(super) fn channels<R: Read>(input: R, faults: &mut Faults) -> Vec<Channel> {
    match header::read(&mut Tokens::new(input), faults) {
        Ok(header) => select::channels(&header),
        Err(error) => {
            faults.io(error);
            Vec::new()
        }
    }
}
