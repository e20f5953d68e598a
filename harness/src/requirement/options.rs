//! The same values as command-line options; an option stands over the file.

use std::path::{Path, PathBuf};

use clap::Args;
use debounce_core::{PerChange, PerPosition};

use super::check::check;
use super::pair::{ForChanges, ForPositions};
use super::{
    ContactKind, Core, Level, Origin, Reading, Recording, Requirement, Role, Sourced, TakenAt, Thresholds,
    TickChoice, read,
};
use crate::problem::{Problem, Problems};
use crate::quantity::{Bytes, Instructions, Share, TickPeriod, Ticks, Time, Voltage};

/// A requirement as options of a command.
///
/// Every quantity is written with its unit: "12 ms", "30 Hz", "2 %".
#[derive(Args, Clone, PartialEq, Debug, Default)]
pub struct RequirementOptions {
    /// Requirement file, contact.toml; the options below stand over it
    #[arg(long, short = 'r', value_name = "FILE", help_heading = "Requirement")]
    pub requirement: Option<PathBuf>,
    /// Name of the contact; the generated module is named after it
    #[arg(long, value_name = "TEXT", help_heading = "Requirement")]
    pub name: Option<String>,
    /// push-button, key, toggle, limit-switch, reed, relay, encoder or other
    #[arg(long, value_name = "KIND", help_heading = "Requirement")]
    pub kind: Option<ContactKind>,
    /// control, guarding or metering; the last two carry a caution
    #[arg(long, value_name = "ROLE", help_heading = "Requirement")]
    pub role: Option<Role>,
    /// Level of the line while the contact is closed: low or high
    #[arg(long, value_name = "LEVEL", help_heading = "Requirement")]
    pub closed: Option<Level>,
    /// Channel of the recordings given as arguments
    #[arg(long, value_name = "NAME", help_heading = "Requirement")]
    pub channel: Option<String>,
    /// Where the recordings were taken: contact, or pin behind the network that the requirement file states
    #[arg(long, value_name = "PLACE", help_heading = "Requirement")]
    pub taken_at: Option<TakenAt>,
    /// At or below this voltage the line reads low
    #[arg(
        long,
        value_name = "VOLTS",
        help_heading = "Requirement",
        requires = "threshold_high",
        allow_hyphen_values = true
    )]
    pub threshold_low: Option<Voltage>,
    /// At or above this voltage the line reads high
    #[arg(
        long,
        value_name = "VOLTS",
        help_heading = "Requirement",
        requires = "threshold_low",
        allow_hyphen_values = true
    )]
    pub threshold_high: Option<Voltage>,
    /// Longest delay of a report: "20 ms" or "make=20 ms,break=30 ms"
    #[arg(long, value_name = "TIME", help_heading = "Requirement")]
    pub latency: Option<ForChanges<Time>>,
    /// Shortest time closed that must still be reported
    #[arg(long, value_name = "TIME", help_heading = "Requirement")]
    pub shortest_closed: Option<Time>,
    /// Shortest time open that must still be reported
    #[arg(long, value_name = "TIME", help_heading = "Requirement")]
    pub shortest_open: Option<Time>,
    /// Longest bounce: "5 ms" or "make=5 ms,break=3 ms"
    #[arg(long, value_name = "TIME", help_heading = "Requirement")]
    pub bounce: Option<ForChanges<Time>>,
    /// Widest disturbance: "300 us" or "open=300 us,closed=100 us"
    #[arg(long, value_name = "TIME", help_heading = "Requirement")]
    pub disturbance: Option<ForPositions<Time>>,
    /// Shortest time between two disturbances, `quiet` in the requirement file
    #[arg(long = "quiet-time", id = "quiet_time", value_name = "TIME", help_heading = "Requirement")]
    pub quiet: Option<Time>,
    /// Shortest settled time between a bounce and a disturbance
    #[arg(long, value_name = "TIME", help_heading = "Requirement")]
    pub calm: Option<Time>,
    /// How sure a claim from recordings must be
    #[arg(long, value_name = "SHARE", help_heading = "Requirement")]
    pub confidence: Option<Share>,
    /// Which share of all operations such a claim must cover
    #[arg(long, value_name = "SHARE", help_heading = "Requirement")]
    pub coverage: Option<Share>,
    /// How much is added to what the recordings show
    #[arg(long, value_name = "SHARE", help_heading = "Requirement")]
    pub margin: Option<Share>,
    /// Tick periods or rates to choose from: "1 ms,2 ms,100 Hz"
    #[arg(long, value_name = "PERIODS", help_heading = "Requirement", value_delimiter = ',')]
    pub tick: Vec<TickPeriod>,
    /// How far the tick period may be off, either way
    #[arg(long, value_name = "SHARE", help_heading = "Requirement")]
    pub tolerance: Option<Share>,
    /// Peak-to-peak jitter of a sample instant
    #[arg(long, value_name = "TIME", help_heading = "Requirement")]
    pub jitter: Option<Time>,
    /// Ticks that may be lost in a row
    #[arg(long, value_name = "TICKS", help_heading = "Requirement")]
    pub lost: Option<Ticks>,
    /// RAM for each input
    #[arg(long, value_name = "BYTES", help_heading = "Requirement")]
    pub ram: Option<Bytes>,
    /// Fastest tick that the firmware can serve
    #[arg(long, value_name = "RATE", help_heading = "Requirement")]
    pub fastest_tick: Option<TickPeriod>,
    /// Instructions of a tick for each input, as counted for its kind of law
    #[arg(long, value_name = "COUNT", help_heading = "Requirement")]
    pub instructions: Option<Instructions>,
    /// Core on which instructions are counted: cortex-m3, cortex-m0 or riscv32imc; all of them without it
    #[arg(long, value_name = "CORE", help_heading = "Requirement")]
    pub core: Option<Core>,
}

