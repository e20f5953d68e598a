//! `harness prove`: proves or refutes one law in an envelope.

use std::fs;
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use clap::{Args, ValueEnum};
use debounce_core::{Change, Envelope, PerChange, Period, TickClock};
use serde_json::{Value, json};

use super::envelope_text::EnvelopeText;
use super::input::Input;
use super::lines::{Lines, grouped, strong};
use super::recordings::RequirementInput;
use super::{Answer, Failure, Outcome, OutputFolder, Session, faults};
use crate::choose::known_limit;
use crate::emit::module_name;
use crate::emit::table::table_law;
use crate::law_text::LawParameters;
use crate::logic::Logic;
use crate::machine::{
    MachineTable, Reading, dot, read_table, table_text, terminal_diagram, write_csv, write_kiss2,
};
use crate::problem::Problem;
use crate::prove::{self, Contract, LawTable, Limits, Proof, prove_contract};
use crate::quantity::TickPeriod;
use crate::report::state_diagram::state_diagram;
use crate::report::timing::TimingDiagram;
use crate::report::witness::write_witness;
use crate::report::{json as report, words};
use crate::requirement::RequirementOptions;
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
    /// The envelope in ticks, in place of a requirement; --tick then only adds times to the answer
    #[arg(long, value_name = "ENVELOPE")]
    pub envelope: Option<EnvelopeText>,
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
    /// Where a counter-example is written, as VCD
    #[arg(long, value_name = "FILE")]
    pub witness: Option<PathBuf>,
    /// Where the machine behind the law is written, minimised; the ending says how: kiss2, csv, txt, dot, svg, rs
    #[arg(long, value_name = "FILE")]
    pub machine: Option<PathBuf>,
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
        let logic = self.logic()?;
        let (envelope, tick) = self.envelope(session)?;
        let file = self.witness.as_deref().map(OutputFolder::of_file).transpose()?;
        let contract = self.contract.into();
        let limits = Limits::default();
        let bar = session.waiting("exploring");
        let proof = prove_contract(&logic.table, &envelope, contract, &limits).map_err(Problem::told)?;
        bar.finish_and_clear();
        let again = self.again(&envelope, tick);
        let tick = tick.map(TickPeriod::period);
        let limit = if contract == Contract::Follow { known_limit(&envelope) } else { None };
        let mut written = Vec::new();
        if let Some(path) = &self.machine {
            let (folder, name) = OutputFolder::of_file(path)?;
            let text = machine_file(&logic, path)?;
            let mut files = folder.stage();
            files.add(&name, |out| out.write_all(text.as_bytes()))?;
            written.extend(files.commit()?);
        }
        if let (Some((folder, name)), Some((_, witness))) = (file, proof.refutation()) {
            let period = tick.unwrap_or_else(|| Period::from_ms(1));
            let mut files = folder.stage();
            files.add(&name, |out| write_witness(out, witness, period, &again))?;
            written.extend(files.commit()?);
        }
        Ok(Box::new(Proved { logic, envelope, tick, proof, limit, written, again }))
    }

    fn logic(&self) -> Result<Named, Failure> {
        if let Some(path) = &self.table {
            let bytes = fs::read(path).map_err(|error| faults::unreadable("table", path, &error))?;
            let name = path.display().to_string();
            let machine = read_table(&name, &bytes, self.reading.into())
                .map_err(|error| Failure::from_found(faults::table(&error)))?;
            let table = LawTable::of(&machine).map_err(|error| Problem::told(error).in_file(path))?;
            return Ok(Named { name, table, machine });
        }
        let Some(parameters) = &self.law else {
            return Err(Problem::new("no law is given")
                .help("name one, such as \"integrator 5\", or give a next-state table with --table")
                .into());
        };
        let logic =
            Logic::try_new(parameters).map_err(|error| Problem::told(format!("{parameters}: {error}")))?;
        let table = logic.table().map_err(|error| Problem::told(format!("{parameters}: {error}")))?;
        let machine = MachineTable::of_table(&table);
        Ok(Named { name: parameters.to_string(), table, machine })
    }

    /// The envelope in samples, and the tick period where there is one.
    fn envelope(&self, session: &Session) -> Result<(Envelope, Option<TickPeriod>), Failure> {
        if let Some(EnvelopeText(envelope)) = self.envelope {
            return Ok((envelope, self.tick_beside_envelope()?));
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
        let tick = only(&resolved.ticks.value)?;
        let envelope = resolved.physical().in_ticks(&resolved.clock(tick)).map_err(Problem::told)?;
        Ok((envelope, Some(tick)))
    }

    /// An envelope in ticks leaves nothing open but how long a tick is.
    fn tick_beside_envelope(&self) -> Result<Option<TickPeriod>, Failure> {
        let ticks = &self.input.requirement.tick;
        let only_ticks = RequirementInput {
            requirement: RequirementOptions { tick: ticks.clone(), ..RequirementOptions::default() },
            ..RequirementInput::default()
        };
        if self.input != only_ticks {
            return Err(Problem::new(
                "the envelope is given in ticks and by a requirement or recordings as well",
            )
            .help("give either --envelope, with --tick for times in the answer, or the requirement alone")
            .into());
        }
        if ticks.is_empty() { Ok(None) } else { Ok(Some(only(ticks)?)) }
    }

    /// The command that proves the same again, from the envelope in ticks, however it was given.
    fn again(&self, envelope: &Envelope, tick: Option<TickPeriod>) -> String {
        let mut text = "harness prove".to_owned();
        match (&self.table, &self.law) {
            (Some(path), _) => {
                text.push_str(&format!(" --table {}", shell_word(&path.display().to_string())))
            }
            (None, Some(law)) => text.push_str(&format!(" \"{law}\"")),
            (None, None) => {}
        }
        if self.table.is_some() && self.reading == OutputOf::Mealy {
            text.push_str(" --reading mealy");
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

/// The machine behind a law, minimised, in the format that the ending of the file names.
fn machine_file(logic: &Named, path: &Path) -> Result<String, Problem> {
    let machine = logic.machine.minimised().machine;
    let refused = |message: String| Problem::new(message).in_file(path);
    let ending = path.extension().and_then(|ending| ending.to_str()).unwrap_or_default();
    match ending {
        "kiss2" => Ok(write_kiss2(&machine, Reading::Moore)),
        "csv" => Ok(write_csv(&machine, Reading::Moore)),
        "txt" => {
            let diagram = terminal_diagram(&machine).map_or(String::new(), |diagram| format!("\n{diagram}"));
            Ok(format!("{}{diagram}", table_text(&machine)))
        }
        "dot" => Ok(dot(&machine)),
        "svg" => state_diagram(&machine, "machine").ok_or_else(|| {
            refused(format!("a diagram of {} states cannot be read", machine.len()))
                .help("write it as .dot or .kiss2 instead")
        }),
        "rs" => table_law(&machine, &constant_name(path)).map_err(|error| refused(error.to_string())),
        other => Err(refused(format!("\"{other}\" is no format for a machine"))
            .help("end the file in .kiss2, .csv, .txt, .dot, .svg or .rs")),
    }
}

/// The name of the table in the module: that of the file, as constants are written.
fn constant_name(path: &Path) -> String {
    let stem = path.file_stem().and_then(|stem| stem.to_str()).unwrap_or("logic");
    module_name(stem).to_uppercase()
}

/// The one tick period that a proof is for.
fn only(ticks: &[TickPeriod]) -> Result<TickPeriod, Problem> {
    if let &[tick] = ticks {
        return Ok(tick);
    }
    let periods: Vec<String> = ticks.iter().map(ToString::to_string).collect();
    let example = periods.first().map_or("1 ms", String::as_str);
    Err(Problem::new(format!("there are several tick periods: {}", periods.join(", ")))
        .help(format!("a proof is for one tick period; choose one, such as --tick \"{example}\"")))
}

/// A word as a shell takes it: in single quotes where it holds anything but letters, digits and `._-/`.
fn shell_word(text: &str) -> String {
    if !text.is_empty() && text.chars().all(|letter| letter.is_alphanumeric() || "._-/".contains(letter)) {
        return text.to_owned();
    }
    format!("'{}'", text.replace('\'', r"'\''"))
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
    written: Vec<PathBuf>,
    again: String,
}

impl Proved {
    /// Samples, and the delay they stand for where the tick is known.
    fn latency(&self, samples: u32) -> String {
        let counted = words::count(samples as usize, "sample");
        let Some(period) = self.tick else { return counted };
        let below_ns = TickClock::new(period).delay_ns(samples).1;
        format!("{counted} (less than {} at the nominal tick)", words::at_most(below_ns))
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
                lines.plain("\n")?;
                lines.command(&format!("again: {}", self.again))
            }
        }?;
        for path in &self.written {
            lines.plain(&format!("written: {}\n", path.display()))?;
        }
        Ok(())
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
                "{} states of contact, disturbances and law together, {} transitions; the law alone has {} ({})",
                grouped(self.proof.states),
                grouped(self.proof.transitions),
                words::count(counts.states, "state"),
                words::count(counts.state_bits as usize, "bit"),
            ),
        )
    }
}
