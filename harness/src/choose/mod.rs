//! The choice: every candidate with its proven bounds, its measured latency, its cost, and its distance from the
//! best that any logic could do.
//!
//! A [`Question`] states the physics and what is asked; [`choose`] judges every candidate law at every tick
//! period on the same physics and returns a [`Ranking`]. A bound is proved by the closed form of the core where
//! that answers, else by exploration; what neither answers within the limits is *unproven* and never recommended.

mod candidates;
mod judge;
mod rank;

use debounce_core::{Bounds, Change, Clause, Envelope, PerChange, TickClock};
use rayon::prelude::*;

use crate::cost::InstructionBudget;
use crate::envelope::{PhysicalEnvelope, TickError};
use crate::law_text::LawParameters;
use crate::logic::Logic;
use crate::prove::{Limits, limit};
use crate::replay::{Measurement, PrepareError, PreparedTrace};
use crate::sample::ExactPeriod;
use crate::trace::Trace;
use crate::truth::TruthChange;

pub(crate) use candidates::laws as laws_to_try;
pub(crate) use judge::Tables;
pub use rank::{Preference, Reason};

/// What is to be chosen for.
#[derive(Clone, Debug)]
pub struct Question<'a> {
    /// The waveforms that must be served.
    pub physical: PhysicalEnvelope,
    /// Longest time from a change to its report; the report must come before it.
    pub latency_ns: PerChange<u64>,
    /// The sample clocks to choose from.
    pub clocks: Vec<TickClock>,
    /// Most RAM for each input, in bytes.
    pub ram_bytes: Option<u32>,
    /// Most instructions of a tick for each input.
    pub instructions: Option<InstructionBudget>,
    /// Recordings with what the contact did in them.
    pub recordings: Vec<(&'a Trace, &'a [TruthChange])>,
    /// What counts most among those that hold.
    pub preference: Preference,
    /// The laws to judge, where it is not all that could make sense.
    pub only: Option<Vec<LawParameters>>,
    /// What exploring one candidate may use.
    pub limits: Limits,
}

/// How the bounds of a candidate are known.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Evidence {
    /// By the closed form.
    ClosedForm,
    /// By exploring every reachable state; so many of them.
    Explored {
        /// Reachable states of envelope and law together.
        states: u64,
    },
}

/// What is known of a candidate's faithfulness.
#[derive(Clone, PartialEq, Debug)]
pub enum Judgement {
    /// Faithful, within these bounds.
    Faithful {
        /// Latencies in samples.
        bounds: Bounds,
        /// How that is known.
        evidence: Evidence,
    },
    /// Not faithful: this promise breaks.
    Refuted {
        /// The promise.
        clause: Clause,
        /// How that is known.
        evidence: Evidence,
    },
    /// Neither: the exploration would not fit the limits, for this reason.
    Unproven(String),
}

/// Something that is asked and not given.
#[derive(Clone, PartialEq, Debug)]
pub enum Shortfall {
    /// A promise breaks inside the envelope.
    Unfaithful(Clause),
    /// Nothing is proved.
    Unproven,
    /// The worst delay of a change is not below the longest allowed one.
    TooSlow {
        /// The change.
        change: Change,
        /// The delay is always less than this.
        below_ns: u64,
        /// The longest allowed.
        allowed_ns: u64,
    },
    /// The state needs too much RAM.
    TooBig {
        /// Bytes of one state.
        bytes: u32,
        /// Bytes allowed.
        allowed: u32,
    },
    /// The worst tick takes too many instructions, or was not counted for so wide a state.
    TooManyInstructions {
        /// Instructions of its kind of law; `None` where they were not counted.
        instructions: Option<u32>,
        /// Instructions allowed.
        allowed: u32,
    },
    /// A recording shows a missed operation or a false edge.
    FailsOnRecording {
        /// Which recording, from 0.
        recording: usize,
    },
}

/// One law at one tick period, judged.
#[derive(Clone, PartialEq, Debug)]
pub struct Candidate {
    /// The law.
    pub parameters: LawParameters,
    /// The same, ready to run.
    pub logic: Logic,
    /// Index of its clock in the question.
    pub clock: usize,
    /// Faithful or not, and how that is known.
    pub judgement: Judgement,
    /// Worst delay at make and break: always less than this. `None` unless faithful.
    pub worst_below_ns: Option<PerChange<u64>>,
    /// Worst latency as a multiple of what any logic needs at this tick, the greater of make and break; `None`
    /// where the limit is not known.
    pub times_limit: Option<f64>,
    /// Worst delay as a multiple of what no tick period could beat, the greater of make and break.
    pub times_physical_limit: Option<f64>,
    /// RAM for each input, in bytes.
    pub state_bytes: u32,
    /// What the recordings show, one for each.
    pub measured: Vec<Measurement>,
    /// Everything that is asked and not given; empty for a candidate that holds.
    pub shortfalls: Vec<Shortfall>,
    /// Whether no other candidate that holds is at least as good in every respect and better in one.
    pub pareto: bool,
}

