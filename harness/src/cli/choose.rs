//! `harness choose`: ranks the candidates for a requirement.

use std::io::{self, Write};
use std::path::PathBuf;

use clap::Args;
use comfy_table::{ColumnConstraint, ContentArrangement, Table};
use debounce_core::Clause;
use serde_json::{Value, json};

use super::assumed::assumed;
use super::clock_text::ClockView;
use super::input::Input;
use super::lines::{Lines, columns, strong};
use super::preference::PreferenceOption;
use super::recorded::claims;
use super::recordings::RequirementInput;
use super::report::{ReportOption, written};
use super::study::{failure, judging};
use super::{Answer, Failure, Outcome, Session};
use crate::choose::Shortfall;
use crate::clock_range::{Activity, ClockQuestion, asleep, clock_range, slowest_by_tolerance};
use crate::problem::Problem;
use crate::quantity::counted;
use crate::report::clock_plot::ClockPlot;
use crate::report::{characterised, html, json as report, nothing_words, words};
use crate::requirement::InFront;
use crate::study::Study;

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
    /// What counts most.
    #[command(flatten)]
    pub preference: PreferenceOption,
    /// So many candidates are listed
    #[arg(long, value_name = "COUNT", default_value_t = 4)]
    pub list: usize,
    /// Say why each value was assumed, and all that is known of clock and sleep
    #[arg(long)]
    pub details: bool,
    /// Plot worst delay against tick period
    #[arg(long)]
    pub plot: bool,
    /// Operations in an hour, for how long the firmware can sleep
    #[arg(long, value_name = "COUNT", default_value_t = 60)]
    pub operations_per_hour: u32,
    /// Disturbances in an hour, for the same
    #[arg(long, value_name = "COUNT", default_value_t = 0)]
    pub disturbances_per_hour: u32,
    /// The report.
    #[command(flatten)]
    pub report: ReportOption,
}

impl ChooseArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  From figures alone, without a recording:
    harness choose --bounce \"5 ms\" --disturbance \"300 us\" --quiet-time \"5 ms\" \\
      --latency \"20 ms\"
  From a requirement file, with a slower clock than it says:
    harness choose --requirement contact.toml --tick \"5 ms,10 ms\"
  For a recording, on firmware that can serve 1000 ticks a second at most:
    harness choose gate.vcd --fastest-tick \"1 kHz\" --ram \"4 bytes\"";
}

impl ChooseArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        let input = Input::with_or_without_recordings(&self.input, session)?;
        let report = self.report.prepare()?;
        let files = if report.is_some() { input.files()? } else { Vec::new() };
        let bar = judging(session, &input.requirement);
        let study = Study::of(input.observed, &input.requirement, self.preference.into(), |_| bar.inc(1))
            .map_err(failure)?;
        bar.finish_and_clear();
        study.cautions().iter().for_each(|caution| session.warn(&caution.to_string()));
        let activity = Activity {
            operations_per_hour: self.operations_per_hour,
            disturbances_per_hour: self.disturbances_per_hour,
        };
        let clock = clock_view(&study, activity)?;
        let mut written = Vec::new();
        if let Some(report) = report {
            let html = |origin: &_| html::study(&study, &clock.range, false, origin);
            written.push(report.write(session, files, html)?);
        }
        let Self { list, details, plot, .. } = *self;
        Ok(Box::new(Chosen { study, list, clock, details, plot, written }))
    }
}

/// A ranking, so many candidates of it to be shown.
struct Chosen {
    study: Study,
    list: usize,
    clock: ClockView,
    details: bool,
    plot: bool,
    written: Vec<PathBuf>,
}

/// Tolerances of the clock that are looked at: exact, a crystal of 100 ppm, oscillators on the chip (common practice).
const TOLERANCES_PPM: [u32; 5] = [0, 100, 10_000, 20_000, 100_000];

/// The sample clock, and how long the first candidate sleeps.
fn clock_view(study: &Study, activity: Activity) -> Result<ClockView, Problem> {
    let question = ClockQuestion::of(&study.resolved);
    let asleep = match study.ranking.recommended() {
        Some(first) => {
            let view = study.ranking.view(first);
            let table = first.logic.table().map_err(Problem::told)?;
            view.envelope.ok().and_then(|envelope| asleep(&table, &envelope, &view.clock, activity))
        }
        None => None,
    };
    Ok(ClockView {
        range: clock_range(&question),
        by_tolerance: slowest_by_tolerance(&question, &TOLERANCES_PPM),
        activity,
        asleep,
    })
}

impl Answer for Chosen {
    fn outcome(&self) -> Outcome {
        if self.study.ranking.recommended().is_some() { Outcome::Holds } else { Outcome::DoesNotHold }
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let ranking = &self.study.ranking;
        let mut lines = Lines::new(out);
        lines.item("Envelope", &words::envelope_at_pin(&self.study.resolved))?;
        network(&mut lines, self.study.resolved.network.as_ref())?;
        if !self.study.observed.is_empty() {
            claims(&mut lines, &self.study.claims)?;
        }
        assumed(&mut lines, &self.study.resolved, self.details)?;
        for view in &ranking.clocks {
            if let Err(error) = view.envelope {
                lines.item("Left out", &error.to_string())?;
            }
        }
        match &ranking.reason {
            Some(reason) => {
                if let Some(first) = ranking.recommended() {
                    let law = format!("{} at a tick of {}", first.parameters, self.study.tick(first));
                    lines.item("First", &strong(&law))?;
                }
                lines.more(&reason.to_string())?;
            }
            None => {
                lines
                    .item("None holds", &format!("{} candidates, nearest first", ranking.candidates.len()))?;
                for shortfall in ranking.candidates.iter().take(1).flat_map(|nearest| &nearest.shortfalls) {
                    lines.more(&format!("the first: {}", words::shortfall(shortfall)))?;
                }
                if let Some(text) = nothing_words::latency_shortfall(&self.study) {
                    lines.more(&text)?;
                }
            }
        }
        lines.plain("\n")?;
        lines.plain(&candidate_table(&self.study, self.list))?;
        lines.plain("\n")?;
        if ranking.candidates.iter().take(self.list).any(|one| one.pareto) {
            lines.item("*", "none that holds beats it in delay, ticks a second and RAM together")?;
            lines.plain("\n")?;
        }
        self.clock.write(&mut lines, self.details)?;
        if self.plot {
            let latency = &self.study.resolved.required.latency;
            let allowed_ns = latency.make.value.ns().min(latency.break_.value.ns());
            lines.plain(&format!("\n{}", ClockPlot { range: &self.clock.range, allowed_ns }))?;
        }
        written(&mut lines, &self.written)
    }

