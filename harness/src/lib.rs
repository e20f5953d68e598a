//! The workbench: records, characterises, chooses, proves and ships the conditioning of a contact.
#![forbid(unsafe_code)]

pub mod nearest;
pub mod quantity;
pub mod trace;
