//! `harness prove`: proves or refutes one law in an envelope.

use std::path::PathBuf;

use clap::{Args, ValueEnum};
use debounce_core::{Envelope, Period};

use super::envelope_input::{EnvelopeGiven, EnvelopeInput};
use super::envelope_text::EnvelopeText;
use super::input::source_file;
use super::logic_name::{LogicName, NamedLogic, OutputOf};
use super::machine_file::MachineFile;
use super::prove_answer::Proved;
use super::report::ReportOption;
use super::shell::shell_word;
use super::{Answer, Failure, OutputFolder, Session};
use crate::choose::known_limit;
use crate::problem::Problem;
use crate::prove::{Beyond, Contract, Effort, Limits, closed_form_limit, prove_contract};
use crate::quantity::TickPeriod;
use crate::report::html;
use crate::report::witness::write_witness;

/// Proves or refutes one law in an envelope.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Explores every waveform of the envelope against the law. The answer is exact: either the law \
                  reports every operation once, with these latencies, or here is a shortest waveform that breaks \
                  it. The envelope is given in ticks, or follows from a requirement and one tick period.",
    after_help = ProveArguments::EXAMPLES
)]
pub struct ProveArguments {
    /// The law with its parameters in ticks; two numbers around a stroke are for make and break
    #[arg(value_name = "LAW", conflicts_with = "table")]
    pub law: Option<LogicName>,
    /// A next-state table in place of a built-in law: KISS2, or CSV with the columns state, sample, next, output
    #[arg(long, value_name = "FILE")]
    pub table: Option<PathBuf>,
    /// Whether an output of the table belongs to a state or to a transition
    #[arg(long, value_enum, default_value_t)]
    pub reading: OutputOf,
    /// What the logic promises
    #[arg(long, value_enum, default_value_t)]
    pub contract: Promise,
    /// The envelope.
    #[command(flatten)]
    pub envelope: EnvelopeInput,
    /// Where a counter-example is written, as VCD
    #[arg(long, value_name = "FILE")]
    pub witness: Option<PathBuf>,
    /// Where the machine behind the law is written, minimised; the ending says how: kiss2, csv, txt, dot, svg, rs
    #[arg(long, value_name = "FILE")]
    pub machine: Option<PathBuf>,
    /// Search for immunity, shortest operations and recovery however large the proof is
    #[arg(long)]
    pub thorough: bool,
    /// The report.
    #[command(flatten)]
    pub report: ReportOption,
}

/// A promise.
#[derive(ValueEnum, Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Promise {
    /// The output follows the contact
    #[default]
    Follow,
    /// The output turns over once for every make: push on, push off
    Alternate,
}

impl From<Promise> for Contract {
    fn from(promise: Promise) -> Self {
        match promise {
            Promise::Follow => Self::Follow,
            Promise::Alternate => Self::Alternate,
        }
    }
}

impl ProveArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  In ticks:
    harness prove \"integrator 5\" \\
      --envelope \"dwell=20 bounce=5/3 glitch=1/1 quiet=10\"
  In time, at one tick period:
    harness prove \"state-machine confirm=3/2 lockout=4/0\" \\
      --requirement contact.toml --tick \"1 ms\"
  Logic of one's own, as a next-state table, with the counter-example as a file:
    harness prove --table own.kiss2 \\
      --envelope \"dwell=20 bounce=5 glitch=1 quiet=10\" --witness broken.vcd";
}

impl ProveArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        let name = self.logic()?;
        let logic = NamedLogic::read(&name, self.reading)?;
        let given = self.envelope.given(session, self.report.is_wanted())?;
        let EnvelopeGiven { envelope, tick, clock, allowed, caution, mut files } = given;
        if let (LogicName::Table(path), true) = (&name, self.report.is_wanted()) {
            files.push(source_file(path, "next-state table")?);
        }
        let report = self.report.prepare()?;
        let witness_file = self.witness.as_deref().map(OutputFolder::of_file).transpose()?;
        let machine_file = self.machine.as_deref().map(MachineFile::prepare).transpose()?;
        let contract = self.contract.into();
        let limits = Limits::default();
        let explored =
            session.during("exploring", || prove_contract(&logic.table, &envelope, contract, &limits));
        let proof = explored.map_err(Problem::told)?;
        let effort = if self.thorough { Effort::Thorough } else { Effort::Quick };
        let beyond = session.during("searching beyond", || Beyond::of(&logic.table, &proof, effort, &limits));
        let again = self.again(&name, &envelope, tick);
        let limit = match contract {
            Contract::Follow => known_limit(&envelope),
            Contract::Alternate => closed_form_limit(&envelope, contract),
        };
        let mut written = Vec::new();
        if let Some(file) = machine_file {
            written.extend(file.write(&logic.machine)?);
        }
        if let (Some((folder, name)), Some((_, witness))) = (witness_file, proof.refutation()) {
            let period = tick.map_or(Period::from_ms(1), TickPeriod::period);
            let mut files = folder.stage();
            files.add(&name, |out| write_witness(out, witness, period, &again))?;
            written.extend(files.commit()?);
        }
        if let Some(report) = report {
            let proved = html::Proved {
                name: &logic.name,
                machine: &logic.machine,
                envelope: &envelope,
                proof: &proof,
                limit,
                beyond: &beyond,
                clock,
                allowed,
                caution,
            };
            written.push(report.write(session, files, |origin| html::proof(&proved, origin))?);
        }
        Ok(Box::new(Proved { logic, envelope, clock, allowed, proof, beyond, limit, written, again }))
    }

    fn logic(&self) -> Result<LogicName, Problem> {
        let table = self.table.clone().map(LogicName::Table);
        table.or_else(|| self.law.clone()).ok_or_else(|| {
            Problem::new("no law is given")
                .help("name one, such as \"integrator 5\", or give a next-state table with --table")
        })
    }

    /// The command that proves the same again, from the envelope in ticks, however it was given.
    fn again(&self, name: &LogicName, envelope: &Envelope, tick: Option<TickPeriod>) -> String {
        let mut text = "harness prove".to_owned();
        match name {
            LogicName::Law(law) => text.push_str(&format!(" \"{law}\"")),
            LogicName::Table(path) => {
                text.push_str(&format!(" --table {}", shell_word(&path.display().to_string())));
                if self.reading == OutputOf::Mealy {
                    text.push_str(" --reading mealy");
                }
            }
        }
        if self.contract == Promise::Alternate {
            text.push_str(" --contract alternate");
        }
        text.push_str(&format!(" --envelope \"{}\"", EnvelopeText(*envelope)));
        if let Some(tick) = tick {
            text.push_str(&format!(" --tick \"{tick}\""));
        }
        text
    }
}
