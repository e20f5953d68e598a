//! Proof: a logic and an envelope explored together, exhaustively.
//!
//! The envelope is an automaton ([`Environment`]), the logic is a table ([`LawTable`]), and everything that the
//! two can do together, from both starts, is walked through. What comes out is a [`Proof`]: either the logic is
//! *faithful*, with its exact best and worst latency at make and at break, each attained by a witness; or it is
//! refuted by a shortest waveform. A search that cannot be finished is an error, never a proof.
//!
//! ```
//! use debounce_core::{Change, Envelope, Law, Machine, Position};
//!
//! /// The output follows every sample at once.
//! struct Follow;
//!
//! impl Machine for Follow {
//!     type Input = Position;
//!     type Output = Option<Change>;
//!     type State = Position;
//!     fn step(&self, state: &mut Position, sample: Position) -> Option<Change> {
//!         let changed = *state != sample;
//!         *state = sample;
//!         changed.then(|| sample.reached_by())
//!     }
//! }
//!
//! impl Law for Follow {
//!     fn rest(&self, position: Position) -> Position { position }
//!     fn output(&self, state: &Position) -> Position { *state }
//! }
//!
//! let clean = harness::prove::prove(&Follow, &Envelope::clean(1, 1))?;
//! assert_eq!(clean.bounds().expect("faithful").latency.make.worst, 1);
//! let bouncing = harness::prove::prove(&Follow, &Envelope::clean(9, 9).bounce(3, 0))?;
//! assert!(bouncing.bounds().is_none());
//! # Ok::<(), harness::prove::ProveError>(())
//! ```

mod contract;
mod environment;
mod explore;
mod frontier;
mod immunity;
mod latency;
mod limit;
pub mod observe;
mod product;
mod recovery;
mod tabulate;
mod witness;

use core::fmt;
use core::hash::Hash;

use debounce_core::{Bounds, Change, Clause, Envelope, Latency, Law, PerChange, Position};

pub use contract::Contract;
pub use environment::{Branch, Environment, EnvironmentState, Fired};
pub use frontier::shortest_operations;
pub use immunity::{immunity, widest_lone_disturbance};
pub use limit::{LimitAnswer, NoLogic, Solution, limit, promptest_logic, solve_limit};
pub use recovery::{Recovery, recovery_from_any_state, recovery_from_short_operations};
pub use tabulate::{Entry, LawTable};
pub use witness::{Witness, WitnessTick};

use product::{Product, Step};

use crate::report::words;

/// What an exploration may use.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[non_exhaustive]
pub struct Limits {
    /// Most bytes for the set of visited states.
    pub memory_bytes: u64,
    /// Threads to share large layers among: 1 is none but the caller's, 0 is as many as there are.
    pub threads: usize,
}

impl Default for Limits {
    fn default() -> Self {
        Self { memory_bytes: 1 << 30, threads: 0 }
    }
}

