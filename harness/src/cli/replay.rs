//! `harness replay`: one law over recordings.

mod overview;

use std::io::{self, Write};
use std::path::{Path, PathBuf};

use clap::Args;
use debounce_core::{Change, Law, TickClock, is_settled};
use serde_json::{Value, json};

use super::input::Input;
use super::lines::Lines;
use super::logic_name::{LogicName, OutputOf, Runnable};
use super::recorded::taken_at;
use super::recordings::RequirementInput;
use super::{Answer, Failure, Outcome, Session};
use crate::characterise::Burst;
use crate::generate::{changes_of, read_truth};
use crate::nearest::nearest_scoped;
use crate::problem::Problem;
use crate::prove::{Witness, WitnessTick};
use crate::quantity::{Share, TickPeriod, counted};
use crate::replay::{ClockMeasurement, Draws, Failures, Measurement, PreparedClock};
use crate::report::timing::TimingDiagram;
use crate::report::{characterised, claim_words, words};
use crate::requirement::Word;
use crate::sample::SampleClock;
use crate::study::{Observed, measured};
use crate::trace::Trace;
use crate::truth::check_truth;
use crate::with_law;

/// Runs one law over recordings and shows what it reports.
#[derive(Args, Clone, PartialEq, Debug)]
#[command(
    long_about = "Samples the recordings at every phase that matters and steps the law over them. Shows the \
                  latency at make and break (distribution and exact worst case), false edges and missed \
                  operations, each with its time in the recording.",
    after_help = ReplayArguments::EXAMPLES
)]
pub struct ReplayArguments {
    /// The law with its parameters in ticks, two numbers around a stroke being for make and break; or the file of a
    /// next-state table (.kiss2 or .csv)
    #[arg(value_name = "LAW")]
    pub law: LogicName,
    /// Whether an output of the table belongs to a state or to a transition
    #[arg(long, value_enum, default_value_t)]
    pub reading: OutputOf,
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
    /// What the contact did, from a file that harness generate wrote; read off the recording without it
    #[arg(long, value_name = "FILE")]
    pub truth: Option<PathBuf>,
    /// Passes drawn with tolerance, jitter and lost ticks, on top of the exact ones
    #[arg(long, value_name = "COUNT", default_value_t = 32)]
    pub draws: u32,
    /// Seed of the first drawn pass
    #[arg(long, value_name = "NUMBER", default_value_t = 1)]
    pub seed: u64,
}

impl ReplayArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  One law over one recording:
    harness replay \"integrator 5\" gate.vcd --tick \"1 ms\"
  A slow clock, exactly 30 samples a second:
    harness replay \"shift-register 1\" gate.vcd --tick \"30 Hz\"
  The recordings of a requirement file, for a program:
    harness replay \"state-machine confirm=3/2 lockout=4/0\" \\
      --requirement contact.toml --tick \"1 ms\" --json";
}

impl ReplayArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        let mut input = Input::with_recordings(&self.input, session)?;
        if let Some(path) = &self.truth {
            stated_truth(path, &mut input.observed)?;
        }
        let resolved = input.requirement.fill_in(&measured(&input.observed))?;
        let network = input.requirement.resolved_network()?;
        let at_pin = |one: &Observed| one.at_pin(network.as_ref().map(|found| &found.network));
        let pins: Vec<Trace> =
            input.observed.iter().map(at_pin).collect::<Result<_, _>>().map_err(Problem::told)?;
        let logic = Runnable::read(&self.law, self.reading)?;
        let shortest = &resolved.required.shortest;
        let draws = Draws {
            count: self.draws,
            seed: self.seed,
            shortest_dwell_ns: shortest.open.value.ns().min(shortest.closed.value.ns()),
        };
        let mut runs = Vec::new();
        let steps = input.observed.len() * resolved.ticks.value.len();
        let bar = session.progress("replaying", steps as u64);
        for (recording, one) in input.observed.iter().enumerate() {
            for &tick in &resolved.ticks.value {
                let clock = resolved.clock(tick);
                let prepared = PreparedClock::new(&pins[recording], &one.truth, &clock, draws)
                    .map_err(|error| Problem::told(format!("{}: {error}", one.name)))?;
                let measured = match &logic {
                    Runnable::Law(logic) => with_law!(logic, law => prepared.measure(law)),
                    Runnable::Table(machine) => prepared.measure(machine),
                };
                let failures = Failures::of(&measured.nominal, &one.truth);
                runs.push(Run { recording, tick, clock, measured, failures });
                bar.inc(1);
            }
        }
        let confidence = resolved.confidence.value;
        let (law, observed) = (self.law.clone(), input.observed);
        Ok(Box::new(Replayed { logic, law, observed, pins, runs, confidence }))
    }
}

