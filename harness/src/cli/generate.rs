//! `harness generate`: invented recordings of contacts that one does not have.

use std::io::{self, Write};
use std::path::{Path, PathBuf};

use clap::{Args, ValueEnum};
use debounce_core::Change;
use serde_json::{Value, json};

use super::generate_list::Presets;
use super::lines::{Lines, grouped};
use super::{Answer, Failure, Outcome, OutputFolder, Session};
use crate::generate::{
    Actuation, Habit, Made, MadeLine, Panel, PanelContact, Preset, file, write_levels_csv, write_truth,
    write_volts_csv,
};
use crate::nearest::nearest;
use crate::problem::Problem;
use crate::quantity::Time;
use crate::report::words;
use crate::trace::write_vcd;

/// Invents recordings, seeded, with the truth beside them.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Invents recordings of contacts that one does not have: from a preset by name, whose numbers come \
                  from published measurements and data sheets, or from a scenario file with several contacts, what \
                  is done to them and what their lines pick up. The same seed gives the same bytes everywhere. The \
                  truth goes to a file beside the recording.",
    after_help = GenerateArguments::EXAMPLES
)]
pub struct GenerateArguments {
    /// A preset by name, or a scenario file (.toml)
    #[arg(value_name = "PRESET|SCENARIO", required_unless_present = "list")]
    pub what: Option<String>,
    /// List the presets and habits with their numbers and where these come from
    #[arg(long, conflicts_with_all = ["what", "output"])]
    pub list: bool,
    /// The recording to write, .vcd or .csv; the truth goes to NAME.truth.csv beside it
    #[arg(long, short, value_name = "FILE")]
    pub output: Option<PathBuf>,
    /// Write the volts at the inputs as well, to NAME.volts.csv
    #[arg(long, requires = "output")]
    pub volts: bool,
    /// The seed of everything random; over the one in a scenario file
    #[arg(long, value_name = "NUMBER")]
    pub seed: Option<u64>,
    /// Preset: how many operations, of an encoder how many detents
    #[arg(long, value_name = "COUNT", value_parser = clap::value_parser!(u64).range(1..=file::MOST_OPERATIONS))]
    pub operations: Option<u64>,
    /// Preset: who works it: presses, taps, fastest-taps, double-taps, holds or typing
    #[arg(long, value_name = "HABIT")]
    pub habit: Option<String>,
    /// Preset: how fast it is moved
    #[arg(long, value_enum, value_name = "SPEED")]
    pub actuation: Option<Speed>,
    /// The recorder's sample period; 1 us without it
    #[arg(long, value_name = "TIME")]
    pub resolution: Option<Time>,
}

/// How fast a contact is moved.
#[derive(ValueEnum, Clone, Copy, PartialEq, Eq, Debug)]
pub enum Speed {
    /// As by someone who hesitates
    Slow,
    /// As usual
    Usual,
    /// As by a blow
    Fast,
}

impl From<Speed> for Actuation {
    fn from(speed: Speed) -> Self {
        match speed {
            Speed::Slow => Self::Slow,
            Speed::Usual => Self::Usual,
            Speed::Fast => Self::Fast,
        }
    }
}

impl GenerateArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  What there is, and where the numbers come from:
    harness generate --list
  Sixty presses of a tactile button, with the truth beside them:
    harness generate tactile --operations 60 --seed 7 --output button.vcd
  A panel of several contacts, with volts, for a program:
    harness generate panel.toml --output panel.csv --volts --json";
}

impl GenerateArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        let Some(what) = &self.what else { return Ok(Box::new(Presets)) };
        let output = self.output.as_deref().map(Output::of).transpose()?;
        let mut panel = self.panel(what)?;
        if let Some(resolution) = self.resolution {
            panel.resolution_ns = resolution.ns();
        }
        if panel.resolution_ns == 0 {
            let problem = Problem::new("a sample period of 0 is none");
            return Err(problem.help("give --resolution \"1 us\"").into());
        }
        let made = session.during("inventing", || panel.generate(self.volts)).map_err(Problem::told)?;
        let remark = format!("invented: {what}, seed {}", panel.seed);
        let written = match output {
            Some(output) => output.write(&made, &remark, self.volts)?,
            None => {
                session.warn("nothing is written; give --output button.vcd");
                Vec::new()
            }
        };
        Ok(Box::new(Generated { what: what.clone(), panel, made, written }))
    }

    fn panel(&self, what: &str) -> Result<Panel, Failure> {
        if Path::new(what).extension().is_some_and(|extension| extension == "toml") {
            let given = [
                ("--operations", self.operations.is_some(), "count"),
                ("--habit", self.habit.is_some(), "habit"),
                ("--actuation", self.actuation.is_some(), "actuation"),
            ];
            if let Some((option, _, key)) = given.into_iter().find(|(_, is_given, _)| *is_given) {
                let problem = Problem::new(format!("{option} is for a preset, and this is a scenario file"));
                return Err(problem
                    .in_file(what)
                    .help(format!("write {key} under [[operation]] in it"))
                    .into());
            }
            return Ok(file::read(Path::new(what), self.seed)?);
        }
        let preset = Preset::find(what).ok_or_else(|| {
            let names = Preset::all().iter().map(|preset| preset.name);
            one_of(what, "a preset, and a scenario file ends in .toml", names)
        })?;
        let habit = self.habit.as_deref().unwrap_or("presses");
        let habit = Habit::find(habit)
            .ok_or_else(|| one_of(habit, "a habit", Habit::ALL.iter().map(|habit| habit.name)))?;
        let seed = self.seed.unwrap_or(1);
        let actuation = self.actuation.map_or(Actuation::Usual, Actuation::from);
        let contact = PanelContact {
            routines: vec![habit.routine(self.operations.unwrap_or(60), actuation)],
            detent_ns: preset.detent_ns,
            ..PanelContact::new(preset.name, preset.specimen(seed))
        };
        Ok(Panel { seed, resolution_ns: 1_000, contacts: vec![contact] })
    }
}

