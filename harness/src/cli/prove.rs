//! `harness prove`: proves or refutes one law in an envelope.

use std::fs;
use std::io::{self, Write};
use std::path::PathBuf;

use clap::{Args, ValueEnum};
use debounce_core::{Change, Envelope, PerChange, Period, TickClock};
use serde_json::{Value, json};

use super::envelope_text::EnvelopeText;
use super::input::Input;
use super::lines::{Lines, grouped, strong};
use super::recordings::RequirementInput;
use super::{Answer, Failure, Outcome, OutputFolder, Session};
use crate::choose::known_limit;
use crate::law_text::LawParameters;
use crate::logic::Logic;
use crate::machine::{MachineTable, Reading, TableFault, TableFileError, read_table};
use crate::problem::{Problem, Problems, plain_reason};
use crate::prove::{self, Contract, LawTable, Limits, Proof, prove_contract};
use crate::report::timing::TimingDiagram;
use crate::report::witness::write_witness;
use crate::report::{json as report, words};
use crate::study::measured;

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
    pub law: Option<LawParameters>,
    /// A next-state table in place of a built-in law: KISS2, or CSV with the columns state, sample, next, output
    #[arg(long, value_name = "FILE")]
    pub table: Option<PathBuf>,
    /// Whether an output of the table belongs to a state or to a transition
    #[arg(long, value_enum, default_value_t)]
    pub reading: OutputOf,
    /// What the logic promises
    #[arg(long, value_enum, default_value_t)]
    pub contract: Promise,
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

/// What an output of a table belongs to.
#[derive(ValueEnum, Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum OutputOf {
    /// The output of a row is that of its present state
    #[default]
    Moore,
    /// The output of a row is that of the transition, the state after it
    Mealy,
}

impl From<OutputOf> for Reading {
    fn from(reading: OutputOf) -> Self {
        match reading {
            OutputOf::Moore => Self::Moore,
            OutputOf::Mealy => Self::Mealy,
        }
    }
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
    harness prove \"integrator 5\" --envelope \"dwell=20 bounce=5/3 glitch=1/1 quiet=10\"
  In time, at one tick period:
    harness prove \"state-machine confirm=3/2 lockout=4/0\" --requirement contact.toml --tick \"1 ms\"
  Logic of one's own, as a next-state table, with the counter-example as a file:
    harness prove --table own.kiss2 --envelope \"dwell=20 bounce=5 glitch=1 quiet=10\" --witness broken.vcd";
}

