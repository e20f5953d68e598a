//! The contract *alternate*: proved, refuted, and checked against an observer and against the contract *follow*.

use std::hash::Hash;

use debounce_core::{
    Change, Clause, Envelope, Integrator, Latency, Law, PerChange, Position, ShiftRegister, StateMachine,
    StateMachineParameters,
};
use harness::machine::{MachineTable, Reading, read_kiss2};
use harness::prove::observe::{Observed, Observer, Start, World, observe};
use harness::prove::{
    Contract, Environment, LawTable, Limits, Outcome, Proof, closed_form_limit, prove, prove_contract,
    prove_within,
};
use integration_tests::predicate::each_legal_word;
use integration_tests::toggle::{Lamp, TOGGLE};

fn toggle() -> MachineTable {
    read_kiss2("lamp.kiss2", TOGGLE.as_bytes(), Reading::Moore).expect("a sound table")
}

fn alternate<L: Law>(law: &L, envelope: &Envelope) -> Proof
where
    L::State: Hash,
{
    let table = LawTable::of(law).expect("a sound law");
    prove_contract(&table, envelope, Contract::Alternate, &Limits::default()).expect("a sound envelope")
}

fn latency(best: u32, worst: u32) -> PerChange<Latency> {
    PerChange { make: Latency { best, worst }, break_: Latency { best, worst } }
}

#[test]
fn toggle_as_drawn_turns_the_lamp_over_at_the_first_sample_of_a_clean_contact() {
    let proof = alternate(&toggle(), &Envelope::clean(1, 1));
    assert_eq!(proof.bounds().expect("faithful").latency, latency(1, 1));
    assert_eq!((proof.law_states, proof.contract), (4, Contract::Alternate));
}

/// A tick longer than the bounce leaves one doubtful sample: the machine needs no more than that.
#[test]
fn toggle_as_drawn_holds_with_one_doubtful_sample_and_fails_with_two() {
    let proof = alternate(&toggle(), &Envelope::clean(2, 2).bounce(1, 1));
    assert_eq!(proof.bounds().expect("faithful").latency, latency(1, 2));
    for envelope in [
        Envelope::clean(9, 9).bounce(2, 1),
        Envelope::clean(9, 9).bounce(1, 2),
        Envelope::clean(9, 9).glitch(1, 0).quiet(5),
        Envelope::clean(9, 9).glitch(0, 1).quiet(5),
    ] {
        let proof = alternate(&toggle(), &envelope);
        let (clause, witness) = proof.refutation().expect("refuted");
        assert_eq!(clause, Clause::FalseEdge, "{envelope:?}");
        assert!(witness.ticks.len() <= 3, "{envelope:?}: {witness:?}");
    }
}

#[test]
fn toggle_as_drawn_does_not_follow_the_contact() {
    let table = LawTable::of(&toggle()).expect("a sound law");
    let proof = prove_within(&table, &Envelope::clean(9, 9), &Limits::default()).expect("a sound envelope");
    assert_eq!(proof.refutation().expect("refuted").0, Clause::Missed);
}

#[test]
fn follower_does_not_alternate() {
    let proof = alternate(&ShiftRegister::new(1), &Envelope::clean(9, 9));
    let (clause, witness) = proof.refutation().expect("refuted");
    assert_eq!((clause, witness.ticks.len()), (Clause::FalseEdge, 1), "the break turns it back");
}

fn envelopes() -> Vec<Envelope> {
    let mut envelopes = Vec::new();
    for dwell in [1, 2, 3, 6, 12] {
        for bounce in [(0, 0), (1, 0), (0, 2), (2, 1)] {
            for (glitch, quiet, calm) in [((0, 0), 1, 0), ((1, 0), 2, 0), ((1, 1), 4, 0), ((1, 2), 4, 4)] {
                envelopes.push(
                    Envelope::clean(dwell, dwell)
                        .bounce(bounce.0, bounce.1)
                        .glitch(glitch.0, glitch.1)
                        .quiet(quiet)
                        .calm(calm),
                );
            }
        }
    }
    envelopes
}

