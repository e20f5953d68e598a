//! What an overrun does, where ticks and so their samples are lost: it delays, and never makes an operation up.

extern crate std;

use std::vec::Vec;

use crate::{
    Change, Changeover, ContactPair, Integrator, Law, Machine, MajorityRegister, PairFault, PairKind,
    PairPositions, Position, PulseCounter, PulseEvent, PulseLimits, QuadratureEvent, ShiftRegister, Speed,
    StateMachine, StateMachineParameters, Throws, Turn,
};
use Position::{Closed, Open};

/// How many ticks can be lost in each of the ways tried.
const LOSABLE: u32 = 10;

/// Runs `inputs` with every set of the first [`LOSABLE`] ticks lost, and hands over what was reported, with its tick.
fn with_every_loss<M: Machine>(
    machine: &M,
    start: M::State,
    inputs: &[M::Input],
    mut look: impl FnMut(&dyn Fn(usize) -> bool, Vec<(usize, M::Output)>),
) {
    for set in 0..1u32 << LOSABLE {
        let lost = |tick: usize| u32::try_from(tick).is_ok_and(|tick| tick < LOSABLE && set >> tick & 1 == 1);
        let mut state = start;
        let taken = inputs.iter().enumerate().filter(|(tick, _)| !lost(*tick));
        let reports = taken.map(|(tick, input)| (tick, machine.step(&mut state, *input))).collect();
        look(&lost, reports);
    }
}

/// The tick of the `count`-th sample that was not lost.
fn taken(lost: &dyn Fn(usize) -> bool, count: usize) -> usize {
    (0..).filter(|tick| !lost(*tick)).nth(count - 1).expect("there is no last tick")
}

#[test]
fn law_clean_make_with_lost_ticks_is_late_by_them_and_glitch_stays_one() {
    fn check<L: Law>(law: &L, confirm: usize) {
        with_every_loss(law, law.rest(Open), &[Closed; 24], |lost, reports| {
            let edges: Vec<_> = reports.into_iter().filter_map(|(tick, edge)| Some((tick, edge?))).collect();
            assert_eq!(edges, [(taken(lost, confirm), Change::Make)]);
        });
        let mut glitch = [Open; 24];
        glitch[2..1 + confirm].fill(Closed);
        with_every_loss(law, law.rest(Open), &glitch, |_, reports| {
            assert!(reports.iter().all(|(_, edge)| edge.is_none()));
        });
    }
    check(&Integrator::<u8>::new(6), 6);
    check(&ShiftRegister::new(5), 5);
    check(&MajorityRegister::<u8>::new(4, 6), 4);
    check(&StateMachine::<u8>::new(StateMachineParameters::confirm(5, 4).patience(2, 2)), 5);
}

#[test]
fn changeover_travel_with_lost_ticks_is_one_make_and_faults_later_only() {
    let lever = Changeover::new(3, 0);
    let throws = |resting, working| Throws { resting, working };
    let mut start = Changeover::POWER_UP;
    let _ = lever.step(&mut start, throws(Closed, Open));
    let mut travel = [throws(Open, Open); 16];
    travel[8..].fill(throws(Open, Closed));
    with_every_loss(&lever, start, &travel, |lost, reports| {
        let edges: Vec<_> = reports.iter().filter_map(|(tick, report)| Some((*tick, report.edge?))).collect();
        let arrived = (8..).find(|tick| !lost(*tick)).expect("there is no last tick");
        assert_eq!(edges, [(arrived, Change::Make)]);
        let fault = reports.iter().find(|(_, report)| report.fault.is_some()).map(|(tick, _)| *tick);
        let seen_on_the_way = (0..8).filter(|tick| !lost(*tick)).count();
        // The limit of 3 is passed at the fourth sample on the way, if so many were taken.
        assert_eq!(fault, (seen_on_the_way >= 4).then(|| taken(lost, 4)));
    });
}

#[test]
fn pulse_with_lost_ticks_is_narrower_and_never_two() {
    let counter = PulseCounter::new(PulseLimits { shortest_closed: 3, longest_closed: 9, shortest_open: 2 });
    let mut start = PulseCounter::POWER_UP;
    for _ in 0..8 {
        let _ = counter.step(&mut start, Open);
    }
    let mut line = [Open; 24];
    line[1..8].fill(Closed);
    with_every_loss(&counter, start, &line, |lost, reports| {
        let width = (1..8).filter(|tick| !lost(*tick)).count();
        let counted = reports.iter().filter(|(_, event)| matches!(event, Some(PulseEvent::Counted { .. })));
        let refused = reports.iter().filter(|(_, event)| matches!(event, Some(PulseEvent::Refused(_))));
        // One that lies in lost ticks altogether was never there.
        assert_eq!(
            (counted.count(), refused.count()),
            (usize::from(width >= 3), usize::from((1..3).contains(&width)))
        );
    });
}

#[test]
fn pair_discrepancy_with_lost_ticks_is_a_fault_later_by_them() {
    let lid = ContactPair::new(PairKind::Equivalent, 4);
    let mut start = ContactPair::POWER_UP;
    let _ = lid.step(&mut start, PairPositions { first: Open, second: Open });
    let apart = [PairPositions { first: Closed, second: Open }; 24];
    let mut on_time = None;
    with_every_loss(&lid, start, &apart, |lost, reports| {
        assert!(reports.iter().all(|(_, report)| report.edge.is_none()));
        let faults: Vec<(usize, PairFault)> =
            reports.iter().filter_map(|(tick, report)| Some((*tick, report.fault?))).collect();
        let (tick, fault) = *faults.first().expect("it is reported");
        let (first, expected) = *on_time.get_or_insert((tick, fault));
        assert_eq!(faults, [(taken(lost, first + 1), expected)]);
    });
}

#[test]
fn speed_with_lost_ticks_closes_its_gate_later_by_them() {
    let speed = Speed::new(6);
    let steps = [Some(QuadratureEvent::Step(Turn::Forward)); 24];
    with_every_loss(&speed, Speed::POWER_UP, &steps, |lost, reports| {
        let first = reports.into_iter().find_map(|(tick, steps)| Some((tick, steps?)));
        assert_eq!(first, Some((taken(lost, 6), 6)));
    });
}