impl ProveArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        let logic = self.logic()?;
        let (envelope, tick) = self.envelope(session)?;
        let file = self.witness.as_deref().map(OutputFolder::of_file).transpose()?;
        let contract = self.contract.into();
        let limits = Limits::default();
        let proof = prove_contract(&logic.table, &envelope, contract, &limits)
            .map_err(|error| Problem::new(error.to_string()))?;
        let limit = if contract == Contract::Follow { known_limit(&envelope) } else { None };
        let mut written = None;
        if let (Some((folder, name)), Some((_, witness))) = (file, proof.refutation()) {
            let period = tick.unwrap_or_else(|| Period::from_ms(1));
            let mut files = folder.stage();
            files.add(&name, |out| write_witness(out, witness, period, &self.again()))?;
            written = files.commit()?.pop();
        }
        Ok(Box::new(Proved { logic, envelope, tick, proof, limit, written, again: self.again() }))
    }

    fn logic(&self) -> Result<Named, Failure> {
        if let Some(path) = &self.table {
            let bytes = fs::read(path).map_err(|error| {
                Problem::new(format!("the table cannot be read: {}", plain_reason(&error))).in_file(path)
            })?;
            let name = path.display().to_string();
            let machine = read_table(&name, &bytes, self.reading.into())
                .map_err(|error| Failure::from(table_problems(&error)))?;
            let table =
                LawTable::of(&machine).map_err(|error| Problem::new(error.to_string()).in_file(path))?;
            return Ok(Named { name, table, machine });
        }
        let Some(parameters) = &self.law else {
            return Err(Problem::new("no law is given")
                .help("name one, such as \"integrator 5\", or give a next-state table with --table")
                .into());
        };
        let logic =
            Logic::try_new(parameters).map_err(|error| Problem::new(format!("{parameters}: {error}")))?;
        let table = logic.table().map_err(|error| Problem::new(format!("{parameters}: {error}")))?;
        let machine = MachineTable::of_table(&table);
        Ok(Named { name: parameters.to_string(), table, machine })
    }

    /// The envelope in samples, and the tick period where there is one.
    fn envelope(&self, session: &Session) -> Result<(Envelope, Option<Period>), Failure> {
        if let Some(EnvelopeText(envelope)) = self.envelope {
            return Ok((envelope, None));
        }
        if self.input.is_empty() {
            return Err(Problem::new("no envelope is given")
                .help("give one in ticks, such as --envelope \"dwell=20 bounce=5/3 glitch=1/1 quiet=10\"")
                .help(
                    "or a requirement and a tick period, such as --requirement contact.toml --tick \"1 ms\"",
                )
                .into());
        }
        let input = Input::with_or_without_recordings(&self.input, session)?;
        let resolved = input.requirement.resolve(&measured(&input.observed))?;
        let &[tick] = resolved.ticks.value.as_slice() else {
            let periods: Vec<String> = resolved.ticks.value.iter().map(ToString::to_string).collect();
            return Err(Problem::new(format!("there are several tick periods: {}", periods.join(", ")))
                .help(format!("choose one, such as --tick \"{}\"", periods[0]))
                .into());
        };
        let envelope = resolved
            .physical()
            .in_ticks(&resolved.clock(tick))
            .map_err(|error| Problem::new(error.to_string()))?;
        Ok((envelope, Some(tick.period())))
    }

    /// The command that proves the same again.
    fn again(&self) -> String {
        let law = match (&self.table, &self.law) {
            (Some(path), _) => format!("--table {}", path.display()),
            (None, Some(law)) => format!("\"{law}\""),
            (None, None) => String::new(),
        };
        let mut text = format!("harness prove {law}");
        if self.contract == Promise::Alternate {
            text.push_str(" --contract alternate");
        }
        if let Some(EnvelopeText(e)) = self.envelope {
            text.push_str(&format!(
                " --envelope \"dwell={}/{} bounce={}/{} glitch={}/{} quiet={} calm={} lost={}\"",
                e.dwell.open,
                e.dwell.closed,
                e.bounce.make,
                e.bounce.break_,
                e.glitch.open,
                e.glitch.closed,
                e.quiet,
                e.calm,
                e.lost
            ));
        }
        if let Some(path) = &self.input.requirement.requirement {
            text.push_str(&format!(" --requirement {}", path.display()));
        }
        if let [tick] = self.input.requirement.tick.as_slice() {
            text.push_str(&format!(" --tick \"{tick}\""));
        }
        text
    }
}

/// Every fault of a table, with its place.
fn table_problems(error: &TableFileError) -> Problems {
    let one = |fault: &TableFault| {
        let problem = Problem::new(fault.message());
        let problem = match (fault.line(), fault.column()) {
            (Some(line), Some(column)) => problem.at(error.path(), line, column),
            _ => problem.in_file(error.path()),
        };
        match fault.help() {
            Some(help) => problem.help(help),
            None => problem,
        }
    };
    Problems::from_found(error.faults().iter().map(one).collect())
        .unwrap_or_else(|| Problem::new("the table could not be read").into())
}

/// A logic with what it is called.
struct Named {
    name: String,
    table: LawTable,
    machine: MachineTable,
}

