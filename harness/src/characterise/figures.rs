//! The summary of a recording, and the envelope it supports.

use debounce_core::{Change, PerChange, PerPosition, Position};

use super::histogram::{Histogram, Step, empirical_distribution};
use super::independence::Independence;
use super::operations::Segmentation;
use super::quantile::Spread;
use super::tail::Tail;
use crate::envelope::PhysicalEnvelope;

/// What the operations of one kind have in common.
#[derive(Clone, PartialEq, Debug)]
pub struct ChangeFigures {
    /// Operations recorded whole.
    pub count: usize,
    /// How many of them are in doubt.
    pub ambiguous: usize,
    /// Bounce duration in nanoseconds, first edge to last, as recorded.
    pub bounce_ns: Option<Spread>,
    /// Number of edges.
    pub edges: Option<Spread>,
    /// The longest run inside each bounce that has one, in nanoseconds.
    pub longest_gap_ns: Option<Spread>,
    /// The shortest run inside each bounce that has one, in nanoseconds.
    pub shortest_pulse_ns: Option<Spread>,
    /// Every bounce duration as recorded, from the shortest to the longest.
    pub sorted_bounces_ns: Vec<u64>,
    /// Every bounce duration on the safe side, from the shortest to the longest: doubtful tails included, and the
    /// recorder's sample period added. Claims stand on these.
    pub sorted_safe_bounces_ns: Vec<u64>,
    /// The longest bounce if every doubtful disturbance after a change were a second burst of its bounce.
    pub longest_bounce_in_doubt_ns: u64,
    /// Whether the bounces in their order look independent and alike.
    pub independence: Independence,
    /// What the longest bounces indicate about still longer ones; no claim.
    pub tail: Option<Tail>,
}

impl ChangeFigures {
    /// The recorded bounces in bins, none narrower than `resolution_ns`.
    #[must_use]
    pub fn histogram(&self, resolution_ns: u64) -> Option<Histogram> {
        Histogram::of_sorted(&self.sorted_bounces_ns, resolution_ns)
    }

    /// The empirical distribution of the recorded bounces.
    #[must_use]
    pub fn distribution(&self) -> Vec<Step> {
        empirical_distribution(&self.sorted_bounces_ns)
    }
}

/// What the disturbances begun in one position have in common.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct DisturbanceFigures {
    /// Disturbances recorded whole.
    pub count: usize,
    /// How many of them are in doubt.
    pub ambiguous: usize,
    /// Width in nanoseconds, as recorded.
    pub width_ns: Option<Spread>,
    /// The widest part of a bounce that may be a disturbance instead, 0 where there is none.
    pub widest_in_doubt_ns: u64,
}

/// How long the contact stayed in one position.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct DwellFigures {
    /// How often it was seen to enter the position and to leave it again.
    pub count: usize,
    /// Shortest time from the first edge of the change to it to the first edge of the change from it.
    pub shortest_ns: Option<u64>,
    /// Shortest time from the end of the bounce to the first edge of the change from it.
    pub shortest_settled_ns: Option<u64>,
    /// Shortest run that may have been an operation of its own, where there is one.
    pub shortest_in_doubt_ns: Option<u64>,
}

/// The summary of a recording, or of several. Times are as recorded; what the recorder could not see is added in
/// [`envelope`](Self::envelope).
#[derive(Clone, PartialEq, Debug)]
pub struct Figures {
    /// Makes and breaks.
    pub changes: PerChange<ChangeFigures>,
    /// Disturbances by the position in which they began.
    pub disturbances: PerPosition<DisturbanceFigures>,
    /// Time between the end of a disturbance and the beginning of the next.
    pub spacing_ns: Option<Spread>,
    /// How many of those times were recorded whole: one disturbance fewer than there are in a recording.
    pub rests: usize,
    /// The shortest rest between two disturbances, doubtful ones included; `None` where no two were recorded, for then
    /// nothing is known of how near each other they come.
    pub quiet_ns: Option<u64>,
    /// The shortest time between a bounce and a disturbance after it, doubtful ones included.
    pub calm_ns: Option<u64>,
    /// Time in each position.
    pub dwell: PerPosition<DwellFigures>,
    /// Bursts cut off by an end of the recording; they count in no other figure.
    pub fragments: usize,
    /// How long was recorded.
    pub recorded_ns: u64,
    /// The recorder's own sample period, the longest where there are several: a time read from the recording may be
    /// off by that much.
    pub resolution_ns: u64,
}

