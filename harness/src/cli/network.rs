//! `harness network`: the resistors, the capacitor and the input between a contact and its pin.

use std::io::{self, Write};
use std::path::PathBuf;

use clap::Args;
use debounce_core::{Change, PerChange, Position};
use serde_json::{Value, json};

use super::input::source_file;
use super::lines::Lines;
use super::report::{ReportOption, written};
use super::{Answer, Failure, Outcome, Session};
use crate::network::{Analysis, Delay, Review, Waveform, caution, review};
use crate::problem::Problem;
use crate::quantity::Spread;
use crate::report::si::{at_least, at_most, between, si};
use crate::report::{html, network as report, words};
use crate::requirement::{Level, NetworkOptions, NetworkTable, Origin, ResolvedNetwork, Role, read};

/// Works out the network of resistors, capacitor and input in front of a pin.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Works out what stands between a contact and its pin: time to threshold at make and break over all \
                  tolerances, contact current, which pulses get through, how slow an edge becomes, power while held. \
                  The same figures in [network] of a requirement file count in choose, study and emit, where \
                  network and logic share one latency.",
    after_help = NetworkArguments::EXAMPLES
)]
pub struct NetworkArguments {
    /// Requirement file, contact.toml; the options below stand over its network
    #[arg(long, short = 'r', value_name = "FILE")]
    pub requirement: Option<PathBuf>,
    /// Level of the line while the contact is closed: low with the contact to ground, high with it to the supply
    #[arg(long, value_name = "LEVEL")]
    pub closed: Option<Level>,
    /// control, guarding or metering; the last two carry a caution
    #[arg(long, value_name = "ROLE")]
    pub role: Option<Role>,
    /// The network.
    #[command(flatten)]
    pub network: NetworkOptions,
    /// The report.
    #[command(flatten)]
    pub report: ReportOption,
}

impl NetworkArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  A push-button on a microcontroller pin:
    harness network --supply \"3.3 V 5 %\" --pull \"10 kohm 5 %\" \\
      --series \"1 kohm 5 %\" --capacitor \"100 nF 10 % X7R\"
  The same with a Schmitt gate and a diode that quickens the edge after a break:
    harness network --input schmitt-hc --supply \"5 V\" --series \"10 kohm\" \\
      --capacitor \"100 nF\" --diode silicon
  The [network] of a requirement file, with another capacitor:
    harness network --requirement contact.toml --capacitor \"22 nF 5 % C0G\"";
}

impl NetworkArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        let report = self.report.prepare()?;
        let requirement = self.requirement.as_ref().map(|path| read(path)).transpose()?;
        let mut table = NetworkTable::default();
        let (mut closed, mut role) = (self.closed, self.role.unwrap_or(Role::Control));
        let mut source = None;
        if let Some(requirement) = &requirement {
            table = requirement.network.clone().unwrap_or_default();
            closed = closed.or(requirement.contact.closed.map(|closed| closed.value));
            // An option may add a caution and never take one away.
            role = requirement
                .contact
                .role
                .map(|role| role.value)
                .filter(|r| r.caution().is_some())
                .unwrap_or(role);
            source = requirement.source();
        }
        let table = self.network.over(table);
        if table == NetworkTable::default() {
            let problem = Problem::new("nothing says what the network is");
            let help = "give parts as options, such as --pull \"10 kohm 5 %\" --capacitor \"100 nF 10 %\", or a requirement file with [network]";
            return Err(problem.help(help).into());
        }
        let resolved = table.resolve(closed, source)?;
        let analysis = resolved.network.analysis();
        let review = review(&resolved, &analysis);
        let waveforms = resolved.network.waveforms();
        let mut written = Vec::new();
        if let Some(report) = report {
            let files = self.requirement.iter().map(|path| source_file(path, "requirement"));
            let files = files.collect::<Result<_, _>>()?;
            let cautions: Vec<_> = [role.caution(), caution(&resolved)].into_iter().flatten().collect();
            let found = html::Networked {
                resolved: &resolved,
                analysis: &analysis,
                review: &review,
                waveforms: &waveforms,
                cautions: &cautions,
            };
            written.push(report.write(session, files, |origin| html::network(&found, origin))?);
        }
        Ok(Box::new(NetworkAnswer { resolved, analysis, review, waveforms, role, written }))
    }
}

/// A network that was worked out.
struct NetworkAnswer {
    resolved: ResolvedNetwork,
    analysis: Analysis,
    review: Review,
    waveforms: PerChange<Waveform>,
    role: Role,
    written: Vec<PathBuf>,
}

