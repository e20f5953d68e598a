//! The workbench: records, characterises, chooses, proves and ships the conditioning of a contact.
#![forbid(unsafe_code)]

pub mod characterise;
pub mod conformance;
pub mod demo;
pub mod envelope;
pub mod generate;
pub mod trace;
