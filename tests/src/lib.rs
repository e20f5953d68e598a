//! What several tests share: the envelope written a second time, as a predicate on words.

pub mod predicate;
