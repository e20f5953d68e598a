//! What segmentation finds: operations, disturbances, fragments, and what is in doubt about them.

use debounce_core::{Change, Position};

use super::gap::Gap;
use crate::truth::TruthChange;

/// Edges that belong together: no two neighbours are as far apart as the gap that ends a burst.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Burst {
    /// Instant of the first edge.
    pub first_ns: u64,
    /// Instant of the last edge.
    pub last_ns: u64,
    /// How many edges.
    pub edges: usize,
    /// The longest run inside, 0 for a single edge.
    pub longest_gap_ns: u64,
    /// The shortest run inside, where there is one.
    pub shortest_pulse_ns: Option<u64>,
}

impl Burst {
    /// From the first edge to the last.
    #[must_use]
    pub fn width_ns(&self) -> u64 {
        self.last_ns - self.first_ns
    }
}

/// A stretch of time that the recording shows whole, or only in part.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Extent {
    /// Both ends were recorded.
    Exactly(u64),
    /// It began before the recording, or went on after it.
    AtLeast(u64),
}

impl Extent {
    /// The time, where both ends were recorded.
    #[must_use]
    pub fn exact(self) -> Option<u64> {
        match self {
            Self::Exactly(ns) => Some(ns),
            Self::AtLeast(_) => None,
        }
    }

    /// The time that was recorded of it.
    #[must_use]
    pub fn seen_ns(self) -> u64 {
        match self {
            Self::Exactly(ns) | Self::AtLeast(ns) => ns,
        }
    }
}

/// A make or a break, recorded whole.
///
/// The contact's change is deemed to be at the first edge.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Operation {
    /// What the contact did.
    pub change: Change,
    /// Its edges; the bounce lasts from the first to the last.
    pub burst: Burst,
    /// Time in the position before, from first edge to first edge.
    pub dwell_before: Extent,
    /// Time in the new position, from first edge to first edge.
    pub dwell_after: Extent,
    /// What cannot be told for sure about it.
    pub ambiguity: Option<Ambiguity>,
}

impl Operation {
    /// From the first edge to the last: the safe reading, which takes a doubtful tail as bounce.
    #[must_use]
    pub fn bounce_ns(&self) -> u64 {
        self.burst.width_ns()
    }
}

/// A burst that ends in the position in which it began.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Disturbance {
    /// The contact's position around it.
    pub position: Position,
    /// Its edges.
    pub burst: Burst,
    /// Time since the last disturbance ended; none for the first of the recording.
    pub since_disturbance_ns: Option<u64>,
    /// Time since the last bounce ended; none before the first operation.
    pub since_bounce_ns: Option<u64>,
    /// What cannot be told for sure about it.
    pub ambiguity: Option<Ambiguity>,
}

/// Something that cannot be told apart from the edges alone.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Ambiguity {
    /// The two readings.
    pub doubt: Doubt,
    /// Beginning of the run on which the decision rests.
    pub at_ns: u64,
    /// Length of that run.
    pub run_ns: u64,
}

/// Two readings of the same edges.
///
/// | doubt | counted as | claims take |
/// |---|---|---|
/// | [`SecondBurstOrDisturbance`](Self::SecondBurstOrDisturbance) inside one burst | bounce, so bounce is longer | glitch at least as wide as the tail, quiet and calm at most its distance |
/// | the same, apart from the change | disturbance | quiet and calm at most its distance, bounce as if it belonged to the change |
/// | [`DisturbanceBeforeChange`](Self::DisturbanceBeforeChange) | bounce, so the change is earlier and the bounce longer | glitch at least as wide as the head |
/// | [`DisturbanceOrOperation`](Self::DisturbanceOrOperation) | disturbance, so glitch is wider | dwell no longer than its longest run |
/// | [`OneOrSeveralOperations`](Self::OneOrSeveralOperations) inside one burst | one operation, so bounce is longer | dwell no longer than the runs in doubt |
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[non_exhaustive]
pub enum Doubt {
    /// The edges after the run are a second burst of the same bounce, or a disturbance.
    SecondBurstOrDisturbance,
    /// The edges before the run are a disturbance, or already the change.
    DisturbanceBeforeChange,
    /// The whole is a disturbance, or a short operation there and back.
    DisturbanceOrOperation,
    /// The whole is one operation with a long bounce, or several quick ones.
    OneOrSeveralOperations,
}

