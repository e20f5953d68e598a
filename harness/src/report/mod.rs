//! What a person sees of a result.

pub mod timing;
