//! Which reported edge belongs to which change of the contact.
//!
//! The rule, in the order of time. Changes of the contact alternate, and so do the edges of a law.
//!
//! * A change waits from the first sample at or after it.
//! * An edge reports the waiting change of its own direction; an older one still waiting is then missed.
//!   With none waiting it is false.
//! * When the next change of the same direction comes, the one that waited is missed.
//! * Once the law is settled with sample and output where the contact is, nothing of the past is left in it, and
//!   all that waits is missed. That is how both changes of an operation that left no edge are missed.
//! * At the end of the trace, what waits is missed if the law is settled where the line is, else undecided.

use debounce_core::{Change, Position};

/// The changes that wait to be reported: always the latest ones, and never more than two.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub(crate) struct Waiting(u8);

/// What an edge is. Changes are numbered by how far they lie back: 0 is the latest.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Judgement {
    /// Nothing stands behind it.
    False,
    /// It reports the latest change.
    ReportsLatest,
    /// It reports the latest change, and the one before that is missed.
    ReportsLatestMissesPrevious,
    /// It reports the change before the latest.
    ReportsPrevious,
}

impl Waiting {
    /// A change comes; `true` when the one two before it is missed by that.
    #[must_use]
    pub(crate) fn arrive(&mut self) -> bool {
        let full = self.0 == 2;
        if !full {
            self.0 += 1;
        }
        full
    }

    /// The law reports `change` while the contact, after its latest change, is at `contact`.
    #[must_use]
    pub(crate) fn edge(&mut self, change: Change, contact: Position) -> Judgement {
        let (left, judgement) = match (self.0, change == contact.reached_by()) {
            (0, _) => (0, Judgement::False),
            (1, false) => (1, Judgement::False),
            (1, true) => (0, Judgement::ReportsLatest),
            (_, false) => (1, Judgement::ReportsPrevious),
            (_, true) => (0, Judgement::ReportsLatestMissesPrevious),
        };
        self.0 = left;
        judgement
    }

    /// How many changes wait; the latest ones do.
    pub(crate) fn count(self) -> u8 {
        self.0
    }

    /// Nothing waits any more; gives how many did.
    #[must_use]
    pub(crate) fn clear(&mut self) -> u8 {
        std::mem::take(&mut self.0)
    }
}