/// Why there is no answer.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum ProveError {
    /// A dwell is seen by no sample.
    #[error(
        "the contact may be {} for so short a time that it falls between two samples; no logic can see that",
        word(*.position)
    )]
    DwellUnseen {
        /// The position that may go unseen.
        position: Position,
    },
    /// Disturbances follow each other without a sample between.
    #[error(
        "disturbances may follow each other without one quiet sample between them: quiet must be at least 1 tick"
    )]
    NoQuiet,
    /// A law says something else at rest than where it rests.
    #[error("the law is no law: at rest {} its output is {}", word(*.position), word(.position.opposite()))]
    RestOutput {
        /// Where it should rest.
        position: Position,
    },
    /// A law does not stay at rest.
    #[error("the law is no law: a {} sample moves it from rest {}", word(*.position), word(*.position))]
    RestMoves {
        /// Where it should rest.
        position: Position,
    },
    /// Two steps from the same state with the same sample differ.
    #[error(
        "the law is no law: its step from state {state} with a {} sample gave two different results; it must depend on nothing but law, state and sample",
        word(*.sample)
    )]
    NotAFunction {
        /// Number of the state, in the order of discovery.
        state: usize,
        /// The sample.
        sample: Position,
    },
    /// The edge returned does not match the change of the output.
    #[error(
        "the law is no law: from state {state} with a {} sample the edge it returns is not the change of its output",
        word(*.sample)
    )]
    EdgeOutput {
        /// Number of the state, in the order of discovery.
        state: usize,
        /// The sample.
        sample: Position,
    },
    /// A table has no states.
    #[error("the table is no law: it has no states")]
    NoStates,
    /// A table has not one output for each state.
    #[error("the table is no law: it has {states} states but {outputs} outputs")]
    OutputsMismatch {
        /// Number of states.
        states: usize,
        /// Number of outputs.
        outputs: usize,
    },
    /// A step of a table leads to a state that is not there.
    #[error(
        "the table is no law: from state {state} {} sample leads to state {target}; the states are 0 to {}",
        a_word(*.sample), .states - 1
    )]
    NoSuchState {
        /// The state stepped from.
        state: usize,
        /// The sample.
        sample: Position,
        /// Where it should lead.
        target: u32,
        /// Number of states.
        states: usize,
    },
    /// A table rests in a state that is not there.
    #[error(
        "the table is no law: it rests {} in state {target}; the states are 0 to {}",
        word(*.position), .states - 1
    )]
    NoSuchRest {
        /// Where it should rest.
        position: Position,
        /// The state named.
        target: u32,
        /// Number of states.
        states: usize,
    },
    /// The law has too many states.
    #[error("unfinished: the law has more than {} states ({states} found so far)", LawTable::MOST_STATES)]
    LawTooLarge {
        /// States found before the search stopped.
        states: usize,
    },
    /// The envelope's automaton has too many states.
    #[error("unfinished: the envelope has more than {limit} states of its own; use a longer tick period")]
    EnvironmentTooLarge {
        /// The most there may be.
        limit: usize,
    },
    /// The product does not fit the memory allowed.
    #[error(
        "unfinished: {pairs} pairs of envelope and law states need {bytes} bytes, more than the {limit} allowed"
    )]
    TooLarge {
        /// Pairs of states.
        pairs: u128,
        /// Bytes needed.
        bytes: u128,
        /// Bytes allowed.
        limit: u64,
    },
}

impl ProveError {
    fn environment_too_large() -> Self {
        Self::EnvironmentTooLarge { limit: 1 << 27 }
    }
}

fn word(position: Position) -> &'static str {
    match position {
        Position::Open => "open",
        Position::Closed => "closed",
    }
}

fn a_word(position: Position) -> &'static str {
    match position {
        Position::Open => "an open",
        Position::Closed => "a closed",
    }
}

/// A finished exploration.
#[derive(Clone, PartialEq, Debug)]
pub struct Proof {
    /// The envelope, as it was given.
    pub envelope: Envelope,
    /// What was promised.
    pub contract: Contract,
    /// What came out.
    pub outcome: Outcome,
    /// States of the law.
    pub law_states: usize,
    /// States of the envelope's automaton.
    pub environment_states: usize,
    /// States of both together that were reached.
    pub states: u64,
    /// Transitions taken between them.
    pub transitions: u64,
}

impl Proof {
    /// The bounds, if the law is faithful.
    #[must_use]
    pub fn bounds(&self) -> Option<Bounds> {
        match &self.outcome {
            Outcome::Faithful { bounds, .. } => Some(*bounds),
            Outcome::Refuted { .. } => None,
        }
    }

    /// The refutation, if there is one.
    #[must_use]
    pub fn refutation(&self) -> Option<(Clause, &Witness)> {
        match &self.outcome {
            Outcome::Faithful { .. } => None,
            Outcome::Refuted { clause, witness } => Some((*clause, witness)),
        }
    }
}

