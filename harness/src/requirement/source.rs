//! Where a value came from.

use std::fmt;
use std::ops::Range;

/// Where a value came from.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Origin {
    /// It stands in the requirement file.
    Given {
        /// Its line, from 1.
        line: usize,
        /// First byte of the value.
        from: usize,
        /// First byte after it.
        until: usize,
    },
    /// It was given as this option, such as `--latency`.
    Option(&'static str),
    /// It was taken from the recordings.
    Measured,
    /// It was worked out from the network in front of the pin.
    Network,
    /// Nobody gave it; the text says where the default comes from.
    Default(&'static str),
}

impl Origin {
    /// The bytes of the value in the requirement file.
    #[must_use]
    pub fn span(&self) -> Option<Range<usize>> {
        match *self {
            Self::Given { from, until, .. } => Some(from..until),
            _ => None,
        }
    }

    /// One word for tables and for JSON: `given`, `option`, `measured`, `network` or `default`.
    #[must_use]
    pub fn word(&self) -> &'static str {
        match self {
            Self::Given { .. } => "given",
            Self::Option(_) => "option",
            Self::Measured => "measured",
            Self::Network => "network",
            Self::Default(_) => "default",
        }
    }
}

impl fmt::Display for Origin {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Given { line, .. } => write!(f, "line {line} of the requirement"),
            Self::Option(name) => write!(f, "option {name}"),
            Self::Measured => f.write_str("measured on the recordings"),
            Self::Network => f.write_str("worked out from [network], over all its tolerances"),
            Self::Default(reason) => write!(f, "default: {reason}"),
        }
    }
}

/// A value and where it came from.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Sourced<T> {
    /// The value.
    pub value: T,
    /// Where it came from.
    pub origin: Origin,
}

impl<T> Sourced<T> {
    /// A value from `origin`.
    #[must_use]
    pub const fn new(value: T, origin: Origin) -> Self {
        Self { value, origin }
    }

    /// Another value from the same place.
    #[must_use]
    pub fn map<U>(self, f: impl FnOnce(T) -> U) -> Sourced<U> {
        Sourced { value: f(self.value), origin: self.origin }
    }
}
