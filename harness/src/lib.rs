//! The workbench: records, characterises, chooses, proves and ships the conditioning of a contact.
#![forbid(unsafe_code)]

pub mod nearest;
pub mod problem;
pub mod quantity;
pub mod requirement;
pub mod trace;
