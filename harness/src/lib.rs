//! The workbench: records, characterises, chooses, proves and ships the conditioning of a contact.
//!
//! The [guide] leads from a contact on the bench to firmware with a proven input. For one's own tests there is [`check`].
#![forbid(unsafe_code)]

pub mod characterise;
pub mod check;
pub mod choose;
pub mod cli;
pub mod clock_range;
pub mod conformance;
pub mod cost;
pub mod demo;
mod digest;
pub mod emit;
pub mod envelope;
pub mod generate;
pub mod guide;
pub mod law_text;
mod level;
pub mod logic;
pub mod machine;
pub mod nearest;
pub mod network;
pub mod problem;
pub mod prove;
pub mod quantity;
mod raw_input;
pub mod recheck;
pub mod replay;
pub mod report;
pub mod requirement;
pub mod sample;
pub mod schema;
pub mod strategy;
pub mod study;
pub mod trace;
pub mod truth;
