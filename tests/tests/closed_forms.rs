//! The closed forms of the core against exploration, for every parameter inside a stated size.

use std::fmt::Debug;
use std::hash::Hash;

use debounce_core::{
    Envelope, Integrator, Law, MajorityRegister, ShiftRegister, StateMachine, StateMachineParameters, Verdict,
};
use harness::prove::{Outcome, prove};
use rayon::prelude::*;

/// How often a closed form said what, and how often the exploration said the same.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
struct Tally {
    holds: u32,
    fails: u32,
    unknown: u32,
}

impl Tally {
    fn and(self, other: Self) -> Self {
        Self {
            holds: self.holds + other.holds,
            fails: self.fails + other.fails,
            unknown: self.unknown + other.unknown,
        }
    }
}

fn compare<L: Law + Debug>(law: &L, verdict: Verdict, envelope: &Envelope) -> Tally
where
    L::State: Hash,
{
    let proof = prove(law, envelope).expect("a sound law and envelope");
    match (verdict, &proof.outcome) {
        (Verdict::Holds(claimed), Outcome::Faithful { bounds, .. }) if claimed == *bounds => {
            Tally { holds: 1, ..Tally::default() }
        }
        (Verdict::Fails(_), Outcome::Refuted { .. }) => Tally { fails: 1, ..Tally::default() },
        (Verdict::Unknown, _) => Tally { unknown: 1, ..Tally::default() },
        (claimed, outcome) => panic!("{law:?} in {envelope:?}: claimed {claimed:?}, explored {outcome:?}"),
    }
}

/// Every envelope over the given bounces and disturbances at both edges apart, quiet and calm.
fn envelopes(dwell: u32, bounces: &[u32], widest: u32, quiets: &[u32], calms: &[u32]) -> Vec<Envelope> {
    let mut all = Vec::new();
    for &make in bounces {
        for &break_ in bounces {
            for open in 0..=widest {
                for closed in 0..=widest {
                    for &quiet in quiets {
                        for &calm in calms {
                            let bouncing = Envelope::clean(dwell, dwell).bounce(make, break_);
                            all.push(bouncing.glitch(open, closed).quiet(quiet).calm(calm));
                        }
                    }
                }
            }
        }
    }
    all
}

fn tally(envelopes: &[Envelope], compare: impl Fn(&Envelope) -> Tally + Sync + Send) -> Tally {
    envelopes.par_iter().map(compare).reduce(Tally::default, Tally::and)
}

#[test]
fn closed_form_every_small_shift_register_agrees_with_exploration() {
    let envelopes = envelopes(40, &[0, 1, 2, 3, 8], 3, &[1, 2, 3, 4, 6], &[0, 2, 4]);
    let all = tally(&envelopes, |envelope| {
        (1..=6).fold(Tally::default(), |sum, window| {
            let law = ShiftRegister::new(window);
            sum.and(compare(&law, law.verdict(envelope), envelope))
        })
    });
    assert_eq!(all, Tally { holds: 7_437, fails: 28_563, unknown: 0 });
}

#[test]
fn closed_form_every_small_state_machine_agrees_with_exploration() {
    let envelopes = envelopes(30, &[0, 1, 4], 2, &[1, 2, 3, 5], &[0, 1, 3]);
    let all = tally(&envelopes, |envelope| {
        let mut sum = Tally::default();
        for confirm in [(1, 1), (2, 2), (2, 3), (3, 2), (4, 4)] {
            for patience in [(1, 1), (2, 1), (3, 3)] {
                for lockout in [(0, 0), (1, 0), (2, 3)] {
                    let parameters = StateMachineParameters::<u8>::confirm(confirm.0, confirm.1)
                        .patience(patience.0, patience.1)
                        .lockout(lockout.0, lockout.1);
                    let law = StateMachine::<u8>::new(parameters);
                    sum = sum.and(compare(&law, law.verdict(envelope), envelope));
                }
            }
        }
        sum
    });
    assert_eq!(all, Tally { holds: 12_821, fails: 30_919, unknown: 0 });
}

#[test]
fn closed_form_every_small_integrator_agrees_with_exploration() {
    let envelopes = envelopes(48, &[0, 1, 3, 8], 2, &[1, 2, 4, 7], &[0, 1, 3]);
    let all = tally(&envelopes, |envelope| {
        [(1, 1, 1), (2, 1, 1), (3, 1, 1), (4, 1, 1), (6, 1, 1), (3, 2, 1), (5, 1, 2), (6, 2, 3)]
            .into_iter()
            .map(|(full, up, down)| Integrator::<u8>::with_steps(full, up, down))
            .fold(Tally::default(), |sum, law| sum.and(compare(&law, law.verdict(envelope), envelope)))
    });
    assert_eq!(all, Tally { holds: 3_147, fails: 9_462, unknown: 1_215 });
}

/// Dwells too short for the closed form must be answered with "unknown" or with the truth, never with a guess.
#[test]
fn closed_form_short_dwells_agree_with_exploration() {
    let mut all = Tally::default();
    for dwell in 1..=24 {
        let envelopes = envelopes(dwell, &[0, 2, 5], 1, &[1, 2, 4], &[0, 2]);
        all = all.and(tally(&envelopes, |envelope| {
            let parameters = StateMachineParameters::<u8>::confirm(2, 3).patience(2, 1).lockout(1, 2);
            let machine = StateMachine::<u8>::new(parameters);
            let register = ShiftRegister::new(3);
            let integrator = Integrator::<u8>::new(3);
            compare(&machine, machine.verdict(envelope), envelope)
                .and(compare(&register, register.verdict(envelope), envelope))
                .and(compare(&integrator, integrator.verdict(envelope), envelope))
        }));
    }
    assert_eq!(all, Tally { holds: 4_869, fails: 7_451, unknown: 3_232 });
}

#[test]
fn closed_form_majority_never_contradicts_exploration() {
    let envelopes = envelopes(24, &[0, 2], 3, &[5], &[0]);
    let all = tally(&envelopes, |envelope| {
        let law = MajorityRegister::<u8>::new(3, 4);
        compare(&law, law.verdict(envelope), envelope)
    });
    assert_eq!(all, Tally { holds: 0, fails: 28, unknown: 36 });
}
