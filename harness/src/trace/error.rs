//! Why a recording could not be read: every bad line with its place, and what to do about it.

use std::fmt;
use std::io;

use super::Thresholds;
use crate::problem::plain_reason;

/// So many bad lines are listed; reading stops at the next one.
pub const MAX_FAULTS: usize = 20;

/// One thing that is wrong, and where.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Fault {
    place: Option<Place>,
    message: String,
}

/// A place in a text, both from 1; the column counts bytes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Place {
    pub(super) line: u64,
    pub(super) column: u64,
}

impl Fault {
    /// The line, from 1, where there is one.
    #[must_use]
    pub fn line(&self) -> Option<u64> {
        self.place.map(|place| place.line)
    }

    /// The column in bytes, from 1, where there is one.
    #[must_use]
    pub fn column(&self) -> Option<u64> {
        self.place.map(|place| place.column)
    }

    /// What is wrong.
    #[must_use]
    pub fn message(&self) -> &str {
        &self.message
    }
}

/// Why a recording could not be read. Prints one line per fault: `path:line:column: message`.
#[derive(Debug)]
pub struct ReadError {
    source_name: String,
    faults: Vec<Fault>,
    more: Listed,
    help: Option<String>,
    lacks: Option<Lack>,
    cause: Option<io::Error>,
}

/// What a reader was not told and could not find out, so that a caller can say how to tell it.
#[derive(Clone, PartialEq, Debug)]
#[non_exhaustive]
pub enum Lack {
    /// Which channel is meant.
    Channel {
        /// A channel that there is: the one that was probably meant, else the first.
        such_as: Option<String>,
    },
    /// Where a voltage turns into a level.
    Thresholds {
        /// Thresholds that would turn this channel into levels.
        proposed: Option<Thresholds>,
    },
    /// The unit of the times.
    TimeUnit,
    /// Which column holds the times.
    TimeColumn,
    /// What stands between the fields of a row.
    Delimiter,
}

/// Whether the list of faults is the whole of it.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
enum Listed {
    #[default]
    All,
    FirstOnes,
}

impl ReadError {
    /// Everything that was found wrong, in the order of the file; never empty.
    #[must_use]
    pub fn faults(&self) -> &[Fault] {
        &self.faults
    }

    /// What to do about it, without the word "help".
    #[must_use]
    pub fn help(&self) -> Option<&str> {
        self.help.as_deref()
    }

    /// What the reader would have had to be told, where that was the trouble.
    #[must_use]
    pub fn lacks(&self) -> Option<&Lack> {
        self.lacks.as_ref()
    }

    /// Whether the file has more faults than are listed.
    #[must_use]
    pub fn has_more(&self) -> bool {
        self.more == Listed::FirstOnes
    }

    /// The name of the file, as it was given.
    #[must_use]
    pub fn source_name(&self) -> &str {
        &self.source_name
    }
}

impl fmt::Display for ReadError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (index, fault) in self.faults.iter().enumerate() {
            if index > 0 {
                f.write_str("\n")?;
            }
            f.write_str(&self.source_name)?;
            if let Some(Place { line, column }) = fault.place {
                write!(f, ":{line}:{column}")?;
            }
            write!(f, ": {}", fault.message)?;
        }
        if self.more == Listed::FirstOnes {
            write!(f, "\n{}: more bad lines follow; the first {MAX_FAULTS} are listed", self.source_name)?;
        }
        Ok(())
    }
}

impl std::error::Error for ReadError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        self.cause.as_ref().map(|cause| cause as _)
    }
}

/// The faults found so far.
#[derive(Debug, Default)]
pub(super) struct Faults {
    list: Vec<Fault>,
    more: Listed,
    help: Option<String>,
    lacks: Option<Lack>,
    cause: Option<io::Error>,
}

impl Faults {
    pub(super) fn at(&mut self, place: Place, message: impl Into<String>) {
        self.push(Some(place), message.into());
    }

    pub(super) fn whole_file(&mut self, message: impl Into<String>) {
        self.push(None, message.into());
    }

    /// The first piece of advice stays: it belongs to the first fault, which often causes the others.
    pub(super) fn help(&mut self, text: impl Into<String>) {
        self.help.get_or_insert_with(|| text.into());
    }

    /// The first lack stays, as the first piece of advice does.
    pub(super) fn lack(&mut self, lack: Lack) {
        self.lacks.get_or_insert(lack);
    }

    pub(super) fn io(&mut self, error: io::Error) {
        self.whole_file(format!("cannot be read: {}", plain_reason(&error)));
        self.cause = Some(error);
    }

    /// Nothing more will be listed: reading on is of no use.
    pub(super) fn is_full(&self) -> bool {
        self.more == Listed::FirstOnes
    }

    pub(super) fn is_empty(&self) -> bool {
        self.list.is_empty()
    }

    fn push(&mut self, place: Option<Place>, message: String) {
        if self.list.len() < MAX_FAULTS {
            self.list.push(Fault { place, message });
        } else {
            self.more = Listed::FirstOnes;
        }
    }

    pub(super) fn into_error(self, source_name: &str) -> ReadError {
        ReadError {
            source_name: source_name.to_owned(),
            faults: self.list,
            more: self.more,
            help: self.help,
            lacks: self.lacks,
            cause: self.cause,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn read_error_lists_each_fault_with_its_place() {
        let mut faults = Faults::default();
        faults.at(Place { line: 3, column: 7 }, "first");
        faults.whole_file("second");
        faults.help("do this");
        faults.help("not this");
        let error = faults.into_error("bench/door.csv");
        assert_eq!(error.to_string(), "bench/door.csv:3:7: first\nbench/door.csv: second");
        assert_eq!(error.help(), Some("do this"));
    }

    #[test]
    fn faults_beyond_the_maximum_are_said_to_exist() {
        for (found, full) in [(MAX_FAULTS, false), (MAX_FAULTS + 1, true)] {
            let mut faults = Faults::default();
            for line in 0..found as u64 {
                faults.at(Place { line: line + 1, column: 1 }, "bad");
            }
            assert_eq!(faults.is_full(), full);
            let error = faults.into_error("f");
            assert_eq!(error.faults().len(), MAX_FAULTS);
            assert_eq!(error.to_string().contains("more bad lines follow"), full);
        }
    }
}
