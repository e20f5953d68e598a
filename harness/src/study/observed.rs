//! A recording, read as operations, and what several together show.

use debounce_core::{Change, PerChange, PerPosition, Position};

use crate::characterise::{Figures, SegmentError, SegmentOptions, Segmentation, segment};
use crate::quantity::Time;
use crate::requirement::{Level, Measured, Seen};
use crate::trace::Recording;
use crate::truth::TruthChange;

/// A recording with everything that was read from it.
#[derive(Clone, Debug)]
pub struct Observed {
    /// What the user calls it: its path, or the name of the demo.
    pub name: String,
    /// The channel and its trace.
    pub recording: Recording,
    /// Its operations and disturbances.
    pub segmentation: Segmentation,
    /// Their summary.
    pub figures: Figures,
    /// What the contact did, by the segmentation.
    pub truth: Vec<TruthChange>,
    /// The level at which the contact was declared to be closed, where that was said of this recording.
    pub closed: Option<Level>,
}

/// Reads a recording as operations.
///
/// # Errors
/// When it holds none.
pub fn observe(
    name: impl Into<String>,
    recording: Recording,
    options: &SegmentOptions,
) -> Result<Observed, SegmentError> {
    let segmentation = segment(&recording.trace, options)?;
    let figures = Figures::of(&segmentation);
    let truth = segmentation.truth();
    Ok(Observed { name: name.into(), recording, segmentation, figures, truth, closed: None })
}

/// The figures of all recordings together, as if they were one.
#[must_use]
pub fn pooled(observed: &[Observed]) -> Figures {
    Figures::pooled(&observed.iter().map(|one| &one.segmentation).collect::<Vec<_>>())
}

fn seen(ns: u64, count: usize) -> Seen {
    Seen { time: Time::from_ns(ns), count: count as u64 }
}

/// What all recordings together show, each figure on the safe side.
#[must_use]
pub fn measured(observed: &[Observed]) -> Measured {
    let longest = |change: Change| {
        observed.iter().filter_map(|one| one.figures.longest_bounce_ns(change)).max().map(Time::from_ns)
    };
    // A recording without a disturbance does not show that there are none.
    let widest = |position: Position| {
        let widths = observed.iter().map(|one| one.figures.widest_glitch_ns(position));
        let count = observed.iter().map(|one| one.figures.disturbances.of(position).count).sum();
        widths.max().filter(|&width| width > 0).map(|width| seen(width, count))
    };
    let shortest = |position: Position| {
        let count = observed.iter().map(|one| one.figures.dwell.of(position).count).sum();
        let dwells = observed.iter().filter_map(|one| one.figures.shortest_dwell_ns(position));
        dwells.min().map(|dwell| seen(dwell, count))
    };
    let quiet = observed
        .iter()
        .filter_map(|one| Some(one.figures.quiet_ns?.saturating_sub(one.figures.resolution_ns)))
        .min();
    let rests = observed.iter().map(|one| one.figures.rests).sum();
    Measured {
        bounce: PerChange { make: longest(Change::Make), break_: longest(Change::Break) },
        disturbance: PerPosition { open: widest(Position::Open), closed: widest(Position::Closed) },
        quiet: quiet.map(|quiet| seen(quiet, rests)),
        shortest: PerPosition { open: shortest(Position::Open), closed: shortest(Position::Closed) },
    }
}
