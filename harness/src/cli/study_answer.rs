//! The summary of a study: what was recorded, what is recommended, what is proved and for which envelope, what
//! to do next. It fits one screen.

use std::io::{self, Write};
use std::path::PathBuf;

use debounce_core::PerChange;
use serde_json::{Value, json};

use super::assumed::assumed_briefly;
use super::choose::network;
use super::lines::{Lines, grouped, strong};
use super::recorded::{claims, recorded};
use super::report::written;
use super::{Answer, Outcome};
use crate::choose::{Candidate, Judgement};
use crate::prove::Recovery;
use crate::quantity::{TickPeriod, counted};
use crate::report::{claim_words, json, nothing_words, words};
use crate::requirement::TakenAt;
use crate::study::{Guarantees, Study};

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
        if !study.observed.is_empty() {
            claims(&mut lines, &study.claims)?;
        }
        lines.item("Envelope", &words::envelope_at_pin(&study.resolved))?;
        network(&mut lines, study.resolved.network.as_ref())?;
        assumed_briefly(&mut lines, &study.resolved)?;
        match (study.ranking.recommended(), &study.guarantees) {
            (Some(best), Some(found)) => self.recommended(&mut lines, best, found)?,
            _ => nothing_holds(&mut lines, study)?,
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

impl StudyAnswer {
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
            best.times_limit.map_or("; limit unknown".to_owned(), |times| {
                format!("; {times:.2} x the limit of any logic at this tick")
            }),
            best.times_physical_limit
                .map(|times| format!(", {times:.2} x what no tick could beat"))
                .unwrap_or_default(),
        ))?;
        if let Some(wider) = found.explored_wider() {
            lines.more(&format!(
                "explored with dwells of {} open and {} closed and a quiet of {} samples, which allows all that the envelope does and more",
                wider.dwell.open, wider.dwell.closed, wider.quiet
            ))?;
        }
        if let Some(line) = beyond(found, tick) {
            lines.more(&line)?;
        }
        for (one, measured) in self.study.observed.iter().zip(&best.measured) {
            let (Some(make), Some(break_)) = (&measured.make.latency, &measured.break_.latency) else {
                continue;
            };
            lines.item(
                "Measured",
                &format!(
                    "over every phase of the tick, none missed, none false: make median {}, worst {}; break median {}, worst {}{}",
                    words::about(make.delay.median_ns),
                    words::at_most(make.delay.below_ns),
                    words::about(break_.delay.median_ns),
                    words::at_most(break_.delay.below_ns),
                    if one.is_behind_network() { "; counted from the first edge at the pin" } else { "" },
                ),
            )?;
        }
        if let Some(text) =
            self.study.failures().and_then(|all| claim_words::failures(&all, self.study.claims.confidence))
        {
            lines.more(&text)?;
        }
        let ram = best.state_bytes;
        lines.item(
            "Cost",
            &format!("{ram} bytes of RAM an input, {:.0} ticks a second", tick.ticks_per_second()),
        )
    }

    fn conformance(&self, lines: &mut Lines<'_>) -> io::Result<()> {
        for (one, conforms) in self.study.observed.iter().zip(&self.study.conformance) {
            if conforms.conforms() {
                let inside = match one.taken_at.map(|taken_at| taken_at.value) {
                    Some(TakenAt::Contact) => {
                        "the envelope of the contact that the network was worked out for"
                    }
                    _ if self.study.guarantees.is_some() => "the envelope of the proof",
                    _ => "the required envelope; nothing is proved of it",
                };
                lines.item("Conforms", &format!("{} lies inside {inside}", one.name))?;
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
                    words::instant(violation.at_ns),
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
            return lines.item("Next", nothing_words::advice(&self.study));
        }
        written(lines, &self.written)?;
        if self.written.iter().any(|path| path.extension().is_some_and(|ending| ending == "rs")) {
            lines.item("Next", "add the .rs file to the firmware beside debounce-core and tick it; its build checks the choice again")?;
        } else {
            let again =
                if self.demo { "harness study --output results" } else { "the same with --output FOLDER" };
            lines.item(
                "Next",
                &format!("{again} writes the report, the Rust module and the results as JSON"),
            )?;
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
    let beyond = &found.beyond;
    let immunity = beyond.immunity.as_ref().ok()?;
    let pair = beyond.shortest_operations.as_ref().ok()?.first()?;
    let recovery = match beyond.after_short_operations.as_ref().ok()? {
        Recovery::Within(samples) => {
            format!("recovers from shorter ones within {}", counted(u64::from(*samples), "tick"))
        }
        Recovery::Never(_) => "may stay wrong after shorter ones".to_owned(),
    };
    let ticks = |number: u32| counted(u64::from(number), "tick");
    let width = |width: Option<u32>| width.map_or("none".to_owned(), ticks);
    Some(format!(
        "at {tick}: bears disturbances up to {} open and {} closed; serves operations down to {} closed, {} open; {recovery}",
        width(immunity.open),
        width(immunity.closed),
        ticks(pair.closed),
        ticks(pair.open),
    ))
}

/// That nothing holds, what comes nearest, and what nothing could beat.
pub(super) fn nothing_holds(lines: &mut Lines<'_>, study: &Study) -> io::Result<()> {
    let ranking = &study.ranking;
    lines.item(
        "Recommended",
        &strong(&format!("nothing: none of {} candidates holds", ranking.candidates.len())),
    )?;
    let Some(nearest) = ranking.candidates.first() else {
        return lines.more("no tick period left anything to try; allow a longer latency or a shorter tick");
    };
    lines.more(&format!("nearest: {} at a tick of {}", nearest.parameters, study.tick(nearest)))?;
    for shortfall in &nearest.shortfalls {
        lines.more(&format!("  but {}", words::shortfall(shortfall)))?;
    }
    if let Judgement::Unproven(why) = &nearest.judgement {
        lines.more(&format!("  {why}"))?;
    }
    if let Some(text) = nothing_words::latency_shortfall(study) {
        lines.more(&text)?;
    }
    lines.more(&nothing_words::least_of_all(study))
}
