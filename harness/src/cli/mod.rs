//! The command line: what is typed, how a run ends, where output goes. One file for each command.
//!
//! Exit codes: 0 holds, 1 does not hold, 2 bad input, bad usage or an output that cannot be written. A reader
//! of standard output that goes away ends the run quietly, with the exit code that the answer has.

mod ascii;
mod characterise;
mod choose;
mod completions;
mod emit;
mod envelope_text;
mod failure;
mod faults;
mod files;
mod input;
mod lines;
mod manual;
mod preference;
mod prove;
mod reading;
mod recheck;
mod recorded;
mod recordings;
mod replay;
mod run;
mod schema;
mod session;
mod study;
mod study_answer;

#[cfg(test)]
mod tests;

pub use characterise::CharacteriseArguments;
pub use choose::ChooseArguments;
pub use completions::CompletionsArguments;
pub use emit::EmitArguments;
pub use envelope_text::{EnvelopeText, EnvelopeTextError};
pub use failure::{Failure, Outcome};
pub use files::{OutputFolder, StagedFiles};
pub use manual::ManualArguments;
pub use preference::{Merit, PreferenceOption};
pub use prove::{OutputOf, Promise, ProveArguments};
pub use reading::{FieldDelimiter, FractionMark, ReadingOptions, UnitOfTimes, UnknownValue};
pub use recheck::RecheckArguments;
pub use recordings::RequirementInput;
pub use replay::ReplayArguments;
pub use run::run;
pub use schema::SchemaArguments;
pub use session::{Answer, GlobalOptions, SCHEMA, Session};
pub use study::StudyArguments;
