//! The main job: from recordings and a requirement to a chosen, proven configuration.
//!
//! [`observe`] reads a recording as operations; [`measured`] sums several up; [`Study::of`] fills in the
//! requirement, chooses, proves the choice by exploration, and checks that the recordings lie inside the envelope
//! the proof speaks of.

mod caution;
mod claims;
mod extreme;
mod observed;
mod proof;

use debounce_core::PerChange;

use crate::characterise::tolerance::ToleranceError;
use crate::choose::{Candidate, Evidence, Judgement, Preference, Question, Ranking, choose};
use crate::conformance::{self, Conformance};
use crate::cost::InstructionBudget;
use crate::emit::{Configuration, Proof as Proved};
use crate::envelope::PhysicalEnvelope;
use crate::law_text::LawParameters;
use crate::problem::Problems;
use crate::prove::{Limits, ProveError};
use crate::quantity::TickPeriod;
use crate::replay::{Failures, PrepareError};
use crate::requirement::{Requirement, Resolved};
use crate::trace::{Trace, TraceError};

pub use caution::Caution;
pub use claims::{Claims, DesignBounce};
pub use extreme::{Extreme, ExtremeOf};
pub use observed::{Observed, measured, observe, pooled};
pub use proof::Guarantees;

/// Why a study could not be finished.
#[derive(Debug, thiserror::Error)]
#[non_exhaustive]
pub enum StudyError {
    /// The requirement contradicts itself or the recordings.
    #[error("the requirement does not fit")]
    Requirement(Problems),
    /// Disturbances come faster than every tick period can tell apart.
    #[error("no tick period serves the requirement: {reason}")]
    NoClock {
        /// Why the first of them does not.
        reason: String,
    },
    /// The confidence or the coverage is no share.
    #[error(transparent)]
    Claim(#[from] ToleranceError),
    /// A recording cannot be replayed.
    #[error(transparent)]
    Replay(#[from] PrepareError),
    /// A recording cannot be taken through the network.
    #[error(transparent)]
    Network(#[from] TraceError),
    /// The chosen configuration could not be explored.
    #[error("the recommended configuration could not be proved: {0}")]
    Prove(#[from] ProveError),
}

/// What a study found out.
#[derive(Debug)]
pub struct Study {
    /// The recordings, read.
    pub observed: Vec<Observed>,
    /// The requirement with everything filled in.
    pub resolved: Resolved,
    /// What the recordings allow to claim, and which claim the envelope stands on.
    pub claims: Claims,
    /// The waveforms that everything is claimed for.
    pub physical: PhysicalEnvelope,
    /// Whether the recordings lie inside; one for each.
    pub conformance: Vec<Conformance>,
    /// All candidates, best first.
    pub ranking: Ranking,
    /// The exploration of the recommended candidate; `None` when none holds.
    pub guarantees: Option<Guarantees>,
}

impl Study {
    /// Studies `observed` for `requirement`; `progress` is called with the number of candidates judged so far.
    ///
    /// # Errors
    /// When the requirement contradicts itself, or something cannot be replayed or explored.
    pub fn of(
        observed: Vec<Observed>,
        requirement: &Requirement,
        preference: Preference,
        progress: impl Fn(usize) + Sync,
    ) -> Result<Self, StudyError> {
        Self::among(observed, requirement, preference, None, progress)
    }

    /// As [`of`](Self::of), with only these laws for candidates where any are given.
    ///
    /// # Errors
    /// As [`of`](Self::of).
    pub fn among(
        observed: Vec<Observed>,
        requirement: &Requirement,
        preference: Preference,
        only: Option<Vec<LawParameters>>,
        progress: impl Fn(usize) + Sync,
    ) -> Result<Self, StudyError> {
        let resolved = requirement.resolve(&measured(&observed)).map_err(StudyError::Requirement)?;
        let claims = Claims::of(&observed, &resolved)?;
        let physical = resolved.physical();
        // With a network the pin shows something else than the contact: each recording is held against its own.
        let contact = resolved.at_contact();
        let envelope = |one: &Observed| if one.is_behind_network() { physical } else { contact };
        let conformance =
            observed.iter().map(|one| conformance::check(&one.recording.trace, &envelope(one))).collect();
        let at_pin = at_pin(&resolved, &observed)?;
        let question = Question { only, ..question(&resolved, &observed, &at_pin, preference) };
        let ranking = choose(&question, progress)?;
        if ranking.clocks.iter().all(|view| view.envelope.is_err()) {
            let reason = ranking.clocks.iter().find_map(|view| view.envelope.err());
            let reason = reason.map_or("there is none to choose from".to_owned(), |error| error.to_string());
            return Err(StudyError::NoClock { reason });
        }
        let guarantees = match ranking.recommended() {
            Some(candidate) => Some(Guarantees::of(candidate, ranking.view(candidate))?),
            None => None,
        };
        Ok(Self { observed, resolved, claims, physical, conformance, ranking, guarantees })
    }

    /// Whether there is a recommendation and every recording lies inside the envelope it is proved for.
    #[must_use]
    pub fn holds(&self) -> bool {
        self.guarantees.is_some() && self.conformance.iter().all(Conformance::conforms)
    }

    /// What a person should know before leaning on the recordings.
    #[must_use]
    pub fn cautions(&self) -> Vec<Caution> {
        Caution::all(&self.observed, &self.resolved, &self.claims)
    }

    /// How often the recommended candidate failed on all recordings together; `None` when none holds, or there is
    /// no recording.
    #[must_use]
    pub fn failures(&self) -> Option<Failures> {
        let candidate = self.ranking.recommended()?;
        let each = self.observed.iter().zip(&candidate.measured);
        each.map(|(one, measured)| Failures::of(measured, &one.truth)).reduce(Failures::with)
    }

    /// The tick period of a candidate.
    #[must_use]
    pub fn tick(&self, candidate: &Candidate) -> TickPeriod {
        self.ranking.view(candidate).clock.period().into()
    }

    /// The recommended candidate as something to write for the firmware.
    #[must_use]
    pub fn configuration(&self) -> Option<Configuration> {
        let candidate = self.ranking.recommended()?;
        let Judgement::Faithful { bounds, evidence } = candidate.judgement else { return None };
        let view = self.ranking.view(candidate);
        let envelope = view.envelope.ok()?;
        let proof = match evidence {
            Evidence::ClosedForm => Proved::ClosedForm,
            Evidence::Explored { states } => Proved::Explored { states },
        };
        let tick = self.tick(candidate);
        let mut configuration =
            Configuration::new(&self.resolved, tick, envelope, candidate.parameters, bounds, proof);
        for one in &self.observed {
            configuration = configuration
                .provenance(format!("recording {}, channel {}", one.name, one.recording.channel));
        }
        if let Some(front) = &self.resolved.network {
            for sentence in front.sentences() {
                configuration = configuration.provenance(format!("network in front of the pin: {sentence}"));
            }
        }
        Some(configuration)
    }
}

/// What the pin shows of each recording; nothing where it shows the recording itself.
fn at_pin(resolved: &Resolved, observed: &[Observed]) -> Result<Vec<Trace>, StudyError> {
    let Some(front) = &resolved.network else { return Ok(Vec::new()) };
    let network = Some(&front.resolved.network);
    Ok(observed.iter().map(|one| one.at_pin(network)).collect::<Result<_, _>>()?)
}

fn question<'a>(
    resolved: &Resolved,
    observed: &'a [Observed],
    at_pin: &'a [Trace],
    preference: Preference,
) -> Question<'a> {
    let trace = |(index, one): (usize, &'a Observed)| {
        (at_pin.get(index).unwrap_or(&one.recording.trace), one.truth.as_slice())
    };
    let latency = resolved.required.latency;
    Question {
        physical: resolved.physical(),
        latency_ns: PerChange { make: latency.make.value.ns(), break_: latency.break_.value.ns() },
        clocks: resolved.ticks.value.iter().map(|&tick| resolved.clock(tick)).collect(),
        ram_bytes: resolved.ram.map(|ram| ram.value.0),
        instructions: resolved
            .instructions
            .map(|most| InstructionBudget { most: most.value.0, core: resolved.core.map(|core| core.value) }),
        recordings: observed.iter().enumerate().map(trace).collect(),
        preference,
        only: None,
        // A candidate that needs more than this is shown as unproven; the usual one needs a thousandth.
        limits: Limits { memory_bytes: 1 << 20, threads: 1, ..Limits::default() },
    }
}
