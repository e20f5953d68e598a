//! A recording, read as operations, and what several together show.

use debounce_core::{Change, PerChange, PerPosition, Position};

use crate::characterise::{Figures, SegmentError, SegmentOptions, Segmentation, segment, tolerance};
use crate::quantity::{Share, Time};
use crate::requirement::Measured;
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
    Ok(Observed { name: name.into(), recording, segmentation, figures, truth })
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
        widths.max().filter(|&width| width > 0).map(Time::from_ns)
    };
    let shortest = |position: Position| {
        observed.iter().filter_map(|one| one.figures.shortest_dwell_ns(position)).min().map(Time::from_ns)
    };
    let quiet = observed
        .iter()
        .filter_map(|one| Some(one.figures.quiet_ns?.saturating_sub(one.figures.resolution_ns)))
        .min();
    Measured {
        bounce: PerChange { make: longest(Change::Make), break_: longest(Change::Break) },
        disturbance: PerPosition { open: widest(Position::Open), closed: widest(Position::Closed) },
        quiet: quiet.map(Time::from_ns),
        shortest: PerPosition { open: shortest(Position::Open), closed: shortest(Position::Closed) },
    }
}

/// What may be claimed of the longest bounce seen in n operations, were they independent (Wilks).
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Claim {
    /// Operations recorded whole.
    pub operations: u64,
    /// The longest bounce among them.
    pub longest_ns: u64,
    /// With the wanted confidence, at least this share of all operations bounces no longer.
    pub covered: f64,
    /// Operations that would be needed for the wanted coverage.
    pub needed: u64,
}

impl Claim {
    /// The claim for one kind of change over all recordings; `None` where there is no such operation.
    ///
    /// # Errors
    /// When confidence or coverage is not between 0 and 1.
    pub fn of(
        observed: &[Observed],
        change: Change,
        confidence: Share,
        coverage: Share,
    ) -> Result<Option<Self>, tolerance::ToleranceError> {
        let bounces = observed.iter().flat_map(|one| &one.figures.changes.of(change).sorted_bounces_ns);
        let (count, longest) =
            bounces.fold((0, None), |(count, longest), &ns| (count + 1, longest.max(Some(ns))));
        let Some(longest_ns) = longest else { return Ok(None) };
        let confidence = tolerance::Share::try_new(confidence.fraction())?;
        let coverage = tolerance::Share::try_new(coverage.fraction())?;
        Ok(Some(Self {
            operations: count,
            longest_ns,
            covered: tolerance::coverage(count, 1, confidence)?,
            needed: tolerance::operations_needed(1, coverage, confidence)?,
        }))
    }
}
