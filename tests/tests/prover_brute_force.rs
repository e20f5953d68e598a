//! The prover against brute force: every legal word up to a length, by the separate predicate, through the law.

use std::fmt::Debug;
use std::hash::Hash;

use debounce_core::{
    Chain, Change, Clause, Envelope, Integrator, Law, MajorityRegister, PerChange, Position, ShiftRegister,
    StateMachine, StateMachineParameters,
};
use harness::prove::{Outcome, prove};
use integration_tests::predicate::{Letter, each_legal_word};

/// What all words up to a length show.
#[derive(Debug, Default)]
struct Shown {
    words: u64,
    /// Samples of the shortest word that ends with a false edge.
    false_edge: Option<usize>,
    /// Samples of the shortest word after which an unreported change can never be reported any more.
    missed: Option<usize>,
    /// Worst and best latency of the changes that were reported.
    worst: PerChange<u32>,
    best: PerChange<Option<u32>>,
}

fn by_force<L: Law>(law: &L, envelope: &Envelope, length: usize) -> Shown {
    let mut shown = Shown::default();
    for start in Position::BOTH {
        each_legal_word(start, &envelope.delivered(), length, &mut |word| look(law, start, word, &mut shown));
    }
    shown
}

/// Runs one word; says whether longer ones are worth looking at.
fn look<L: Law>(law: &L, start: Position, word: &[Letter], shown: &mut Shown) -> bool {
    shown.words += 1;
    let mut state = law.rest(start);
    let mut contact = start;
    let mut pending: Vec<(Change, usize)> = Vec::new();
    for (at, &(position, sample)) in word.iter().enumerate() {
        if position != contact {
            contact = position;
            pending.push((position.reached_by(), at));
        }
        let last = at + 1 == word.len();
        if let Some(edge) = law.step(&mut state, sample) {
            if pending.is_empty() || pending[0].0 != edge {
                assert!(last, "a shorter word should have stopped the search");
                shown.false_edge = Some(shown.false_edge.map_or(word.len(), |n| n.min(word.len())));
                return false;
            }
            let (change, since) = pending.remove(0);
            let latency = (at - since + 1) as u32;
            if last {
                let (worst, best) = match change {
                    Change::Make => (&mut shown.worst.make, &mut shown.best.make),
                    Change::Break => (&mut shown.worst.break_, &mut shown.best.break_),
                };
                *worst = latency.max(*worst);
                *best = Some(best.map_or(latency, |b| b.min(latency)));
            }
        }
    }
    let mut next = state;
    let hopeless = law.step(&mut next, contact).is_none() && next == state && !pending.is_empty();
    if hopeless || pending.len() > 3 {
        shown.missed = Some(shown.missed.map_or(word.len(), |n| n.min(word.len())));
        return false;
    }
    true
}

/// Compares proof and brute force. `length` must be long enough for what the proof claims to show.
#[track_caller]
fn agree<L: Law + Debug>(law: &L, envelope: Envelope, length: usize) -> (u64, bool)
where
    L::State: Hash,
{
    let proof = prove(law, &envelope).expect("a sound law and envelope");
    let shown = by_force(law, &envelope, length);
    let context = format!("{law:?} in {envelope:?}");
    match &proof.outcome {
        Outcome::Faithful { bounds, .. } => {
            assert_eq!((shown.false_edge, shown.missed), (None, None), "{context}");
            for change in [Change::Make, Change::Break] {
                let proved = bounds.latency.at(change);
                assert_eq!(shown.worst.at(change), proved.worst, "worst {change:?}: {context}");
                assert_eq!(shown.best.at(change), Some(proved.best), "best {change:?}: {context}");
            }
        }
        Outcome::Refuted { clause, witness } => {
            let first = shown.false_edge.into_iter().chain(shown.missed).min();
            if witness.loop_from.is_none() {
                assert_eq!(first, Some(witness.ticks.len()), "{context}: {shown:?}");
                let of_clause = match clause {
                    Clause::FalseEdge => shown.false_edge,
                    Clause::Missed => shown.missed,
                    other => panic!("{other:?} was not asked for"),
                };
                assert_eq!(of_clause, first, "{context}");
            } else {
                assert_eq!(first, None, "{context}: a finite refutation is preferred");
            }
        }
    }
    (shown.words, proof.bounds().is_some())
}

