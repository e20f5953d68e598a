//! `harness study`: the main job, from recordings and a requirement to a proven configuration.

use std::path::PathBuf;

use clap::Args;

use super::recordings::RequirementInput;

/// From recordings and a requirement to a proven, compilable configuration.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Characterises the recordings, chooses tick period, law and parameters for the requirement, \
                  proves the choice for every waveform inside the stated envelope, checks that the recordings \
                  lie inside it, and writes the results and a Rust configuration. Without any argument it does \
                  so for the built-in demo recording, which is invented.",
    after_help = StudyArguments::EXAMPLES
)]
pub struct StudyArguments {
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
    /// Folder for the results; made if it is not there
    #[arg(long, short, value_name = "FOLDER")]
    pub output: Option<PathBuf>,
}

impl StudyArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  The built-in demo:
    harness study
  A recording, with the one figure that matters:
    harness study gate.vcd --channel top.gate --latency \"20 ms\"
  Everything from a requirement file, results into a folder:
    harness study --requirement contact.toml --output results";
}
