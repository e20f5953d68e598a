//! Logic that no search exhausts, such as one that counts time without end: tried on many words, never proved.

use std::fmt;

use debounce_core::{Change, Clause, Envelope, Law, PerChange, Position};
use rand::SeedableRng;
use rand::rngs::ChaCha8Rng;

use super::follow::{Followed, Follower};
use crate::prove::{ProveError, Witness, WitnessTick};
use crate::report::words;
use crate::strategy::shrink::{Plan, simplest};
use crate::strategy::{Word, Words};

/// What so many drawn words showed. Unlike a [`Proof`](crate::prove::Proof) it says nothing about the others.
#[derive(Clone, PartialEq, Debug)]
pub struct Sampled {
    /// The envelope that was drawn from.
    pub envelope: Envelope,
    /// How many words were asked for.
    pub cases: u32,
    /// The seed of the draws.
    pub seed: u64,
    /// Samples that the logic was given in all.
    pub samples: u64,
    /// The longest latency that was seen; longer ones may exist.
    pub slowest_seen: PerChange<Option<u32>>,
    /// The first word that broke a promise, made as simple as could be.
    pub refutation: Option<Refutation>,
}

/// A word that broke a promise.
#[derive(Clone, PartialEq, Debug)]
pub struct Refutation {
    /// Which of the cases it was, counted from 1.
    pub case: u32,
    /// The promise.
    pub clause: Clause,
    /// The word, with its lost ticks.
    pub word: Word,
    /// What the logic was given of it, and what it said.
    pub witness: Witness,
}

/// Tries `law` on `cases` words drawn from `envelope`. The same seed gives the same words.
///
/// After each word the contact stays where it is, undisturbed, for some multiple of all lengths of the envelope; a
/// change unreported by then counts as missed. The logic need not be finite, and need not settle.
///
/// # Errors
/// When the envelope is none, or the logic says something else at rest than where it rests.
pub fn sample_faithful<L: Law>(
    law: &L,
    envelope: &Envelope,
    cases: u32,
    seed: u64,
) -> Result<Sampled, ProveError> {
    let words = Words::of(envelope)?;
    for position in Position::BOTH {
        if law.output(&law.rest(position)) != position {
            return Err(ProveError::RestOutput { position });
        }
    }
    let steady = steady_ticks(envelope);
    let mut sampled = Sampled {
        envelope: *envelope,
        cases,
        seed,
        samples: 0,
        slowest_seen: PerChange { make: None, break_: None },
        refutation: None,
    };
    for case in 0..cases {
        let mut rng = ChaCha8Rng::seed_from_u64(seed);
        rng.set_stream(case.into());
        let plan = words.plan(&mut rng);
        let followed = follow(law, &plan.value(), steady);
        sampled.samples += followed.ticks.len() as u64;
        let PerChange { make, break_ } = followed.slowest;
        sampled.slowest_seen.make = sampled.slowest_seen.make.max(make);
        sampled.slowest_seen.break_ = sampled.slowest_seen.break_.max(break_);
        if let Some(clause) = followed.fault {
            let word = simplest(plan, |word| follow(law, word, steady).fault == Some(clause));
            let ticks = follow(law, &word, steady).ticks;
            let witness = Witness { start: word.start, ticks, loop_from: None };
            sampled.refutation = Some(Refutation { case: case + 1, clause, word, witness });
            break;
        }
    }
    Ok(sampled)
}

fn steady_ticks(e: &Envelope) -> usize {
    let all = [e.dwell.open, e.dwell.closed, e.bounce.make, e.bounce.break_, e.glitch.open, e.glitch.closed];
    let sum: usize = all.into_iter().chain([e.quiet, e.calm, e.lost]).map(|ticks| ticks as usize).sum();
    64 + 4 * sum
}

fn follow<L: Law>(law: &L, word: &Word, steady: usize) -> Followed {
    let mut follower = Follower::at_rest(law, word.start);
    let goes_on = word.delivered().all(|tick| {
        follower.take(WitnessTick {
            contact: tick.contact,
            sample: tick.sample,
            output: tick.contact,
            bouncing: tick.bouncing,
            disturbed: tick.disturbed,
        })
    });
    if goes_on { follower.settle(steady) } else { follower.end() }
}

impl fmt::Display for Sampled {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if let Some(Refutation { case, clause, .. }) = &self.refutation {
            return write!(
                f,
                "refuted by case {case} of {} (seed {}): {}",
                self.cases,
                self.seed,
                words::clause(*clause)
            );
        }
        write!(f, "sampled {} cases (seed {}), not proved: no promise was broken", self.cases, self.seed)?;
        for change in [Change::Make, Change::Break] {
            if let Some(latency) = self.slowest_seen.at(change) {
                write!(f, ", slowest {} seen {latency} samples", words::change(change))?;
            }
        }
        Ok(())
    }
}
