//! What counts most among the candidates that hold, as an option.

use clap::{Args, ValueEnum};

use crate::choose::Preference;

/// What counts most.
#[derive(Args, Clone, Copy, PartialEq, Eq, Debug, Default)]
pub struct PreferenceOption {
    /// What counts most among the candidates that hold
    #[arg(long, value_enum, value_name = "MERIT", default_value_t)]
    pub prefer: Merit,
}

/// A merit of a candidate.
#[derive(ValueEnum, Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Merit {
    /// The slowest tick, then the shortest worst delay
    #[default]
    FewTicks,
    /// The shortest worst delay, then the slowest tick
    ShortDelay,
    /// The least RAM, then the slowest tick
    LittleMemory,
}

impl From<PreferenceOption> for Preference {
    fn from(option: PreferenceOption) -> Self {
        match option.prefer {
            Merit::FewTicks => Self::FewTicks,
            Merit::ShortDelay => Self::ShortDelay,
            Merit::LittleMemory => Self::LittleMemory,
        }
    }
}