fn one_of<'a>(text: &str, what: &str, words: impl Iterator<Item = &'a str> + Clone) -> Problem {
    let help = match nearest(text, words.clone()) {
        Some(word) => format!("write {word}"),
        None => format!("write one of {}", words.collect::<Vec<_>>().join(", ")),
    };
    Problem::new(format!("\"{text}\" is not {what}")).help(help)
}

/// Where the files go.
struct Output {
    folder: OutputFolder,
    name: String,
    is_csv: bool,
}

impl Output {
    fn of(path: &Path) -> Result<Self, Problem> {
        let extension = path.extension().and_then(|extension| extension.to_str());
        let is_csv = match extension {
            Some("vcd") => false,
            Some("csv") => true,
            _ => {
                return Err(Problem::new("a recording is written as VCD or as CSV")
                    .in_file(path)
                    .help("give a name that ends in .vcd or .csv"));
            }
        };
        let (folder, name) = OutputFolder::of_file(path)?;
        Ok(Self { folder, name, is_csv })
    }

    fn write(self, made: &Made, remark: &str, with_volts: bool) -> Result<Vec<PathBuf>, Problem> {
        // The name ends in a point and three letters.
        let stem = self.name[..self.name.len() - 4].to_owned();
        let mut files = self.folder.stage();
        files.add(&self.name, |mut out| {
            if self.is_csv {
                return write_levels_csv(out, &made.lines);
            }
            let traces: Vec<_> = made.lines.iter().map(|line| (line.name.as_str(), &line.trace)).collect();
            write_vcd(&mut out, &traces, remark)
        })?;
        files.add(&format!("{stem}.truth.csv"), |out| write_truth(out, made, remark))?;
        if with_volts {
            files.add(&format!("{stem}.volts.csv"), |out| write_volts_csv(out, &made.lines))?;
        }
        files.commit()
    }
}

/// An invented recording and where it went.
struct Generated {
    what: String,
    panel: Panel,
    made: Made,
    written: Vec<PathBuf>,
}

/// The longest bounce after each of one sort of change.
fn longest_ns(line: &MadeLine, change: Change) -> Option<u64> {
    let changes = line.truth.iter().zip(&line.bounce_ends_ns);
    changes.filter(|(truth, _)| truth.change == change).map(|(truth, end)| end - truth.at_ns).max()
}

impl Answer for Generated {
    fn outcome(&self) -> Outcome {
        Outcome::Holds
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        lines.title(&format!("{}  (invented, seed {})", self.what, self.panel.seed))?;
        for line in &self.made.lines {
            let bounce = |change| longest_ns(line, change).map_or("none".to_owned(), words::about);
            let text = format!(
                "{} changes, {} edges, {}; longest bounce {} at a make, {} at a break",
                grouped(line.truth.len() as u64),
                grouped(line.trace.edges().len() as u64),
                words::count(line.noise.len(), "disturbance"),
                bounce(Change::Make),
                bounce(Change::Break),
            );
            lines.item("Channel", &format!("{}: {text}", line.name))?;
        }
        if !self.made.turns.is_empty() {
            lines.item("Turned", &format!("by {}", words::count(self.made.turns.len(), "detent")))?;
        }
        for (index, path) in self.written.iter().enumerate() {
            let text = path.display().to_string();
            if index == 0 { lines.item("Written", &text)? } else { lines.more(&text)? }
        }
        let (Some(path), Some(line)) = (self.written.first(), self.made.lines.first()) else { return Ok(()) };
        lines.item(
            "Next",
            &format!(
                "harness characterise {} --channel \"{}\" --closed high --resolution \"{:.20}\"",
                path.display(),
                line.name,
                Time::from_ns(self.panel.resolution_ns)
            ),
        )
    }

    fn to_json(&self) -> Value {
        let line = |line: &MadeLine| {
            json!({
                "channel": line.name,
                "changes": line.truth.len(),
                "edges": line.trace.edges().len(),
                "disturbances": line.noise.len(),
                "longest_bounce_ns": {
                    "make": longest_ns(line, Change::Make),
                    "break": longest_ns(line, Change::Break),
                },
                "ends_ns": line.trace.end_ns(),
            })
        };
        json!({
            "scenario": self.what,
            "seed": self.panel.seed,
            "resolution_ns": self.panel.resolution_ns,
            "channels": self.made.lines.iter().map(line).collect::<Value>(),
            "detents": self.made.turns.len(),
            "written": self.written.iter().map(|path| path.display().to_string()).collect::<Value>(),
        })
    }
}
