//! The source of words: [`Words`].

use debounce_core::Envelope;
use rand::Rng;

use super::shrink::Plan;
use super::{Word, WordPlan};
use crate::prove::{Environment, ProveError};

/// Draws words from exactly one envelope.
///
/// Every word is inside the envelope, and what the logic is given of it, lost ticks left out, is inside
/// [`Envelope::delivered`]. With the feature `proptest` this is a strategy.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Words {
    envelope: Envelope,
    most_changes: usize,
}

impl Words {
    /// Words of `envelope`, with up to 6 changes of the contact.
    ///
    /// # Errors
    /// When the envelope is none: a dwell or quiet that no sample sees.
    pub fn of(envelope: &Envelope) -> Result<Self, ProveError> {
        Environment::check(envelope)?;
        Ok(Self { envelope: *envelope, most_changes: 6 })
    }

    /// Sets the most changes of the contact in one word.
    #[must_use]
    pub fn most_changes(mut self, changes: usize) -> Self {
        self.most_changes = changes;
        self
    }

    /// The envelope.
    #[must_use]
    pub fn envelope(&self) -> &Envelope {
        &self.envelope
    }

    /// Draws one word.
    pub fn draw<R: Rng>(&self, rng: &mut R) -> Word {
        self.plan(rng).value()
    }

    pub(crate) fn plan<R: Rng>(&self, rng: &mut R) -> WordPlan {
        WordPlan::draw(&self.envelope, self.most_changes, rng)
    }
}
