//! The limit: the least worst-case latency that any logic whatever can have in an envelope.
//!
//! # The game, and why it is won by one strategy
//!
//! A logic sees samples, not the contact. What it can know at most is the set of environment states that agree with
//! the samples so far, each with the number of its changes that are unreported: its *belief*. Asking for a logic
//! that reports no edge without a change and no change too late is a safety game on beliefs, with the waveform as
//! opponent (games of incomplete information: Reif, The complexity of two-player games of incomplete information,
//! 1984; Chatterjee, Doyen, Henzinger and Raskin, Algorithms for omega-regular games with imperfect information,
//! 2006; beliefs are the subset construction of Rabin and Scott, Finite automata and their decision problems, 1959;
//! all cited from memory). Such games are solved backwards from the lost beliefs, and in general a strategy must
//! give up one thing for another. Here it need not:
//!
//! * The waveform does not depend on what the logic says, so neither does the set of states that agree with the
//!   samples. Saying nothing never teaches anything.
//! * In a faithful logic, the n-th edge may be reported at a sample only if in every waveform that agrees with
//!   the samples so far the contact has changed n times. The *prompt* logic reports it at the first sample at which
//!   that holds and an edge has not just been reported. By induction on n no faithful logic ever reports any edge
//!   sooner, in any waveform.
//! * The prompt logic never reports a false edge. So if it is not faithful then no logic is, and if it is, its
//!   worst latencies at make and at break are each the least that exist. Make and break never have to be traded
//!   for each other: the frontier of the two is always a single point.
//!
//! A law must rest, so the table begins not with the start itself but with the belief after ever so many samples of the
//! position there. The start may always stay as it is, so these samples teach nothing and only add members; whatever
//! can come after them can come after the start too, and the worst is the same.
//!
//! The prompt logic is a finite table over beliefs. It is proved like any other logic, and its worst latencies are
//! the limit.
//!
//! # Forgetting
//!
//! A belief stands in for another if each of the other's members has one in it that can do all the same, and whose
//! pending change is as old: then a logic that goes on as from the vaguer belief is right in every waveform, and it
//! reports a change no later than the prompt logic reports one as old in some other waveform. So the worst latency
//! stays exactly the same, although single waveforms may be served later, and far fewer beliefs are needed. (Only
//! the vaguest matter, as in the antichain algorithms of De Wulf, Doyen, Henzinger and Raskin, 2006, from memory.)
//! The age of a change is known as long as the dwell has not been served and no older change is pending; elsewhere
//! nothing is forgotten.
//!
//! The tests solve small games a second time, backwards over all beliefs and both decisions, for every pair of
//! targets.

mod belief;
mod minimal;
mod subsets;

use core::fmt;

use debounce_core::{Envelope, PerChange, Position};

use super::environment::Environment;
use super::tabulate::LawTable;
use super::witness::Witness;
use super::{Contract, Limits, Outcome, ProveError, prove_within, word};
use crate::report::words;
use minimal::minimal;
use subsets::{Memory, Subsets, subsets};

/// The most beliefs that are looked at. Each is compared with all that are kept, so the time grows with the square.
const MOST_BELIEFS: usize = 1 << 14;

/// What the best logic can do.
#[derive(Clone, Debug)]
#[non_exhaustive]
pub enum LimitAnswer {
    /// The least worst latencies in samples, by the [proof](debounce_core::proofs) of the closed form.
    ClosedForm(PerChange<u32>),
    /// The least worst latencies, found by exploring all that a logic can know.
    Solved(Solution),
    /// There is no faithful logic.
    Unsolvable(NoLogic),
    /// The beliefs are too many.
    Unknown {
        /// Beliefs found before the search stopped.
        beliefs: usize,
        /// Bytes that they took.
        bytes: u64,
    },
}

impl LimitAnswer {
    /// The least worst latencies in samples, where they are known.
    #[must_use]
    pub fn latency(&self) -> Option<PerChange<u32>> {
        match self {
            Self::ClosedForm(latency) => Some(*latency),
            Self::Solved(solution) => Some(solution.latency),
            Self::Unsolvable(_) | Self::Unknown { .. } => None,
        }
    }
}

