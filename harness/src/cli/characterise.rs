//! `harness characterise`: what the recordings show of the contact.

use std::io::{self, Write};
use std::path::PathBuf;

use clap::Args;
use debounce_core::Change;
use serde_json::{Value, json};

use super::choose::network;
use super::figures;
use super::input::Input;
use super::lines::Lines;
use super::operations_table::operations;
use super::recorded::{claims, recorded};
use super::recordings::RequirementInput;
use super::report::{ReportOption, written};
use super::{Answer, Failure, Outcome, Session};
use crate::characterise::GapOrigin;
use crate::problem::Problem;
use crate::report::{characterised, html, json as report, words};
use crate::requirement::{InFront, Origin, Requirement, Resolved};
use crate::study::{Caution, Claims, Observed, measured};

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
    /// List every operation
    #[arg(long)]
    pub operations: bool,
    /// Draw how the bounces of each kind are distributed
    #[arg(long)]
    pub histogram: bool,
    /// The report.
    #[command(flatten)]
    pub report: ReportOption,
}

impl CharacteriseArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  One recording with a single channel, every operation listed:
    harness characterise gate.vcd --operations
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
        let report = self.report.prepare()?;
        let resolved = input.requirement.fill_in(&measured(&input.observed))?;
        let resolved = in_front(&input.requirement, resolved, session)?;
        let claims = Claims::of(&input.observed, &resolved).map_err(Problem::told)?;
        let cautions = Caution::all(&input.observed, &resolved, &claims);
        for caution in &cautions {
            session.warn(&caution.to_string());
        }
        let is_asked = [resolved.confidence.origin, resolved.coverage.origin]
            .iter()
            .any(|origin| !matches!(origin, Origin::Default(_)));
        let outcome = if is_asked && !claims.are_reached() { Outcome::DoesNotHold } else { Outcome::Holds };
        let mut written = Vec::new();
        if let Some(report) = report {
            let files = input.files()?;
            let (observed, resolved) = (&input.observed, &resolved);
            let found = html::Characterised { observed, resolved, claims: &claims, warnings: &cautions };
            written.push(report.write(session, files, |origin| html::characterised(&found, origin))?);
        }
        let (observed, listed, histogram) = (input.observed, self.operations, self.histogram);
        let network = resolved.network;
        Ok(Box::new(Characterised {
            observed,
            network,
            claims,
            cautions,
            outcome,
            listed,
            histogram,
            written,
        }))
    }
}

/// The same with what the network makes of the contact. That it leaves nothing of the operations is no reason not to
/// look at a recording; that its parts are impossible is.
fn in_front(requirement: &Requirement, resolved: Resolved, session: &Session) -> Result<Resolved, Failure> {
    requirement.resolved_network()?;
    let network = InFront::of(requirement, resolved.at_contact()).unwrap_or_else(|problems| {
        for problem in problems.iter() {
            session.warn(&format!("nothing is promised at the pin: {}", problem.message()));
        }
        None
    });
    Ok(Resolved { network, ..resolved })
}

/// What recordings show.
struct Characterised {
    observed: Vec<Observed>,
    network: Option<InFront>,
    claims: Claims,
    cautions: Vec<Caution>,
    outcome: Outcome,
    listed: bool,
    histogram: bool,
    written: Vec<PathBuf>,
}

impl Answer for Characterised {
    fn outcome(&self) -> Outcome {
        self.outcome
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        let several = self.observed.len() > 1;
        for one in &self.observed {
            recorded(&mut lines, one)?;
            gap(&mut lines, one)?;
            if several {
                figures::between(&mut lines, &one.figures, one.recording.period)?;
            }
        }
        if several {
            let all = words::count(self.observed.len(), "recording");
            lines
                .item("Pooled", &format!("{all}, {} in all", words::about(self.claims.pooled.recorded_ns)))?;
        }
        figures::between(&mut lines, &self.claims.pooled, figures::period_of(&self.observed))?;
        for change in [Change::Make, Change::Break] {
            figures::of_kind(&mut lines, &self.claims.pooled, change, self.histogram)?;
        }
        claims(&mut lines, &self.claims)?;
        figures::limits(&mut lines, &self.claims)?;
        network(&mut lines, self.network.as_ref())?;
        figures::extremes(&mut lines, &self.claims)?;
        lines.item("Quantiles", characterised::QUANTILES)?;
        for one in self.observed.iter().filter(|_| self.listed) {
            operations(&mut lines, one)?;
        }
        written(&mut lines, &self.written)
    }

    fn to_json(&self) -> Value {
        let recording = |one: &Observed| {
            let mut value = report::observed(one);
            if self.listed {
                value["operations"] = characterised::operations(one);
            }
            value
        };
        json!({
            "recordings": self.observed.iter().map(recording).collect::<Value>(),
            "pooled": characterised::figures(&self.claims.pooled),
            "claims": characterised::claims(&self.claims),
            "written": self.written.iter().map(|path| path.display().to_string()).collect::<Value>(),
            "warnings": self.cautions.iter().map(ToString::to_string).collect::<Vec<_>>(),
        })
    }
}

/// The gap that ends a burst, and where it comes from.
fn gap(lines: &mut Lines<'_>, one: &Observed) -> io::Result<()> {
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
    let fragments = one.segmentation.fragments.len();
    if fragments > 0 {
        let cut = words::count(fragments, "burst");
        let counts = if fragments == 1 { "counts" } else { "count" };
        lines.more(&format!("{cut} cut off by an end of the recording, which {counts} as nothing"))?;
    }
    Ok(())
}
