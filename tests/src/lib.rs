//! What several tests share.

pub mod predicate;
pub mod toggle;
