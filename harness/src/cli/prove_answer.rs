//! A finished proof, as text and as JSON.

use std::io::{self, Write};
use std::path::PathBuf;

use debounce_core::{Change, Envelope, PerChange, TickClock};
use serde_json::{Value, json};

use super::beyond_text::{beyond, still_bears};
use super::envelope_input::{in_ticks, latency};
use super::lines::{Lines, grouped, strong};
use super::logic_name::NamedLogic;
use super::report::written;
use super::{Answer, Outcome};
use crate::prove::{self, Beyond, Contract, Proof};
use crate::quantity::Time;
use crate::report::timing::TimingDiagram;
use crate::report::{json as report, words};

/// A finished proof.
pub(super) struct Proved {
    pub(super) logic: NamedLogic,
    pub(super) envelope: Envelope,
    pub(super) clock: Option<TickClock>,
    /// The latencies that are required.
    pub(super) allowed: PerChange<Option<Time>>,
    pub(super) proof: Proof,
    pub(super) beyond: Beyond,
    pub(super) limit: Option<PerChange<u32>>,
    pub(super) written: Vec<PathBuf>,
    pub(super) again: String,
}

impl Answer for Proved {
    fn outcome(&self) -> Outcome {
        let in_time = |change| self.below_ns(change).is_none_or(|(below, allowed)| below <= allowed.ns());
        let holds = self.proof.bounds().is_some() && [Change::Make, Change::Break].into_iter().all(in_time);
        if holds { Outcome::Holds } else { Outcome::DoesNotHold }
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        lines.item("Law", &self.logic.name)?;
        lines.item("Envelope", &in_ticks(&self.envelope))?;
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
                    let found = bounds.latency.at(change);
                    let limit = match (self.limit, self.proof.contract) {
                        (Some(limit), _) => {
                            let limit = limit.at(change);
                            format!(
                                "; no logic can promise less than {limit} ({:.2} x)",
                                f64::from(found.worst) / f64::from(limit)
                            )
                        }
                        (None, Contract::Follow) => {
                            "; limit unknown, harness limit searches longer".to_owned()
                        }
                        (None, Contract::Alternate) => "; limit unknown".to_owned(),
                    };
                    lines.item(
                        if change == Change::Make { "Make" } else { "Break" },
                        &format!(
                            "at most {}, at least {}{limit}",
                            latency(found.worst, self.clock.as_ref()),
                            found.best
                        ),
                    )?;
                    if let Some((below_ns, allowed)) = self.below_ns(change) {
                        lines.more(&strong(&words::against(below_ns, allowed)))?;
                    }
                }
                self.size(&mut lines)?;
                beyond(&mut lines, &self.beyond)?;
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
                still_bears(&mut lines, &self.beyond)?;
                lines.plain(&format!("\na shortest waveform that shows it:\n{}", TimingDiagram(witness)))?;
                lines.plain("\n")?;
                lines.command(&format!("again: {}", self.again))
            }
        }?;
        written(&mut lines, &self.written)
    }

    fn to_json(&self) -> Value {
        let mut value = report::proof(&self.proof);
        value["law"] = json!(self.logic.name);
        value["envelope"] = report::envelope(&self.envelope);
        value["limit_samples"] =
            json!(self.limit.map(|limit| json!({ "make": limit.make, "break": limit.break_ })));
        value["beyond"] = report::beyond(&self.beyond);
        let allowed = |change| {
            self.below_ns(change)
                .map(|(below_ns, allowed)| json!({ "allowed_ns": allowed.ns(), "below_ns": below_ns }))
        };
        value["required_latency"] = json!({ "make": allowed(Change::Make), "break": allowed(Change::Break) });
        value["again"] = json!(self.again);
        value["written"] = self.written.iter().map(|path| path.display().to_string()).collect();
        value
    }
}

impl Proved {
    /// What is proved of a latency that is required, and what is required; `None` where nothing is.
    fn below_ns(&self, change: Change) -> Option<(u64, Time)> {
        let (bounds, clock) = (self.proof.bounds()?, self.clock.as_ref()?);
        let allowed = (*self.allowed.of(change))?;
        Some((clock.delay_ns(bounds.latency.at(change).worst).1, allowed))
    }

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