impl Candidate {
    /// Whether everything that is asked is given.
    #[must_use]
    pub fn holds(&self) -> bool {
        self.shortfalls.is_empty()
    }

    /// The bounds, if it is faithful.
    #[must_use]
    pub fn bounds(&self) -> Option<Bounds> {
        match self.judgement {
            Judgement::Faithful { bounds, .. } => Some(bounds),
            _ => None,
        }
    }
}

/// One clock of the question, and what it makes of the physics.
#[derive(Clone, Debug)]
pub struct ClockView {
    /// The clock.
    pub clock: TickClock,
    /// The envelope in its samples, or why there is none.
    pub envelope: Result<Envelope, TickError>,
    /// The limit of any logic at this clock, in samples, where it is known.
    pub limit: Option<PerChange<u32>>,
}

/// All candidates, judged, best first.
#[derive(Clone, Debug)]
pub struct Ranking {
    /// The clocks, in the order of the question.
    pub clocks: Vec<ClockView>,
    /// The candidates: those that hold first, in order of preference; then the others, nearest miss first.
    pub candidates: Vec<Candidate>,
    /// What no logic could beat at any tick period, in ns.
    pub physical_limit_ns: PerChange<u64>,
    /// Why the first is recommended; `None` when none holds.
    pub reason: Option<Reason>,
}

impl Ranking {
    /// The recommended candidate.
    #[must_use]
    pub fn recommended(&self) -> Option<&Candidate> {
        self.candidates.first().filter(|candidate| candidate.holds())
    }

    /// How many hold.
    #[must_use]
    pub fn holding(&self) -> usize {
        self.candidates.iter().filter(|candidate| candidate.holds()).count()
    }

    /// The clock and envelope of a candidate.
    #[must_use]
    pub fn view(&self, candidate: &Candidate) -> &ClockView {
        &self.clocks[candidate.clock]
    }
}

/// Judges every candidate; `progress` is called after each clock with the number of candidates judged so far.
///
/// # Errors
/// When a recording and its truth do not fit together.
pub fn choose(question: &Question<'_>, progress: impl Fn(usize) + Sync) -> Result<Ranking, PrepareError> {
    let clocks: Vec<ClockView> = question.clocks.par_iter().map(|&clock| view(question, clock)).collect();
    let tables = Tables::default();
    let mut candidates = Vec::new();
    for (index, view) in clocks.iter().enumerate() {
        let Ok(envelope) = view.envelope else { continue };
        let prepared = question
            .recordings
            .iter()
            .map(|(trace, truth)| PreparedTrace::new(trace, truth, ExactPeriod::nominal(&view.clock)))
            .collect::<Result<Vec<_>, _>>()?;
        let judge = judge::Judge::new(question, view, index, envelope, &prepared, &tables);
        let laws = match &question.only {
            Some(laws) => laws.clone(),
            None => candidates::laws(&envelope, allowed_samples(question, &view.clock)),
        };
        candidates.par_extend(laws.into_par_iter().filter_map(|parameters| judge.candidate(parameters)));
        progress(candidates.len());
    }
    let physical_limit_ns = physical_limit(&question.physical);
    let reason = rank::rank(question, &mut candidates);
    Ok(Ranking { clocks, candidates, physical_limit_ns, reason })
}

fn view(question: &Question<'_>, clock: TickClock) -> ClockView {
    let envelope = question.physical.in_ticks(&clock);
    let limit = envelope.ok().and_then(|envelope| known_limit(&envelope));
    ClockView { clock, envelope, limit }
}

/// The limit by the closed form, else by beliefs as long as these are so few that nobody waits for them.
#[must_use]
pub fn known_limit(envelope: &Envelope) -> Option<PerChange<u32>> {
    let few = Limits { memory_bytes: 1 << 19, threads: 1 };
    limit(envelope, &few).ok()?.latency()
}

/// The most samples of latency that stay within what is allowed, the larger of make and break.
fn allowed_samples(question: &Question<'_>, clock: &TickClock) -> u32 {
    let allowed = question.latency_ns.make.max(question.latency_ns.break_);
    // A delay of k samples is below (k + lost) Tmax + J, so no more than this many can fit.
    clock.samples_seen(allowed).saturating_add(1)
}

/// What no logic could beat however fast it samples: the limit in samples, times the tick, as the tick goes to 0.
#[must_use]
pub fn physical_limit(physical: &PhysicalEnvelope) -> PerChange<u64> {
    let (open, closed) = (physical.glitch_ns.open, physical.glitch_ns.closed);
    let follows = |after: u64| if physical.calm_ns > open.max(closed) { 0 } else { after };
    PerChange {
        make: (physical.bounce_ns.make + follows(closed)).max(open) + open,
        break_: (physical.bounce_ns.break_ + follows(open)).max(closed) + closed,
    }
}
