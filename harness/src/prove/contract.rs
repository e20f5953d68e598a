//! What a logic promises: that its output follows the contact, or that it turns over once per make.

use debounce_core::Position;

/// A promise to prove or refute.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
pub enum Contract {
    /// The output follows the contact: every make and every break is reported once and in order.
    #[default]
    Follow,
    /// The output turns over once per make and stays at a break: the lamp of a push-on, push-off switch.
    ///
    /// A make is *pending* until the output turns over, and a turn with no make pending is a false edge. The
    /// `make` latency is that of the makes that turn the output to closed, and the `break_` latency that of the
    /// makes that turn it back to open.
    ///
    /// The starts are the two rests of the logic: contact and output both open (the reset state of such a machine),
    /// and both closed, where holding the contact after the first make leads. Of the four settled states of a
    /// push-on, push-off machine the other two (released with the output closed, held with the output open) are
    /// reached from these.
    Alternate,
}

impl Contract {
    /// The output wanted once the contact has come to `contact`.
    pub(super) fn wanted_after(self, contact: Position, wanted: Position) -> Position {
        match (self, contact) {
            (Self::Follow, _) => contact,
            (Self::Alternate, Position::Closed) => wanted.opposite(),
            (Self::Alternate, Position::Open) => wanted,
        }
    }
}
