//! The summary of a study: what was recorded, what is recommended, what is proved and for which envelope, what
//! to do next. It fits one screen.

use std::io::{self, Write};
use std::path::PathBuf;

use debounce_core::{Change, PerChange};
use serde_json::{Value, json};

use super::lines::{Lines, strong};
use super::{Answer, Outcome};
use crate::choose::{Candidate, Judgement};
use crate::prove::Recovery;
use crate::quantity::TickPeriod;
use crate::report::{json, words};
use crate::study::{Claim, Guarantees, Observed, Study};

/// A finished study and the files it wrote.
pub(super) struct StudyAnswer {
    pub(super) study: Study,
    pub(super) demo: bool,
    pub(super) written: Vec<PathBuf>,
}

impl Answer for StudyAnswer {
    fn outcome(&self) -> Outcome {
        if self.study.holds() { Outcome::Holds } else { Outcome::DoesNotHold }
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let study = &self.study;
        let mut lines = Lines::new(out);
        let marked = if self.demo { "  (built-in demonstration, invented)" } else { "" };
        lines.title(&format!("{}{marked}", study.resolved.name.value))?;
        for one in &study.observed {
            recorded(&mut lines, one)?;
        }
        self.claims(&mut lines)?;
        lines.item("Envelope", &format!("the contact {}", words::envelope(&study.physical).join("; ")))?;
        match (study.ranking.recommended(), &study.guarantees) {
            (Some(best), Some(found)) => self.recommended(&mut lines, best, found)?,
            _ => self.nothing_holds(&mut lines)?,
        }
        self.conformance(&mut lines)?;
        if let Some(caution) = study.resolved.caution() {
            lines.item("Caution", caution)?;
        }
        self.next(&mut lines)
    }

    fn to_json(&self) -> Value {
        let mut value = json::study(&self.study);
        value["demo"] = json!(self.demo);
        value["written"] = self.written.iter().map(|path| path.display().to_string()).collect();
        value
    }
}

fn recorded(lines: &mut Lines<'_>, one: &Observed) -> io::Result<()> {
    let figures = &one.figures;
    let span = one.recording.trace.end_ns() - one.recording.trace.start_ns();
    let disturbances = figures.disturbances.open.count + figures.disturbances.closed.count;
    lines.item(
        "Recorded",
        &format!(
            "{}, channel {}, {}: {}, {}, {}; {} in doubt",
            one.name,
            one.recording.channel,
            words::about(span),
            words::count(figures.changes.make.count, "make"),
            words::count(figures.changes.break_.count, "break"),
            words::count(disturbances, "disturbance"),
            one.segmentation.ambiguous(),
        ),
    )?;
    for change in [Change::Make, Change::Break] {
        if let Some(bounce) = figures.changes.of(change).bounce_ns {
            lines.more(&format!(
                "bounce at a {:<6} median {:>8}, 95 % {:>8}, longest {:>8}",
                words::change(change),
                words::about(bounce.median),
                words::about(bounce.p95),
                words::about(bounce.max)
            ))?;
        }
    }
    Ok(())
}

impl StudyAnswer {
    /// What the recorded operations allow to claim of those to come.
    fn claims(&self, lines: &mut Lines<'_>) -> io::Result<()> {
        let resolved = &self.study.resolved;
        let (confidence, coverage) = (resolved.confidence.value, resolved.coverage.value);
        for change in [Change::Make, Change::Break] {
            let claim = Claim::of(&self.study.observed, change, confidence, coverage);
            let Some(claim) = claim.map_err(io::Error::other)? else { continue };
            let enough = if claim.operations >= claim.needed {
                String::new()
            } else {
                format!("; {} are needed for {coverage}", claim.needed)
            };
            // Rounded down to a tenth of a percent, which understates what is covered.
            let covered = (claim.covered * 1000.0).floor() / 10.0;
            lines.item(
                "Claim",
                &format!(
                    "with {confidence} confidence {covered:.1} % of {}s bounce no longer than {} ({} recorded{enough}), were they independent",
                    words::change(change),
                    words::at_most(claim.longest_ns),
                    claim.operations,
                ),
            )?;
        }
        Ok(())
    }