/// The value of an option over that of the file.
pub(super) fn over<T: Clone>(target: &mut Option<Sourced<T>>, option: &Option<T>, name: &'static str) {
    if let Some(value) = option {
        *target = Some(Sourced::new(value.clone(), Origin::Option(name)));
    }
}

impl RequirementOptions {
    /// The requirement of the file, if one is named, with these options and `recordings` over it.
    ///
    /// # Errors
    /// Everything that is wrong with the file, or with the two together.
    pub fn load(&self, recordings: &[PathBuf]) -> Result<Requirement, Problems> {
        let requirement = match &self.requirement {
            Some(path) => read(path)?,
            None => Requirement::default(),
        };
        self.over(requirement, recordings)
    }

    /// These options and `recordings` over `requirement`.
    ///
    /// # Errors
    /// Where the two together contradict each other.
    pub fn over(
        &self,
        mut requirement: Requirement,
        recordings: &[PathBuf],
    ) -> Result<Requirement, Problems> {
        let mut problems = Vec::new();
        self.recordings_over(&mut requirement, recordings, &mut problems);
        self.role_over(&mut requirement, &mut problems);
        let contact = &mut requirement.contact;
        over(&mut contact.name, &self.name, "--name");
        over(&mut contact.kind, &self.kind, "--kind");
        over(&mut contact.closed, &self.closed, "--closed");
        let required = &mut requirement.required;
        let no_change = ForChanges(PerChange::default());
        let no_position = ForPositions(PerPosition::default());
        let ForChanges(latency) = self.latency.as_ref().unwrap_or(&no_change);
        over(&mut required.latency.make, &latency.make, "--latency");
        over(&mut required.latency.break_, &latency.break_, "--latency");
        over(&mut required.shortest.closed, &self.shortest_closed, "--shortest-closed");
        over(&mut required.shortest.open, &self.shortest_open, "--shortest-open");
        let ForChanges(bounce) = self.bounce.as_ref().unwrap_or(&no_change);
        over(&mut required.bounce.make, &bounce.make, "--bounce");
        over(&mut required.bounce.break_, &bounce.break_, "--bounce");
        let ForPositions(disturbance) = self.disturbance.as_ref().unwrap_or(&no_position);
        over(&mut required.disturbance.open, &disturbance.open, "--disturbance");
        over(&mut required.disturbance.closed, &disturbance.closed, "--disturbance");
        over(&mut required.quiet, &self.quiet, "--quiet-time");
        over(&mut required.calm, &self.calm, "--calm");
        over(&mut requirement.confidence, &self.confidence, "--confidence");
        over(&mut requirement.coverage, &self.coverage, "--coverage");
        over(&mut requirement.margin, &self.margin, "--margin");
        let ticks = (!self.tick.is_empty()).then(|| {
            let mut periods = self.tick.clone();
            periods.sort();
            periods.dedup();
            TickChoice::OneOf(periods)
        });
        let clock = &mut requirement.clock;
        over(&mut clock.ticks, &ticks, "--tick");
        over(&mut clock.tolerance, &self.tolerance, "--tolerance");
        over(&mut clock.jitter, &self.jitter, "--jitter");
        over(&mut clock.lost, &self.lost, "--lost");
        over(&mut requirement.budget.ram, &self.ram, "--ram");
        over(&mut requirement.budget.fastest_tick, &self.fastest_tick, "--fastest-tick");
        over(&mut requirement.budget.instructions, &self.instructions, "--instructions");
        over(&mut requirement.budget.core, &self.core, "--core");
        problems.extend(check(&requirement));
        match Problems::from_found(problems) {
            Some(problems) => Err(problems),
            None => Ok(requirement),
        }
    }

