//! `harness prove`: proves or refutes one law in an envelope.

use std::path::PathBuf;

use clap::Args;

use super::envelope_text::EnvelopeText;
use super::recordings::RequirementInput;
use crate::law_text::LawParameters;

/// Proves or refutes one law in an envelope.
#[derive(Args, Clone, PartialEq, Debug)]
#[command(
    long_about = "Explores every waveform of the envelope against the law. The answer is exact: either the law \
                  reports every operation once, with these latencies, or here is a shortest waveform that breaks \
                  it. The envelope is given in ticks, or follows from a requirement and one tick period.",
    after_help = ProveArguments::EXAMPLES
)]
pub struct ProveArguments {
    /// The law with its parameters in ticks; two numbers around a stroke are for make and break
    #[arg(value_name = "LAW")]
    pub law: LawParameters,
    /// The envelope in ticks, in place of a requirement
    #[arg(long, value_name = "ENVELOPE", conflicts_with = "requirement")]
    pub envelope: Option<EnvelopeText>,
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
    /// Where a counter-example is written, as VCD
    #[arg(long, value_name = "FILE")]
    pub witness: Option<PathBuf>,
}

impl ProveArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  In ticks:
    harness prove \"integrator 5\" --envelope \"dwell=20 bounce=5/3 glitch=1/1 quiet=10\"
  In time, at one tick period:
    harness prove \"state-machine confirm=3/2 lockout=4/0\" --requirement contact.toml --tick \"1 ms\"
  With the counter-example as a file:
    harness prove \"shift-register 8\" --requirement contact.toml --tick \"1 kHz\" --witness broken.vcd";
}
