//! The ready-made assertions: what they let pass, what they print, and that the printed line replays the flaw.

use std::panic::{AssertUnwindSafe, catch_unwind};

use debounce_core::{
    Chain, Change, Clause, Envelope, Law, Machine, MajorityRegister, PerChange, Position, ShiftRegister,
    StateMachine, StateMachineParameters,
};
use harness::check::{
    assert_equivalent, assert_faithful, assert_immune_to, assert_latency_at_most, assert_sampled_faithful,
    edges, replay, sample_faithful, samples,
};

const BUTTON: Envelope = Envelope::clean(20, 20).bounce(4, 2).glitch(1, 1).quiet(6);

fn at_the_limit() -> StateMachine {
    StateMachine::<u8>::for_envelope(&BUTTON).expect("a closed form")
}

/// The message of an assertion that fails.
#[track_caller]
fn message<T>(assertion: impl FnOnce() -> T) -> String {
    match catch_unwind(AssertUnwindSafe(assertion)) {
        Ok(_) => panic!("the assertion must fail"),
        Err(payload) => *payload.downcast::<String>().expect("a formatted message"),
    }
}

#[test]
fn assert_faithful_of_a_proven_law_gives_the_proof() {
    let proof = assert_faithful(&at_the_limit(), &BUTTON);
    let best = proof.bounds().expect("faithful").latency;
    let begin = format!(
        "proved: every operation is reported once, a make after {} to 7 samples, a break after {} to 5; all {} states",
        best.make.best, best.break_.best, proof.states
    );
    assert!(proof.to_string().starts_with(&begin), "{proof}");
}

