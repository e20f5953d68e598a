//! A limit, as text and as JSON.

use std::io::{self, Write};
use std::path::PathBuf;

use debounce_core::{Change, Envelope, PerChange, TickClock};
use serde_json::{Value, json};

use super::envelope_input::{in_ticks, latency};
use super::lines::{Lines, grouped, strong};
use super::report::written;
use super::{Answer, Outcome};
use crate::law_text::LawParameters;
use crate::machine::{MachineTable, Reading, terminal_diagram, write_kiss2};
use crate::prove::{NoLogic, Outcome as Proved, Proof};
use crate::report::html::{Limited, Reaching};
use crate::report::timing::TimingDiagram;
use crate::report::{json as report, words};

/// What is known of the limit in an envelope.
pub(super) struct LimitFound {
    pub(super) envelope: Envelope,
    pub(super) clock: Option<TickClock>,
    pub(super) known: Known,
    pub(super) written: Vec<PathBuf>,
}

pub(super) enum Known {
    /// There is no faithful logic.
    NoLogic(NoLogic),
    /// The limit, and a logic that reaches it.
    Limit(Box<Reached>),
}

impl Known {
    /// The same for a report.
    pub(super) fn limited<'a>(
        &'a self,
        envelope: &'a Envelope,
        clock: Option<TickClock>,
        caution: Option<&'static str>,
    ) -> Limited<'a> {
        let found = match self {
            Self::NoLogic(reason) => Err(reason),
            Self::Limit(reached) => Ok(Reaching {
                latency: reached.latency,
                name: &reached.name,
                machine: &reached.machine,
                proof: reached.proof.as_ref(),
                evidence: reached.evidence(),
                law: reached.law.filter(|_| reached.by_search).map(|law| law.to_string()),
            }),
        };
        Limited { envelope, clock, caution, found }
    }
}

/// A limit with a logic that has exactly that latency.
pub(super) struct Reached {
    pub(super) latency: PerChange<u32>,
    pub(super) name: String,
    pub(super) machine: MachineTable,
    /// `None` where the proof of the logic does not fit.
    pub(super) proof: Option<Proof>,
    /// Beliefs looked at.
    pub(super) beliefs: usize,
    /// By beliefs, not by the closed form alone.
    pub(super) by_search: bool,
    /// The built-in law that reaches it too, where the closed form is proved.
    pub(super) law: Option<LawParameters>,
}

impl Reached {
    fn evidence(&self) -> String {
        let formula = "the closed form, whose proof is written down (debounce_core::proofs)";
        match (self.by_search, self.law.is_some()) {
            (true, true) => format!("{}; {formula}, says the same", self.search()),
            (true, false) => format!("{}; no closed form is proved for this envelope", self.search()),
            (false, _) => formula.to_owned(),
        }
    }

    fn search(&self) -> String {
        format!("followed all that samples can tell: {} states of knowledge", grouped(self.beliefs as u64))
    }
}

impl Answer for LimitFound {
    fn outcome(&self) -> Outcome {
        match self.known {
            Known::NoLogic(_) => Outcome::DoesNotHold,
            Known::Limit(_) => Outcome::Holds,
        }
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        lines.item("Envelope", &in_ticks(&self.envelope))?;
        match &self.known {
            Known::NoLogic(reason) => {
                lines.item("Unsolvable", &strong(&reason.to_string()))?;
                if let NoLogic::AlwaysInDoubt { witness } = reason {
                    lines.plain(&format!(
                        "\nthe waveform, with the output of the logic that is as early as any can be:\n{}",
                        TimingDiagram(witness)
                    ))?;
                }
            }
            Known::Limit(reached) => self.limit(&mut lines, reached)?,
        }
        written(&mut lines, &self.written)
    }

    fn to_json(&self) -> Value {
        let mut value = json!({
            "envelope": report::envelope(&self.envelope),
            "written": self.written.iter().map(|path| path.display().to_string()).collect::<Value>(),
        });
        match &self.known {
            Known::NoLogic(reason) => {
                value["unsolvable"] = json!(reason.to_string());
                if let NoLogic::AlwaysInDoubt { witness } = reason {
                    value["witness"] = report::witness(witness);
                }
            }
            Known::Limit(reached) => {
                let pair = json!({ "make": reached.latency.make, "break": reached.latency.break_ });
                let counts = reached.machine.counts();
                value["limit_samples"] = pair.clone();
                // One logic has both, so there is nothing to trade.
                value["frontier"] = json!([pair]);
                value["evidence"] = json!(if reached.by_search { "search" } else { "closed-form" });
                value["closed_form"] = json!(reached.law.is_some());
                value["beliefs"] = json!(reached.beliefs);
                value["law"] = json!(reached.law.map(|law| law.to_string()));
                value["logic"] = json!({
                    "name": reached.name,
                    "states": counts.states,
                    "state_bits": counts.state_bits,
                    "kiss2": write_kiss2(&reached.machine, Reading::Moore),
                });
                value["exploration"] = json!(reached.proof.as_ref().map(report::proof));
            }
        }
        value
    }
}

impl LimitFound {
    fn limit(&self, lines: &mut Lines<'_>, reached: &Reached) -> io::Result<()> {
        let PerChange { make, break_ } = reached.latency;
        lines.item("Limit", &strong("no logic whatever can promise less"))?;
        for (label, samples) in [("Make", make), ("Break", break_)] {
            lines.item(label, &latency(samples, self.clock.as_ref()))?;
        }
        lines.item("Known from", &reached.evidence())?;
        lines.item(
            "Frontier",
            &format!(
                "one point, {make} and {break_}: one logic has both at once, so make and break are not traded for each other"
            ),
        )?;
        let counts = reached.machine.counts();
        lines.item(
            "Reached by",
            &format!(
                "{}: {}, {} of state",
                reached.name,
                words::count(counts.states, "state"),
                words::count(counts.state_bits as usize, "bit")
            ),
        )?;
        lines.more(&match &reached.proof {
            Some(proof) => format!(
                "proved for all {} states of contact, disturbances and logic together",
                grouped(proof.states)
            ),
            None => "by the written proof; exploring it would not fit the memory allowed".to_owned(),
        })?;
        if let (true, Some(law)) = (reached.by_search, &reached.law) {
            lines.more(&format!("the built-in \"{law}\" reaches it too"))?;
        }
        if let Some(diagram) = terminal_diagram(&reached.machine) {
            lines.plain(&format!("\n{diagram}"))?;
        } else if self.written.is_empty() {
            lines.more("--machine best.kiss2 writes it, best.svg draws it, best.rs is for the firmware")?;
        }
        self.slowest(lines, reached)
    }

    fn slowest(&self, lines: &mut Lines<'_>, reached: &Reached) -> io::Result<()> {
        let Some(Proved::Faithful { slowest, .. }) = reached.proof.as_ref().map(|proof| &proof.outcome)
        else {
            return Ok(());
        };
        for change in [Change::Make, Change::Break] {
            if let Some(witness) = slowest.of(change) {
                lines.plain(&format!("\nslowest {}:\n{}", words::change(change), TimingDiagram(witness)))?;
            }
        }
        Ok(())
    }
}