/// Wherever a law follows the contact, a lamp behind it alternates, with the make latency of the law both ways.
#[test]
fn lamp_behind_a_law_that_follows_alternates_with_its_make_latency() {
    let mut faithful = 0;
    for envelope in envelopes() {
        let law = StateMachine::<u8>::new(StateMachineParameters::confirm(2, 3).lockout(1, 2));
        let Some(bounds) = prove(&law, &envelope).expect("a sound law").bounds() else { continue };
        faithful += 1;
        let make = bounds.latency.make;
        let lamp = alternate(&Lamp(law), &envelope).bounds().unwrap_or_else(|| panic!("{envelope:?}"));
        assert_eq!(lamp.latency, PerChange { make, break_: make }, "{envelope:?}");
    }
    assert_eq!(faithful, 20, "pinned; none would make the test empty");
}

/// The waveforms of an envelope as a world of samples.
struct Waveforms<'a>(&'a Environment);

impl World for Waveforms<'_> {
    type Input = Position;
    type State = usize;

    fn each(&self, state: &usize, each: &mut dyn FnMut(Position, usize)) {
        self.0.branches(*state).iter().for_each(|branch| each(branch.sample(), branch.target()));
    }
}

/// The contract *alternate* written down a second time: the ages of the makes not yet answered, oldest first.
struct OncePerMake<'a> {
    environment: &'a Environment,
    /// Objects to an answer later than this.
    within: u32,
}

/// Where the contact was, and the ages; 0 is none.
type Waiting = (Position, [u32; 4]);

impl Observer<Waveforms<'_>, Option<Change>> for OncePerMake<'_> {
    type State = Waiting;

    fn watch(
        &self,
        (contact, ages): &mut Waiting,
        world: &usize,
        output: &Option<Change>,
    ) -> Result<(), &'static str> {
        ages.iter_mut().filter(|age| **age > 0).for_each(|age| *age += 1);
        let now = self.environment.state(*world).contact;
        if core::mem::replace(contact, now) != now && now.is_closed() {
            *ages.iter_mut().find(|age| **age == 0).ok_or("five makes wait")? = 1;
        }
        if ages[0] > self.within {
            return Err("late");
        }
        if output.is_some() {
            if ages[0] == 0 {
                return Err("no make waits");
            }
            ages.rotate_left(1);
            ages[3] = 0;
        }
        Ok(())
    }
}

#[track_caller]
fn observed<L: Law>(law: &L, envelope: &Envelope, within: u32) -> Observed<Position>
where
    L::State: Hash,
{
    let environment = &Environment::of(envelope).expect("a sound envelope");
    let observer = OncePerMake { environment, within };
    let starts = Position::BOTH.map(|p| Start {
        world: environment.start(p),
        machine: law.rest(p),
        observer: (p, [0; 4]),
    });
    observe(&Waveforms(environment), law, &observer, &starts, 10_000_000).expect("few states")
}

/// Compares the proof with the observer; returns whether the law alternates.
#[track_caller]
fn agree<L: Law>(law: &L, envelope: &Envelope) -> bool
where
    L::State: Hash,
{
    let long = 60;
    match alternate(law, envelope).outcome {
        Outcome::Faithful { bounds, .. } => {
            let worst = bounds.latency.make.worst.max(bounds.latency.break_.worst);
            assert!(matches!(observed(law, envelope, worst), Observed::Holds { .. }), "{envelope:?}");
            let Observed::Broken { objection, inputs } = observed(law, envelope, worst - 1) else {
                panic!("the worst latency of {worst} is attained: {envelope:?}")
            };
            assert!(objection == "late" && inputs.len() >= worst as usize, "{envelope:?}");
            true
        }
        Outcome::Refuted { clause, witness } => {
            let Observed::Broken { objection, inputs } = observed(law, envelope, long) else {
                panic!("{clause:?} is not seen: {envelope:?}")
            };
            if clause == Clause::FalseEdge {
                assert_eq!((objection, inputs.len()), ("no make waits", witness.ticks.len()), "{envelope:?}");
            }
            false
        }
    }
}

#[test]
fn alternate_proof_of_many_machines_agrees_with_the_observer() {
    let mut held = [0; 5];
    for envelope in envelopes() {
        let verdicts = [
            agree(&toggle(), &envelope),
            agree(&Lamp(ShiftRegister::new(2)), &envelope),
            agree(&Lamp(Integrator::<u8>::new(3)), &envelope),
            agree(
                &Lamp(StateMachine::<u8>::new(StateMachineParameters::confirm(1, 1).lockout(2, 2))),
                &envelope,
            ),
            agree(&ShiftRegister::new(1), &envelope),
        ];
        held.iter_mut().zip(verdicts).for_each(|(count, verdict)| *count += u32::from(verdict));
    }
    assert_eq!(held, [9, 27, 27, 12, 0], "pinned, of 80 envelopes");
}

