//! What several tests share.

pub mod firmware;
pub mod predicate;
pub mod toggle;