/// A finished proof.
struct Proved {
    logic: Named,
    envelope: Envelope,
    tick: Option<Period>,
    proof: Proof,
    limit: Option<PerChange<u32>>,
    written: Option<PathBuf>,
    again: String,
}

impl Proved {
    /// Samples, and the delay they stand for where the tick is known.
    fn latency(&self, samples: u32) -> String {
        match self.tick {
            Some(period) => {
                let below_ns = TickClock::new(period).delay_ns(samples).1;
                format!("{samples} samples (less than {} at the nominal tick)", words::at_most(below_ns))
            }
            None => format!("{samples} samples"),
        }
    }
}

impl Answer for Proved {
    fn outcome(&self) -> Outcome {
        if self.proof.bounds().is_some() { Outcome::Holds } else { Outcome::DoesNotHold }
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        lines.item("Law", &self.logic.name)?;
        let e = &self.envelope;
        lines.item(
            "Envelope",
            &format!(
                "in ticks: dwell {} open, {} closed; bounce {} at make, {} at break; disturbance {} open, {} closed; quiet {}; calm {}; lost {}",
                e.dwell.open, e.dwell.closed, e.bounce.make, e.bounce.break_, e.glitch.open, e.glitch.closed,
                e.quiet, e.calm, e.lost
            ),
        )?;
        match &self.proof.outcome {
            prove::Outcome::Faithful { bounds, slowest } => {
                lines.item(
                    "Proved",
                    &strong(match self.proof.contract {
                        Contract::Follow => "every operation is reported once and in order",
                        Contract::Alternate => "the output turns over once for every make",
                    }),
                )?;
                for change in [Change::Make, Change::Break] {
                    let latency = bounds.latency.at(change);
                    let limit = match (self.limit, self.proof.contract) {
                        (Some(limit), _) => {
                            let limit = limit.at(change);
                            format!(
                                "; no logic can promise less than {limit} ({:.2} x)",
                                f64::from(latency.worst) / f64::from(limit)
                            )
                        }
                        (None, Contract::Follow) => "; limit unknown".to_owned(),
                        (None, Contract::Alternate) => String::new(),
                    };
                    lines.item(
                        if change == Change::Make { "Make" } else { "Break" },
                        &format!("at most {}, at least {}{limit}", self.latency(latency.worst), latency.best),
                    )?;
                }
                self.size(&mut lines)?;
                for change in [Change::Make, Change::Break] {
                    if let Some(witness) = slowest.of(change) {
                        lines.plain(&format!(
                            "\nslowest {}:\n{}",
                            words::change(change),
                            TimingDiagram(witness)
                        ))?;
                    }
                }
                Ok(())
            }
            prove::Outcome::Refuted { clause, witness } => {
                lines.item("Refuted", &strong(words::clause(*clause)))?;
                self.size(&mut lines)?;
                lines.plain(&format!("\na shortest waveform that shows it:\n{}", TimingDiagram(witness)))?;
                lines.plain(&format!("\nagain: {}\n", self.again))?;
                if let Some(path) = &self.written {
                    lines.plain(&format!("written: {}\n", path.display()))?;
                }
                Ok(())
            }
        }
    }

    fn to_json(&self) -> Value {
        let mut value = report::proof(&self.proof);
        value["law"] = json!(self.logic.name);
        value["envelope"] = report::envelope(&self.envelope);
        value["limit_samples"] =
            json!(self.limit.map(|limit| json!({ "make": limit.make, "break": limit.break_ })));
        value["again"] = json!(self.again);
        value
    }
}

impl Proved {
    fn size(&self, lines: &mut Lines<'_>) -> io::Result<()> {
        let counts = self.logic.machine.counts();
        lines.item(
            "Explored",
            &format!(
                "{} states of contact, disturbances and law together, {} transitions; the law alone has {} ({} bits)",
                grouped(self.proof.states),
                grouped(self.proof.transitions),
                words::count(counts.states, "state"),
                counts.state_bits,
            ),
        )
    }
}
