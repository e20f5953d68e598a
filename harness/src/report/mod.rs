//! What a person looks at.

pub mod state_diagram;
