//! What a person sees of a result.

pub mod html;
pub mod json;
pub mod plot;
pub mod state_diagram;
pub mod timing;
pub mod witness;
pub mod words;