/// Puts what a file states in the place of what was read off the recordings.
fn stated_truth(path: &Path, observed: &mut [Observed]) -> Result<(), Failure> {
    let rows = read_truth(path)?;
    for one in observed {
        let channel = &one.recording.channel;
        let truth = changes_of(&rows, channel);
        if truth.is_empty() {
            let known = nearest_scoped(channel, rows.iter().map(|row| row.channel.as_str()));
            let problem = Problem::new(format!("nothing is stated of the channel {channel}")).in_file(path);
            return Err(problem
                .help(match known {
                    Some(known) => format!("it states something of {known}; choose that with --channel"),
                    None => "give the truth that was written with this recording".to_owned(),
                })
                .into());
        }
        check_truth(&one.recording.trace, &truth).map_err(|error| {
            Problem::told(error).in_file(path).help("give the truth that was written with this recording")
        })?;
        one.truth = truth;
    }
    Ok(())
}

/// One recording at one tick period.
struct Run {
    recording: usize,
    tick: TickPeriod,
    clock: TickClock,
    measured: ClockMeasurement,
    failures: Failures,
}

struct Replayed {
    logic: Runnable,
    law: LogicName,
    observed: Vec<Observed>,
    /// What the logic samples of each.
    pins: Vec<Trace>,
    runs: Vec<Run>,
    confidence: Share,
}

impl Answer for Replayed {
    fn outcome(&self) -> Outcome {
        if self.runs.iter().all(|run| run.measured.is_faithful()) {
            Outcome::Holds
        } else {
            Outcome::DoesNotHold
        }
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        let ticks = self.runs.iter().filter(|run| run.recording == 0).count();
        if ticks > TICKS {
            return self.overview(&mut lines, ticks);
        }
        for run in &self.runs {
            let one = &self.observed[run.recording];
            lines.item("Replayed", &format!("{} at {} over {}", self.law, run.tick, one.name))?;
            if let Some(text) = at_pin(one) {
                lines.more(&text)?;
            }
            self.figures(&mut lines, run)?;
        }
        if let [run] = self.runs.as_slice() {
            self.slowest(&mut lines, run)?;
        }
        Ok(())
    }

    fn to_json(&self) -> Value {
        let run = |run: &Run| {
            json!({
                "recording": self.observed[run.recording].name,
                "taken_at": self.observed[run.recording].taken_at.map(|taken_at| taken_at.value.word()),
                "tick": run.tick.to_string(),
                "measured": run.measured,
                "failures": characterised::failures(&run.failures, self.confidence),
            })
        };
        json!({ "law": self.law.to_string(), "runs": self.runs.iter().map(run).collect::<Value>() })
    }
}

impl Replayed {
    fn figures(&self, lines: &mut Lines<'_>, run: &Run) -> io::Result<()> {
        let exact = &run.measured.nominal;
        for change in [Change::Make, Change::Break] {
            let figures = exact.at(change);
            let judged = judged(exact, change);
            let text = match &figures.latency {
                None => format!("{judged}, none reported"),
                Some(latency) => format!(
                    "{judged}; delay median {}, 95 % {}, 99 % {}, always less than {}; at most {}",
                    words::about(latency.delay.median_ns),
                    words::about(latency.delay.p95_ns),
                    words::about(latency.delay.p99_ns),
                    words::at_most(run.measured.worst_delay_ns(change).unwrap_or(latency.delay.below_ns)),
                    counted(latency.samples.worst, "sample"),
                ),
            };
            lines.item(if change == Change::Make { "Makes" } else { "Breaks" }, &text)?;
        }
        for missed in exact.missed.iter().take(SHOWN) {
            lines.item(
                "Missed",
                &format!(
                    "{} at {}, at {:.1} % of phases",
                    words::change(missed.change),
                    words::instant(missed.at_ns),
                    missed.probability * 100.0
                ),
            )?;
        }
        for place in exact.false_edges.places.iter().take(SHOWN) {
            lines.item(
                "False edge",
                &format!(
                    "{} between {} and {}, {:.3} on average in one pass",
                    words::change(place.change),
                    words::instant(place.from_ns),
                    words::instant(place.until_ns),
                    place.mean
                ),
            )?;
        }
        let (missed, places) = (exact.missed.len(), exact.false_edges.places.len());
        if missed == 0 && places == 0 {
            lines.more("none missed and none false, at any phase of the nominal tick")?;
        } else if missed > SHOWN || places > SHOWN {
            lines.more(&format!(
                "{} missed at some phase and {} with a false edge in all; --json lists them",
                words::count(missed, "operation"),
                words::count(places, "place")
            ))?;
        }
        if let Some(text) = claim_words::failures(&run.failures, self.confidence) {
            lines.item("Rate", &text)?;
        }
        if let Some(drawn) = &run.measured.drawn {
            lines.more(&format!(
                "sampled, not proved: {} passes with tolerance, jitter and lost ticks from seed {}; {} of them unfaithful",
                drawn.draws.count, drawn.draws.seed, drawn.unfaithful
            ))?;
        }
        Ok(())
    }

