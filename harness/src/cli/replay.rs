//! `harness replay`: one law over recordings.

use clap::Args;

use super::recordings::RequirementInput;
use crate::law_text::LawParameters;

/// Runs one law over recordings and shows what it reports.
#[derive(Args, Clone, PartialEq, Debug)]
#[command(
    long_about = "Samples the recordings at every phase that matters and steps the law over them. Shows the \
                  latency at make and break (distribution and exact worst case), false edges and missed \
                  operations, each with its time in the recording.",
    after_help = ReplayArguments::EXAMPLES
)]
pub struct ReplayArguments {
    /// The law with its parameters in ticks; two numbers around a stroke are for make and break
    #[arg(value_name = "LAW")]
    pub law: LawParameters,
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
}

impl ReplayArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  One law over one recording:
    harness replay \"integrator 5\" gate.vcd --tick \"1 ms\"
  A slow clock, exactly 30 samples a second:
    harness replay \"shift-register 1\" gate.vcd --tick \"30 Hz\"
  The recordings of a requirement file, for a program:
    harness replay \"state-machine confirm=3/2 lockout=4/0\" --requirement contact.toml --tick \"1 ms\" --json";
}
