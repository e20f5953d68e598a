//! `harness characterise`: what the recordings show of the contact.

use std::io::{self, Write};

use clap::Args;
use debounce_core::{Change, Position};
use serde_json::{Value, json};

use super::input::Input;
use super::lines::Lines;
use super::recorded::{claims, recorded};
use super::recordings::RequirementInput;
use super::{Answer, Failure, Outcome, Session};
use crate::characterise::GapOrigin;
use crate::report::{json as report, words};
use crate::requirement::Resolved;
use crate::study::{Claim, Observed, measured};

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
    harness characterise gate.csv --threshold-low \"0.8 V\" \\
      --threshold-high \"2.0 V\"
  Several recordings, for a program:
    harness characterise day1.vcd day2.vcd --channel top.gate \\
      --confidence \"99 %\" --json";
}

impl CharacteriseArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        let input = Input::with_recordings(&self.input, session)?;
        let resolved = input.requirement.fill_in(&measured(&input.observed))?;
        Ok(Box::new(Characterised { observed: input.observed, resolved }))
    }
}

/// What recordings show.
struct Characterised {
    observed: Vec<Observed>,
    resolved: Resolved,
}

impl Answer for Characterised {
    fn outcome(&self) -> Outcome {
        Outcome::Holds
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        for one in &self.observed {
            figures(&mut lines, one)?;
        }
        claims(&mut lines, &self.observed, &self.resolved)
    }

    fn to_json(&self) -> Value {
        let claim = |change| {
            let resolved = &self.resolved;
            let claim = Claim::of(&self.observed, change, resolved.confidence.value, resolved.coverage.value);
            claim.ok().flatten().map(|claim| {
                json!({
                    "operations": claim.operations,
                    "longest_bounce_ns": claim.longest_ns,
                    "covered": claim.covered,
                    "operations_needed": claim.needed,
                })
            })
        };
        json!({
            "recordings": self.observed.iter().map(report::observed).collect::<Value>(),
            "claims": {
                "confidence": self.resolved.confidence.value.fraction(),
                "make": claim(Change::Make),
                "break": claim(Change::Break),
            },
        })
    }
}

/// Everything that one recording shows.
fn figures(lines: &mut Lines<'_>, one: &Observed) -> io::Result<()> {
    recorded(lines, one)?;
    let gap = &one.segmentation.gap;
    let origin = match gap.origin {
        GapOrigin::Given => "as stated".to_owned(),
        GapOrigin::Found { longest_inside_ns, shortest_between_ns } => format!(
            "found: the longest rest inside a burst is {}, the shortest between two {}",
            words::about(longest_inside_ns),
            words::about(shortest_between_ns)
        ),
        GapOrigin::Unclear { longest_inside_ns, shortest_between_ns } => format!(
            "unclear: rests of {} and of {} are hardly apart; state it with --gap",
            words::about(longest_inside_ns),
            words::about(shortest_between_ns)
        ),
        _ => "no run is short enough to be bounce".to_owned(),
    };
    lines.item("Gap", &format!("a burst ends after {} of rest, {origin}", words::about(gap.ns)))?;
    for position in Position::BOTH {
        let (disturbed, dwell) = (one.figures.disturbances.of(position), one.figures.dwell.of(position));
        let widths = disturbed.width_ns.map_or(String::new(), |width| {
            format!(", median {}, widest {}", words::about(width.median), words::about(width.max))
        });
        lines.item(
            if position.is_closed() { "While closed" } else { "While open" },
            &format!("{}{widths}", words::count(disturbed.count, "disturbance")),
        )?;
        if disturbed.widest_in_doubt_ns > 0 {
            lines.more(&format!(
                "and perhaps parts of bounces, up to {}",
                words::about(disturbed.widest_in_doubt_ns)
            ))?;
        }
        if let Some(shortest) = dwell.shortest_ns {
            let doubt = dwell.shortest_in_doubt_ns.map_or(String::new(), |ns| {
                format!("; a run of {} may have been an operation", words::about(ns))
            });
            lines.more(&format!("shortest {}{doubt}", words::about(shortest)))?;
        }
    }
    if let Some(quiet) = one.figures.quiet_ns {
        lines.item("Quiet", &format!("at least {} beside every disturbance", words::at_least(quiet)))?;
    }
    lines.item(
        "Recorder",
        &format!(
            "its sample period of {} is added to every figure that is claimed",
            words::about(one.figures.resolution_ns)
        ),
    )
}
