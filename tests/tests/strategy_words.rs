//! The words that the strategies draw are exactly those of the envelope: none outside, and every transition reached.

use std::collections::BTreeSet;

use debounce_core::{Envelope, PerChange, Position, ShiftRegister};
use harness::prove::Environment;
use harness::strategy::{Word, WordTick, Words};
use integration_tests::predicate::{Letter, is_legal};
use rand::SeedableRng;
use rand::rngs::ChaCha8Rng;

/// Small enough for the predicate to look at every choice; each row has something that the others have not.
const SMALL: [Envelope; 15] = [
    Envelope::clean(1, 1),
    Envelope::clean(2, 3),
    Envelope::clean(3, 3).bounce(2, 1),
    Envelope::clean(1, 2).bounce(3, 2),
    Envelope::clean(3, 3).glitch(1, 1).quiet(2),
    Envelope::clean(3, 2).glitch(2, 1).quiet(1),
    Envelope::clean(3, 4).glitch(0, 3).quiet(2),
    Envelope::clean(4, 3).bounce(2, 1).glitch(2, 1).quiet(3),
    Envelope::clean(3, 3).bounce(1, 2).glitch(1, 2).quiet(2).calm(1),
    Envelope::clean(4, 4).bounce(2, 2).glitch(1, 1).quiet(2).calm(3),
    Envelope::clean(4, 5).bounce(1, 0).glitch(1, 1).quiet(3).lost(1),
    Envelope::clean(5, 4).bounce(1, 2).glitch(2, 1).quiet(4).lost(2),
    Envelope::clean(6, 6).glitch(3, 0).quiet(3).lost(1),
    Envelope::clean(6, 6).glitch(2, 2).quiet(3).calm(2).lost(1),
    Envelope::clean(6, 6).bounce(1, 1).glitch(2, 2).quiet(3).calm(4).lost(1),
];

fn letters(word: &Word) -> Vec<Letter> {
    word.delivered().map(|tick| (tick.contact, tick.sample)).collect()
}

fn draws(envelope: &Envelope, changes: usize, cases: u64) -> impl Iterator<Item = Word> {
    let words = Words::of(envelope).expect("a sound envelope").most_changes(changes);
    let mut rng = ChaCha8Rng::seed_from_u64(0x5EED);
    (0..cases).map(move |_| words.draw(&mut rng))
}

#[test]
fn words_of_any_small_envelope_are_legal_by_the_predicate() {
    for envelope in SMALL {
        for word in draws(&envelope, 3, 1_000) {
            // The slow predicate tries every choice; a prefix of a legal word is legal, a long one takes it days.
            let all = letters(&word);
            let looked_at = &all[..all.len().min(26)];
            assert!(is_legal(looked_at, word.start, &envelope.delivered()), "{envelope:?}: {word:?}");
            if word.lost_ticks().is_empty() {
                let whole = envelope.lost(0);
                assert!(is_legal(looked_at, word.start, &whole), "{envelope:?}: {word:?}");
            }
        }
    }
}

/// Walks a word through the automaton, and notes every transition it may have taken.
fn walk(environment: &Environment, word: &Word, reached: &mut BTreeSet<(usize, usize)>) {
    let mut at = BTreeSet::from([environment.start(word.start)]);
    for (index, tick) in word.delivered().enumerate() {
        let mut next = BTreeSet::new();
        for &state in &at {
            for (which, branch) in environment.branches(state).iter().enumerate() {
                let contact = environment.state(branch.target()).contact;
                if branch.sample() == tick.sample && contact == tick.contact {
                    next.insert(branch.target());
                    reached.insert((state, which));
                }
            }
        }
        assert!(!next.is_empty(), "sample {index} of {word:?} is outside the envelope");
        at = next;
    }
}

#[test]
fn words_of_any_small_envelope_reach_every_transition_of_its_automaton() {
    for envelope in SMALL {
        let environment = Environment::of(&envelope).unwrap();
        let mut reached = BTreeSet::new();
        draws(&envelope, 4, 20_000).for_each(|word| walk(&environment, &word, &mut reached));
        let missed: Vec<_> = (0..environment.len())
            .flat_map(|state| (0..environment.branches(state).len()).map(move |which| (state, which)))
            .filter(|pair| !reached.contains(pair))
            .map(|(state, which)| (environment.state(state), environment.branches(state)[which]))
            .collect();
        assert!(missed.is_empty(), "{envelope:?} misses {} such as {:?}", missed.len(), missed[0]);
    }
}

