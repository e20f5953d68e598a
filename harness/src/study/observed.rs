//! A recording, read as operations, and what several together show.

use debounce_core::{Change, PerChange, PerPosition, Position};

use crate::characterise::{Figures, SegmentError, SegmentOptions, Segmentation, segment};
use crate::network::Network;
use crate::quantity::Time;
use crate::requirement::{Level, Measured, Seen, Sourced, TakenAt};
use crate::trace::{Recording, Trace, TraceError};
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
    /// Where it was taken, if a network stands between the contact and the pin; `None` where nothing does.
    pub taken_at: Option<Sourced<TakenAt>>,
}

impl Observed {
    /// Whether it shows the contact through a network.
    #[must_use]
    pub fn is_behind_network(&self) -> bool {
        self.taken_at.is_some_and(|taken_at| taken_at.value == TakenAt::Pin)
    }

    /// What the pin shows of it: the recording itself, unless it was taken in front of `network`.
    ///
    /// # Errors
    /// None that a trace in order can cause.
    pub fn at_pin(&self, network: Option<&Network>) -> Result<Trace, TraceError> {
        match network.filter(|_| !self.is_behind_network()) {
            Some(network) => network.through(&self.recording.trace),
            None => Ok(self.recording.trace.clone()),
        }
    }
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
    Ok(Observed { name: name.into(), recording, segmentation, figures, truth, closed: None, taken_at: None })
}

/// The figures of all recordings together, as if they were one: of those that show the contact itself; where there is
/// none of that sort, of those taken behind its network.
#[must_use]
pub fn pooled(observed: &[Observed]) -> Figures {
    let behind = observed.iter().all(Observed::is_behind_network);
    let counted = observed.iter().filter(|one| behind || !one.is_behind_network());
    Figures::pooled(&counted.map(|one| &one.segmentation).collect::<Vec<_>>())
}

fn seen(ns: u64, count: usize) -> Seen {
    Seen { time: Time::from_ns(ns), count: count as u64 }
}

/// What all recordings of the contact show together, each figure on the safe side.
///
/// A network hides pulses and moves edges, so a recording taken behind it says nothing of the contact's own figures.
#[must_use]
pub fn measured(observed: &[Observed]) -> Measured {
    let observed: Vec<&Observed> = observed.iter().filter(|one| !one.is_behind_network()).collect();
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
