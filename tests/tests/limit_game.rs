//! The limit, solved a second time as a plain game, and against the closed form.

use std::collections::{BTreeMap, BTreeSet};

use debounce_core::{Envelope, PerChange, Position};
use harness::prove::{
    Environment, LimitAnswer, Limits, NoLogic, Solution, limit, promptest_logic, prove_within, solve_limit,
};
use rayon::prelude::*;

/// An environment state that agrees with the samples, and for how many samples its change has been unreported.
type Member = (usize, Option<u32>);
type Belief = BTreeSet<Member>;

/// The safety game for one pair of latencies, solved backwards: all beliefs that any decisions lead to, of which
/// the lost ones are struck off until none is left to strike. Nothing is pruned and both decisions are always open.
/// A change may be pending alone only, which loses nothing while no latency is longer than the dwell.
fn some_logic_wins(environment: &Environment, most: PerChange<u32>) -> bool {
    // What a belief offers for each sample: the beliefs that the decisions lead to; `None` where it cannot occur.
    let mut game: BTreeMap<Belief, [Option<Vec<Belief>>; 2]> = BTreeMap::new();
    let starts = Position::BOTH.map(|position| Belief::from([(environment.start(position), None)]));
    let mut open = starts.to_vec();
    while let Some(belief) = open.pop() {
        if game.contains_key(&belief) {
            continue;
        }
        let offers = Position::BOTH.map(|sample| {
            let after = after(environment, &belief, sample);
            (!after.is_empty()).then(|| decisions(environment, &after, most))
        });
        open.extend(offers.iter().flatten().flatten().cloned());
        game.insert(belief, offers);
    }
    let mut won: BTreeSet<&Belief> = game.keys().collect();
    loop {
        let lost: Vec<&Belief> = won
            .iter()
            .copied()
            .filter(|belief| {
                game[belief]
                    .iter()
                    .flatten()
                    .any(|choices| !choices.iter().any(|choice| won.contains(choice)))
            })
            .collect();
        if lost.is_empty() {
            return starts.iter().all(|start| won.contains(start));
        }
        lost.iter().for_each(|belief| {
            won.remove(belief);
        });
    }
}

/// Every member's ways to go on with a sample, before the logic decides.
fn after(environment: &Environment, belief: &Belief, sample: Position) -> Belief {
    let mut after = Belief::new();
    for &(state, pending) in belief {
        for branch in environment.branches(state).iter().filter(|branch| branch.sample() == sample) {
            let age = match (branch.changes(), pending) {
                (0, age) => age.map(|age| age + 1),
                (_, None) => Some(1),
                (_, Some(_)) => panic!("no latency is longer than the dwell"),
            };
            after.insert((branch.target(), age));
        }
    }
    after
}

/// The beliefs after saying nothing and after a report, as far as either is allowed.
fn decisions(environment: &Environment, after: &Belief, most: PerChange<u32>) -> Vec<Belief> {
    let mut choices = Vec::new();
    let late = |&(state, age): &Member| {
        age.is_some_and(|age| age >= most.at(environment.state(state).contact.reached_by()))
    };
    if !after.iter().any(late) {
        choices.push(after.clone());
    }
    if after.iter().all(|(_, age)| age.is_some()) {
        choices.push(after.iter().map(|&(state, _)| (state, None)).collect());
    }
    choices
}

/// All pairs of latencies up to the dwells for which some logic wins, and of which neither can be less.
fn frontier(envelope: &Envelope) -> Vec<PerChange<u32>> {
    let environment = Environment::of(envelope).expect("a sound envelope");
    let mut frontier = Vec::new();
    let mut least_break = envelope.dwell.open + 1;
    for make in 1..=envelope.dwell.closed {
        let wins = |break_| some_logic_wins(&environment, PerChange { make, break_ });
        let mut least = least_break;
        while least > 1 && wins(least - 1) {
            least -= 1;
        }
        if least < least_break {
            frontier.push(PerChange { make, break_: least });
            least_break = least;
        }
    }
    frontier
}

#[track_caller]
fn solved(envelope: &Envelope) -> Solution {
    match solve_limit(envelope, &Limits::default()) {
        Ok(LimitAnswer::Solved(solution)) => solution,
        other => panic!("{envelope:?}: {other:?}"),
    }
}