#[test]
fn words_of_a_large_envelope_stay_inside_its_automaton() {
    let large = Envelope::clean(160, 120).bounce(32, 20).glitch(8, 8).quiet(16);
    let environment = Environment::of(&large).unwrap();
    draws(&large, 5, 300).for_each(|word| walk(&environment, &word, &mut BTreeSet::new()));
    let calm = large.calm(20);
    let environment = Environment::of(&calm).unwrap();
    draws(&calm, 5, 300).for_each(|word| walk(&environment, &word, &mut BTreeSet::new()));
}

/// What a large envelope allows at its ends, counted over many words.
#[derive(Debug, Default, PartialEq, Eq)]
struct Ends {
    shortest_dwell: PerChange<u32>,
    contrary_at_the_last_bounce_sample: PerChange<u32>,
    full_disturbance: u32,
    one_sample_disturbance: u32,
    straddling: u32,
    begun_with_the_change: u32,
    exactly_quiet: u32,
    exactly_calm: u32,
    lost_with_the_change: u32,
    all_lost: u32,
}

/// Lengths of the stretches in which `inside` holds, as (first, after).
fn stretches(word: &Word, inside: impl Fn(&WordTick) -> bool) -> Vec<(usize, usize)> {
    let mut found: Vec<(usize, usize)> = Vec::new();
    for (at, _) in word.ticks.iter().enumerate().filter(|(_, tick)| inside(tick)) {
        match found.last_mut() {
            Some((_, after)) if *after == at => *after += 1,
            _ => found.push((at, at + 1)),
        }
    }
    found
}

impl Ends {
    fn look(&mut self, word: &Word, envelope: &Envelope) {
        let changes = word.changes();
        for pair in changes.windows(2) {
            let contact = word.ticks[pair[0]].contact;
            if pair[1] - pair[0] == envelope.dwell.at(contact) as usize {
                *self.of(contact, |ends| &mut ends.shortest_dwell) += 1;
            }
        }
        for &change in &changes {
            let contact = word.ticks[change].contact;
            let last = change + envelope.bounce.at(contact.reached_by()) as usize - 1;
            if word.ticks.get(last).is_some_and(|tick| tick.bouncing && tick.sample != tick.contact) {
                *self.of(contact, |ends| &mut ends.contrary_at_the_last_bounce_sample) += 1;
            }
            let is_lost = word.ticks[change].lost;
            self.lost_with_the_change += u32::from(is_lost);
        }
        let windows = stretches(word, |tick| tick.disturbed);
        for &(first, after) in &windows {
            let width = envelope.glitch.at(word.ticks[first].contact) as usize;
            self.full_disturbance += u32::from(after - first == width);
            self.one_sample_disturbance += u32::from(after - first == 1);
            self.straddling += u32::from(changes.iter().any(|&change| (first + 1..after).contains(&change)));
            self.begun_with_the_change += u32::from(changes.contains(&first));
            let bounce_ends = stretches(word, |tick| tick.bouncing);
            let calm = envelope.calm as usize;
            self.exactly_calm += u32::from(bounce_ends.iter().any(|&(_, end)| end + calm == first));
        }
        for pair in windows.windows(2) {
            self.exactly_quiet += u32::from(pair[1].0 - pair[0].1 == envelope.quiet as usize);
        }
        let lost = stretches(word, |tick| tick.lost);
        self.all_lost += lost.iter().filter(|run| run.1 - run.0 == envelope.lost as usize).count() as u32;
    }

    fn of(&mut self, contact: Position, field: impl Fn(&mut Self) -> &mut PerChange<u32>) -> &mut u32 {
        let field = field(self);
        match contact {
            Position::Closed => &mut field.make,
            Position::Open => &mut field.break_,
        }
    }

    fn each(&self) -> [u32; 12] {
        let Self { shortest_dwell: dwell, contrary_at_the_last_bounce_sample: bounce, .. } = self;
        [
            dwell.make,
            dwell.break_,
            bounce.make,
            bounce.break_,
            self.full_disturbance,
            self.one_sample_disturbance,
            self.straddling,
            self.begun_with_the_change,
            self.exactly_quiet,
            self.exactly_calm,
            self.lost_with_the_change,
            self.all_lost,
        ]
    }
}

