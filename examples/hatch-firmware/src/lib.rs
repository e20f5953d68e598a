//! The hatch of an invented seed dryer: one press opens it, the next closes it.
//!
//! `contact.toml` beside this package says what the button does and what is asked of it, `src/hatch_button.rs` is
//! generated from it, and `harness recheck contact.toml` in continuous integration makes sure that neither changes
//! without the other.
#![no_std]

pub mod hatch_button;

use debounce_core::{Change, Position, Started};
use hatch_button::StartingDebouncer;

/// The hatch and its button.
pub struct Hatch {
    button: StartingDebouncer,
    is_open: bool,
}

impl Hatch {
    /// A hatch that is shut; the button may be held when the program starts.
    #[must_use]
    pub fn new() -> Self {
        Self {
            button: hatch_button::starting(),
            is_open: false,
        }
    }

    /// To be called from the timer interrupt, with the level of the line; true while the hatch should be open.
    pub fn tick(&mut self, line_is_high: bool) -> bool {
        let sample = Position::closed_if(line_is_high);
        if self.button.tick(sample) == Some(Started::Edge(Change::Make)) {
            self.is_open = !self.is_open;
        }
        self.is_open
    }
}

impl Default for Hatch {
    fn default() -> Self {
        Self::new()
    }
}