    /// Recordings given as arguments take the place of those in the file.
    fn recordings_over(&self, requirement: &mut Requirement, paths: &[PathBuf], problems: &mut Vec<Problem>) {
        const ARGUMENT: Origin = Origin::Option("RECORDING");
        let thresholds =
            self.threshold_low.zip(self.threshold_high).map(|(low, high)| Thresholds { low, high });
        if let Some(Thresholds { low, high }) = thresholds
            && low >= high
        {
            let message = format!("--threshold-low {low} is not below --threshold-high {high}");
            problems.push(
                Problem::new(message).help("between the two the line keeps its level; give low below high"),
            );
        }
        for path in paths.iter().filter(|path| path.extension().is_some_and(|extension| extension == "toml"))
        {
            let problem = Problem::new("this is a requirement file, not a recording").in_file(path);
            problems.push(problem.help(format!("give it as --requirement {}", path.display())));
        }
        if !paths.is_empty() {
            let recording = |path: &Path| Recording {
                path: Sourced::new(path.to_path_buf(), ARGUMENT),
                channel: None,
                thresholds: None,
                closed: None,
                taken_at: None,
                reading: Reading::default(),
                sha256: None,
            };
            requirement.recordings = paths.iter().map(|path| recording(path)).collect();
        }
        for recording in &mut requirement.recordings {
            over(&mut recording.channel, &self.channel, "--channel");
            over(&mut recording.taken_at, &self.taken_at, "--taken-at");
            over(&mut recording.thresholds, &thresholds, "--threshold-low");
        }
    }

    /// An option may add a caution to what the file says, and never take one away.
    fn role_over(&self, requirement: &mut Requirement, problems: &mut Vec<Problem>) {
        let Some(role) = self.role else { return };
        let given = requirement.contact.role;
        if let (Some(given), Some(source)) = (given, requirement.source())
            && let Some(span) = given.origin.span()
            && given.value.caution().is_some()
            && given.value != role
        {
            let message =
                format!("--role {role} would take away the caution that \"{}\" carries", given.value);
            problems.push(
                Problem::new(message)
                    .mark(source, span, "the role of the contact")
                    .help("change the role in the requirement file, if it is wrong, and leave --role out"),
            );
            return;
        }
        over(&mut requirement.contact.role, &Some(role), "--role");
    }
}
