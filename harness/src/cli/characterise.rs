//! `harness characterise`: what the recordings show of the contact.

use clap::Args;

use super::recordings::RequirementInput;

/// Bounce, disturbance and tolerance figures of recordings.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Counts the operations in the recordings and measures bounce at make and at break, \
                  disturbances and their spacing, and the shortest times open and closed; says what may be \
                  claimed from so many operations, and with what confidence.",
    after_help = CharacteriseArguments::EXAMPLES
)]
pub struct CharacteriseArguments {
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
}

impl CharacteriseArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  One recording with a single channel:
    harness characterise gate.vcd
  An oscilloscope export in volts:
    harness characterise gate.csv --threshold-low \"0.8 V\" --threshold-high \"2.0 V\"
  Several recordings, for a program:
    harness characterise day1.vcd day2.vcd --channel top.gate --confidence \"99 %\" --json";
}
