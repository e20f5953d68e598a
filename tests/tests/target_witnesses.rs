//! The prover's waveforms, kept beside the firmware that replays them: every one is there, and none is out of date.

use std::fmt::Write as _;
use std::hash::Hash;
use std::{env, fs};

use debounce_core::{
    Bank, Chain, Envelope, Integrator, Lane, Law, MajorityRegister, Position, ShiftRegister, StateMachine,
    StateMachineParameters, TableLaw,
};
use harness::prove::{Outcome, Witness, prove};

const PATH: &str =
    concat!(env!("CARGO_MANIFEST_DIR"), "/../examples/firmware-checks/replay/src/witnesses.txt");

const HEAD: &str = "\
# Waveforms that the prover found, for the replay on host and target; written by
# `HARNESS_REWRITE_WITNESSES=1 cargo test -p integration-tests --test target_witnesses`.
# law; envelope; what it shows; where contact and law rest before; samples; what the law says after each
";

const ENVELOPES: [(&str, Envelope); 3] = [
    ("small button", Envelope::clean(60, 60).bounce(5, 3).glitch(1, 1).quiet(12)),
    ("rough relay", Envelope::clean(90, 80).bounce(14, 11).glitch(2, 1).quiet(4).calm(1)),
    ("large limit switch", Envelope::clean(450, 450).bounce(60, 40).glitch(3, 3).quiet(30)),
];

/// The waveforms as lines; how many envelopes a law holds in, and in how many it does not.
#[derive(Default)]
struct Book {
    text: String,
    proved: usize,
    refuted: usize,
}

impl Book {
    fn law<L: Law<State: Hash>>(&mut self, name: &str, law: &L) {
        for (envelope, within) in &ENVELOPES {
            let proof = prove(law, within).expect("each of these fits the limits of the prover");
            match proof.outcome {
                Outcome::Faithful { slowest, .. } => {
                    self.proved += 1;
                    for (witness, shows) in
                        [(slowest.make, "slowest make"), (slowest.break_, "slowest break")]
                    {
                        let witness = witness.expect("a proof comes with its slowest waveforms");
                        self.write(name, envelope, shows, &witness);
                    }
                }
                Outcome::Refuted { clause, witness } => {
                    self.refuted += 1;
                    self.write(name, envelope, &format!("breaks {clause:?}"), &witness);
                }
            }
        }
    }

    fn write(&mut self, law: &str, envelope: &str, shows: &str, witness: &Witness) {
        // What goes on for ever is shown twice: then the loop is closed once.
        let again = witness.loop_from.map_or(&[][..], |from| &witness.ticks[from..]);
        let ticks = || witness.ticks.iter().chain(again);
        let samples: String = ticks().map(|tick| digit(tick.sample)).collect();
        let outputs: String = ticks().map(|tick| digit(tick.output)).collect();
        let start = digit(witness.start);
        let _ = writeln!(self.text, "{law}; {envelope}; {shows}; {start}; {samples}; {outputs}");
    }
}

fn digit(position: Position) -> char {
    if position.is_closed() { '1' } else { '0' }
}

/// The laws that the firmware replays, under the names that it has for them, but one whose states do not fit a proof.
fn book() -> Book {
    static ROWS: [[u8; 2]; 3] = [[0, 1], [0, 2], [0, 2]];
    let patient = StateMachineParameters::confirm(3, 4).patience(4, 3).lockout(6, 3);
    let wide = StateMachineParameters::confirm(3, 4).patience(4, 3).lockout(6, 3);
    let mut book = Book::default();
    book.law("integrator u8", &Integrator::<u8>::new(9));
    book.law("integrator u16", &Integrator::<u16>::with_steps(300, 40, 70));
    book.law("shift register", &ShiftRegister::new(8));
    book.law("majority register u8", &MajorityRegister::<u8>::new(5, 8));
    book.law("majority register u16", &MajorityRegister::<u16>::new(9, 13));
    book.law("state machine u8", &StateMachine::<u8>::new(StateMachineParameters::confirm(6, 4)));
    book.law("patient state machine u8", &StateMachine::<u8>::new(patient));
    book.law("patient state machine u16", &StateMachine::<u16>::new(wide));
    let confirm = StateMachine::<u8>::new(StateMachineParameters::confirm(3, 3));
    book.law("chain", &Chain::new(MajorityRegister::<u8>::new(2, 3), confirm));
    book.law("table", &TableLaw::new(&ROWS, 2, [0, 2]));
    book.law("lane of a bank", &Lane::new(Bank::<u8, 3>::new(0)));
    book
}

#[test]
fn target_witnesses_are_what_the_prover_finds() {
    let book = book();
    assert!(book.proved >= 10 && book.refuted >= 10, "{} proved, {} refuted", book.proved, book.refuted);
    let text = format!("{HEAD}{}", book.text);
    if env::var_os("HARNESS_REWRITE_WITNESSES").is_some() {
        fs::write(PATH, text).expect("the file can be written");
    } else {
        let kept = fs::read_to_string(PATH).expect("the file is there");
        assert_eq!(
            kept, text,
            "the firmware replays other waveforms than the prover finds; its head says what to run"
        );
    }
}
