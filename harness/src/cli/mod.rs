//! The command line: what is typed, how a run ends, where output goes. One file for each command.
//!
//! Exit codes: 0 holds, 1 does not hold, 2 bad input, bad usage or an output that cannot be written. A reader
//! of standard output that goes away ends the run quietly, with the exit code that the answer has.

mod ascii;
mod assumed;
mod beyond_text;
mod characterise;
mod choose;
mod clock_text;
mod compare;
mod completions;
mod emit;
mod envelope_input;
mod envelope_text;
mod failure;
mod faults;
mod figures;
mod files;
mod generate;
mod generate_list;
mod input;
mod limit;
mod limit_answer;
mod lines;
mod logic_name;
mod machine_file;
mod manual;
mod network;
mod operations_table;
mod preference;
mod prove;
mod prove_answer;
mod reading;
mod recheck;
mod recorded;
mod recordings;
mod replay;
mod report;
mod run;
mod schema;
mod session;
mod shell;
mod study;
mod study_answer;

#[cfg(test)]
mod tests;

pub use characterise::CharacteriseArguments;
pub use choose::ChooseArguments;
pub use compare::CompareArguments;
pub use completions::CompletionsArguments;
pub use emit::EmitArguments;
pub use envelope_input::EnvelopeInput;
pub use envelope_text::{EnvelopeText, EnvelopeTextError};
pub use failure::{Failure, Outcome};
pub use files::{OutputFolder, StagedFiles};
pub use generate::GenerateArguments;
pub use limit::LimitArguments;
pub use logic_name::{LogicName, OutputOf};
pub use manual::ManualArguments;
pub use network::NetworkArguments;
pub use preference::{Merit, PreferenceOption};
pub use prove::{Promise, ProveArguments};
pub use reading::{FieldDelimiter, FractionMark, ReadingOptions, UnitOfTimes, UnknownValue};
pub use recheck::RecheckArguments;
pub use recordings::RequirementInput;
pub use replay::ReplayArguments;
pub use report::ReportOption;
pub use run::run;
pub use schema::SchemaArguments;
pub use session::{Answer, GlobalOptions, SCHEMA, Session};
pub use study::StudyArguments;