/// What is put on top of the figures, and what is left out.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Allowance {
    /// Added to bounce and disturbance widths, in percent of them.
    pub above_percent: u32,
    /// Taken off dwell, quiet and calm, in percent of them, at most 100.
    pub below_percent: u32,
    /// Whether a calm is claimed.
    pub calm: Calm,
}

/// Whether the envelope says anything about disturbances soon after a bounce.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Calm {
    /// Disturbances know nothing of the contact: the safe default.
    Unclaimed,
    /// They kept clear of the bounces in this recording, and that is claimed to go on.
    AsRecorded,
}

impl Allowance {
    /// The figures as they are: an envelope that the recording fills to the brim, and no calm.
    pub const NONE: Self = Self { above_percent: 0, below_percent: 0, calm: Calm::Unclaimed };

    fn above(&self, ns: u64) -> u64 {
        scale(ns, 100 + u128::from(self.above_percent), |scaled| scaled.div_ceil(100))
    }

    fn below(&self, ns: u64) -> u64 {
        scale(ns, u128::from(100 - self.below_percent.min(100)), |scaled| scaled / 100)
    }
}

fn scale(ns: u64, percent: u128, divide: impl Fn(u128) -> u128) -> u64 {
    u64::try_from(divide(u128::from(ns) * percent)).unwrap_or(u64::MAX)
}

/// A figure that the recording does not hold.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum MissingFigure {
    /// No operation of this kind was recorded whole.
    #[error("the recording holds no whole {}; record at least one, or state the bounce at {}", change_word(*.change), change_word(*.change))]
    Bounce {
        /// The kind.
        change: Change,
    },
    /// The contact was never seen to enter this position and leave it again.
    #[error(
        "the recording does not show how long the contact stays {}; record an operation there and back, \
         or state the shortest time {}",
        position_word(*.position), position_word(*.position)
    )]
    Dwell {
        /// The position.
        position: Position,
    },
}

fn change_word(change: Change) -> &'static str {
    match change {
        Change::Make => "make",
        Change::Break => "break",
    }
}

fn position_word(position: Position) -> &'static str {
    match position {
        Position::Open => "open",
        Position::Closed => "closed",
    }
}

impl Figures {
    /// Sums up a segmented recording.
    #[must_use]
    pub fn of(segmentation: &Segmentation) -> Self {
        Self::pooled(&[segmentation])
    }

    /// Sums up several segmented recordings of one contact as if they were one; times between two operations or
    /// disturbances are only counted within a recording.
    #[must_use]
    pub fn pooled(recordings: &[&Segmentation]) -> Self {
        let change = |change| sums::change(recordings, change);
        let position = |position| sums::disturbances_in(recordings, position);
        let dwell = |position| sums::dwell(recordings, position);
        let mut spacing: Vec<u64> =
            sums::disturbances(recordings).filter_map(|d| d.since_disturbance_ns).collect();
        Self {
            changes: PerChange { make: change(Change::Make), break_: change(Change::Break) },
            disturbances: PerPosition { open: position(Position::Open), closed: position(Position::Closed) },
            rests: spacing.len(),
            spacing_ns: Spread::of(&mut spacing),
            quiet_ns: recordings.iter().filter_map(|one| sums::quiet(one)).min(),
            calm_ns: recordings.iter().filter_map(|one| sums::calm(one)).min(),
            dwell: PerPosition { open: dwell(Position::Open), closed: dwell(Position::Closed) },
            fragments: recordings.iter().map(|one| one.fragments.len()).sum(),
            recorded_ns: recordings.iter().map(|one| one.recorded_ns.1 - one.recorded_ns.0).sum(),
            resolution_ns: recordings.iter().map(|one| one.resolution_ns).max().unwrap_or(0),
        }
    }

