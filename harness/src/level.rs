//! The two levels of a line, before polarity is turned.

/// A level of the line.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Level {
    /// Logic 0.
    Low,
    /// Logic 1.
    High,
}