#[test]
fn words_of_a_large_envelope_come_to_every_end_of_it() {
    let base = Envelope::clean(320, 240).bounce(64, 40).glitch(8, 12).quiet(32).lost(3);
    let mut ends = Ends::default();
    draws(&base, 6, 600).for_each(|word| ends.look(&word, &base));
    let calm = base.calm(40);
    let mut calm_ends = Ends::default();
    draws(&calm, 6, 600).for_each(|word| calm_ends.look(&word, &calm));
    // With calm no disturbance begins with a change.
    assert_eq!(calm_ends.begun_with_the_change, 0);
    calm_ends.begun_with_the_change = u32::MAX;
    for found in [ends, calm_ends] {
        assert!(found.each().iter().all(|&times| times >= 10), "{found:?}");
    }
}

#[test]
fn words_of_an_envelope_that_no_sample_sees_are_refused() {
    assert!(Words::of(&Envelope::clean(0, 3)).is_err());
    assert!(Words::of(&Envelope::clean(2, 3).lost(2)).is_err());
    assert!(Words::of(&Envelope::clean(3, 3).glitch(1, 1).quiet(0)).is_err());
    assert!(Words::of(&Envelope::clean(3, 3).lost(2)).is_ok());
}

mod shrinking {
    use super::*;
    use debounce_core::Running;
    use proptest::test_runner::{Config, RngSeed, TestError, TestRunner};

    /// The word that a property test shows in the end, as its start, contact and readings.
    #[track_caller]
    fn shrinks_to(envelope: Envelope, fails: impl Fn(&Word) -> bool, expected: (Position, &str, &str)) {
        // Several seeds: the end must not depend on where it begins.
        for seed in 0..8 {
            let rng_seed = RngSeed::Fixed(seed);
            let config = Config { failure_persistence: None, cases: 5_000, rng_seed, ..Config::default() };
            let mut runner = TestRunner::new(config);
            let words = Words::of(&envelope).unwrap();
            let outcome = runner.run(&words, |word| {
                if fails(&word) { Err(proptest::test_runner::TestCaseError::fail("wrong")) } else { Ok(()) }
            });
            let Err(TestError::Fail(_, word)) = outcome else { panic!("it must fail: {outcome:?}") };
            let row = |of: fn(&WordTick) -> Position| -> String {
                word.ticks.iter().map(|tick| if of(tick).is_closed() { '1' } else { '0' }).collect()
            };
            let shown = (row(|tick| tick.contact), row(|tick| tick.sample));
            assert_eq!((word.start, &*shown.0, &*shown.1), expected, "{:?}", word.lost_ticks());
        }
    }

    #[test]
    fn shrinking_a_disturbance_of_three_samples_leaves_nothing_else() {
        // A window of three is fooled by three contrary samples in a row while the contact stays open.
        let envelope = Envelope::clean(20, 20).bounce(5, 5).glitch(6, 2).quiet(9);
        let reports_falsely = |word: &Word| {
            if word.start == Position::Closed || !word.changes().is_empty() {
                return false;
            }
            let mut running = Running::new(ShiftRegister::new(3), word.start);
            word.samples().iter().any(|&sample| running.tick(sample).is_some())
        };
        shrinks_to(envelope, reports_falsely, (Position::Open, "000", "111"));
    }

    #[test]
    fn shrinking_two_changes_leaves_the_shortest_dwell_between() {
        let envelope = Envelope::clean(7, 5).bounce(3, 3).glitch(2, 2).quiet(6);
        let two_from_open = |word: &Word| word.start == Position::Open && word.changes().len() >= 2;
        shrinks_to(envelope, two_from_open, (Position::Open, "111110", "111110"));
    }

    #[test]
    fn shrinking_a_lost_change_keeps_one_lost_tick() {
        let envelope = Envelope::clean(9, 9).bounce(2, 2).lost(2);
        let lost_make = |word: &Word| {
            word.start == Position::Open && word.changes().first().is_some_and(|&at| word.ticks[at].lost)
        };
        shrinks_to(envelope, lost_make, (Position::Open, "1", "1"));
    }
}
