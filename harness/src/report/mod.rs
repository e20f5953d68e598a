//! What a person sees of a result.

pub mod json;
pub mod state_diagram;
pub mod timing;
pub mod words;
