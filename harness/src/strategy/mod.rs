//! Waveforms drawn at random from exactly an envelope, for property tests and for logic that no search exhausts.
//!
//! [`Words`] draws in samples, from an [`Envelope`](debounce_core::Envelope): where the contact is and what is read,
//! tick by tick, with bounce, disturbances and lost ticks. [`Waves`] draws in time, from a
//! [`PhysicalEnvelope`](crate::envelope::PhysicalEnvelope): a trace, what the contact really did, and one pass of a
//! clock with its phase, its period within the tolerance, its jitter and its lost ticks.
//!
//! What is drawn favours the ends of the envelope: shortest dwells, full bounces, disturbances at exactly quiet or
//! calm, close to a change or across it. What fails is made simpler: fewer edges first, then shorter.
//!
//! With the feature `proptest` each is a strategy of that crate.

mod clock_plan;
mod course;
mod draw;
#[cfg(feature = "proptest")]
mod proptest;
pub(crate) mod shrink;
mod wave;
mod wave_plan;
mod waves;
mod word;
mod word_plan;
mod words;

#[cfg(feature = "proptest")]
pub use proptest::{WaveTree, WordTree};
pub use wave::{Wave, WaveSample};
pub(crate) use wave_plan::WavePlan;
pub use waves::{Waves, WavesError};
pub(crate) use word::row;
pub use word::{Word, WordTick};
pub(crate) use word_plan::WordPlan;
pub use words::Words;
