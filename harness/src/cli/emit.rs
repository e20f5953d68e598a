//! `harness emit`: the Rust configuration for the firmware.

use std::path::PathBuf;

use clap::Args;

use super::recordings::RequirementInput;
use crate::law_text::LawParameters;

/// Writes the Rust configuration for the firmware.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Writes a Rust module with documented constants, a ready-made type and assertions that fail to \
                  compile when someone edits the parameters out of the requirement. Without --law the best \
                  candidate for the requirement is taken; with it, that law is proved first, and nothing is \
                  written unless the requirement holds.",
    after_help = EmitArguments::EXAMPLES
)]
pub struct EmitArguments {
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
    /// The law with its parameters in ticks, in place of the best candidate; needs one tick period
    #[arg(long, value_name = "LAW")]
    pub law: Option<LawParameters>,
    /// The file to write; standard output without it
    #[arg(long, short, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

impl EmitArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  The best candidate for a requirement file:
    harness emit --requirement contact.toml --output src/gate.rs
  A law of your own choice:
    harness emit --requirement contact.toml --law \"integrator 5\" --tick \"1 ms\" --output src/gate.rs
  From figures alone, to standard output:
    harness emit --name \"sluice gate\" --bounce \"5 ms\" --latency \"20 ms\"";
}
