//! Rust for the firmware.

pub mod table;
