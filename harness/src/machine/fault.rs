//! Why a written table was refused: everything that is wrong with it, each with its place.

use std::fmt;

/// One thing that is wrong with a table.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct TableFault {
    place: Option<Place>,
    message: String,
    help: Option<String>,
}

/// Line and column, both from 1; columns count characters.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
pub(super) struct Place {
    pub(super) line: usize,
    pub(super) column: usize,
}

impl TableFault {
    /// The line, from 1, where there is one.
    #[must_use]
    pub fn line(&self) -> Option<usize> {
        self.place.map(|place| place.line)
    }

    /// The column in characters, from 1, where there is one.
    #[must_use]
    pub fn column(&self) -> Option<usize> {
        self.place.map(|place| place.column)
    }

    /// What is wrong.
    #[must_use]
    pub fn message(&self) -> &str {
        &self.message
    }

    /// What to write instead, where that is not plain from the message.
    #[must_use]
    pub fn help(&self) -> Option<&str> {
        self.help.as_deref()
    }
}

/// Why a table could not be read. Prints one line per fault: `path:line:column: message; help`.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct TableFileError {
    path: String,
    faults: Vec<TableFault>,
}

impl TableFileError {
    /// Everything that was found wrong, in the order of the file; never empty.
    #[must_use]
    pub fn faults(&self) -> &[TableFault] {
        &self.faults
    }

    /// The name of the file, as it was given.
    #[must_use]
    pub fn path(&self) -> &str {
        &self.path
    }
}

impl fmt::Display for TableFileError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (index, fault) in self.faults.iter().enumerate() {
            if index > 0 {
                f.write_str("\n")?;
            }
            f.write_str(&self.path)?;
            if let Some(Place { line, column }) = fault.place {
                write!(f, ":{line}:{column}")?;
            }
            write!(f, ": {}", fault.message)?;
            if let Some(help) = &fault.help {
                write!(f, "; {help}")?;
            }
        }
        Ok(())
    }
}

impl std::error::Error for TableFileError {}

/// The faults found so far.
#[derive(Debug, Default)]
pub(super) struct Faults(Vec<TableFault>);

impl Faults {
    pub(super) fn at(&mut self, place: Place, message: impl Into<String>) {
        self.0.push(TableFault { place: Some(place), message: message.into(), help: None });
    }

    pub(super) fn at_with_help(&mut self, place: Place, message: impl Into<String>, help: impl Into<String>) {
        self.0.push(TableFault { place: Some(place), message: message.into(), help: Some(help.into()) });
    }

    pub(super) fn whole_file(&mut self, message: impl Into<String>, help: impl Into<String>) {
        self.0.push(TableFault { place: None, message: message.into(), help: Some(help.into()) });
    }

    pub(super) fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    pub(super) fn count(&self) -> usize {
        self.0.len()
    }

    /// What came of reading a file.
    pub(super) fn or<T>(mut self, path: &str, found: Option<T>) -> Result<T, TableFileError> {
        match found {
            Some(found) if self.0.is_empty() => Ok(found),
            _ => {
                self.0.sort_by_key(|fault| fault.place);
                Err(TableFileError { path: path.to_owned(), faults: self.0 })
            }
        }
    }
}