/// The latency that the synthesised logic is proved to have, apart from what the solver says of it.
#[track_caller]
fn proved(solution: &Solution, envelope: &Envelope) -> PerChange<u32> {
    let proof = prove_within(&solution.logic, envelope, &Limits::default()).expect("a sound envelope");
    let bounds = proof.bounds().unwrap_or_else(|| panic!("{envelope:?}: {:?}", proof.outcome));
    PerChange { make: bounds.latency.make.worst, break_: bounds.latency.break_.worst }
}

/// Both edges apart, every quiet and calm that matters.
fn every_envelope(
    dwells: &[u32],
    bounces: &[u32],
    widest: u32,
    quiets: &[u32],
    calms: &[u32],
) -> Vec<Envelope> {
    let mut all = Vec::new();
    for &dwell in dwells {
        for &make in bounces {
            for &break_ in bounces {
                for open in 0..=widest {
                    for closed in 0..=widest {
                        for &quiet in quiets {
                            for &calm in calms {
                                let clean = Envelope::clean(dwell, dwell).bounce(make, break_);
                                all.push(clean.glitch(open, closed).quiet(quiet).calm(calm));
                            }
                        }
                    }
                }
            }
        }
    }
    all
}

/// The frontier is always a single point, the one that the solver finds; or there is none, and the solver finds none
/// that is within the dwell.
#[test]
fn limit_every_tiny_envelope_agrees_with_the_game_solved_backwards() {
    let envelopes = every_envelope(&[2, 5], &[0, 2], 2, &[1, 2, 3], &[0, 1]);
    let solvable: usize = envelopes
        .par_iter()
        .map(|envelope| {
            let frontier = frontier(envelope);
            let answer = solve_limit(envelope, &Limits::default()).expect("a sound envelope");
            let within = |latency: &PerChange<u32>| {
                latency.make <= envelope.dwell.closed && latency.break_ <= envelope.dwell.open
            };
            assert!(!matches!(answer, LimitAnswer::Unknown { .. }), "{envelope:?}");
            let single: Vec<PerChange<u32>> = answer.latency().into_iter().filter(within).collect();
            assert_eq!(frontier, single, "{envelope:?}: {answer:?}");
            frontier.len()
        })
        .sum();
    assert_eq!((envelopes.len(), solvable), (432, 164));
}

/// Where the closed form is proved the beliefs say the same, and the logic they make is proved to reach it.
#[test]
fn limit_every_small_envelope_in_the_range_of_the_closed_form_is_the_same_by_beliefs() {
    let envelopes = every_envelope(&[30], &[0, 1, 3, 4], 2, &[1, 2, 3, 5], &[0, 1, 2, 3, 5]);
    let (compared, beliefs, states) = envelopes
        .par_iter()
        .filter_map(|envelope| {
            let limit = envelope.limit()?;
            let solution = solved(envelope);
            assert_eq!(solution.latency, limit, "{envelope:?}");
            assert_eq!(proved(&solution, envelope), limit, "{envelope:?}");
            Some((1, solution.beliefs, solution.logic.len()))
        })
        .reduce(|| (0, 0, 0), |a, b| (a.0 + b.0, a.1 + b.1, a.2 + b.2));
    assert_eq!((envelopes.len(), compared, beliefs, states), (2_880, 1_936, 13_536, 12_664));
}

/// Outside that range too the synthesised logic is faithful with exactly the latencies promised; and what it
/// forgets costs nothing in the worst case.
#[test]
fn limit_logic_outside_the_closed_form_is_proved_and_as_good_as_the_promptest() {
    let envelopes = every_envelope(&[30], &[0, 3], 3, &[1, 2, 3], &[0, 1, 2]);
    let (solved, unsolvable) = envelopes
        .par_iter()
        .filter(|envelope| envelope.limit().is_none())
        .map(|envelope| match limit(envelope, &Limits::default()).expect("a sound envelope") {
            LimitAnswer::Solved(solution) => {
                assert_eq!(proved(&solution, envelope), solution.latency, "{envelope:?}");
                let promptest = promptest_logic(envelope, &Limits::default()).expect("a sound envelope");
                assert_eq!(promptest.latency(), Some(solution.latency), "{envelope:?}");
                (1, 0)
            }
            LimitAnswer::Unsolvable(_) => (0, 1),
            other => panic!("{envelope:?}: {other:?}"),
        })
        .reduce(|| (0, 0), |a, b| (a.0 + b.0, a.1 + b.1));
    assert_eq!((solved, unsolvable), (248, 164));
}