#[test]
fn assert_faithful_of_a_short_window_prints_the_witness_and_its_replay() {
    let shown = message(|| assert_faithful(&ShiftRegister::new(1), &BUTTON));
    let expected = "\
not faithful: an edge is reported that the contact did not make

tick     1
contact  _
reads    #
because  d
output   #

keep it as a test:
    replay(&law, Position::Open, \"0\", \"1\").assert_faithful();
";
    assert_eq!(shown, expected);
}

#[test]
fn assert_faithful_of_a_missed_operation_prints_a_replay_that_fails_too() {
    let clean = Envelope::clean(3, 3);
    let law = ShiftRegister::new(4);
    let shown = message(|| assert_faithful(&law, &clean));
    assert!(shown.contains("a change of the contact is never reported"), "{shown}");
    let line = shown.lines().find(|line| line.contains("replay(")).expect("a line that replays it");
    let rows: Vec<&str> = line.split('"').collect();
    let start = if line.contains("Open") { Position::Open } else { Position::Closed };
    let replayed = replay(&law, start, rows[1], rows[3]);
    assert_eq!(replayed.fault(), Some(Clause::Missed), "{shown}");
    replay(&ShiftRegister::new(3), start, rows[1], rows[3]).assert_faithful();
}

#[test]
fn assert_faithful_of_a_dwell_unseen_says_that_no_word_shows_it() {
    let shown = message(|| assert_faithful(&ShiftRegister::new(1), &Envelope::clean(0, 3)));
    assert!(shown.contains("an operation may fall between two samples"), "{shown}");
    assert!(shown.contains("no word of samples shows it"), "{shown}");
}

#[test]
fn assert_latency_at_its_boundary_passes_and_one_less_fails() {
    let law = at_the_limit();
    let bounds = assert_latency_at_most(&law, &BUTTON, 7, 5);
    assert_eq!((bounds.latency.make.worst, bounds.latency.break_.worst), (7, 5));
    for (make, break_, what) in [(6, 5, "a make takes 7 samples, 6"), (7, 4, "a break takes 5 samples, 4")] {
        let shown = message(|| assert_latency_at_most(&law, &BUTTON, make, break_));
        assert!(shown.contains(what), "{shown}");
        let line = shown.lines().find(|line| line.contains("replay(")).expect("a line that replays it");
        assert!(line.ends_with(&format!(".assert_latency_at_most({make}, {break_});")), "{shown}");
        let rows: Vec<&str> = line.split('"').collect();
        let start = if line.contains("Open") { Position::Open } else { Position::Closed };
        let replayed = replay(&law, start, rows[1], rows[3]);
        replayed.assert_latency_at_most(7, 5);
        message(|| replayed.assert_latency_at_most(make, break_));
    }
}

#[test]
fn assert_immune_at_its_boundary_passes_and_one_more_fails() {
    assert_immune_to(&at_the_limit(), &BUTTON, 1, 1);
    message(|| assert_immune_to(&at_the_limit(), &BUTTON, 2, 1));
    message(|| assert_immune_to(&at_the_limit(), &BUTTON, 1, 2));
}

#[test]
fn assert_equivalent_of_two_forms_of_one_law_passes() {
    for window in 1..=8 {
        assert_equivalent(&ShiftRegister::new(window), &MajorityRegister::<u8>::new(window, window));
        let textbook = StateMachine::<u8>::new(StateMachineParameters::confirm(window, window));
        assert_equivalent(&ShiftRegister::new(window), &textbook);
        assert_equivalent(&textbook, &Chain::new(ShiftRegister::new(1), textbook));
    }
}

#[test]
fn assert_equivalent_of_two_laws_prints_a_shortest_word_and_its_replay() {
    let (one, other) = (MajorityRegister::<u8>::new(2, 3), ShiftRegister::new(2));
    let shown = message(|| assert_equivalent(&one, &other));
    let expected = "\
not equivalent: from rest open, after the samples 101 the one law reports make, the other nothing

keep it as a test:
    assert_eq!(edges(&one, Position::Open, \"101\"), edges(&other, Position::Open, \"101\"));
";
    assert_eq!(shown, expected);
    assert_eq!(edges(&one, Position::Open, "101"), [(3, Change::Make)]);
    assert_eq!(edges(&other, Position::Open, "101"), []);
}

#[test]
fn replay_with_a_repeated_part_goes_on_for_ever() {
    let law = ShiftRegister::new(3);
    // Contrary every third sample: a window of three is never filled, for ever.
    assert_eq!(replay(&law, Position::Open, "1(111)", "1(011)").fault(), Some(Clause::Missed));
    assert_eq!(replay(&law, Position::Open, "1(111)", "1(111)").fault(), None);
    // Without the repetition the contact then stays, undisturbed, and is reported.
    let once = replay(&law, Position::Open, "1111", "1011");
    assert_eq!((once.fault(), once.slowest()), (None, PerChange { make: Some(5), break_: None }));
}

#[test]
fn replay_of_rows_that_do_not_match_is_refused() {
    let law = ShiftRegister::new(3);
    for (contact, reads) in [("01", "0"), ("0(1)", "01"), ("(01)", "0(1)"), ("0x", "01"), ("0()", "0()")] {
        let refused = catch_unwind(|| replay(&law, Position::Open, contact, reads)).is_err();
        assert!(refused, "{contact} {reads}");
    }
    assert_eq!(samples(""), []);
}

/// Reports a position that has been read for some ticks of a clock that counts without end.
#[derive(Debug)]
struct Stamped {
    ticks: u64,
}

/// The time, when the line was last read at the output, and the output.
type Stamps = (u64, u64, Position);

impl Machine for Stamped {
    type Input = Position;
    type Output = Option<Change>;
    type State = Stamps;

    fn step(&self, state: &mut Stamps, sample: Position) -> Option<Change> {
        let (now, agreed, output) = state;
        *now += 1;
        if sample == *output {
            *agreed = *now;
        } else if *now - *agreed >= self.ticks {
            (*agreed, *output) = (*now, sample);
            return Some(sample.reached_by());
        }
        None
    }
}

impl Law for Stamped {
    fn rest(&self, position: Position) -> Stamps {
        (0, 0, position)
    }

    fn output(&self, state: &Stamps) -> Position {
        state.2
    }
}

#[test]
fn sampled_time_stamps_that_serve_say_that_nothing_is_proved() {
    // A window of two samples: disturbances of one are rejected, the bounce is silent until the end.
    let quiet = Envelope::clean(20, 20).bounce(1, 1).glitch(1, 1).quiet(6);
    let sampled = assert_sampled_faithful(&Stamped { ticks: 2 }, &quiet, 2_000, 1);
    assert_eq!(
        sampled.to_string(),
        "sampled 2000 cases (seed 1), not proved: no promise was broken, slowest make seen 5 samples, slowest break seen 5 samples"
    );
    assert_eq!(
        sampled,
        sample_faithful(&Stamped { ticks: 2 }, &quiet, 2_000, 1).unwrap(),
        "the seed decides"
    );
    // The same logic without the stamps is finite: what was seen is what is proved.
    let proof = assert_faithful(&ShiftRegister::new(2), &quiet);
    assert_eq!(proof.bounds().unwrap().latency.make.worst, 5);
}

#[test]
fn sampled_time_stamps_that_are_fooled_shrink_to_the_shortest_witness() {
    for seed in 0..5 {
        // Without bounce, in which a word that is as simple as can be would be another one.
        let wide = Envelope::clean(20, 20).glitch(2, 2).quiet(6);
        let sampled = sample_faithful(&Stamped { ticks: 2 }, &wide, 2_000, seed).unwrap();
        let found = sampled.refutation.as_ref().expect("a disturbance of two samples fills a window of two");
        assert_eq!(found.clause, Clause::FalseEdge);
        // No shorter one exists, as the proof of the finite form shows.
        let proof = harness::prove::prove(&ShiftRegister::new(2), &wide).unwrap();
        let (_, shortest) = proof.refutation().unwrap();
        assert_eq!(found.witness.ticks.len(), shortest.ticks.len(), "{found:?}");
        assert!(sampled.to_string().starts_with("refuted by case "), "{sampled}");
    }
    let shown = message(|| assert_sampled_faithful(&Stamped { ticks: 2 }, &BUTTON.glitch(2, 2), 2_000, 1));
    assert!(shown.contains("keep it as a test:\n    replay(&law, Position::"), "{shown}");
}

#[test]
fn sampled_logic_that_misses_is_caught() {
    let short = Envelope::clean(4, 4);
    let sampled = sample_faithful(&Stamped { ticks: 5 }, &short, 2_000, 3).unwrap();
    assert_eq!(sampled.refutation.map(|found| found.clause), Some(Clause::Missed));
    assert!(sample_faithful(&Stamped { ticks: 4 }, &short, 2_000, 3).unwrap().refutation.is_none());
}
