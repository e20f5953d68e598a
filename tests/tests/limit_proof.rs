//! The steps of the written proof of the limit (`debounce_core::proofs`), looked for in every reachable state.

use debounce_core::{Envelope, Law, Machine, PerChange, Position, StateMachine, StateMachineState};
use harness::prove::{EnvironmentState, LimitAnswer, Limits, each_reachable_state, prove, solve_limit};
use rayon::prelude::*;

/// Every envelope with bounce up to 4 and disturbances up to 2 samples, both edges apart, in the range of the closed
/// form, with the shortest dwells for which it is proved.
fn envelopes() -> Vec<Envelope> {
    let mut all = Vec::new();
    for make in 0..=4 {
        for break_ in 0..=4 {
            for open in 0..=2 {
                for closed in 0..=2 {
                    for quiet in 1..=4 {
                        for calm in 0..=3 {
                            let long = Envelope::clean(100, 100).bounce(make, break_);
                            let long = long.glitch(open, closed).quiet(quiet).calm(calm);
                            all.extend(long.limit().map(|limit| shortest(long, limit)));
                        }
                    }
                }
            }
        }
    }
    all
}

/// With the dwells of the claim: the limit, and the lock-out behind it.
fn shortest(mut envelope: Envelope, limit: PerChange<u32>) -> Envelope {
    envelope.dwell.closed = limit.make + envelope.bounce.make.saturating_sub(1);
    envelope.dwell.open = limit.break_ + envelope.bounce.break_.saturating_sub(1);
    envelope
}

/// The invariant of the proof while nothing is pending, and what it says of a pending change.
fn holds(
    law: &StateMachine,
    envelope: &Envelope,
    environment: &EnvironmentState,
    state: &StateMachineState,
    pending: u32,
) {
    let locked_out = u32::from(state.locked_out());
    let context = || format!("{envelope:?} {environment:?} {state:?}");
    assert!(pending <= 1, "a change is reported before the next: {}", context());
    if pending == 1 {
        assert_eq!(locked_out, 0, "at a change the lock-out is over: {}", context());
        return;
    }
    let widest = envelope.glitch.at(environment.contact);
    assert!(environment.bounce_left <= locked_out, "(a): {}", context());
    assert!(
        environment.window_left == 0 || environment.window_left < widest,
        "(b), at least one sample of the window has come: {}",
        context()
    );
    if locked_out == 0 {
        let confirm = u32::from(law.parameters().confirm.at(environment.contact.opposite().reached_by()));
        let seen = confirm - contrary_samples_to_an_edge(law, *state);
        assert!(seen + environment.window_left <= widest, "(c), of one window: {}", context());
    }
}

fn contrary_samples_to_an_edge(law: &StateMachine, mut state: StateMachineState) -> u32 {
    let contrary = law.output(&state).opposite();
    (1..).find(|_| law.step(&mut state, contrary).is_some()).expect("contrary samples report at last")
}

#[test]
fn limit_proof_invariant_holds_in_every_reachable_state() {
    let envelopes = envelopes();
    let states: u64 = envelopes
        .par_iter()
        .map(|envelope| {
            let law = StateMachine::<u8>::for_envelope(envelope).expect("in the range of the closed form");
            each_reachable_state(&law, envelope, &Limits::default(), |environment, state, pending| {
                holds(&law, envelope, environment, state, pending);
            })
            .expect("a sound envelope")
        })
        .sum();
    assert_eq!((envelopes.len(), states), (2_125, 215_140));
}

/// With dwells as short as the claim allows, the machine has the limit and no logic is better.
#[test]
fn limit_at_the_shortest_dwells_is_reached_and_not_beaten() {
    let envelopes = envelopes();
    envelopes.par_iter().for_each(|envelope| {
        let limit = envelope.limit().expect("the dwells are just long enough");
        let law = StateMachine::<u8>::for_envelope(envelope).expect("in the range of the closed form");
        let bounds = prove(&law, envelope).expect("a sound envelope").bounds();
        let worst = bounds.map(|b| PerChange { make: b.latency.make.worst, break_: b.latency.break_.worst });
        assert_eq!(worst, Some(limit), "{envelope:?}");
        let best = solve_limit(envelope, &Limits::default()).expect("a sound envelope");
        assert_eq!(best.latency(), Some(limit), "{envelope:?}");
        for position in Position::BOTH {
            let mut shorter = *envelope;
            match position {
                Position::Open => shorter.dwell.open -= 1,
                Position::Closed => shorter.dwell.closed -= 1,
            }
            assert_eq!(shorter.limit(), None, "{shorter:?}");
        }
    });
}

/// The example at the end of the proof: what the form would say there is not the truth.
#[test]
fn limit_with_a_dwell_one_tick_too_short_can_be_greater() {
    let bell = |closed| Envelope::clean(40, closed).bounce(5, 1);
    assert_eq!(bell(10).limit(), Some(PerChange { make: 6, break_: 2 }));
    assert_eq!(bell(8).limit(), None);
    let answer = solve_limit(&bell(8), &Limits::default()).expect("a sound envelope");
    assert!(matches!(answer, LimitAnswer::Solved(_)));
    assert_eq!(answer.latency(), Some(PerChange { make: 6, break_: 3 }));
}
