//! The workbench: records, characterises, chooses, proves and ships the conditioning of a contact.
#![forbid(unsafe_code)]

pub mod emit;
pub mod machine;
pub mod prove;
pub mod report;
pub mod trace;