    fn to_json(&self) -> Value {
        json!({
            "requirement": report::requirement(&self.study.resolved),
            "envelope": report::physical(&self.study.physical),
            "claims": characterised::claims(&self.study.claims),
            "choice": report::ranking(&self.study.ranking),
            "clock": report::clock_range(&self.clock.range),
            "slowest_by_tolerance": self
                .clock
                .by_tolerance
                .iter()
                .map(|(ppm, slowest_ns)| json!({ "ppm": ppm, "slowest_ns": slowest_ns }))
                .collect::<Value>(),
            "written": self.written.iter().map(|path| path.display().to_string()).collect::<Value>(),
            "sleep": {
                "operations_per_hour": self.clock.activity.operations_per_hour,
                "disturbances_per_hour": self.clock.activity.disturbances_per_hour,
                "of_first": self.clock.asleep.as_ref().map(report::asleep),
            },
        })
    }
}

/// What stands in front of the pin, and what it does.
pub(super) fn network(lines: &mut Lines<'_>, front: Option<&InFront>) -> io::Result<()> {
    let Some(front) = front else { return Ok(()) };
    let sentences = front.sentences();
    for (index, sentence) in sentences.iter().enumerate() {
        if index == 0 { lines.item("Network", sentence)? } else { lines.more(sentence)? }
    }
    Ok(())
}

/// Columns at which the table has room for everything side by side, and below which it has not even for its numbers.
const ROOMY: usize = 100;
const NARROW: usize = 72;

/// The first candidates as a table.
fn candidate_table(study: &Study, list: usize) -> String {
    let mut table = Table::new();
    table.load_style(comfy_table::presets::NOTHING);
    table.set_content_arrangement(ContentArrangement::Dynamic);
    table.set_width(u16::try_from(columns()).unwrap_or(u16::MAX));
    let listed = || study.ranking.candidates.iter().take(list);
    // Where all that are listed hold, there is nothing to lack, and more room for the rest.
    let has_lack = listed().any(|one| !one.holds());
    let has_mark = listed().any(|one| one.pareto);
    let has_limit = !has_lack || columns() >= ROOMY;
    let mut header: Vec<&str> = has_mark.then_some("").into_iter().collect();
    let law = header.len();
    header.extend(["law", "tick", "make <", "break <"]);
    header.extend(has_limit.then_some("x limit"));
    header.extend(["median", "bytes"]);
    header.extend(has_lack.then_some("lacks"));
    table.set_header(header);
    for one in listed() {
        let (make, break_) = one.worst_below_ns.map_or(("-".into(), "-".into()), |worst| {
            (words::at_most(worst.make), words::at_most(worst.break_))
        });
        let median =
            one.measured.iter().filter_map(|m| m.make.latency.as_ref()).map(|l| l.delay.median_ns).max();
        let mark = if one.pareto { "*" } else { "" };
        let mut row: Vec<String> = has_mark.then(|| mark.to_owned()).into_iter().collect();
        row.extend([one.parameters.to_string(), study.tick(one).to_string(), make, break_]);
        row.extend(has_limit.then(|| match (one.times_limit, one.worst_below_ns) {
            (Some(times), _) => format!("{times:.2}"),
            (None, Some(_)) => "unknown".into(),
            (None, None) => "-".into(),
        }));
        row.extend([median.map_or("-".into(), words::about), one.state_bytes.to_string()]);
        row.extend(has_lack.then(|| one.shortfalls.first().map(lacks).unwrap_or_default()));
        table.add_row(row);
    }
    // The law takes what room is left and may be broken between its parameters; a header or a time is never broken.
    if columns() >= NARROW {
        for column in table.column_iter_mut().filter(|column| column.index != law) {
            column.set_constraint(ColumnConstraint::ContentWidth);
        }
    }
    table.trim_fmt() + "\n"
}

/// What is asked and not given, so short that it fits a column.
fn lacks(shortfall: &Shortfall) -> String {
    match shortfall {
        Shortfall::Unfaithful(Clause::Missed) => "misses".to_owned(),
        Shortfall::Unfaithful(_) => "false edge".to_owned(),
        Shortfall::Unproven => "a proof".to_owned(),
        Shortfall::TooSlow { change, below_ns, allowed_ns } => {
            format!("{} {}", words::at_most(below_ns - allowed_ns), words::change(*change))
        }
        Shortfall::TooBig { bytes, allowed } => counted(u64::from(bytes - allowed), "byte"),
        Shortfall::TooManyInstructions { instructions, allowed } => {
            instructions.map_or("a count".to_owned(), |count| format!("{} instr.", count - allowed))
        }
        Shortfall::FailsOnRecording { recording } => format!("recording {}", recording + 1),
    }
}