    /// The slowest make as a timing diagram, where it fits one.
    fn slowest(&self, lines: &mut Lines<'_>, run: &Run) -> io::Result<()> {
        let Some(latency) = &run.measured.nominal.make.latency else { return Ok(()) };
        let (one, pin) = (&self.observed[run.recording], &self.pins[run.recording]);
        let sampler = SampleClock::new(run.clock).phase_units(latency.slowest.phase.from);
        let at_ns = latency.slowest.at_ns;
        let shown = match &self.logic {
            Runnable::Law(logic) => with_law!(logic, law => around(law, &sampler, one, pin, at_ns)),
            Runnable::Table(machine) => around(machine, &sampler, one, pin, at_ns),
        };
        lines.plain(&format!(
            "\nslowest make, at {}, one column a tick:\n{}",
            words::instant(latency.slowest.at_ns),
            TimingDiagram(&shown)
        ))
    }
}

/// Tick periods that are shown with all their figures.
const TICKS: usize = 2;

/// Places listed on the screen.
const SHOWN: usize = 5;

/// How many changes of one kind could be judged, and how many the recording ends too early for: they count in no rate.
fn judged(exact: &Measurement, change: Change) -> String {
    let undecided = exact.undecided.iter().filter(|one| one.change == change).count() as u64;
    let judged = counted(u64::from(exact.at(change).changes).saturating_sub(undecided), "change");
    match undecided {
        0 => judged,
        more => format!("{judged} and {more} more too near the end of the recording to be judged"),
    }
}

/// Columns before the change and in all.
const BEFORE: u64 = 4;
const COLUMNS: u64 = 60;

/// Where the recording was taken, if a network makes a difference, and from where delays are counted.
fn at_pin(one: &Observed) -> Option<String> {
    let counted = if one.is_behind_network() {
        "delays are counted from the first edge at the pin: that of the network comes before it"
    } else {
        "its typical unit is sampled, and delays are counted from the contact, so they hold that of the network"
    };
    Some(format!("{}; {counted}", taken_at(one)?))
}

/// What a law makes of the samples around an instant.
fn around<L: Law>(law: &L, sampler: &SampleClock, one: &Observed, trace: &Trace, at_ns: u64) -> Witness {
    let (period, phase) = (sampler.period(), u128::from(sampler.phase()));
    let step = u128::from(period.units());
    let change_tick = (period.to_units(at_ns - trace.start_ns()).saturating_sub(phase)).div_ceil(step) as u64;
    let first = change_tick.saturating_sub(BEFORE);
    let mut state = law.rest(trace.initial());
    let mut shown = Witness { start: trace.initial(), ticks: Vec::new(), loop_from: None };
    for stretch in sampler.train(trace).stretches() {
        for tick in stretch.first_tick..stretch.first_tick + stretch.ticks {
            if tick >= first + COLUMNS {
                return shown;
            }
            let settled = is_settled(law, &state, stretch.position);
            if settled && tick < first {
                // Nothing will change until the columns or the end of the stretch.
                if stretch.first_tick + stretch.ticks <= first {
                    break;
                }
                continue;
            }
            let _edge: Option<Change> = law.step(&mut state, stretch.position);
            if tick >= first {
                let instant = phase + u128::from(tick) * step;
                let instant_ns = trace.start_ns() + (instant / u128::from(period.units_per_ns())) as u64;
                let before = one.truth.partition_point(|change| change.at_ns <= instant_ns);
                let contact = if before == 0 { trace.initial() } else { one.truth[before - 1].change.to() };
                let within = |burst: &Burst| (burst.first_ns..burst.last_ns).contains(&instant_ns);
                let disturbed = one.segmentation.disturbances.iter().any(|found| within(&found.burst));
                shown.ticks.push(WitnessTick {
                    contact,
                    sample: stretch.position,
                    output: law.output(&state),
                    bouncing: !disturbed,
                    disturbed,
                });
            }
        }
    }
    shown
}
