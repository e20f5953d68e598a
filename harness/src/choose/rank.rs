//! Order among the candidates, the Pareto set, and the one sentence that says why the first is first.

use core::cmp::Ordering;
use std::fmt;

use debounce_core::PerChange;

use super::{Candidate, Question, Shortfall};
use crate::law_text::LawParameters;
use crate::quantity::TickPeriod;

/// What counts most among the candidates that hold.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Preference {
    /// The slowest tick, so that the processor wakes least; then the shortest worst delay.
    #[default]
    FewTicks,
    /// The shortest worst delay; then the slowest tick.
    ShortDelay,
    /// The least RAM; then the slowest tick and the shortest worst delay.
    LittleMemory,
}

/// Why the recommended candidate is.
#[derive(Clone, PartialEq, Debug)]
pub struct Reason {
    preference: Preference,
    /// How many hold, of how many.
    holding: usize,
    tried: usize,
    /// How many of those that hold share the first property.
    alike: usize,
    tick: TickPeriod,
    state_bytes: u32,
}

impl fmt::Display for Reason {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self { preference, holding, tried, alike, tick, state_bytes } = self;
        write!(f, "of {tried} candidates {holding} hold; ")?;
        match preference {
            Preference::FewTicks if *alike == 1 => {
                write!(f, "{tick} is the slowest tick at which any does, and this is the only one there")
            }
            Preference::FewTicks => write!(
                f,
                "{tick} is the slowest tick at which any does, and of the {alike} there this one has the shortest worst delay"
            ),
            Preference::ShortDelay => write!(f, "none has a shorter worst delay than this one"),
            Preference::LittleMemory => write!(
                f,
                "{alike} need only {state_bytes} bytes an input, and of those this one has the slowest tick and then the shortest worst delay"
            ),
        }
    }
}

/// Sorts the candidates, marks the Pareto set, and explains the first if it holds.
pub(super) fn rank(question: &Question<'_>, candidates: &mut [Candidate]) -> Option<Reason> {
    let tick = |candidate: &Candidate| TickPeriod::from(question.clocks[candidate.clock].period());
    candidates.sort_by(|a, b| {
        let by = |order: Ordering, next: Ordering| order.then(next);
        let delay = worst(a).cmp(&worst(b));
        let slow = tick(b).cmp(&tick(a));
        let small = a.state_bytes.cmp(&b.state_bytes);
        let preferred = match question.preference {
            Preference::FewTicks => by(slow, by(delay, small)),
            Preference::ShortDelay => by(delay, by(slow, small)),
            Preference::LittleMemory => by(small, by(slow, delay)),
        };
        let ties = simplicity(&a.parameters).cmp(&simplicity(&b.parameters));
        let misses = miss(a).total_cmp(&miss(b));
        // Those that hold have missed nothing, so the first comparison keeps them together and in front.
        misses
            .then(preferred)
            .then(ties)
            .then_with(|| a.parameters.to_string().cmp(&b.parameters.to_string()))
    });
    mark_pareto(candidates, &tick);
    let first = candidates.first().filter(|first| first.holds())?;
    let holding: Vec<&Candidate> = candidates.iter().filter(|candidate| candidate.holds()).collect();
    let alike = holding.iter().filter(|other| match question.preference {
        Preference::FewTicks => other.clock == first.clock,
        Preference::ShortDelay => worst(other) == worst(first),
        Preference::LittleMemory => other.state_bytes == first.state_bytes,
    });
    Some(Reason {
        preference: question.preference,
        holding: holding.len(),
        tried: candidates.len(),
        alike: alike.count(),
        tick: tick(first),
        state_bytes: first.state_bytes,
    })
}

/// The worse of the two worst delays.
fn worst(candidate: &Candidate) -> u64 {
    candidate.worst_below_ns.map_or(u64::MAX, |PerChange { make, break_ }| make.max(break_))
}

/// How far a candidate is from holding: 0 if it does; too slow counts by its excess, all else is worse.
fn miss(candidate: &Candidate) -> f64 {
    let one = |shortfall: &Shortfall| match *shortfall {
        Shortfall::TooSlow { below_ns, allowed_ns, .. } => below_ns as f64 / allowed_ns.max(1) as f64 - 1.0,
        Shortfall::TooBig { bytes, allowed } => f64::from(bytes) / f64::from(allowed.max(1)),
        Shortfall::TooManyInstructions { instructions, allowed } => {
            instructions.map_or(1e3, |count| f64::from(count) / f64::from(allowed.max(1)))
        }
        Shortfall::FailsOnRecording { .. } => 1e6,
        Shortfall::Unproven => 1e9,
        Shortfall::Unfaithful(_) => 1e12,
    };
    candidate.shortfalls.iter().map(one).sum()
}

/// Among equals the simpler law is taken.
fn simplicity(parameters: &LawParameters) -> u32 {
    match parameters {
        LawParameters::ShiftRegister { .. } => 0,
        LawParameters::Integrator { .. } => 1,
        LawParameters::StateMachine { .. } => 2,
        LawParameters::MajorityRegister { .. } => 3,
    }
}

/// Marks the candidates that hold and that no other one that holds beats: by worst make delay, worst break
/// delay, ticks a second and bytes of state.
fn mark_pareto(candidates: &mut [Candidate], tick: &impl Fn(&Candidate) -> TickPeriod) {
    let merits: Vec<_> = candidates
        .iter()
        .filter(|candidate| candidate.holds())
        .map(|c| {
            let delay = c.worst_below_ns.expect("a candidate that holds is faithful");
            (delay.make, delay.break_, core::cmp::Reverse(tick(c)), c.state_bytes)
        })
        .collect();
    let beaten = |mine: &(u64, u64, core::cmp::Reverse<TickPeriod>, u32)| {
        merits.iter().any(|other| {
            other != mine && other.0 <= mine.0 && other.1 <= mine.1 && other.2 <= mine.2 && other.3 <= mine.3
        })
    };
    for (candidate, mine) in candidates.iter_mut().zip(&merits) {
        candidate.pareto = !beaten(mine);
    }
}
