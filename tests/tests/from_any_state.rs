//! Power-up and upset: from any state of a logic, how long until it follows the contact again.

use std::hash::Hash;

use debounce_core::{
    Chain, Change, Envelope, Integrator, Law, Machine, MajorityRegister, Position, ShiftRegister,
    StateMachine,
};
use harness::check::assert_recovers_within;
use harness::prove::{LawTable, Limits, Recovery, prove, recovery_from_any_state};
use integration_tests::predicate::each_legal_word;

const BUTTON: Envelope = Envelope::clean(20, 20).bounce(2, 1).glitch(1, 1).quiet(4);

/// The same by brute force: every state, every legal word in which the contact stays; the last wrong output.
fn by_force<L: Law>(law: &L, envelope: &Envelope, length: usize) -> u32
where
    L::State: Hash,
{
    let (_, states) = LawTable::with_states(law).expect("a sound law");
    let mut right_from = 0;
    for start in Position::BOTH {
        each_legal_word(start, envelope, length, &mut |word| {
            if word.last().is_some_and(|&(contact, _)| contact != start) {
                return false;
            }
            if word.len() == length {
                for &state in &states {
                    let mut state = state;
                    if law.output(&state) != start {
                        right_from = right_from.max(1);
                    }
                    for (&(_, sample), at) in word.iter().zip(1..) {
                        let _ = law.step(&mut state, sample);
                        if law.output(&state) != start {
                            right_from = right_from.max(at + 1);
                        }
                    }
                }
            }
            true
        });
    }
    right_from
}

/// The samples that it takes, by exploration and by brute force.
#[track_caller]
fn recovers<L: Law>(law: &L, envelope: &Envelope) -> u32
where
    L::State: Hash,
{
    let found = assert_recovers_within(law, envelope, 100);
    assert_eq!(by_force(law, envelope, found as usize + 5), found, "by brute force");
    found
}

#[test]
fn recovery_of_every_law_from_any_state_matches_brute_force() {
    let machine = StateMachine::<u8>::for_envelope(&BUTTON).expect("a closed form");
    let found = [
        recovers(&ShiftRegister::new(2), &BUTTON),
        recovers(&MajorityRegister::<u8>::new(2, 3), &BUTTON),
        recovers(&MajorityRegister::<u8>::new(3, 5), &BUTTON),
        recovers(&Integrator::<u8>::new(4), &BUTTON),
        recovers(&machine, &BUTTON),
        recovers(&Chain::new(MajorityRegister::<u8>::new(2, 3), ShiftRegister::new(2)), &BUTTON),
        recovers(&Chain::new(ShiftRegister::new(2), Integrator::<u8>::new(3)), &BUTTON),
    ];
    assert_eq!(found, [4, 3, 4, 6, 5, 4, 6]);
}

#[test]
fn recovery_allowed_one_sample_less_is_refused() {
    let law = ShiftRegister::new(3);
    let clean = Envelope::clean(9, 9);
    assert_eq!(assert_recovers_within(&law, &clean, 3), 3);
    let refused = std::panic::catch_unwind(|| assert_recovers_within(&law, &clean, 2));
    let shown = *refused.unwrap_err().downcast::<String>().expect("a formatted message");
    assert_eq!(shown, "recovers only within 3 samples from some state, 2 are allowed");
}

/// Follows a clean contact at two samples, but four samples that alternate make it believe in a fault of the line,
/// and it forgets to ever look again.
#[derive(Debug)]
struct Sulks;

#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
struct SulksState {
    output: Position,
    last: Position,
    alternations: u8,
}

impl Machine for Sulks {
    type Input = Position;
    type Output = Option<Change>;
    type State = SulksState;

    fn step(&self, state: &mut SulksState, sample: Position) -> Option<Change> {
        if state.alternations == 4 {
            return None;
        }
        state.alternations = if sample == state.last { 0 } else { state.alternations + 1 };
        let twice = sample == state.last;
        state.last = sample;
        (twice && sample != state.output).then(|| {
            state.output = sample;
            sample.reached_by()
        })
    }
}

impl Law for Sulks {
    fn rest(&self, position: Position) -> SulksState {
        SulksState { output: position, last: position, alternations: 0 }
    }

    fn output(&self, state: &SulksState) -> Position {
        state.output
    }
}

#[test]
fn recovery_of_a_logic_that_gives_up_is_never_although_it_is_faithful() {
    let inside = Envelope::clean(9, 9).glitch(1, 1).quiet(4);
    assert!(prove(&Sulks, &inside).unwrap().bounds().is_some(), "nothing in its envelope makes it give up");
    let logic = LawTable::of(&Sulks).unwrap();
    let Recovery::Never(witness) = recovery_from_any_state(&logic, &inside, &Limits::default()).unwrap()
    else {
        panic!("from the state in which it has given up it never recovers")
    };
    let from = witness.loop_from.expect("for ever");
    assert!(witness.ticks[from..].iter().any(|tick| tick.output != tick.contact), "{witness:?}");
    let refused = std::panic::catch_unwind(|| assert_recovers_within(&Sulks, &inside, 1_000));
    let shown = *refused.unwrap_err().downcast::<String>().expect("a formatted message");
    assert!(shown.starts_with("never recovers: "), "{shown}");
    assert!(shown.contains("repeat for ever"), "{shown}");
}
