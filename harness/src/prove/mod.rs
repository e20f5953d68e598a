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

mod at_once;
mod beyond;
mod contract;
mod environment;
mod explore;
mod frontier;
mod immunity;
mod latency;
mod layers;
mod limit;
pub mod observe;
mod product;
mod reached;
mod recovery;
mod slowest;
mod tabulate;
mod witness;
mod word;

use core::fmt;
use core::hash::Hash;

use debounce_core::{Bounds, Clause, Envelope, Latency, Law, PerChange, Position};

pub use beyond::{Beyond, Effort, NotSearched, Searched};
pub use contract::Contract;
pub use environment::{Branch, Environment, EnvironmentState, Fired};
pub use frontier::shortest_operations;
pub use immunity::{immunity, widest_lone_disturbance};
pub use limit::{LimitAnswer, NoLogic, Solution, closed_form_limit, limit, promptest_logic, solve_limit};
pub use recovery::{Recovery, recovery_from_any_state, recovery_from_short_operations};
pub use tabulate::{Entry, LawTable};
pub use witness::{Witness, WitnessTick};

use layers::Layers;
use product::{Node, Product, Step};
use word::{Place, Words};

use crate::report::words;

/// What an exploration may use.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[non_exhaustive]
pub struct Limits {
    /// Most bytes for the set of states reached; envelope, law and the layers of a witness come on top.
    pub memory_bytes: u64,
    /// Threads to explore with: 1 is the caller's alone, 0 is as many as there are. Small explorations take one, large
    /// ones up to two, one for each position of the contact.
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
        "unfinished: {states} states of envelope and law together were reached before the {limit} bytes allowed were full, and no promise was broken up to there"
    )]
    TooLarge {
        /// States reached before the search stopped.
        states: u64,
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
    refuse_hopeless(envelope, limits)?;
    let environment = match Environment::under(envelope, contract) {
        Err(ProveError::DwellUnseen { position }) => return Ok(unseen(logic, envelope, contract, position)),
        other => other?,
    };
    prove_in(logic, &environment, envelope, contract, limits)
}

/// As [`prove_contract`], in the automaton that [`Environment::under`] made of the envelope and the contract.
pub(crate) fn prove_in(
    logic: &LawTable,
    environment: &Environment,
    envelope: &Envelope,
    contract: Contract,
    limits: &Limits,
) -> Result<Proof, ProveError> {
    let product = Product { environment, logic };
    let words = Words::of(&product);
    let (outcome, states, transitions) = match explore::explore(&product, &words, limits)? {
        Some(explored) => {
            let outcome = slowest::outcome(&product, &words, limits, &explored.reached)?;
            (outcome, explored.states, explored.transitions)
        }
        None => refute(&product, &words, limits)?,
    };
    Ok(Proof {
        envelope: *envelope,
        contract,
        outcome,
        law_states: logic.len(),
        environment_states: environment.len(),
        states,
        transitions,
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
    let environment = Environment::within(envelope, limits)?;
    let (logic, states) = LawTable::with_states(law)?;
    let product = Product { environment: &environment, logic: &logic };
    let words = Words::of(&product);
    let mut count = 0;
    let mut visit = |place, bits| {
        for node in words.nodes(place, bits) {
            count += 1;
            visit(environment.state(node.environment()), &states[node.logic()], product.pending(node));
        }
    };
    match explore::explore(&product, &words, limits)? {
        Some(explored) => explored.reached.words().for_each(|(place, bits)| visit(place, bits)),
        None => {
            let mut layers = Layers::new(&product, &words, limits);
            layers
                .search::<1>(&product, usize::MAX, |_, place, bits| broken(&product, &words, place, bits))?;
            layers.all().iter().flatten().for_each(|&(place, bits)| visit(place, bits));
        }
    }
    Ok(count)
}

impl Environment {
    /// As [`of`](Self::of), unless the automaton would be too large for the limits.
    ///
    /// # Errors
    /// As [`of`](Self::of), and [`ProveError::EnvironmentTooLarge`].
    pub fn within(envelope: &Envelope, limits: &Limits) -> Result<Self, ProveError> {
        refuse_hopeless(envelope, limits)?;
        Self::of(envelope)
    }
}

/// Refuses an envelope whose automaton alone would not fit, before its states are enumerated.
///
/// Every time that the contact has held occurs together with every time since the last disturbance, up to dwell
/// and quiet, so the automaton has at least about so many states.
fn refuse_hopeless(envelope: &Envelope, limits: &Limits) -> Result<(), ProveError> {
    let e = envelope.delivered();
    let quiet = if e.glitch.open == 0 && e.glitch.closed == 0 { 1 } else { u128::from(e.quiet) + 1 };
    let states = (u128::from(e.dwell.open) + u128::from(e.dwell.closed)) * quiet;
    let limit = limits.memory_bytes.max(LEAST_ENVIRONMENT_BYTES) / ENVIRONMENT_STATE_BYTES;
    if states <= u128::from(limit) {
        return Ok(());
    }
    Err(ProveError::EnvironmentTooLarge { limit: usize::try_from(limit).unwrap_or(usize::MAX) })
}

/// About what a state of the automaton takes while it is built.
const ENVIRONMENT_STATE_BYTES: u64 = 64;

/// An automaton may take this much even where the set of visited states must be smaller.
const LEAST_ENVIRONMENT_BYTES: u64 = 1 << 25;

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

/// The first state of a word, and branch from it, that breaks a promise.
fn broken(product: &Product<'_>, words: &Words<'_>, place: Place, bits: u64) -> Option<(Node, usize)> {
    let branches = product.environment.branches(words.environment_of(place));
    let all = branches.iter().fold(0, |all, &branch| all | words.split(place, bits, branch).broken);
    let node = words.nodes(place, all).next()?;
    let pending = product.pending(node);
    let breaks = |&branch: &_| matches!(product.step(node, pending, branch), Step::Violates(_));
    Some((node, branches.iter().position(breaks)?))
}

/// A shortest refutation where there is one, and the states and transitions up to the samples that it takes.
fn refute(
    product: &Product<'_>,
    words: &Words<'_>,
    limits: &Limits,
) -> Result<(Outcome, u64, u64), ProveError> {
    let mut layers = Layers::new(product, words, limits);
    let [path] =
        layers.search::<1>(product, usize::MAX, |_, place, bits| broken(product, words, place, bits))?;
    let path = path.expect("the violation found once is found again");
    let &(node, at) = path.last().expect("the path ends with the violation");
    let Step::Violates(clause) = product.step(node, product.pending(node), product.branches(node)[at]) else {
        unreachable!("the path ends with the violation")
    };
    let (mut states, mut transitions) = (0, 0);
    for &(place, bits) in layers.all().iter().flatten() {
        let here = u64::from(bits.count_ones());
        states += here;
        transitions += here * product.environment.branches(words.environment_of(place)).len() as u64;
    }
    let outcome = Outcome::Refuted { clause, witness: Witness::of(product, &path, None) };
    Ok((outcome, states, transitions))
}