    fn recommended(&self, lines: &mut Lines<'_>, best: &Candidate, found: &Guarantees) -> io::Result<()> {
        let tick = self.study.tick(best);
        lines.item("Recommended", &strong(&format!("{} at a tick of {tick}", best.parameters)))?;
        if let Some(reason) = &self.study.ranking.reason {
            lines.more(&reason.to_string())?;
        }
        let Some(PerChange { make, break_ }) = best.worst_below_ns else { return Ok(()) };
        lines.item(
            "Proved",
            &format!(
                "every operation inside the envelope is reported once and in order: a make in less than {}, a break in less than {}",
                strong(&words::at_most(make)),
                strong(&words::at_most(break_)),
            ),
        )?;
        lines.more(&format!(
            "for all {} reachable states of contact, disturbances and logic{}{}",
            grouped(found.proof.states),
            best.times_limit
                .map(|times| format!("; {times:.2} x the limit of any logic at this tick"))
                .unwrap_or_default(),
            best.times_physical_limit
                .map(|times| format!(", {times:.2} x what no tick could beat"))
                .unwrap_or_default(),
        ))?;
        if let Some(line) = beyond(found, tick) {
            lines.more(&line)?;
        }
        for measured in &best.measured {
            let (Some(make), Some(break_)) = (&measured.make.latency, &measured.break_.latency) else {
                continue;
            };
            lines.item(
                "Measured",
                &format!(
                    "over every phase of the tick, none missed, none false: make median {}, worst {}; break median {}, worst {}",
                    words::about(make.delay.median_ns),
                    words::at_most(make.delay.below_ns),
                    words::about(break_.delay.median_ns),
                    words::at_most(break_.delay.below_ns),
                ),
            )?;
        }
        let ram = best.state_bytes;
        lines.item(
            "Cost",
            &format!("{ram} bytes of RAM an input, {:.0} ticks a second", tick.ticks_per_second()),
        )
    }

    fn nothing_holds(&self, lines: &mut Lines<'_>) -> io::Result<()> {
        let ranking = &self.study.ranking;
        lines.item(
            "Recommended",
            &strong(&format!("nothing: none of {} candidates holds", ranking.candidates.len())),
        )?;
        let Some(nearest) = ranking.candidates.first() else {
            return lines
                .more("no tick period left anything to try; allow a longer latency or a shorter tick");
        };
        lines.more(&format!("nearest: {} at a tick of {}", nearest.parameters, self.study.tick(nearest)))?;
        for shortfall in &nearest.shortfalls {
            lines.more(&format!("  but {}", words::shortfall(shortfall)))?;
        }
        if let Judgement::Unproven(why) = &nearest.judgement {
            lines.more(&format!("  {why}"))?;
        }
        let PerChange { make, break_ } = ranking.physical_limit_ns;
        lines.more(&format!(
            "no logic at any tick can promise less than {} at a make or {} at a break in this envelope",
            words::at_most(make),
            words::at_most(break_)
        ))
    }

    fn conformance(&self, lines: &mut Lines<'_>) -> io::Result<()> {
        for (one, conforms) in self.study.observed.iter().zip(&self.study.conformance) {
            if conforms.conforms() {
                lines.item("Conforms", &format!("{} lies inside the envelope of the proof", one.name))?;
                continue;
            }
            let number = conforms.violations.len();
            lines.item(
                "Leaves it",
                &format!("{} leaves the envelope at {}:", one.name, words::count(number, "place")),
            )?;
            for violation in conforms.violations.iter().take(SHOWN) {
                lines.more(&format!(
                    "{}: {} ({} found, {} allowed)",
                    words::about(violation.at_ns),
                    violation.clause.text(),
                    words::about(violation.found_ns),
                    words::about(violation.allowed_ns)
                ))?;
            }
            if number > SHOWN {
                lines.more(&format!("and {} more; --json lists them all", number - SHOWN))?;
            }
        }
        Ok(())
    }

    fn next(&self, lines: &mut Lines<'_>) -> io::Result<()> {
        if !self.study.holds() {
            return lines.item(
                "Next",
                "relax what is asked, record the contact again, or state the figures that the recording exceeds",
            );
        }
        if self.written.is_empty() {
            let again =
                if self.demo { "harness study --output results" } else { "the same with --output FOLDER" };
            lines.item("Next", &format!("{again} writes the Rust module and the results as JSON"))?;
        } else {
            let files: Vec<String> = self.written.iter().map(|path| path.display().to_string()).collect();
            lines.item("Written", &files.join(", "))?;
            lines.item("Next", "add the .rs file to the firmware beside debounce-core and tick it; its build checks the choice again")?;
        }
        if self.demo {
            lines.more("with your own recording: harness study gate.vcd --latency \"20 ms\"")?;
        }
        Ok(())
    }
}

/// Violations listed on the screen.
const SHOWN: usize = 5;

/// What is proved beyond the bounds, in one line.
fn beyond(found: &Guarantees, tick: TickPeriod) -> Option<String> {
    let immunity = found.immunity?;
    let pair = found.shortest_operations.first()?;
    let recovery = match found.after_short_operations.as_ref()? {
        Recovery::Within(samples) => format!("recovers from shorter ones within {samples} ticks"),
        Recovery::Never(_) => "may stay wrong after shorter ones".to_owned(),
    };
    let width = |width: Option<u32>| width.map_or("none".to_owned(), |ticks| ticks.to_string());
    Some(format!(
        "at {tick}: bears disturbances up to {} ticks open and {} closed; serves operations down to {} ticks closed, {} open; {recovery}",
        width(immunity.open),
        width(immunity.closed),
        pair.closed,
        pair.open,
    ))
}

/// A number with its thousands apart.
fn grouped(number: u64) -> String {
    let digits = number.to_string();
    let mut text = String::new();
    for (index, digit) in digits.chars().enumerate() {
        if index > 0 && (digits.len() - index).is_multiple_of(3) {
            text.push(' ');
        }
        text.push(digit);
    }
    text
}
