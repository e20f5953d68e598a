//! What a person sees of a result.

pub mod apart;
pub mod characterised;
pub mod claim_words;
pub mod clock_plot;
pub mod html;
pub mod json;
pub mod network;
pub mod nothing_words;
pub mod plot;
pub mod si;
pub mod state_diagram;
pub mod timing;
pub mod witness;
pub mod words;
