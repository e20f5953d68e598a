//! What a person sees of a result.

pub mod json;
pub mod timing;
pub mod words;