impl Doubt {
    /// The two readings in words.
    #[must_use]
    pub fn text(self) -> &'static str {
        match self {
            Self::SecondBurstOrDisturbance => "a second burst of the bounce, or a disturbance",
            Self::DisturbanceBeforeChange => "a disturbance before the change, or already the change",
            Self::DisturbanceOrOperation => "a disturbance, or a short operation",
            Self::OneOrSeveralOperations => "one operation with a long bounce, or several quick ones",
        }
    }
}

/// An end of the recording.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum RecordingEnd {
    /// Where it begins.
    Start,
    /// Where it stops.
    End,
}

/// A burst so close to an end of the recording that part of it may be missing; it counts as nothing.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Fragment {
    /// The end that cuts it off.
    pub cut_by: RecordingEnd,
    /// Where the line was before its first recorded edge.
    pub before: Position,
    /// The edges that were recorded.
    pub burst: Burst,
}

/// A recording, read as operations and disturbances, in order of time.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Segmentation {
    /// The gap that ends a burst, and where it comes from.
    pub gap: Gap,
    /// Makes and breaks recorded whole; they alternate.
    pub operations: Vec<Operation>,
    /// Disturbances recorded whole.
    pub disturbances: Vec<Disturbance>,
    /// Bursts cut off by the start or the end of the recording.
    pub fragments: Vec<Fragment>,
    /// First and last instant of the recording.
    pub recorded_ns: (u64, u64),
    /// The recorder's own sample period: what it could not see.
    pub resolution_ns: u64,
}

impl Segmentation {
    /// The changes of the contact as truth for a replay over the same recording.
    ///
    /// They alternate and begin away from the recording's first position. So that they do, a burst that an end of
    /// the recording cut off counts as a change here where its recorded edges are odd in number.
    #[must_use]
    pub fn truth(&self) -> Vec<TruthChange> {
        let whole = self.operations.iter().map(|o| TruthChange { change: o.change, at_ns: o.burst.first_ns });
        let cut = self
            .fragments
            .iter()
            .filter(|f| !f.burst.edges.is_multiple_of(2))
            .map(|f| TruthChange { change: f.before.opposite().reached_by(), at_ns: f.burst.first_ns });
        let mut truth: Vec<TruthChange> = whole.chain(cut).collect();
        truth.sort_by_key(|change| change.at_ns);
        truth
    }

    /// How long each operation's bounce lasts on the safe side: to its own last edge, or to that of a disturbance after
    /// it that may be a second burst of the bounce. The recorder's sample period comes on top.
    #[must_use]
    pub fn reaches_ns(&self) -> Vec<u64> {
        let mut reaches: Vec<u64> = self.operations.iter().map(Operation::bounce_ns).collect();
        let mut next = 0;
        for disturbance in &self.disturbances {
            while self.operations.get(next).is_some_and(|o| o.burst.first_ns < disturbance.burst.first_ns) {
                next += 1;
            }
            let doubt = disturbance.ambiguity.map(|ambiguity| ambiguity.doubt);
            if doubt == Some(Doubt::SecondBurstOrDisturbance)
                && let Some(before) = next.checked_sub(1)
            {
                let until = disturbance.burst.last_ns - self.operations[before].burst.first_ns;
                reaches[before] = reaches[before].max(until);
            }
        }
        reaches
    }

    /// How many operations may be several, or several one.
    #[must_use]
    pub fn changes_in_doubt(&self) -> usize {
        let in_doubt = |a: &Ambiguity| a.doubt == Doubt::OneOrSeveralOperations;
        self.operations.iter().filter(|o| o.ambiguity.as_ref().is_some_and(in_doubt)).count()
    }

    /// How many operations and disturbances are in doubt.
    #[must_use]
    pub fn ambiguous(&self) -> usize {
        self.operations.iter().filter(|o| o.ambiguity.is_some()).count()
            + self.disturbances.iter().filter(|d| d.ambiguity.is_some()).count()
    }
}