/// What all legal words up to a length show, by the separate predicate: samples of the shortest word that ends with a
/// false edge, and worst latency of the makes that turn the output to closed and back.
fn by_force<L: Law>(law: &L, envelope: &Envelope, length: usize) -> (Option<usize>, PerChange<u32>) {
    let mut false_edge: Option<usize> = None;
    let mut worst = PerChange::<u32>::default();
    for start in Position::BOTH {
        each_legal_word(start, envelope, length, &mut |word| {
            let (mut state, mut contact, mut waiting) = (law.rest(start), start, Vec::new());
            for (at, &(position, sample)) in word.iter().enumerate() {
                if core::mem::replace(&mut contact, position) != position && position.is_closed() {
                    waiting.push(at);
                }
                let Some(edge) = law.step(&mut state, sample) else { continue };
                if waiting.is_empty() {
                    false_edge = Some(false_edge.map_or(word.len(), |least| least.min(word.len())));
                    return false;
                }
                let latency = (at - waiting.remove(0) + 1) as u32;
                let slot = match edge {
                    Change::Make => &mut worst.make,
                    Change::Break => &mut worst.break_,
                };
                *slot = latency.max(*slot);
            }
            true
        });
    }
    (false_edge, worst)
}

/// Compares the proof with every word of up to 9 samples; returns whether the law alternates.
#[track_caller]
fn agrees_with_words<L: Law>(law: &L, envelope: &Envelope) -> bool
where
    L::State: Hash,
{
    let (false_edge, worst) = by_force(law, envelope, 9);
    match alternate(law, envelope).outcome {
        Outcome::Faithful { bounds, .. } => {
            let PerChange { make, break_ } = bounds.latency;
            assert_eq!((make.worst, break_.worst), (worst.make, worst.break_), "{envelope:?}");
            assert_eq!(false_edge, None, "{envelope:?}");
            true
        }
        Outcome::Refuted { clause, witness } => {
            assert_eq!((clause, Some(witness.ticks.len())), (Clause::FalseEdge, false_edge), "{envelope:?}");
            false
        }
    }
}

#[test]
fn alternate_proof_agrees_with_every_legal_word() {
    let bouncing = Envelope::clean(3, 3).bounce(1, 1);
    let disturbed = Envelope::clean(4, 4).glitch(1, 1).quiet(3);
    let drawn = [Envelope::clean(1, 1), Envelope::clean(2, 2), bouncing, disturbed];
    assert_eq!(drawn.map(|envelope| agrees_with_words(&toggle(), &envelope)), [true, true, true, false]);
    let slower = [bouncing, disturbed, Envelope::clean(5, 5).bounce(1, 1).glitch(1, 0).quiet(4)];
    let two = Lamp(ShiftRegister::new(2));
    assert_eq!(slower.map(|envelope| agrees_with_words(&two, &envelope)), [true, true, true]);
}

/// A lamp that turns over at the break would answer a held contact never; it has no closed rest.
#[test]
fn lamp_that_turns_over_at_the_break_is_refused_since_a_held_contact_never_settles_it() {
    let at_break = TOGGLE
        .replace("on_held  on       1", "on_held  on       0")
        .replace("1 on_held  on_held  1", "1 on_held  on_held  0");
    let error =
        read_kiss2("lamp.kiss2", at_break.as_bytes(), Reading::Moore).expect_err("it settles nowhere closed");
    assert!(error.to_string().contains("closed samples never settle the machine"), "{error}");
}

/// A lamp behind the machine that reaches the limit of a make turns over within it, either way; and the written
/// argument says that no lamp is sooner.
#[test]
fn lamp_behind_the_best_machine_has_the_limit_of_a_make_at_both_turns() {
    let mut seen = 0;
    for envelope in envelopes() {
        let Some(limit) = closed_form_limit(&envelope, Contract::Alternate) else { continue };
        let law = StateMachine::<u8>::for_envelope(&envelope).expect("in the range of the closed form");
        let bounds = alternate(&Lamp(law), &envelope).bounds().expect("faithful");
        let worst = PerChange { make: bounds.latency.make.worst, break_: bounds.latency.break_.worst };
        assert_eq!(worst, limit, "{envelope:?}");
        assert_eq!(limit.make, limit.break_);
        seen += 1;
    }
    assert_eq!(seen, 41, "pinned");
}
