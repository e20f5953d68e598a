//! The workbench: records, characterises, chooses, proves and ships the conditioning of a contact.
#![forbid(unsafe_code)]

pub mod replay;
pub mod sample;
pub mod trace;
pub mod truth;