/// One line that says "proved" or "refuted", and of how much.
impl fmt::Display for Proof {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match &self.outcome {
            Outcome::Faithful { bounds, .. } => {
                let Latency { best, worst } = bounds.latency.make;
                write!(
                    f,
                    "proved: every operation is reported once, a make after {best} to {worst} samples"
                )?;
                let Latency { best, worst } = bounds.latency.break_;
                write!(f, ", a break after {best} to {worst}")?;
                write!(f, "; all {} states were visited", self.states)
            }
            Outcome::Refuted { clause, witness } => {
                let samples = words::count(witness.ticks.len(), "sample");
                write!(f, "refuted: {}, shown by {samples}", words::clause(*clause))
            }
        }
    }
}

/// What an exploration came to.
#[derive(Clone, PartialEq, Debug)]
pub enum Outcome {
    /// Every operation is reported once and in order, within these exact bounds.
    Faithful {
        /// Best and worst latency in samples.
        bounds: Bounds,
        /// For each change a waveform with the worst latency; the last tick reports it.
        slowest: PerChange<Option<Witness>>,
    },
    /// A promise is broken by a waveform inside the envelope.
    Refuted {
        /// The promise.
        clause: Clause,
        /// A shortest waveform that breaks it; where it loops, the change stays unreported for ever.
        witness: Witness,
    },
}

/// Proves or refutes `law` in `envelope`, with default limits.
///
/// # Errors
/// When the law breaks its obligations, or the exploration does not fit the limits.
pub fn prove<L: Law>(law: &L, envelope: &Envelope) -> Result<Proof, ProveError>
where
    L::State: Hash,
{
    prove_within(&LawTable::of(law)?, envelope, &Limits::default())
}

/// As [`prove`], for a law already tabulated and with limits of one's own.
///
/// # Errors
/// As [`prove`].
pub fn prove_within(logic: &LawTable, envelope: &Envelope, limits: &Limits) -> Result<Proof, ProveError> {
    prove_contract(logic, envelope, Contract::Follow, limits)
}

/// As [`prove_within`], against either contract.
///
/// # Errors
/// As [`prove`].
pub fn prove_contract(
    logic: &LawTable,
    envelope: &Envelope,
    contract: Contract,
    limits: &Limits,
) -> Result<Proof, ProveError> {
    refuse_hopeless(logic, envelope, limits)?;
    let environment = match Environment::under(envelope, contract) {
        Err(ProveError::DwellUnseen { position }) => return Ok(unseen(logic, envelope, contract, position)),
        other => other?,
    };
    let product = Product { environment: &environment, logic };
    let explored = explore::explore(&product, limits)?;
    let outcome = if explored.violation.is_some() {
        refute(&product, limits)?
    } else {
        match latency::Reports::of(&product, &explored.visited) {
            Ok(reports) => faithful(&product, limits, &reports, &explored.visited)?,
            Err(circle) => never_reported(&product, limits, &circle)?,
        }
    };
    Ok(Proof {
        envelope: *envelope,
        contract,
        outcome,
        law_states: logic.len(),
        environment_states: environment.len(),
        states: explored.states,
        transitions: explored.transitions,
    })
}

/// Calls `visit` with every state that `law` and `envelope` can be in together: the envelope's, the law's, and how many
/// changes are unreported. For an invariant of one's own. Returns how many there are; where the law is refuted, those
/// up to the samples that refute it.
///
/// # Errors
/// As [`prove`]; and where a dwell falls between two samples.
pub fn each_reachable_state<L: Law>(
    law: &L,
    envelope: &Envelope,
    limits: &Limits,
    mut visit: impl FnMut(&EnvironmentState, &L::State, u32),
) -> Result<u64, ProveError>
where
    L::State: Hash,
{
    let environment = Environment::of(envelope)?;
    let (logic, states) = LawTable::with_states(law)?;
    let product = Product { environment: &environment, logic: &logic };
    let explored = explore::explore(&product, limits)?;
    for node in explored.visited.nodes() {
        visit(environment.state(node.environment()), &states[node.logic()], product.pending(node));
    }
    Ok(explored.states)
}

