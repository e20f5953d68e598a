//! One candidate: proved, measured, costed, and held against what is asked.

use std::sync::{Arc, Mutex, OnceLock};

use debounce_core::{Change, Clause, Envelope, PerChange, Verdict};

use rustc_hash::FxHashMap;

use super::{Candidate, ClockView, Evidence, Judgement, Question, Shortfall, physical_limit};
use crate::cost::{InstructionBudget, instructions};
use crate::law_text::LawParameters;
use crate::logic::Logic;
use crate::prove::{Contract, Environment, LawTable, Outcome, ProveError, prove_in};
use crate::replay::PreparedTrace;
use crate::with_law;

pub(super) struct Judge<'a> {
    question: &'a Question<'a>,
    view: &'a ClockView,
    clock: usize,
    envelope: Envelope,
    /// The envelope's automaton, the same for every law; made when the first needs it.
    environment: OnceLock<Result<Environment, ProveError>>,
    prepared: &'a [PreparedTrace],
    tables: &'a Tables,
    physical_limit_ns: PerChange<u64>,
}

/// The tables of laws already met: a law is the same at every tick period.
#[derive(Default)]
pub(crate) struct Tables(Mutex<FxHashMap<Logic, Arc<TableOnce>>>);

pub(crate) type TableOnce = OnceLock<Result<LawTable, ProveError>>;

impl Tables {
    /// The table of a law, made if it is new.
    pub(crate) fn of(&self, logic: &Logic) -> Arc<TableOnce> {
        // The table itself is made outside the lock, so that others need not wait for it.
        let once = Arc::clone(self.0.lock().expect("no thread panics").entry(*logic).or_default());
        once.get_or_init(|| logic.table());
        once
    }
}

impl<'a> Judge<'a> {
    pub(super) fn new(
        question: &'a Question<'a>,
        view: &'a ClockView,
        clock: usize,
        envelope: Envelope,
        prepared: &'a [PreparedTrace],
        tables: &'a Tables,
    ) -> Self {
        let physical_limit_ns = physical_limit(&question.physical);
        Self {
            question,
            view,
            clock,
            envelope,
            environment: OnceLock::new(),
            prepared,
            tables,
            physical_limit_ns,
        }
    }

    /// `None` where the law refuses the parameters.
    pub(super) fn candidate(&self, parameters: LawParameters) -> Option<Candidate> {
        let logic = Logic::try_new(&parameters).ok()?;
        let judgement = self.judgement(&logic);
        let bounds = match &judgement {
            Judgement::Faithful { bounds, .. } => Some(*bounds),
            _ => None,
        };
        let worst = bounds
            .map(|bounds| PerChange { make: bounds.latency.make.worst, break_: bounds.latency.break_.worst });
        let delay = |samples: u32| self.view.clock.delay_ns(samples).1;
        let worst_below_ns =
            worst.map(|worst| PerChange { make: delay(worst.make), break_: delay(worst.break_) });
        let times_limit = worst.zip(self.view.limit).map(|(worst, limit)| {
            ratio(worst.make.into(), limit.make.into()).max(ratio(worst.break_.into(), limit.break_.into()))
        });
        let least = self.physical_limit_ns;
        let times_physical_limit = worst_below_ns
            .filter(|_| least.make > 0 && least.break_ > 0)
            .map(|worst| ratio(worst.make, least.make).max(ratio(worst.break_, least.break_)));
        let mut candidate = Candidate {
            parameters,
            logic,
            clock: self.clock,
            judgement,
            worst_below_ns,
            times_limit,
            times_physical_limit,
            state_bytes: logic.state_bytes(),
            measured: self
                .prepared
                .iter()
                .map(|trace| with_law!(&logic, law => trace.measure(law)))
                .collect(),
            shortfalls: Vec::new(),
            pareto: false,
        };
        candidate.shortfalls = self.shortfalls(&candidate);
        Some(candidate)
    }

    fn judgement(&self, logic: &Logic) -> Judgement {
        match logic.verdict(&self.envelope) {
            Verdict::Holds(bounds) => Judgement::Faithful { bounds, evidence: Evidence::ClosedForm },
            Verdict::Fails(clause) => Judgement::Refuted { clause, evidence: Evidence::ClosedForm },
            Verdict::Unknown => self.explored(logic).unwrap_or_else(|e| Judgement::Unproven(e.to_string())),
        }
    }

    fn explored(&self, logic: &Logic) -> Result<Judgement, ProveError> {
        let within = || Environment::within(&self.envelope, &self.question.limits);
        let environment = match self.environment.get_or_init(within) {
            Ok(environment) => environment,
            Err(ProveError::DwellUnseen { .. }) => {
                let (clause, evidence) = (Clause::DwellUnseen, Evidence::ClosedForm);
                return Ok(Judgement::Refuted { clause, evidence });
            }
            Err(error) => return Err(error.clone()),
        };
        let limits = &self.question.limits;
        let table = self.tables.of(logic);
        let table = table.get().expect("made when it was looked up").as_ref().map_err(Clone::clone)?;
        let proof = prove_in(table, environment, &self.envelope, Contract::Follow, limits)?;
        let evidence = Evidence::Explored { states: proof.states };
        Ok(match proof.outcome {
            Outcome::Faithful { bounds, .. } => Judgement::Faithful { bounds, evidence },
            Outcome::Refuted { clause, .. } => Judgement::Refuted { clause, evidence },
        })
    }

    fn shortfalls(&self, candidate: &Candidate) -> Vec<Shortfall> {
        let mut found = Vec::new();
        match &candidate.judgement {
            Judgement::Faithful { .. } => {}
            Judgement::Refuted { clause, .. } => found.push(Shortfall::Unfaithful(*clause)),
            Judgement::Unproven(_) => found.push(Shortfall::Unproven),
        }
        for change in [Change::Make, Change::Break] {
            let allowed_ns = self.question.latency_ns.at(change);
            let below_ns = candidate.worst_below_ns.map(|worst| worst.at(change));
            // Every delay is less than `below_ns`, so that may equal what is allowed.
            if let Some(below_ns) = below_ns.filter(|&below_ns| below_ns > allowed_ns) {
                found.push(Shortfall::TooSlow { change, below_ns, allowed_ns });
            }
        }
        if let Some(allowed) = self.question.ram_bytes.filter(|&allowed| candidate.state_bytes > allowed) {
            found.push(Shortfall::TooBig { bytes: candidate.state_bytes, allowed });
        }
        if let Some(InstructionBudget { most: allowed, core }) = self.question.instructions {
            let instructions = instructions(&candidate.parameters, core);
            if instructions.is_none_or(|instructions| instructions > allowed) {
                found.push(Shortfall::TooManyInstructions { instructions, allowed });
            }
        }
        let fails = candidate.measured.iter().enumerate().filter(|(_, measured)| !measured.is_faithful());
        found.extend(fails.map(|(recording, _)| Shortfall::FailsOnRecording { recording }));
        found
    }
}

fn ratio(value: u64, limit: u64) -> f64 {
    // Both are far below 2^53 samples or nanoseconds for anything that can be waited for.
    value as f64 / limit as f64
}