/// A limit, with a logic that reaches it.
#[derive(Clone, Debug)]
pub struct Solution {
    /// The least worst latency at each change, in samples.
    pub latency: PerChange<u32>,
    /// A logic with exactly these worst latencies, proved; no two of its states are alike.
    pub logic: LawTable,
    /// Beliefs looked at.
    pub beliefs: usize,
}

/// Why no logic is faithful.
#[derive(Clone, PartialEq, Eq, Debug)]
#[non_exhaustive]
pub enum NoLogic {
    /// The contact may be in a position between two samples.
    DwellUnseen {
        /// The position.
        position: Position,
    },
    /// Disturbances may follow each other without a sample between.
    NoQuiet,
    /// Disturbances of either position may look like the other position disturbed, for ever.
    AlwaysDisturbed {
        /// Fewest samples between two disturbances.
        quiet: u32,
        /// The narrower of the widest disturbances at open and at closed.
        glitch: u32,
    },
    /// Even the logic that reports as soon as no doubt is left misses a change, or falls four changes behind.
    AlwaysInDoubt {
        /// A waveform in which it does.
        witness: Witness,
    },
}

impl fmt::Display for NoLogic {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::DwellUnseen { position } => {
                write!(f, "no logic exists: the contact may be {} between two samples", word(*position))
            }
            Self::NoQuiet => {
                write!(
                    f,
                    "no logic exists: disturbances may follow each other without one quiet sample between"
                )
            }
            Self::AlwaysDisturbed { quiet, glitch } => write!(
                f,
                "no logic exists: quiet of {} between disturbances of {glitch} lets either position look like the other \
                 for ever",
                words::count(*quiet as usize, "sample")
            ),
            Self::AlwaysInDoubt { witness } => write!(
                f,
                "no logic exists: a waveform of {} leaves a change in doubt for ever, or until later ones \
                 are in doubt too",
                words::count(witness.ticks.len(), "sample")
            ),
        }
    }
}

/// The limit in closed form under a contract.
///
/// An output that turns over once per make can do so no sooner than a make can be known: the two waveforms of the
/// [proof](debounce_core::proofs), one with a make and one without, read the same up to the sample before the limit,
/// whatever the output is at first. And it need be no later: the state machine of the proof reports each make within
/// the limit, and the output turns over then. So both of its latencies have the limit of a make.
#[must_use]
pub fn closed_form_limit(envelope: &Envelope, contract: Contract) -> Option<PerChange<u32>> {
    let limit = envelope.limit()?;
    Some(match contract {
        Contract::Follow => limit,
        Contract::Alternate => PerChange { make: limit.make, break_: limit.make },
    })
}

/// The least worst latency of any logic in `envelope`: by the closed form where it is proved, else by beliefs.
///
/// # Errors
/// None that the envelope alone can cause; what does not fit `limits` is [`LimitAnswer::Unknown`].
pub fn limit(envelope: &Envelope, limits: &Limits) -> Result<LimitAnswer, ProveError> {
    if let Some(reason) = no_logic(envelope) {
        return Ok(LimitAnswer::Unsolvable(reason));
    }
    match envelope.limit() {
        Some(latency) => Ok(LimitAnswer::ClosedForm(latency)),
        None => solve_limit(envelope, limits),
    }
}

/// As [`limit`], but always by beliefs; so there is a logic where there is a limit.
///
/// ```
/// use debounce_core::{Envelope, PerChange};
/// use harness::prove::{Limits, LimitAnswer, solve_limit};
///
/// // Quiet lies between the two widths, where no formula is known.
/// let line = Envelope::clean(30, 30).bounce(3, 2).glitch(1, 3).quiet(2);
/// let LimitAnswer::Solved(best) = solve_limit(&line, &Limits::default())? else { panic!("a small game") };
/// assert_eq!(best.latency, PerChange { make: 9, break_: 8 });
/// # Ok::<(), harness::prove::ProveError>(())
/// ```
///
/// # Errors
/// As [`limit`].
pub fn solve_limit(envelope: &Envelope, limits: &Limits) -> Result<LimitAnswer, ProveError> {
    solve(envelope, limits, Memory::WhatMatters)
}

