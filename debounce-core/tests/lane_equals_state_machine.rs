//! A lane of a patient bank is the state machine, state for state.

use std::collections::HashSet;

use debounce_core::{
    EdgeRule, Lane, Law, Machine, PatientBank, Position, StateMachine, StateMachineParameters,
};

#[test]
fn patient_lane_every_state_and_sample_equals_state_machine() {
    let counts = |most: u8| 1..=most;
    let mut pairs = 0;
    for (cm, cb) in counts(4).flat_map(|a| counts(4).map(move |b| (a, b))) {
        for (pm, pb) in counts(4).flat_map(|a| counts(4).map(move |b| (a, b))) {
            for (lm, lb) in (0..=3u8).flat_map(|a| (0..=3u8).map(move |b| (a, b))) {
                let rule = |c: u8, p: u8, l: u8| EdgeRule::new(c.into()).patience(p.into()).lockout(l.into());
                let lane = Lane::new(PatientBank::<u8, 2, 2, 2>::new(0, rule(cm, pm, lm), rule(cb, pb, lb)));
                let machine = StateMachine::<u8>::new(
                    StateMachineParameters::confirm(cm, cb).patience(pm, pb).lockout(lm, lb),
                );
                let mut seen = HashSet::new();
                let mut open: Vec<_> =
                    Position::BOTH.iter().map(|&p| (lane.rest(p), machine.rest(p))).collect();
                while let Some(pair) = open.pop() {
                    if !seen.insert(pair) {
                        continue;
                    }
                    for sample in Position::BOTH {
                        let mut next = pair;
                        assert_eq!(lane.step(&mut next.0, sample), machine.step(&mut next.1, sample));
                        open.push(next);
                    }
                }
                pairs += seen.len();
            }
        }
    }
    assert!(pairs > 4096 * 4, "{pairs}");
}
