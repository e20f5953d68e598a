//! The environment automaton of the harness accepts exactly the words that the separate predicate allows.

use std::collections::BTreeSet;

use debounce_core::{Envelope, Position};
use harness::prove::Environment;
use integration_tests::predicate::{Letter, is_legal};

/// Counts the words of up to `length` samples that both allow; fails on one that only one of them allows.
fn agreed_words(envelope: Envelope, length: usize) -> u64 {
    fn extend(
        environment: &Environment,
        at: &BTreeSet<usize>,
        word: &mut Vec<Letter>,
        start: Position,
        envelope: &Envelope,
        left: usize,
    ) -> u64 {
        if left == 0 {
            return 0;
        }
        let mut agreed = 0;
        for contact in Position::BOTH {
            for sample in Position::BOTH {
                word.push((contact, sample));
                let next: BTreeSet<usize> = at
                    .iter()
                    .flat_map(|&state| environment.branches(state))
                    .filter(|branch| branch.sample() == sample)
                    .map(|branch| branch.target())
                    .filter(|&target| environment.state(target).contact == contact)
                    .collect();
                let legal = is_legal(word, start, envelope);
                assert_eq!(legal, !next.is_empty(), "{envelope:?} from {start:?}: {word:?}");
                if legal {
                    agreed += 1 + extend(environment, &next, word, start, envelope, left - 1);
                }
                word.pop();
            }
        }
        agreed
    }
    let environment = Environment::of(&envelope).expect("a sound envelope");
    // Lost ticks take samples away: the predicate is asked about the samples that are left.
    let envelope = envelope.delivered();
    Position::BOTH
        .map(|start| {
            let at = BTreeSet::from([environment.start(start)]);
            extend(&environment, &at, &mut Vec::new(), start, &envelope, length)
        })
        .iter()
        .sum()
}

/// Envelope, length of the words, and how many words of up to that length are legal from both starts.
#[test]
fn environment_any_word_is_legal_exactly_when_the_predicate_says_so() {
    let clean = Envelope::clean;
    let table = [
        (clean(1, 1), 7, 508),
        (clean(2, 3), 9, 325),
        (clean(3, 3).bounce(2, 1), 9, 1642),
        (clean(2, 2).bounce(3, 2), 8, 9612),
        (clean(1, 1).bounce(3, 0), 7, 11442),
        (clean(3, 3).glitch(1, 1).quiet(2), 8, 2920),
        (clean(3, 2).glitch(2, 1).quiet(1), 8, 11771),
        (clean(3, 4).glitch(1, 3).quiet(2), 8, 5413),
        (clean(4, 3).bounce(2, 1).glitch(2, 1).quiet(3), 8, 6346),
        (clean(3, 3).bounce(1, 2).glitch(1, 2).quiet(2).calm(1), 8, 8107),
        (clean(4, 4).bounce(2, 2).glitch(1, 1).quiet(2).calm(3), 9, 5604),
        (clean(4, 4).glitch(2, 1).quiet(1).calm(2), 8, 2583),
        (clean(4, 5).bounce(1, 0).glitch(1, 1).quiet(3).lost(1), 8, 3348),
    ];
    let found: Vec<u64> = table.iter().map(|&(envelope, length, _)| agreed_words(envelope, length)).collect();
    let expected: Vec<u64> = table.iter().map(|row| row.2).collect();
    assert_eq!(found, expected);
}