/// The logic that in every single waveform reports as soon as any logic could: in the worst of them no sooner than
/// [`solve_limit`]'s, in others sooner, for many more states.
///
/// # Errors
/// As [`limit`].
pub fn promptest_logic(envelope: &Envelope, limits: &Limits) -> Result<LimitAnswer, ProveError> {
    solve(envelope, limits, Memory::Everything)
}

fn solve(envelope: &Envelope, limits: &Limits, memory: Memory) -> Result<LimitAnswer, ProveError> {
    match no_logic(envelope) {
        Some(reason) => Ok(LimitAnswer::Unsolvable(reason)),
        None => by_beliefs(envelope, limits, memory),
    }
}

fn by_beliefs(envelope: &Envelope, limits: &Limits, memory: Memory) -> Result<LimitAnswer, ProveError> {
    let environment = match Environment::within(envelope, limits) {
        Err(ProveError::EnvironmentTooLarge { .. }) => {
            return Ok(LimitAnswer::Unknown { beliefs: 0, bytes: 0 });
        }
        other => other?,
    };
    let table = match subsets(&environment, envelope, limits, memory) {
        Ok(table) => table,
        Err(stopped) => {
            return Ok(LimitAnswer::Unknown { beliefs: stopped.beliefs, bytes: stopped.bytes });
        }
    };
    let beliefs = table.beliefs;
    let Subsets { next, outputs, rests, .. } = minimal(&table);
    let logic = LawTable::from_parts(&next, outputs, rests)?;
    let proof = match prove_within(&logic, envelope, limits) {
        Err(ProveError::TooLarge { limit, .. }) => {
            return Ok(LimitAnswer::Unknown { beliefs, bytes: limit });
        }
        other => other?,
    };
    Ok(match proof.outcome {
        Outcome::Faithful { bounds, .. } => {
            let latency = PerChange { make: bounds.latency.make.worst, break_: bounds.latency.break_.worst };
            LimitAnswer::Solved(Solution { latency, logic, beliefs })
        }
        Outcome::Refuted { witness, .. } => LimitAnswer::Unsolvable(NoLogic::AlwaysInDoubt { witness }),
    })
}

/// The reasons that can be read off the envelope.
fn no_logic(envelope: &Envelope) -> Option<NoLogic> {
    let e = envelope.delivered();
    for position in Position::BOTH {
        if e.dwell.at(position) == 0 {
            return Some(NoLogic::DwellUnseen { position });
        }
    }
    let (open, closed) = (e.glitch.open, e.glitch.closed);
    if e.quiet == 0 && (open > 0 || closed > 0) {
        return Some(NoLogic::NoQuiet);
    }
    // As many closed samples as `open` may be disturbed, then `quiet` open ones, over and over, are an open contact
    // disturbed and a closed contact disturbed. A change into it must still be calm enough at one of the two.
    let glitch = open.min(closed);
    (e.quiet <= glitch && e.calm <= open.max(closed))
        .then_some(NoLogic::AlwaysDisturbed { quiet: e.quiet, glitch })
}

#[cfg(test)]
mod tests {
    use debounce_core::Envelope;

    use super::{LimitAnswer, Limits, Memory, NoLogic, by_beliefs, no_logic};

    /// What is read off the envelope without looking at a single belief is what the beliefs say too.
    #[test]
    fn no_logic_read_off_the_envelope_agrees_with_beliefs() {
        let mut agreed = 0;
        for (bounce, open, closed) in [(0, 1, 1), (1, 1, 2), (2, 2, 1), (0, 2, 2), (1, 3, 2)] {
            for quiet in 1..=2 {
                for calm in 0..=3 {
                    let envelope = Envelope::clean(20, 20)
                        .bounce(bounce, 1)
                        .glitch(open, closed)
                        .quiet(quiet)
                        .calm(calm);
                    let answer = by_beliefs(&envelope, &Limits::default(), Memory::WhatMatters);
                    let unsolvable =
                        matches!(answer, Ok(LimitAnswer::Unsolvable(NoLogic::AlwaysInDoubt { .. })));
                    assert_eq!(unsolvable, no_logic(&envelope).is_some(), "{envelope:?}: {answer:?}");
                    agreed += u32::from(unsolvable);
                }
            }
        }
        assert_eq!(agreed, 22);
    }
}