fn laws_agree(envelope: Envelope, length: usize) -> (u64, u32) {
    let (mut words, mut faithful) = (0, 0);
    let mut add = |(more, holds): (u64, bool)| {
        words += more;
        faithful += u32::from(holds);
    };
    for n in 1..=4 {
        add(agree(&ShiftRegister::new(n), envelope, length));
        add(agree(&Integrator::<u8>::new(n), envelope, length));
    }
    for (full, up, down) in [(4, 1, 2), (4, 2, 1), (5, 2, 3)] {
        add(agree(&Integrator::<u8>::with_steps(full, up, down), envelope, length));
    }
    for (m, n) in [(2, 3), (3, 4), (3, 5)] {
        add(agree(&MajorityRegister::<u8>::new(m, n), envelope, length));
    }
    for (confirm, patience, lockout) in [
        ((2, 1), (2, 1), (0, 0)),
        ((2, 2), (2, 2), (1, 2)),
        ((1, 1), (1, 1), (2, 1)),
        ((1, 2), (2, 1), (3, 0)),
    ] {
        let parameters = StateMachineParameters::<u8>::confirm(confirm.0, confirm.1)
            .patience(patience.0, patience.1)
            .lockout(lockout.0, lockout.1);
        add(agree(&StateMachine::<u8>::new(parameters), envelope, length));
    }
    (words, faithful)
}

/// Envelope, length of the words; how many words were looked at, and how many of the laws are faithful.
#[test]
fn prover_small_laws_agree_with_every_legal_word() {
    let clean = Envelope::clean;
    let table = [
        (clean(3, 3), 16, 62028, 13),
        (clean(6, 5), 14, 9954, 18),
        (clean(5, 6).bounce(2, 1), 12, 26654, 16),
        (clean(6, 5).bounce(1, 3), 12, 42024, 10),
        (clean(5, 5).glitch(1, 1).quiet(2), 12, 323432, 4),
        (clean(6, 6).glitch(1, 0).quiet(3), 14, 105890, 11),
        (clean(6, 6).bounce(1, 1).glitch(1, 1).quiet(3), 12, 315521, 7),
        (clean(6, 6).bounce(1, 1).glitch(1, 1).quiet(3).calm(2), 12, 194693, 7),
        (clean(5, 5).glitch(2, 1).quiet(3), 12, 297391, 1),
    ];
    for (envelope, length, words, faithful) in table {
        assert_eq!(laws_agree(envelope, length), (words, faithful), "{envelope:?}");
    }
}

/// Filters in front of counting machines: words looked at, and how many of the six are faithful.
#[test]
fn prover_chains_agree_with_every_legal_word() {
    let machine = |confirm, patience, lockout| {
        let parameters = StateMachineParameters::<u8>::confirm(confirm, confirm);
        StateMachine::<u8>::new(parameters.patience(patience, patience).lockout(lockout, lockout))
    };
    let chains = |envelope, length| {
        let (mut words, mut faithful) = (0, 0);
        for second in [machine(1, 1, 0), machine(2, 2, 0), machine(2, 1, 2)] {
            let three = Chain::new(MajorityRegister::<u8>::new(2, 3), second);
            let five = Chain::new(MajorityRegister::<u8>::new(3, 5), second);
            for (more, holds) in [agree(&three, envelope, length), agree(&five, envelope, length)] {
                words += more;
                faithful += u32::from(holds);
            }
        }
        (words, faithful)
    };
    let clean = Envelope::clean;
    let table = [
        (clean(5, 5), 16, 6780, 6),
        (clean(7, 7).bounce(1, 1), 14, 6720, 6),
        (clean(7, 7).glitch(1, 1).quiet(3), 12, 53282, 5),
        (clean(8, 8).bounce(1, 0).glitch(1, 1).quiet(4), 12, 43455, 5),
        // Operations shorter than the latency: the reports lag by more than one change.
        (clean(2, 2), 14, 26066, 2),
    ];
    let found = table.map(|(envelope, length, _, _)| chains(envelope, length));
    assert_eq!(found, table.map(|(_, _, words, faithful)| (words, faithful)));
}