    /// Disturbances a second, over the time recorded.
    #[must_use]
    pub fn disturbances_per_second(&self) -> f64 {
        let count = self.disturbances.open.count + self.disturbances.closed.count;
        count as f64 * 1e9 / self.recorded_ns.max(1) as f64
    }

    /// The longest bounce that this recording supports: the longest recorded, doubtful tails included, plus
    /// the recorder's sample period.
    #[must_use]
    pub fn longest_bounce_ns(&self, change: Change) -> Option<u64> {
        let figures = match change {
            Change::Make => &self.changes.make,
            Change::Break => &self.changes.break_,
        };
        figures.sorted_safe_bounces_ns.last().copied()
    }

    /// The widest disturbance begun in a position, parts of bounces that may be one included, plus the
    /// recorder's sample period; 0 where none was seen, which does not mean that there are none.
    #[must_use]
    pub fn widest_glitch_ns(&self, position: Position) -> u64 {
        let figures = match position {
            Position::Open => &self.disturbances.open,
            Position::Closed => &self.disturbances.closed,
        };
        match figures.width_ns.map_or(0, |width| width.max).max(figures.widest_in_doubt_ns) {
            0 => 0,
            widest => widest.saturating_add(self.resolution_ns),
        }
    }

    /// The shortest time in a position, runs that may be operations included, less the recorder's sample period.
    #[must_use]
    pub fn shortest_dwell_ns(&self, position: Position) -> Option<u64> {
        let figures = self.dwell.at(position);
        let shortest = figures.shortest_ns.into_iter().chain(figures.shortest_in_doubt_ns).min()?;
        Some(shortest.saturating_sub(self.resolution_ns))
    }

    /// The envelope that the recording supports, with the stated allowance on the safe side of every figure.
    ///
    /// The recording conforms to it; whether operations to come do is what [`tolerance`](super::tolerance)
    /// speaks about, and how much is to be made of extremes that few observations stand behind is decided where a
    /// [requirement](crate::requirement::Requirement::resolve) is filled in.
    ///
    /// # Errors
    /// When a make, a break, or the time in a position was never recorded whole.
    pub fn envelope(&self, allowance: &Allowance) -> Result<PhysicalEnvelope, MissingFigure> {
        let bounce = |change| {
            let longest = self.longest_bounce_ns(change).ok_or(MissingFigure::Bounce { change })?;
            Ok(allowance.above(longest))
        };
        let dwell = |position| {
            let shortest = self.shortest_dwell_ns(position).ok_or(MissingFigure::Dwell { position })?;
            Ok(allowance.below(shortest))
        };
        let glitch = |position| allowance.above(self.widest_glitch_ns(position));
        let seen = |ns: Option<u64>| allowance.below(ns.unwrap_or(0).saturating_sub(self.resolution_ns));
        Ok(PhysicalEnvelope {
            bounce_ns: PerChange { make: bounce(Change::Make)?, break_: bounce(Change::Break)? },
            glitch_ns: PerPosition { open: glitch(Position::Open), closed: glitch(Position::Closed) },
            quiet_ns: seen(self.quiet_ns),
            calm_ns: match allowance.calm {
                Calm::Unclaimed => 0,
                Calm::AsRecorded => seen(self.calm_ns),
            },
            dwell_ns: PerPosition { open: dwell(Position::Open)?, closed: dwell(Position::Closed)? },
        })
    }
}

mod sums;

#[cfg(test)]
mod tests;
