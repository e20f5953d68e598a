//! `harness choose`: ranks the candidates for a requirement.

use clap::Args;

use super::recordings::RequirementInput;

/// Ranks laws, parameters and tick periods for a requirement.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Tries every built-in law over its parameters at each tick period. Of each candidate it gives \
                  the proven bounds, whether the requirement holds and otherwise which clause fails and by how \
                  much, the latency measured on the recordings, the cost, and how far it is from the best that \
                  any logic could do. Recordings may be left out.",
    after_help = ChooseArguments::EXAMPLES
)]
pub struct ChooseArguments {
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
    /// So many candidates are listed
    #[arg(long, value_name = "COUNT", default_value_t = 12)]
    pub list: usize,
}

impl ChooseArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  From figures alone, without a recording:
    harness choose --bounce \"5 ms\" --disturbance \"300 us\" --quiet-time \"5 ms\" --latency \"20 ms\"
  From a requirement file, with a slower clock than it says:
    harness choose --requirement contact.toml --tick \"5 ms,10 ms\"
  For a recording, on firmware that can serve 1000 ticks a second at most:
    harness choose gate.vcd --fastest-tick \"1 kHz\" --ram \"4 bytes\"";
}
