//! What a person sees of a result.

pub mod json;
pub mod network;
pub mod si;
pub mod state_diagram;
pub mod timing;
pub mod witness;
pub mod words;
