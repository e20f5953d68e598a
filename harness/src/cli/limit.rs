//! `harness limit`: what no logic can beat in an envelope, and a logic that reaches it.

use std::path::PathBuf;

use clap::Args;
use debounce_core::{Envelope, PerChange, StateMachine};

use super::envelope_input::{EnvelopeGiven, EnvelopeInput};
use super::limit_answer::{Known, LimitFound, Reached};
use super::logic_name::NamedLogic;
use super::machine_file::MachineFile;
use super::report::ReportOption;
use super::{Answer, Failure, Session};
use crate::law_text::LawParameters;
use crate::machine::MachineTable;
use crate::problem::Problem;
use crate::prove::{LimitAnswer, Limits, Solution, promptest_logic, prove_within, solve_limit};
use crate::report::html;

/// What no logic can beat in an envelope, with a logic that reaches it.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Follows everything that a logic can know from its samples, and so finds the least worst latency that \
                  any logic whatever can have in the envelope, or why none can exist. What was found is itself a \
                  logic with exactly that latency: it is minimised and proved, and can be written as a next-state \
                  table, drawn, or turned into Rust. Where the search does not fit, the closed form answers if it \
                  is proved for that envelope.",
    after_help = LimitArguments::EXAMPLES
)]
pub struct LimitArguments {
    /// The envelope.
    #[command(flatten)]
    pub envelope: EnvelopeInput,
    /// The logic that is as early as any could be in every single waveform, not in the worst alone; it has more states
    #[arg(long)]
    pub earliest: bool,
    /// Where the logic that reaches the limit is written; the ending says how: kiss2, csv, txt, dot, svg, rs
    #[arg(long, value_name = "FILE")]
    pub machine: Option<PathBuf>,
    /// The report.
    #[command(flatten)]
    pub report: ReportOption,
}

impl LimitArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  In ticks:
    harness limit --envelope \"dwell=20 bounce=5/3 glitch=1/1 quiet=10\"
  In time, at one tick period, and the best logic as a table to be proved:
    harness limit --requirement contact.toml --tick \"1 ms\" --machine best.kiss2
  Where no formula is known, as Rust for the firmware:
    harness limit --envelope \"dwell=30 bounce=3/2 glitch=1/3 quiet=2\" \\
      --machine best.rs";
}

impl LimitArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        let given = self.envelope.given(session, self.report.is_wanted())?;
        let EnvelopeGiven { envelope, clock, caution, files, .. } = given;
        let report = self.report.prepare()?;
        let file = self.machine.as_deref().map(MachineFile::prepare).transpose()?;
        let solve = if self.earliest { promptest_logic } else { solve_limit };
        let mut limits = Limits::default();
        if envelope.limit().is_some() {
            limits.memory_bytes = BESIDE_FORMULA;
        }
        let answer =
            session.during("searching the limit", || solve(&envelope, &limits)).map_err(Problem::told)?;
        let known = match answer {
            LimitAnswer::Unsolvable(reason) => Known::NoLogic(reason),
            LimitAnswer::Solved(solution) => {
                let proved = session.during("exploring", || solved(&envelope, solution));
                Known::Limit(Box::new(proved?))
            }
            LimitAnswer::ClosedForm(latency) => Known::Limit(Box::new(by_formula(&envelope, latency, 0)?)),
            LimitAnswer::Unknown { beliefs, bytes } => match envelope.limit() {
                Some(latency) => Known::Limit(Box::new(by_formula(&envelope, latency, beliefs)?)),
                None => return Err(unknown(beliefs, bytes).into()),
            },
        };
        let mut written = Vec::new();
        if let (Some(file), Known::Limit(reached)) = (file, &known) {
            written.extend(file.write(&reached.machine)?);
        }
        if let Some(report) = report {
            let limited = known.limited(&envelope, clock, caution);
            written.push(report.write(session, files, |origin| html::limit(&limited, origin))?);
        }
        Ok(Box::new(LimitFound { envelope, clock, known, written }))
    }
}

/// Where the closed form answers anyway, nobody waits for a search that says the same: this takes a tenth of a second.
const BESIDE_FORMULA: u64 = 1 << 19;

/// A limit found by beliefs, with the logic that they make.
fn solved(envelope: &Envelope, solution: Solution) -> Result<Reached, Problem> {
    if let Some(formula) = envelope.limit() {
        // Each is tested against the other; this is the last line of defence.
        assert_eq!(formula, solution.latency, "closed form and search disagree: please report this");
    }
    let proof = prove_within(&solution.logic, envelope, &Limits::default()).map_err(Problem::told)?;
    Ok(Reached {
        latency: solution.latency,
        name: "the logic found".to_owned(),
        machine: MachineTable::of_table(&solution.logic),
        proof: Some(proof),
        beliefs: solution.beliefs,
        by_search: true,
        law: built_in(envelope),
    })
}

/// A limit by the closed form, with the built-in machine that its proof says reaches it.
fn by_formula(envelope: &Envelope, latency: PerChange<u32>, beliefs: usize) -> Result<Reached, Failure> {
    let law = built_in(envelope).ok_or_else(|| {
        Problem::new(format!(
            "the limit is {} samples for a make and {} for a break, but the machine that reaches it counts further than 65 535 ticks",
            latency.make, latency.break_
        ))
        .help("use a longer tick period")
    })?;
    let NamedLogic { name, table, machine } = NamedLogic::of_law(&law)?;
    // What cannot be explored stands on the written proof alone, and the answer says so.
    let proof = prove_within(&table, envelope, &Limits::default()).ok();
    Ok(Reached { latency, name, machine, proof, beliefs, by_search: false, law: Some(law) })
}

/// The state machine that reaches the limit, in the range of the closed form.
fn built_in(envelope: &Envelope) -> Option<LawParameters> {
    envelope.limit()?;
    let parameters = StateMachine::<u16>::for_envelope(envelope).ok()?.parameters();
    let (confirm, patience, lockout) = (parameters.confirm, parameters.patience, parameters.lockout);
    Some(LawParameters::StateMachine { confirm, patience, lockout })
}

fn unknown(beliefs: usize, bytes: u64) -> Problem {
    let how_far = match beliefs {
        0 => "the envelope alone has too many states".to_owned(),
        _ => format!("{beliefs} states of knowledge, of {bytes} bytes, were followed and more were left"),
    };
    Problem::new(format!("the limit is unknown: {how_far}"))
        .help("use a longer tick period, so that every number of ticks gets smaller")
        .help("harness prove says what one law guarantees in this envelope all the same")
}