/// Dwells so short that several changes can be in doubt at once, where the age of a change is not always known.
#[test]
fn limit_short_dwells_forgetting_costs_nothing() {
    let envelopes = every_envelope(&[1, 2, 3, 5], &[0, 1, 3], 1, &[1, 2], &[0, 2]);
    let solvable: u32 = envelopes
        .par_iter()
        .map(|envelope| {
            let forgetful = solve_limit(envelope, &Limits::default()).expect("a sound envelope");
            let promptest = promptest_logic(envelope, &Limits::default()).expect("a sound envelope");
            assert!(!matches!(promptest, LimitAnswer::Unknown { .. }), "{envelope:?}");
            assert!(!matches!(forgetful, LimitAnswer::Unknown { .. }), "{envelope:?}");
            assert_eq!(forgetful.latency(), promptest.latency(), "{envelope:?}");
            u32::from(forgetful.latency().is_some())
        })
        .sum();
    assert_eq!((envelopes.len(), solvable), (576, 221));
}

/// Envelopes as wide as occur in practice; the numbers of beliefs and states change only with the solver.
#[test]
fn limit_wide_envelopes_are_solved_with_few_beliefs() {
    let alike = |bounce, glitch, dwell| {
        Envelope::clean(dwell, dwell).bounce(bounce, bounce).glitch(glitch, glitch).quiet(glitch + 1)
    };
    for (envelope, beliefs, states) in [(alike(8, 3, 24), 82, 46), (alike(16, 4, 60), 179, 92)] {
        let solution = solved(&envelope);
        assert_eq!(Some(solution.latency), envelope.limit(), "{envelope:?}");
        assert_eq!((solution.beliefs, solution.logic.len()), (beliefs, states), "{envelope:?}");
    }
    let between = Envelope::clean(80, 80).bounce(8, 8).glitch(4, 6).quiet(5);
    let solution = solved(&between);
    assert_eq!(proved(&solution, &between), solution.latency);
    assert_eq!(solution.latency, PerChange { make: 23, break_: 23 });
    assert_eq!((solution.beliefs, solution.logic.len()), (303, 88));
}

#[track_caller]
fn unsolvable(envelope: Envelope) -> NoLogic {
    match limit(&envelope, &Limits::default()) {
        Ok(LimitAnswer::Unsolvable(reason)) => reason,
        other => panic!("{envelope:?}: {other:?}"),
    }
}

#[test]
fn limit_where_no_logic_exists_names_the_reason() {
    let clean = Envelope::clean;
    assert_eq!(unsolvable(clean(3, 2).lost(2)), NoLogic::DwellUnseen { position: Position::Closed });
    assert_eq!(unsolvable(clean(9, 9).glitch(1, 0).quiet(0)), NoLogic::NoQuiet);
    let disturbed = unsolvable(clean(9, 9).glitch(1, 2).quiet(1));
    assert_eq!(disturbed, NoLogic::AlwaysDisturbed { quiet: 1, glitch: 1 });
    let NoLogic::AlwaysInDoubt { witness } = unsolvable(clean(3, 3).bounce(3, 3)) else {
        panic!("a bounce as long as the dwell hides it")
    };
    assert!(!witness.ticks.is_empty());
}

#[test]
fn limit_beyond_the_memory_allowed_is_unknown() {
    let mut limits = Limits::default();
    limits.memory_bytes = 2_000;
    let line = Envelope::clean(30, 30).bounce(3, 2).glitch(2, 3).quiet(3);
    let answer = solve_limit(&line, &limits).expect("a sound envelope");
    let LimitAnswer::Unknown { beliefs, bytes } = answer else { panic!("{answer:?}") };
    assert!(beliefs > 10 && bytes > 2_000, "{beliefs} {bytes}");
}
