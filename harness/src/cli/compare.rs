//! `harness compare`: whether two logics do the same, and otherwise the fewest samples that show it.

use std::io::{self, Write};
use std::path::PathBuf;

use clap::Args;
use debounce_core::{Change, Period};
use serde_json::{Value, json};

use super::input::source_file;
use super::lines::{Lines, strong};
use super::logic_name::{LogicName, NamedLogic, OutputOf};
use super::report::{ReportOption, written};
use super::{Answer, Failure, Outcome, OutputFolder, Session};
use crate::machine::{Apart, compare};
use crate::problem::Problem;
use crate::report::apart::{ApartDiagram, write_apart};
use crate::report::{html, words};

/// Tells whether two logics report the same, whatever the samples.
#[derive(Args, Clone, PartialEq, Debug)]
#[command(
    long_about = "Follows two logics side by side from rest, through every pair of states that they can be in \
                  together. Either both report the same at every sample, whatever the samples, or here is a \
                  shortest sequence of samples at whose end they differ.",
    after_help = CompareArguments::EXAMPLES
)]
pub struct CompareArguments {
    /// A law with its parameters in ticks, or the file of a next-state table (.kiss2 or .csv)
    #[arg(value_name = "LAW")]
    pub one: LogicName,
    /// Another
    #[arg(value_name = "LAW")]
    pub other: LogicName,
    /// Whether an output of a table belongs to a state or to a transition
    #[arg(long, value_enum, default_value_t)]
    pub reading: OutputOf,
    /// Where the samples that tell them apart are written, as VCD, one tick a millisecond
    #[arg(long, value_name = "FILE")]
    pub witness: Option<PathBuf>,
    /// The report.
    #[command(flatten)]
    pub report: ReportOption,
}

impl CompareArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  Two built-in laws that are one and the same:
    harness compare \"shift-register 4\" \"state-machine confirm=4\"
  What a counter does that a window does not:
    harness compare \"integrator 3\" \"shift-register 3\" --witness apart.vcd
  A table as drawn against the law it was drawn from:
    harness compare own.kiss2 \"state-machine confirm=3/2 lockout=4/0\"";
}

impl CompareArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        let logics = [&self.one, &self.other];
        let [one, other] = logics.map(|name| NamedLogic::read(name, self.reading));
        let (one, other) = match (one, other) {
            (Ok(one), Ok(other)) => (one, other),
            (Err(first), Err(second)) => return Err(first.and(second)),
            (Err(failure), _) | (_, Err(failure)) => return Err(failure),
        };
        let report = self.report.prepare()?;
        let files = if report.is_some() {
            logics.iter().filter_map(|name| table_file(name)).collect::<Result<_, _>>()?
        } else {
            Vec::new()
        };
        let file = self.witness.as_deref().map(OutputFolder::of_file).transpose()?;
        let apart = session.during("comparing", || compare(&one.machine, &other.machine));
        let mut written = Vec::new();
        if let (Some((folder, name)), Some(apart)) = (file, &apart) {
            let again = format!("harness compare \"{}\" \"{}\"", self.one, self.other);
            let mut files = folder.stage();
            files.add(&name, |out| {
                write_apart(out, apart, [&one.machine, &other.machine], Period::from_ms(1), &again)
            })?;
            written.extend(files.commit()?);
        }
        if let Some(report) = report {
            let found = html::Compared {
                names: [&one.name, &other.name],
                machines: [&one.machine, &other.machine],
                apart: apart.as_ref(),
            };
            written.push(report.write(session, files, |origin| html::compared(&found, origin))?);
        }
        Ok(Box::new(Compared { logics: [one, other], apart, written }))
    }
}

/// The file of a next-state table, where the name is one.
fn table_file(name: &LogicName) -> Option<Result<html::SourceFile, Problem>> {
    match name {
        LogicName::Table(path) => Some(source_file(path, "next-state table")),
        LogicName::Law(_) => None,
    }
}

struct Compared {
    logics: [NamedLogic; 2],
    apart: Option<Apart>,
    written: Vec<PathBuf>,
}

impl Answer for Compared {
    fn outcome(&self) -> Outcome {
        if self.apart.is_none() { Outcome::Holds } else { Outcome::DoesNotHold }
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        let [one, other] = &self.logics;
        for (label, logic) in [("One", one), ("Other", other)] {
            let states = words::count(logic.machine.len(), "state");
            let least = words::count(logic.machine.minimised().machine.len(), "state");
            lines.item(label, &format!("{}: {states}, {least} when minimised", logic.name))?;
        }
        let Some(apart) = &self.apart else {
            lines
                .item("Equivalent", &strong("both report the same at every sample, whatever the samples"))?;
            return written(&mut lines, &self.written);
        };
        lines.item(
            "Different",
            &strong(&format!(
                "after {} from rest {}, and never after fewer",
                words::count(apart.samples.len(), "sample"),
                words::position(apart.start)
            )),
        )?;
        let [first, second] = apart.edges.map(reports);
        lines.more(&format!("then {} reports {first}, and {} reports {second}", one.name, other.name))?;
        lines.plain(&format!("\n{}", ApartDiagram { apart, machines: [&one.machine, &other.machine] }))?;
        written(&mut lines, &self.written)
    }

    fn to_json(&self) -> Value {
        let digits = |apart: &Apart| -> String {
            apart.samples.iter().map(|sample| if sample.is_closed() { '1' } else { '0' }).collect()
        };
        let logic = |logic: &NamedLogic| {
            json!({
                "name": logic.name,
                "states": logic.machine.len(),
                "states_minimised": logic.machine.minimised().machine.len(),
            })
        };
        json!({
            "equivalent": self.apart.is_none(),
            "logics": self.logics.iter().map(logic).collect::<Value>(),
            "apart": self.apart.as_ref().map(|apart| json!({
                "start": words::position(apart.start),
                "samples": digits(apart),
                "edges": apart.edges.map(|edge| edge.map(words::change)),
            })),
            "written": self.written.iter().map(|path| path.display().to_string()).collect::<Value>(),
        })
    }
}

fn reports(edge: Option<Change>) -> String {
    edge.map_or("nothing".to_owned(), |edge| format!("a {}", words::change(edge)))
}