/// Refuses an envelope whose automaton alone would not fit, before its states are enumerated.
///
/// Every time that the contact has held occurs together with every time since the last disturbance, up to dwell
/// and quiet, so the automaton has at least about so many states.
fn refuse_hopeless(logic: &LawTable, envelope: &Envelope, limits: &Limits) -> Result<(), ProveError> {
    let e = envelope.delivered();
    let quiet = if e.glitch.open == 0 && e.glitch.closed == 0 { 1 } else { u128::from(e.quiet) + 1 };
    let states = (u128::from(e.dwell.open) + u128::from(e.dwell.closed)) * quiet;
    let (pairs, limit) = (states * logic.len() as u128, limits.memory_bytes);
    // Two bits a pair in the set of visited ones, and about 64 bytes a state while the automaton is built.
    let bytes = (pairs / 4).max(states * 64);
    let allowed =
        u128::from(limit).max(if pairs / 4 <= u128::from(limit) { MOST_ENVIRONMENT_BYTES } else { 0 });
    if bytes > allowed { Err(ProveError::TooLarge { pairs, bytes, limit }) } else { Ok(()) }
}

/// An automaton may take this much while it is built, even where the set of visited states must be smaller.
const MOST_ENVIRONMENT_BYTES: u128 = 1 << 27;

/// The verdict where a dwell may fall between two samples: a miss, whatever the logic.
fn unseen(logic: &LawTable, envelope: &Envelope, contract: Contract, position: Position) -> Proof {
    let outcome =
        Outcome::Refuted { clause: Clause::DwellUnseen, witness: Witness::between_samples(position) };
    Proof {
        envelope: *envelope,
        contract,
        outcome,
        law_states: logic.len(),
        environment_states: 0,
        states: 0,
        transitions: 0,
    }
}

fn refute(product: &Product<'_>, limits: &Limits) -> Result<Outcome, ProveError> {
    let mut broken = None;
    let path = explore::shortest_path(product, limits, |_, _, step| match step {
        Step::Violates(clause) => {
            broken = Some(clause);
            true
        }
        Step::To(..) => false,
    })?;
    let path = path.expect("the violation found once is found again");
    let clause = broken.expect("the path ends with the violation");
    Ok(Outcome::Refuted { clause, witness: Witness::of(product, &path, None) })
}

fn never_reported(
    product: &Product<'_>,
    limits: &Limits,
    circle: &latency::Circle,
) -> Result<Outcome, ProveError> {
    let first = circle.0[0].0;
    let reaches = |_, _, step| matches!(step, Step::To(target, _) if target == first);
    let mut path = explore::shortest_path(product, limits, reaches)?.expect("every visited node has a path");
    let loop_from = path.len();
    path.extend_from_slice(&circle.0);
    let witness = Witness::of(product, &path, Some(loop_from));
    Ok(Outcome::Refuted { clause: Clause::Missed, witness })
}

fn faithful(
    product: &Product<'_>,
    limits: &Limits,
    reports: &latency::Reports,
    visited: &explore::Visited,
) -> Result<Outcome, ProveError> {
    let bounds = reports.bounds(product, visited);
    let mut slowest = PerChange { make: None, break_: None };
    for change in [Change::Make, Change::Break] {
        let worst = bounds.latency.at(change).worst;
        let path = explore::shortest_path(product, limits, |node, at, step| {
            product.change(product.branches(node)[at]) == Some(change)
                && reports.of_change(product, node, step).longest == worst
        })?;
        let witness = path.map(|mut path| {
            let &(node, at) = path.last().expect("the path ends with the change");
            let pending = product.pending(node);
            let Step::To(target, edge) = product.step(node, pending, product.branches(node)[at]) else {
                unreachable!("a product without violations was explored")
            };
            path.extend(reports.slowest(product, target, pending + 1 - u32::from(edge)));
            Witness::of(product, &path, None)
        });
        match change {
            Change::Make => slowest.make = witness,
            Change::Break => slowest.break_ = witness,
        }
    }
    Ok(Outcome::Faithful { bounds, slowest })
}
