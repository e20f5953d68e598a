//! How recordings are to be read, where the files do not say it themselves, as options.

use clap::{Args, ValueEnum};

use crate::quantity::Time;
use crate::trace::{DecimalMark, Delimiter, ReadOptions, TimeUnit, Unknown};

/// How the recordings are to be read.
#[derive(Args, Clone, PartialEq, Eq, Debug, Default)]
pub struct ReadingOptions {
    /// The recorder's own sample period, where the file does not show it (a VCD never does)
    #[arg(long, value_name = "TIME", help_heading = "Recordings")]
    pub resolution: Option<Time>,
    /// Unit of the times, where the file does not say or says it wrong
    #[arg(long, value_enum, value_name = "UNIT", help_heading = "Recordings")]
    pub time_unit: Option<UnitOfTimes>,
    /// CSV: the column of times counts samples, one in so much time
    #[arg(long, value_name = "TIME", conflicts_with = "time_unit", help_heading = "Recordings")]
    pub sample_period: Option<Time>,
    /// CSV: the column of times, by name or number; found without it
    #[arg(long, value_name = "COLUMN", help_heading = "Recordings")]
    pub time_column: Option<String>,
    /// CSV: what stands between the fields of a row; found without it
    #[arg(long, value_enum, value_name = "WORD", help_heading = "Recordings")]
    pub delimiter: Option<FieldDelimiter>,
    /// CSV: what stands before the fraction of a number; found without it
    #[arg(long, value_enum, value_name = "WORD", help_heading = "Recordings")]
    pub decimal_mark: Option<FractionMark>,
    /// What to make of values that are neither 0 nor 1
    #[arg(long, value_enum, value_name = "WORD", default_value_t, help_heading = "Recordings")]
    pub unknown: UnknownValue,
}

impl ReadingOptions {
    /// The options of the reader, with everything else as it is by default.
    #[must_use]
    pub fn read_options(&self) -> ReadOptions {
        ReadOptions {
            resolution_ns: self.resolution.map(Time::ns),
            sample_period_ns: self.sample_period.map(Time::ns),
            time_unit: self.time_unit.map(Into::into),
            time_column: self.time_column.clone(),
            delimiter: self.delimiter.map(Into::into),
            decimal_mark: self.decimal_mark.map(Into::into),
            unknown: self.unknown.into(),
            ..ReadOptions::default()
        }
    }
}

/// An option of one word that stands for a value of the library.
macro_rules! option_words {
    ($(#[$doc:meta])* $name:ident for $target:ident { $($(#[$variant_doc:meta])* $variant:ident = $word:literal,)+ }) => {
        $(#[$doc])*
        #[derive(ValueEnum, Clone, Copy, PartialEq, Eq, Debug)]
        pub enum $name {
            $($(#[$variant_doc])* #[value(name = $word)] $variant,)+
        }

        impl From<$name> for $target {
            fn from(option: $name) -> Self {
                match option {
                    $($name::$variant => Self::$variant,)+
                }
            }
        }
    };
}

option_words! {
    /// A unit of time.
    UnitOfTimes for TimeUnit {
        /// Seconds
        Seconds = "s",
        /// Milliseconds
        Milliseconds = "ms",
        /// Microseconds
        Microseconds = "us",
        /// Nanoseconds
        Nanoseconds = "ns",
        /// Picoseconds
        Picoseconds = "ps",
        /// Femtoseconds
        Femtoseconds = "fs",
    }
}

option_words! {
    /// What stands between two fields.
    FieldDelimiter for Delimiter {
        /// A comma
        Comma = "comma",
        /// A semicolon
        Semicolon = "semicolon",
        /// A tabulator
        Tab = "tab",
        /// Any run of spaces or tabulators
        Space = "space",
    }
}

option_words! {
    /// What stands before a fraction.
    FractionMark for DecimalMark {
        /// 1.5
        Point = "point",
        /// 1,5
        Comma = "comma",
    }
}

option_words! {
    /// What to make of an unknown value.
    #[derive(Default)]
    UnknownValue for Unknown {
        /// The position before it is held
        #[default]
        Hold = "hold",
        /// It counts as open
        Open = "open",
        /// It counts as closed
        Closed = "closed",
        /// The recording is refused
        Refuse = "refuse",
    }
}