impl Answer for NetworkAnswer {
    fn outcome(&self) -> Outcome {
        if self.review.troubles.is_empty() { Outcome::Holds } else { Outcome::DoesNotHold }
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        self.parts(&mut lines)?;
        self.times(&mut lines)?;
        self.pulses(&mut lines)?;
        self.contact(&mut lines)?;
        if let Some(synchroniser) = &self.resolved.synchroniser {
            let seconds = synchroniser.mean_time_between_failures();
            lines.item("Synchroniser", &format!(
                "fails once in {} on average: e^(settling/tau) / (window x samples a second x edges a second)",
                long_time(seconds)
            ))?;
        }
        for trouble in &self.review.troubles {
            lines.item("Wrong", &trouble.what)?;
            lines.more(trouble.help)?;
        }
        for note in &self.review.notes {
            lines.item("Note", note)?;
        }
        for text in [caution(&self.resolved), self.role.caution()].into_iter().flatten() {
            lines.item("Caution", text)?;
        }
        lines.item("Method", match self.resolved.network.diode {
            None => "exact (one exponential for each of two capacitances); least and greatest by moving each part to its ends",
            Some(_) => "implicit steps through Shockley's diode equation, each in error by less than a millionth of the supply; least and greatest by moving each part to its ends",
        })?;
        written(&mut lines, &self.written)
    }

    fn to_json(&self) -> Value {
        let Self { resolved, analysis, review, waveforms, role, .. } = self;
        let mut value = report::network(resolved, analysis, review, waveforms);
        value["cautions"] =
            json!([caution(resolved), role.caution()].into_iter().flatten().collect::<Vec<_>>());
        value["written"] = self.written.iter().map(|path| path.display().to_string()).collect();
        value
    }
}

impl NetworkAnswer {
    fn parts(&self, lines: &mut Lines<'_>) -> io::Result<()> {
        let side = match self.resolved.network.closed {
            Level::Low => "the contact leads to ground",
            Level::High => "the contact leads to the supply",
        };
        lines.item("Network", side)?;
        for row in &self.resolved.rows {
            let key = row.key.trim_start_matches("network.");
            let because = match row.origin {
                Origin::Default(_) => format!(" ({})", row.origin),
                _ => String::new(),
            };
            lines.more(&format!("{key} = {}{because}", row.text))?;
        }
        Ok(())
    }

    fn times(&self, lines: &mut Lines<'_>) -> io::Result<()> {
        let Analysis { rest, delay, slowest_edge, recovery, .. } = &self.analysis;
        lines.item(
            "At rest",
            &format!(
                "the pin is at {} while open and at {} while closed",
                range(rest.open, "V"),
                range(rest.closed, "V")
            ),
        )?;
        for (label, change) in [("Make", Change::Make), ("Break", Change::Break)] {
            let Delay { min, typ, max } = delay.at(change);
            lines.item(label, &format!(
                "read after {} at least, {} typically, {} at most; the edge takes up to {} at its threshold",
                at_least(min, "s"), si(typ, "s"), at_most(max, "s"), at_most(slowest_edge.at(change), "s/V")
            ))?;
        }
        lines.item(
            "Recovery",
            &format!(
                "a position held for {} is seen whatever came before it; a quicker operation may be lost",
                at_most(*recovery, "s")
            ),
        )
    }

    fn pulses(&self, lines: &mut Lines<'_>) -> io::Result<()> {
        let lone = &self.analysis.lone_pulse;
        lines.item(
            "Rejects",
            &format!(
                "a lone pulse {} while open, {} while closed",
                width(lone.open, f64::INFINITY),
                width(lone.closed, f64::INFINITY)
            ),
        )?;
        for (burst, limit) in &self.analysis.bursts {
            let one = |position: Position| width(limit.at(position).widest, burst.period);
            lines.more(&format!(
                "{}: each {} while open, {} while closed",
                burst.name,
                one(Position::Open),
                one(Position::Closed)
            ))?;
        }
        Ok(())
    }

    fn contact(&self, lines: &mut Lines<'_>) -> io::Result<()> {
        let Analysis { inrush, inrush_lasts, steady, energy, held_power, cable_inrush, .. } = &self.analysis;
        let cable = if *cable_inrush > 0.0 {
            format!(" and, for some nanoseconds, up to {} from the cable", at_most(*cable_inrush, "A"))
        } else {
            String::new()
        };
        lines.item(
            "Contact",
            &format!(
                "carries {} for up to {} just after a make{cable} (up to {} of energy), then {}",
                range(*inrush, "A"),
                at_most(*inrush_lasts, "s"),
                at_most(*energy, "J"),
                range(*steady, "A")
            ),
        )?;
        lines.item("Power", &format!("{} from the supply while held closed", range(*held_power, "W")))
    }
}

/// The widest pulse of which nothing is seen, in a burst of such a period.
fn width(seconds: f64, period: f64) -> String {
    if seconds < 1e-9 {
        "of no width".to_owned()
    } else if seconds >= period {
        "of any width".to_owned()
    } else {
        format!("up to {}", at_least(seconds, "s"))
    }
}

fn range(spread: Spread, unit: &str) -> String {
    between(spread.min, spread.max, unit)
}

/// Seconds, days or years: what a mean time between failures is told in.
fn long_time(seconds: f64) -> String {
    const DAY: f64 = 86_400.0;
    let digits = |value: f64| if value < 1e6 { format!("{value:.1}") } else { format!("{value:.2e}") };
    if seconds < DAY {
        words::about((seconds * 1e9).round() as u64)
    } else if seconds < 1_000.0 * DAY {
        format!("{} days", digits(seconds / DAY))
    } else {
        format!("{} years", digits(seconds / (365.25 * DAY)))
    }
}
