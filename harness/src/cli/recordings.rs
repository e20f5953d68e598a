//! The recordings of a command, and the requirement beside them.

use std::path::PathBuf;

use clap::Args;

use crate::problem::Problem;
use crate::quantity::Time;
use crate::requirement::{Requirement, RequirementOptions};

use super::{Failure, ReadingOptions};

/// Recordings and requirement, the input of most commands.
#[derive(Args, Clone, PartialEq, Debug, Default)]
pub struct RequirementInput {
    /// Recordings of the contact, VCD or CSV; they take the place of those in the requirement file
    #[arg(value_name = "RECORDING")]
    pub recordings: Vec<PathBuf>,
    /// The rest that ends a burst of bounce; found from each recording without it
    #[arg(long, value_name = "TIME", help_heading = "Recordings")]
    pub gap: Option<Time>,
    /// How the recordings are read.
    #[command(flatten)]
    pub reading: ReadingOptions,
    /// The requirement.
    #[command(flatten)]
    pub requirement: RequirementOptions,
}

impl RequirementInput {
    /// Nothing was given at all.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }

    /// The requirement with the options over the file.
    ///
    /// # Errors
    /// Everything that is wrong with it.
    pub fn load(&self) -> Result<Requirement, Failure> {
        Ok(self.requirement.load(&self.recordings)?)
    }

    /// The same, for a command that cannot do without a recording.
    ///
    /// # Errors
    /// Everything that is wrong with it, or that there is no recording in it.
    pub fn load_with_recordings(&self) -> Result<Requirement, Failure> {
        let requirement = self.load()?;
        if requirement.recordings.is_empty() {
            let problem = match &self.requirement.requirement {
                Some(path) => Problem::new("no recording is given").in_file(path),
                None => Problem::new("no recording is given"),
            };
            let help = "name one after the command, such as \"gate.vcd\", or under [[recording]] in the requirement file";
            return Err(problem.help(help).into());
        }
        Ok(requirement)
    }
}
