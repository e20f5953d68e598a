//! What exploration shows of a logic beyond its bounds: immunity, the shortest operations, how it comes back.
//!
//! These searches repeat the proof many times or keep more of it in memory, so for large products they are made
//! only when asked for; what was not searched says why.

use debounce_core::{PerPosition, Position};

use super::frontier::shortest_operations_under;
use super::immunity::{immunity_under, widest_lone_disturbance};
use super::recovery::{Recovery, recovery_from_any_state, recovery_from_short_operations};
use super::tabulate::LawTable;
use super::{Contract, Limits, Outcome, Proof, ProveError};

/// How much work the searches may be.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub enum Effort {
    /// Only where the product has at most [`Beyond::QUICK`] states, so that nobody waits.
    #[default]
    Quick,
    /// However large the product is, as long as the memory suffices.
    Thorough,
}

/// Why something was not found.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum NotSearched {
    /// The search would take long.
    #[error("not searched, because it repeats the proof with its {states} states many times")]
    Large {
        /// States of envelope and law together.
        states: u64,
    },
    /// It says something only of an output that follows the contact.
    #[error("says nothing of an output that turns over: whether an operation too short counts is left open")]
    TurnsOver,
    /// The search was begun and does not fit.
    #[error(transparent)]
    Unfinished(#[from] ProveError),
}

/// What was found, or why it was not.
pub type Searched<T> = Result<T, NotSearched>;

/// Everything beyond the bounds, in delivered samples.
#[derive(Clone, PartialEq, Debug)]
pub struct Beyond {
    /// The widest lone disturbance from rest that is never reported; `None` where none ever is.
    pub lone_disturbance: PerPosition<Option<u32>>,
    /// The widest disturbance that the proof still bears at each position, all else as it is; `None` where it
    /// bears not even none.
    pub immunity: Searched<PerPosition<Option<u32>>>,
    /// The shortest operations that are always served; see [`shortest_operations`](super::shortest_operations).
    pub shortest_operations: Searched<Vec<PerPosition<u32>>>,
    /// After operations that were too short.
    pub after_short_operations: Searched<Recovery>,
    /// From any state.
    pub from_any_state: Searched<Recovery>,
}

impl Beyond {
    /// The most states of envelope and law together for which a quick search is made.
    pub const QUICK: u64 = 100_000;

    /// Searches for everything that can be said of a logic of which `proof` is the proof or the refutation.
    #[must_use]
    pub fn of(logic: &LawTable, proof: &Proof, effort: Effort, limits: &Limits) -> Self {
        let states = size(proof);
        let large = effort == Effort::Quick && states > Self::QUICK;
        let envelope = &proof.envelope;
        let lone = |position| widest_lone_disturbance(logic, position);
        Self {
            lone_disturbance: PerPosition { open: lone(Position::Open), closed: lone(Position::Closed) },
            immunity: searched(large, states, || immunity_under(logic, envelope, proof.contract, limits)),
            shortest_operations: searched(large, states, || {
                shortest_operations_under(logic, envelope, proof.contract, limits)
            }),
            after_short_operations: following(proof.contract).and_then(|()| {
                searched(large, states, || recovery_from_short_operations(logic, envelope, limits))
            }),
            from_any_state: following(proof.contract)
                .and_then(|()| searched(large, states, || recovery_from_any_state(logic, envelope, limits))),
        }
    }
}

/// States that the searches have to expect. A refutation stops early and says only how many there can be at most.
fn size(proof: &Proof) -> u64 {
    match proof.outcome {
        Outcome::Faithful { .. } => proof.states,
        Outcome::Refuted { .. } => (proof.environment_states as u64).saturating_mul(proof.law_states as u64),
    }
}

fn searched<T>(large: bool, states: u64, search: impl FnOnce() -> Result<T, ProveError>) -> Searched<T> {
    if large { Err(NotSearched::Large { states }) } else { Ok(search()?) }
}

/// Coming back means something only for an output that follows.
fn following(contract: Contract) -> Searched<()> {
    match contract {
        Contract::Follow => Ok(()),
        Contract::Alternate => Err(NotSearched::TurnsOver),
    }
}
