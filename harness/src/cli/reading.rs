//! How recordings are to be read, where the files do not say it themselves, as options.

use clap::{Args, ValueEnum};

use crate::problem::Problem;
use crate::quantity::Time;
use crate::requirement::Reading;
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
    /// What to make of values that are neither 0 nor 1; without it the position before is held
    #[arg(long, value_enum, value_name = "WORD", help_heading = "Recordings")]
    pub unknown: Option<UnknownValue>,
}

impl ReadingOptions {
    /// Whether the times among them are some.
    ///
    /// # Errors
    /// Where one of them is 0.
    pub fn check(&self) -> Result<(), Problem> {
        for (option, time) in [("--resolution", self.resolution), ("--sample-period", self.sample_period)] {
            if time == Some(Time::ZERO) {
                let problem = Problem::new(format!("{option} of 0 is no time"));
                return Err(problem.help(format!("give {option} \"1 us\", or leave it out")));
            }
        }
        Ok(())
    }

    /// These options over what the requirement file says of a recording.
    #[must_use]
    pub fn over(&self, file: &Reading) -> ReadOptions {
        let file = file.options();
        let own_unit = self.time_unit.map(Into::into);
        let own_period = self.sample_period.map(Time::ns);
        ReadOptions {
            resolution_ns: self.resolution.map(Time::ns).or(file.resolution_ns),
            // Times have a unit or are numbered: an option for one takes the file's word for the other away.
            sample_period_ns: own_period.or(file.sample_period_ns.filter(|_| own_unit.is_none())),
            time_unit: own_unit.or(file.time_unit.filter(|_| own_period.is_none())),
            time_column: self.time_column.clone().or(file.time_column),
            delimiter: self.delimiter.map(Into::into).or(file.delimiter),
            decimal_mark: self.decimal_mark.map(Into::into).or(file.decimal_mark),
            unknown: self.unknown.map_or(file.unknown, Into::into),
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
    UnknownValue for Unknown {
        /// The position before it is held
        Hold = "hold",
        /// It counts as open
        Open = "open",
        /// It counts as closed
        Closed = "closed",
        /// The recording is refused
        Refuse = "refuse",
    }
}

#[cfg(test)]
mod tests {
    use clap::ValueEnum;

    use super::*;
    use crate::requirement::Word;

    #[track_caller]
    fn same_words<O: ValueEnum + Into<T>, T: Word + std::fmt::Debug>() {
        let option =
            O::value_variants().iter().filter_map(|value| Some((value.to_possible_value()?, value.clone())));
        let options: Vec<(String, T)> =
            option.map(|(word, value)| (word.get_name().to_owned(), value.into())).collect();
        let file: Vec<(String, T)> = T::ALL.iter().map(|&value| (value.word().to_owned(), value)).collect();
        assert_eq!(options, file);
    }

    #[test]
    fn reading_words_are_the_same_as_option_and_in_the_file() {
        same_words::<UnitOfTimes, TimeUnit>();
        same_words::<FieldDelimiter, Delimiter>();
        same_words::<FractionMark, DecimalMark>();
        same_words::<UnknownValue, Unknown>();
    }

    #[test]
    fn reading_options_stand_over_the_file() {
        use crate::requirement::{Origin, Sourced};
        let file = Reading {
            resolution: Some(Sourced::new(Time::from_us(2), Origin::Measured)),
            sample_period: Some(Sourced::new(Time::from_us(10), Origin::Measured)),
            unknown: Some(Sourced::new(Unknown::Refuse, Origin::Measured)),
            ..Reading::default()
        };
        let alone = ReadingOptions::default().over(&file);
        assert_eq!((alone.resolution_ns, alone.sample_period_ns), (Some(2_000), Some(10_000)));
        assert_eq!(alone.unknown, Unknown::Refuse);
        let options = ReadingOptions {
            time_unit: Some(UnitOfTimes::Milliseconds),
            unknown: Some(UnknownValue::Hold),
            ..ReadingOptions::default()
        };
        let both = options.over(&file);
        assert_eq!((both.resolution_ns, both.sample_period_ns), (Some(2_000), None));
        assert_eq!((both.time_unit, both.unknown), (Some(TimeUnit::Milliseconds), Unknown::Hold));
    }
}
