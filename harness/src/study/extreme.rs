//! What stands behind the widest disturbance, the shortest rest and the shortest times: how many were recorded.

use std::fmt;

use debounce_core::Position;

use crate::characterise::tolerance::{self, ToleranceError};
use crate::quantity::{Share, Time};
use crate::report::words;
use crate::requirement::{Measured, Origin, Resolved, Seen, Sourced};

/// Of what the extreme is.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum ExtremeOf {
    /// The width of disturbances begun in this position.
    Disturbance(Position),
    /// The rest between two disturbances.
    Rest,
    /// The time in this position.
    Stay(Position),
}

/// An extreme, what it allows to claim, and what is taken for the envelope.
///
/// # Method
/// S. S. Wilks, Ann. Math. Stat. 12 (1941) 91-96: the greatest of n independent values is an upper tolerance limit, and
/// the least of them a lower one.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Extreme {
    /// Of what.
    pub of: ExtremeOf,
    /// The extreme that was recorded, on the safe side; `None` where nothing of the kind was.
    pub seen: Option<Time>,
    /// How many were recorded without doubt.
    pub count: u64,
    /// How many would be needed for the wanted coverage and confidence.
    pub needed: u64,
    /// With the wanted confidence, at least this share of all keeps to what was recorded; `None` where none was.
    pub covered: Option<f64>,
    /// What is in the envelope, and where it comes from.
    pub taken: Sourced<Time>,
}

impl Extreme {
    /// All five, in the order of the requirement file.
    pub(super) fn all(
        measured: &Measured,
        resolved: &Resolved,
        coverage: tolerance::Share,
        confidence: tolerance::Share,
    ) -> Result<Vec<Self>, ToleranceError> {
        let required = &resolved.required;
        let stay = |at| (ExtremeOf::Stay(at), *measured.shortest.of(at), *required.shortest.of(at));
        let wide =
            |at| (ExtremeOf::Disturbance(at), *measured.disturbance.of(at), *required.disturbance.of(at));
        let figures = [
            stay(Position::Closed),
            stay(Position::Open),
            wide(Position::Open),
            wide(Position::Closed),
            (ExtremeOf::Rest, measured.quiet, required.quiet),
        ];
        let needed = tolerance::operations_needed(1, coverage, confidence)?;
        let extreme = |(of, seen, taken): (ExtremeOf, Option<Seen>, Sourced<Time>)| {
            let count = seen.map_or(0, |seen| seen.count);
            let covered = match count {
                0 => None,
                _ => Some(tolerance::coverage(count, 1, confidence)?),
            };
            Ok(Self { of, seen: seen.map(|seen| seen.time), count, needed, covered, taken })
        };
        figures.into_iter().map(extreme).collect()
    }

    /// Whether the envelope leans on it, or on a default in its place, although too few were recorded.
    #[must_use]
    pub fn is_unsupported(&self) -> bool {
        matches!(self.taken.origin, Origin::Measured | Origin::Default(_)) && self.count < self.needed
    }

    /// What the recordings allow to claim, as a sentence; `None` where there is nothing.
    #[must_use]
    pub fn claim(&self, coverage: Share) -> Option<String> {
        let (covered, seen) = (words::covered(self.covered?), self.seen?);
        let enough = match self.needed.saturating_sub(self.count) {
            0 => String::new(),
            more => format!("; {more} more are needed for {coverage}"),
        };
        let than = match self.of {
            ExtremeOf::Disturbance(_) => format!("wider than {}", words::at_most(seen.ns())),
            _ => format!("shorter than {}", words::at_least(seen.ns())),
        };
        Some(format!("{covered} of {} are no {than} ({} recorded{enough})", self.of.plural(), self.count))
    }

    /// The key of the requirement file.
    #[must_use]
    pub fn key(&self) -> &'static str {
        match self.of {
            ExtremeOf::Disturbance(Position::Open) => "required.disturbance.open",
            ExtremeOf::Disturbance(Position::Closed) => "required.disturbance.closed",
            ExtremeOf::Rest => "required.quiet",
            ExtremeOf::Stay(Position::Open) => "required.shortest_open",
            ExtremeOf::Stay(Position::Closed) => "required.shortest_closed",
        }
    }
}

impl ExtremeOf {
    /// So many of them: "1 rest between two disturbances".
    fn counted(self, count: u64) -> String {
        let number = usize::try_from(count).unwrap_or(usize::MAX);
        match self {
            Self::Disturbance(at) => {
                format!("{} while {}", words::count(number, "disturbance"), words::position(at))
            }
            Self::Rest => format!("{} between two disturbances", words::count(number, "rest")),
            Self::Stay(at) => format!("{} {}", words::count(number, "time"), words::position(at)),
        }
    }

    fn plural(self) -> String {
        match self {
            Self::Disturbance(at) => format!("disturbances while {}", words::position(at)),
            Self::Rest => "rests between two disturbances".to_owned(),
            Self::Stay(at) => format!("times {}", words::position(at)),
        }
    }
}

/// How few were recorded, and what is taken all the same.
impl fmt::Display for Extreme {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let taken = match (self.taken.origin, self.count, self.of) {
            (Origin::Measured, 0, ExtremeOf::Disturbance(_)) => {
                "taken, for what are perhaps parts of bounces"
            }
            (Origin::Measured, 0, _) => "taken, from what is in doubt",
            (Origin::Measured, ..) => "taken, with the margin",
            _ => "assumed",
        };
        write!(f, "{} ({} {taken})", self.of.counted(self.count), self.taken.value)
    }
}
