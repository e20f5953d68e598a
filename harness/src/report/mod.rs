//! What a person sees of a result.

pub mod characterised;
pub mod json;
pub mod state_diagram;
pub mod timing;
pub mod witness;
pub mod words;
