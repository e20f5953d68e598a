//! What several tests share.

pub mod firmware;
pub mod predicate;
pub mod toggle;

/// The examples of the README, compiled and run.
#[cfg(doctest)]
#[doc = include_str!("../../README.md")]
pub struct Readme;
