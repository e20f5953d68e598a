//! The parameters of `StateMachine::for_envelope` reach the limit, at make and break alike and different.

use debounce_core::{Envelope, StateMachine};
use harness::prove::prove;
use rayon::prelude::*;

/// Proves every envelope with bounce up to 8 and disturbances up to 3 samples, at both edges apart; with quiet
/// just longer than the widest disturbance and longer still, with calm 0 and with calm just long enough.
#[test]
fn limit_every_small_envelope_is_reached_by_the_state_machine() {
    let envelopes: Vec<Envelope> = every_small_envelope().collect();
    assert_eq!(envelopes.len(), 9 * 9 * 4 * 4 * 3);
    let states: u64 = envelopes.par_iter().map(reaches_the_limit).sum();
    assert_eq!(states, 3_439_746, "the pinned number of product states; it changes only with the model");
}

fn every_small_envelope() -> impl Iterator<Item = Envelope> {
    let bounces = (0..=8).flat_map(|make| (0..=8).map(move |break_| (make, break_)));
    let glitches = (0..=3).flat_map(|open| (0..=3).map(move |closed| (open, closed)));
    bounces.flat_map(move |(make, break_)| {
        glitches.clone().flat_map(move |(open, closed)| {
            let widest = open.max(closed);
            [(widest + 1, 0), (2 * widest + 2, 0), (widest + 1, widest + 1)].map(|(quiet, calm)| {
                Envelope::clean(24, 24).bounce(make, break_).glitch(open, closed).quiet(quiet).calm(calm)
            })
        })
    })
}

#[track_caller]
fn reaches_the_limit(envelope: &Envelope) -> u64 {
    let limit = envelope.limit().expect("inside the range of the closed form");
    let law = StateMachine::<u8>::for_envelope(envelope).expect("inside the range of the closed form");
    let proof = prove(&law, envelope).expect("a sound law and envelope");
    let bounds = proof.bounds().unwrap_or_else(|| panic!("{law:?} in {envelope:?}: {:?}", proof.outcome));
    let worst = (bounds.latency.make.worst, bounds.latency.break_.worst);
    assert_eq!(worst, (limit.make, limit.break_), "{law:?} in {envelope:?}");
    proof.states
}
