//! Assertions for one's own tests: a claim about a logic that is proved whenever the tests run.
//!
//! Each explores everything that logic and envelope can do together. A failure prints the shortest witness as a
//! timing diagram, and the line that replays it, to be kept as a regression test.
//!
//! ```
//! use debounce_core::{Envelope, StateMachine};
//! use harness::check::{assert_faithful, assert_latency_at_most};
//!
//! const DOOR: Envelope = Envelope::clean(20, 20).bounce(4, 2).glitch(1, 1).quiet(6);
//! let law = StateMachine::<u8>::for_envelope(&DOOR)?;
//! assert_faithful(&law, &DOOR);
//! assert_latency_at_most(&law, &DOOR, 7, 5);
//! # Ok::<(), debounce_core::ParameterError>(())
//! ```
//!
//! For logic whose state never ends, such as one with time stamps, there is [`assert_sampled_faithful`]: it tries many
//! words and *proves nothing*; its [`Sampled`] says so.

mod follow;
mod replay;
mod sampled;

use core::hash::Hash;

use debounce_core::{Bounds, Change, Envelope, Law, PerChange};

pub use replay::{Replay, edges, replay, samples};
pub use sampled::{Refutation, Sampled, sample_faithful};

use crate::machine::{Apart, MachineTable, compare};
use crate::prove::{LawTable, Limits, Outcome, Proof, ProveError, Recovery, prove, recovery_from_any_state};
use crate::report::timing::TimingDiagram;
use crate::report::words;
use crate::strategy::row;

/// Asserts that `law` reports every operation in `envelope` once and in order, and nothing else.
///
/// # Panics
/// When it does not, or no answer was found.
#[track_caller]
pub fn assert_faithful<L: Law>(law: &L, envelope: &Envelope) -> Proof
where
    L::State: Hash,
{
    let proof = proved(prove(law, envelope));
    if let Some((clause, witness)) = proof.refutation() {
        let replayed = match witness.ticks.first() {
            Some(_) if proof.states > 0 => replay::line(witness, "assert_faithful()"),
            // An operation between two samples is not in any word.
            _ => "// no word of samples shows it".to_owned(),
        };
        fail(&format!("not faithful: {}", words::clause(clause)), TimingDiagram(witness), &replayed);
    }
    proof
}

/// Asserts that `law` is faithful in `envelope` and reports within so many samples.
///
/// # Panics
/// When it is not or does not, or no answer was found.
#[track_caller]
pub fn assert_latency_at_most<L: Law>(law: &L, envelope: &Envelope, make: u32, break_: u32) -> Bounds
where
    L::State: Hash,
{
    let proof = assert_faithful(law, envelope);
    let Outcome::Faithful { bounds, slowest } = &proof.outcome else { unreachable!("it was faithful") };
    let allowed = PerChange { make, break_ };
    for change in [Change::Make, Change::Break] {
        let latency = bounds.latency.at(change).worst;
        if latency > allowed.at(change)
            && let Some(witness) = slowest.of(change)
        {
            let then = format!("assert_latency_at_most({make}, {break_})");
            let what = too_slow(change, latency, allowed.at(change));
            fail(&what, TimingDiagram(witness), &replay::line(witness, &then));
        }
    }
    *bounds
}

/// Asserts that `law` stays faithful in `envelope` when disturbances are as wide as this, in samples.
///
/// # Panics
/// When it does not, or no answer was found.
#[track_caller]
pub fn assert_immune_to<L: Law>(law: &L, envelope: &Envelope, open: u32, closed: u32) -> Proof
where
    L::State: Hash,
{
    assert_faithful(law, &envelope.glitch(open, closed))
}

/// Asserts that two laws report the same for every sequence of samples, from rest at either position.
///
/// # Panics
/// When they do not, with a shortest sequence that tells them apart; or when one of them is no law.
#[track_caller]
pub fn assert_equivalent<A: Law, B: Law>(one: &A, other: &B)
where
    A::State: Hash,
    B::State: Hash,
{
    let (a, b) = (proved(MachineTable::of(one)), proved(MachineTable::of(other)));
    if let Some(Apart { start, samples, edges }) = compare(&a, &b) {
        let row = row(samples);
        let says = |edge: Option<Change>| edge.map_or("nothing", words::change);
        panic!(
            "not equivalent: from rest {}, after the samples {row} the one law reports {}, the other {}\n\n\
             keep it as a test:\n    \
             assert_eq!(edges(&one, Position::{start:?}, \"{row}\"), edges(&other, Position::{start:?}, \"{row}\"));\n",
            words::position(start),
            says(edges[0]),
            says(edges[1]),
        );
    }
}

/// Asserts that from any state that `law` can come into, whatever brought it there, its output is right for good
/// after this many samples in `envelope`, the contact staying where it is.
///
/// # Panics
/// When it is not, or no answer was found.
#[track_caller]
pub fn assert_recovers_within<L: Law>(law: &L, envelope: &Envelope, samples: u32) -> u32
where
    L::State: Hash,
{
    let logic = proved(LawTable::of(law));
    match proved(recovery_from_any_state(&logic, envelope, &Limits::default())) {
        Recovery::Within(found) if found <= samples => found,
        Recovery::Within(found) => {
            panic!("recovers only within {found} samples from some state, {samples} are allowed")
        }
        Recovery::Never(witness) => panic!(
            "never recovers: from some state the output stays wrong, or becomes wrong again and again\n\n{}",
            TimingDiagram(&witness)
        ),
    }
}

/// Tries `law` on many words drawn from `envelope`. Proves nothing: for logic that no search exhausts.
///
/// # Panics
/// When a promise is broken, with the simplest word that was found to break it; or when nothing can be drawn.
#[track_caller]
pub fn assert_sampled_faithful<L: Law>(law: &L, envelope: &Envelope, cases: u32, seed: u64) -> Sampled {
    let sampled = proved(sample_faithful(law, envelope, cases, seed));
    if let Some(Refutation { witness, .. }) = &sampled.refutation {
        let replayed = replay::line(witness, "assert_faithful()");
        fail(&sampled.to_string(), TimingDiagram(witness), &replayed);
    }
    sampled
}

#[track_caller]
fn proved<T>(answer: Result<T, ProveError>) -> T {
    match answer {
        Ok(answer) => answer,
        Err(error) => panic!("no answer: {error}"),
    }
}

fn too_slow(change: Change, latency: u32, allowed: u32) -> String {
    format!("too slow: a {} takes {latency} samples, {allowed} are allowed", words::change(change))
}

#[track_caller]
fn fail(what: &str, diagram: TimingDiagram<'_>, replayed: &str) -> ! {
    panic!("{what}\n\n{diagram}\nkeep it as a test:\n    {replayed}\n")
}
