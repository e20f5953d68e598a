//! What else is proved of a logic: immunity, the shortest operations, and how it comes back.

use debounce_core::{
    Change, Envelope, Integrator, Law, Machine, PerPosition, Position, ShiftRegister, StateMachine,
    StateMachineParameters,
};
use harness::prove::{
    Environment, LawTable, Limits, ProveError, Recovery, immunity, prove_within, recovery_from_any_state,
    recovery_from_short_operations, shortest_operations, widest_lone_disturbance,
};

const BUTTON: Envelope = Envelope::clean(20, 20).bounce(4, 2).glitch(1, 1).quiet(6);

fn limits() -> Limits {
    Limits::default()
}

#[test]
fn lone_disturbance_of_a_unanimous_window_is_one_sample_short_of_it() {
    for window in 1..=9 {
        let logic = LawTable::of(&ShiftRegister::new(window)).unwrap();
        for position in Position::BOTH {
            assert_eq!(widest_lone_disturbance(&logic, position), Some(u32::from(window) - 1));
        }
    }
}

#[test]
fn lone_disturbance_of_unequal_steps_differs_by_position() {
    let logic = LawTable::of(&Integrator::<u8>::with_steps(6, 2, 3)).unwrap();
    assert_eq!(widest_lone_disturbance(&logic, Position::Open), Some(2));
    assert_eq!(widest_lone_disturbance(&logic, Position::Closed), Some(1));
}

#[test]
fn immunity_is_attained_and_one_more_is_refuted() {
    let law = StateMachine::<u8>::for_envelope(&BUTTON).unwrap();
    let logic = LawTable::of(&law).unwrap();
    let widest = immunity(&logic, &BUTTON, &limits()).unwrap();
    // Confirm counts are one more than the disturbance the machine was made for.
    assert_eq!(widest, PerPosition { open: Some(1), closed: Some(1) });
    let wider = prove_within(&logic, &BUTTON.glitch(2, 1), &limits()).unwrap();
    assert!(wider.bounds().is_none());
}

#[test]
fn immunity_of_a_logic_that_fails_undisturbed_is_none() {
    let logic = LawTable::of(&ShiftRegister::new(1)).unwrap();
    assert_eq!(immunity(&logic, &BUTTON, &limits()).unwrap(), PerPosition { open: None, closed: None });
}

/// Compares the frontier with a look at every pair of dwells.
#[track_caller]
fn frontier_is<L: Law>(law: &L, envelope: Envelope, expected: &[(u32, u32)])
where
    L::State: std::hash::Hash,
{
    let logic = LawTable::of(law).unwrap();
    let found = shortest_operations(&logic, &envelope, &limits()).unwrap();
    let found: Vec<_> = found.iter().map(|pair| (pair.closed, pair.open)).collect();
    for closed in 1..=envelope.dwell.closed {
        for open in 1..=envelope.dwell.open {
            let mut pair = envelope;
            pair.dwell = PerPosition { open, closed };
            let served = prove_within(&logic, &pair, &limits()).unwrap().bounds().is_some();
            let inside = found.iter().any(|&(c, o)| closed >= c && open >= o);
            assert_eq!(served, inside, "closed {closed}, open {open}: frontier {found:?}");
        }
    }
    assert_eq!(found, expected);
}

#[test]
fn frontier_of_a_clean_unanimous_window_is_the_window() {
    frontier_is(&ShiftRegister::new(4), Envelope::clean(12, 12), &[(4, 4)]);
}

#[test]
fn frontier_with_a_lock_out_trades_closed_against_open() {
    let parameters = StateMachineParameters::<u8>::confirm(2, 2).lockout(4, 4);
    // A make and a break need their two samples each, and the two lock-outs of four between them.
    let frontier = [(2, 10), (3, 9), (4, 8), (5, 7), (6, 6), (7, 5), (8, 4), (9, 3), (10, 2)];
    frontier_is(&StateMachine::<u8>::new(parameters), Envelope::clean(14, 14), &frontier);
}

#[test]
fn frontier_of_the_machine_at_the_limit_matches_every_pair() {
    let law = StateMachine::<u8>::for_envelope(&BUTTON).unwrap();
    frontier_is(&law, BUTTON, &[(7, 6), (8, 5)]);
}

#[test]
fn recovery_of_a_clean_unanimous_window_is_the_window() {
    let logic = LawTable::of(&ShiftRegister::new(3)).unwrap();
    let clean = Envelope::clean(9, 9);
    assert_eq!(recovery_from_short_operations(&logic, &clean, &limits()).unwrap(), Recovery::Within(3));
    // Any state: the run length says nothing until three samples in a row agree.
    assert_eq!(recovery_from_any_state(&logic, &clean, &limits()).unwrap(), Recovery::Within(3));
}

#[test]
fn recovery_of_the_machine_at_the_limit_includes_its_lock_out() {
    let law = StateMachine::<u8>::for_envelope(&BUTTON).unwrap();
    let logic = LawTable::of(&law).unwrap();
    let found = recovery_from_short_operations(&logic, &BUTTON, &limits()).unwrap();
    // Lock-out of 3 ticks after the make, then the 7 samples of the worst make.
    assert_eq!(found, Recovery::Within(10));
    let found = recovery_from_any_state(&logic, &BUTTON, &limits()).unwrap();
    assert_eq!(found, Recovery::Within(7));
}

/// Follows until it has seen two changes closer together than three samples, then is deaf for good.
#[derive(Debug)]
struct Deafens;

impl Machine for Deafens {
    type Input = Position;
    type Output = Option<Change>;
    type State = (Position, u8);

    fn step(&self, state: &mut Self::State, sample: Position) -> Option<Change> {
        let (output, since) = *state;
        if since == u8::MAX {
            return None;
        }
        let changed = sample != output;
        *state = match (changed, since < 2) {
            (true, true) => (output, u8::MAX),
            (true, false) => (sample, 0),
            (false, _) => (output, (since + 1).min(2)),
        };
        (changed && since >= 2).then(|| sample.reached_by())
    }
}

impl Law for Deafens {
    fn rest(&self, position: Position) -> Self::State {
        (position, 2)
    }

    fn output(&self, state: &Self::State) -> Position {
        state.0
    }
}

#[test]
fn recovery_of_a_logic_that_goes_deaf_is_never() {
    let logic = LawTable::of(&Deafens).unwrap();
    let clean = Envelope::clean(5, 5);
    assert!(
        prove_within(&logic, &clean, &limits()).unwrap().bounds().is_some(),
        "faithful inside its envelope"
    );
    let Recovery::Never(witness) = recovery_from_short_operations(&logic, &clean, &limits()).unwrap() else {
        panic!("one operation too short makes it deaf");
    };
    let from = witness.loop_from.expect("a loop");
    assert!(witness.ticks[from..].iter().all(|tick| tick.output != tick.contact), "{witness:?}");
}

/// A contact that rests for seconds, sampled fast and with disturbances seconds apart: its automaton alone would
/// take gigabytes, so it is refused before it is built.
#[test]
fn environment_of_a_contact_that_rests_for_seconds_is_refused_unbuilt() {
    let resting = Envelope::clean(15_000, 3_600).bounce(1, 87).glitch(43, 5).quiet(13_000);
    let mut little = limits();
    little.memory_bytes = 1 << 20;
    let Err(ProveError::EnvironmentTooLarge { limit: 524_288 }) = Environment::within(&resting, &little)
    else {
        panic!("242 million states do not fit");
    };
    let quick = Envelope::clean(150, 36).bounce(1, 9).glitch(4, 1).quiet(130);
    assert!(Environment::within(&quick, &little).is_ok());
}
