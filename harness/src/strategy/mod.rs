//! Waveforms drawn at random from exactly an envelope, for property tests and for logic that no search exhausts.
//!
//! [`Words`] draws in samples, from an [`Envelope`](debounce_core::Envelope): where the contact is and what is read,
//! tick by tick, with bounce, disturbances and lost ticks.
//!
//! What is drawn favours the ends of the envelope: shortest dwells, full bounces, disturbances at exactly quiet or
//! calm, close to a change or across it. What fails is made simpler: fewer edges first, then shorter.
//!
//! With the feature `proptest` each is a strategy of that crate.

mod draw;
#[cfg(feature = "proptest")]
mod proptest;
pub(crate) mod shrink;
mod word;
mod word_plan;
mod words;

#[cfg(feature = "proptest")]
pub use proptest::WordTree;
pub(crate) use word::row;
pub use word::{Word, WordTick};
pub(crate) use word_plan::WordPlan;
pub use words::Words;
