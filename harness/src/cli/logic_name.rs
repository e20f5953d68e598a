//! A logic named on the command line: a built-in law with its parameters, or the file of a next-state table.

use std::fmt;
use std::fs;
use std::path::{Path, PathBuf};
use std::str::FromStr;

use clap::ValueEnum;

use super::{Failure, faults};
use crate::law_text::{LawParameters, LawTextError};
use crate::logic::Logic;
use crate::machine::{MachineTable, Reading, read_table};
use crate::problem::Problem;
use crate::prove::LawTable;

/// A built-in law, or a next-state table in KISS2 or CSV.
///
/// What ends in `.kiss2` or `.csv` is the path of a table, everything else a law.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum LogicName {
    /// A built-in law.
    Law(LawParameters),
    /// The path of a table.
    Table(PathBuf),
}

impl FromStr for LogicName {
    type Err = LawTextError;

    fn from_str(text: &str) -> Result<Self, LawTextError> {
        let ending = Path::new(text).extension().and_then(|ending| ending.to_str());
        match ending {
            Some("kiss2" | "csv") => Ok(Self::Table(PathBuf::from(text))),
            _ => text.parse().map(Self::Law),
        }
    }
}

impl fmt::Display for LogicName {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Law(law) => law.fmt(f),
            Self::Table(path) => path.display().fmt(f),
        }
    }
}

/// What an output of a table belongs to.
#[derive(ValueEnum, Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum OutputOf {
    /// The output of a row is that of its present state
    #[default]
    Moore,
    /// The output of a row is that of the transition, the state after it
    Mealy,
}

impl From<OutputOf> for Reading {
    fn from(reading: OutputOf) -> Self {
        match reading {
            OutputOf::Moore => Self::Moore,
            OutputOf::Mealy => Self::Mealy,
        }
    }
}

/// A logic with what it is called, explored.
pub(super) struct NamedLogic {
    pub(super) name: String,
    pub(super) table: LawTable,
    pub(super) machine: MachineTable,
}

impl NamedLogic {
    /// Reads a table, or tabulates a law.
    pub(super) fn read(name: &LogicName, reading: OutputOf) -> Result<Self, Failure> {
        match name {
            LogicName::Law(parameters) => Self::of_law(parameters),
            LogicName::Table(path) => {
                let machine = machine(path, reading)?;
                let table = LawTable::of(&machine).map_err(|error| Problem::told(error).in_file(path))?;
                Ok(Self { name: name.to_string(), table, machine })
            }
        }
    }

    pub(super) fn of_law(parameters: &LawParameters) -> Result<Self, Failure> {
        let table =
            law(parameters)?.table().map_err(|error| Problem::told(format!("{parameters}: {error}")))?;
        let machine = MachineTable::of_table(&table);
        Ok(Self { name: parameters.to_string(), table, machine })
    }
}

/// A logic that is only stepped, however many states it has.
pub(super) enum Runnable {
    Law(Logic),
    Table(MachineTable),
}

impl Runnable {
    /// Reads a table, or makes a law of its parameters.
    pub(super) fn read(name: &LogicName, reading: OutputOf) -> Result<Self, Failure> {
        match name {
            LogicName::Law(parameters) => Ok(Self::Law(law(parameters)?)),
            LogicName::Table(path) => Ok(Self::Table(machine(path, reading)?)),
        }
    }
}

fn law(parameters: &LawParameters) -> Result<Logic, Problem> {
    Logic::try_new(parameters).map_err(|error| Problem::told(format!("{parameters}: {error}")))
}

fn machine(path: &Path, reading: OutputOf) -> Result<MachineTable, Failure> {
    let bytes = fs::read(path).map_err(|error| faults::unreadable("table", path, &error))?;
    read_table(&path.display().to_string(), &bytes, reading.into())
        .map_err(|error| Failure::from_found(faults::table(&error)))
}
