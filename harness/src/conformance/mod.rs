//! Whether a recording lies inside an envelope, and every place where it does not.
//!
//! This ties measurement to proof: what is proved for an [`PhysicalEnvelope`] speaks about a recording only if
//! the recording conforms to it.
//!
//! # What is decided
//! A *reading* says which edges are changes of the contact, and covers every run in which the line differs from
//! the contact by bounce or by a disturbance. A recording conforms if some reading keeps every clause. All
//! readings are searched, so the answer does not depend on how the recording was segmented, under these rules:
//!
//! * The contact's change is deemed to be at an edge of the line toward the new position. A change that bounce or
//!   a disturbance hid for a while is not tried at an earlier instant.
//! * A disturbance that straddles a change may be as wide as the narrower of the two widths allowed.
//! * Where calm is claimed, no disturbance begins inside a bounce, and calm is counted from the end of the
//!   bounce or of a disturbance that straddled the change, whichever is later.
//! * Before the recording everything has been served: dwell, quiet and calm. At its end only what was recorded
//!   counts.
//!
//! Each rule leaves readings out and adds none, so a recording that is said to conform does: its samples at any
//! phase lie in the envelope in ticks. Where no reading fits, the violations are those of a reading that leaves
//! about the least time outside the envelope; such a list is a good account, not the only one.

mod reading;
mod search;

use debounce_core::{Change, Position};

use crate::envelope::PhysicalEnvelope;
use crate::trace::Trace;

/// A clause of the envelope that a recording does not keep.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[non_exhaustive]
pub enum BrokenClause {
    /// A bounce lasts longer than allowed.
    BounceTooLong(Change),
    /// A disturbance begun in this position is wider than allowed.
    DisturbanceTooWide(Position),
    /// A disturbance begins too soon after the one before it.
    QuietTooShort,
    /// A disturbance begins too soon after a bounce.
    CalmTooShort,
    /// The contact holds this position for less than allowed.
    DwellTooShort(Position),
}

impl BrokenClause {
    /// The clause in words, to stand before the value found and the value allowed.
    #[must_use]
    pub fn text(self) -> &'static str {
        match self {
            Self::BounceTooLong(Change::Make) => "bounce after a make lasts too long",
            Self::BounceTooLong(Change::Break) => "bounce after a break lasts too long",
            Self::DisturbanceTooWide(Position::Open) => "disturbance while open is too wide",
            Self::DisturbanceTooWide(Position::Closed) => "disturbance while closed is too wide",
            Self::QuietTooShort => "disturbance comes too soon after the one before",
            Self::CalmTooShort => "disturbance comes too soon after a bounce",
            Self::DwellTooShort(Position::Open) => "contact is open too briefly",
            Self::DwellTooShort(Position::Closed) => "contact is closed too briefly",
        }
    }
}

/// One place where the recording leaves the envelope.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct Violation {
    /// The clause that is not kept.
    pub clause: BrokenClause,
    /// Where: beginning of the bounce, of the disturbance, or of the dwell that is too short.
    pub at_ns: u64,
    /// The value in the recording.
    pub found_ns: u64,
    /// The value that the envelope allows.
    pub allowed_ns: u64,
}

/// Edges after a change that fit the envelope only as a disturbance, because as bounce they would last too long.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct DoubtfulDisturbance {
    /// The change before it.
    pub change: Change,
    /// When that change was.
    pub change_ns: u64,
    /// First edge.
    pub from_ns: u64,
    /// Last edge.
    pub until_ns: u64,
}

/// The answer for one recording and one envelope.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Conformance {
    /// Every place where the reading leaves the envelope, in order of time; empty if the recording conforms.
    pub violations: Vec<Violation>,
    /// Disturbances so close to a bounce that they may be a second burst of it: no further from its last edge
    /// than the longest bounce allowed.
    pub doubtful: Vec<DoubtfulDisturbance>,
    /// The changes of the contact in the reading.
    pub changes: Vec<(Change, u64)>,
    /// The disturbances of the reading: first and last edge.
    pub disturbances: Vec<(u64, u64)>,
    /// Whether every reading was searched.
    pub search: Search,
}

/// How far the search went.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Search {
    /// Every reading was searched.
    Complete,
    /// There were too many readings to follow at once; a reading inside the envelope may have been missed.
    /// Conforming recordings are never doubtful in this way.
    Narrowed,
}

impl Conformance {
    /// Whether some reading of the recording lies inside the envelope.
    #[must_use]
    pub fn conforms(&self) -> bool {
        self.violations.is_empty()
    }
}

/// Searches the readings of `trace` for one inside `envelope`.
#[must_use]
pub fn check(trace: &Trace, envelope: &PhysicalEnvelope) -> Conformance {
    let (roles, search) = search::best_reading(trace, envelope);
    let mut conformance = reading::account(trace, envelope, &roles);
    // A narrowed search that found a conforming reading has answered the question all the same.
    conformance.search = if conformance.conforms() { Search::Complete } else { search };
    conformance
}

#[cfg(test)]
mod tests;
