//! Mutants: local copies of the built-in laws in which one use of one parameter is off by one.
//!
//! Every one must be refuted: in some envelope the law keeps what its documents claim, which is that every operation is
//! reported once and in order and no later than the proven bound, and the mutant does not, as the waveform of its
//! refutation shows when it is followed once more through both. The copy without a mutation must do the same as the law.
//! Mutants that do the same as the law are none; comparing finds them, and they are not counted.

use std::fmt::Debug;
use std::hash::Hash;

use debounce_core::{
    Bounds, Change, Envelope, Integrator, Law, Machine, MajorityRegister, Position, ShiftRegister,
    StateMachine, StateMachineParameters,
};
use harness::check::{Replay, replay};
use harness::machine::{MachineTable, compare};
use harness::prove::{Outcome, Witness, WitnessTick, prove};

/// Nothing changed, or the use of that number off by one.
#[derive(Clone, Copy, Debug)]
struct Mutation {
    at: usize,
    by: i32,
}

const NONE: Mutation = Mutation { at: usize::MAX, by: 0 };

impl Mutation {
    /// The parameter as it is used at place `at`.
    fn used(self, at: usize, parameter: i32) -> i32 {
        if self.at == at { parameter + self.by } else { parameter }
    }

    /// Off by one, either way, at each of so many places.
    fn all(places: usize) -> impl Iterator<Item = Self> {
        (0..places).flat_map(|at| [-1, 1].map(|by| Self { at, by }))
    }
}

/// What the copies remember: the output and two counts.
type State = (Position, i32, i32);

macro_rules! law_of_copy {
    ($($copy:ty),*) => {$(
        impl Machine for $copy {
            type Input = Position;
            type Output = Option<Change>;
            type State = State;

            fn step(&self, state: &mut State, sample: Position) -> Option<Change> {
                self.step_of_copy(state, sample)
            }
        }

        impl Law for $copy {
            fn rest(&self, position: Position) -> State {
                (position, 0, 0)
            }

            fn output(&self, state: &State) -> Position {
                state.0
            }
        }
    )*};
}

law_of_copy!(IntegratorCopy, ShiftRegisterCopy, MajorityCopy, StateMachineCopy);

fn turned_over(state: &mut State, ignored: i32) -> Option<Change> {
    *state = (state.0.opposite(), 0, ignored);
    Some(state.0.reached_by())
}

#[derive(Clone, Copy, Debug)]
struct IntegratorCopy {
    full_scale: i32,
    up: i32,
    down: i32,
    mutation: Mutation,
}

impl IntegratorCopy {
    const USES: usize = 5;

    fn step_of_copy(&self, state: &mut State, sample: Position) -> Option<Change> {
        let uses = |at| match sample {
            Position::Closed => self.mutation.used(at, self.up),
            Position::Open => self.mutation.used(at + 1, self.down),
        };
        if sample == state.0 {
            state.1 = (state.1 - uses(0)).max(0);
            return None;
        }
        state.1 += uses(2);
        if state.1 < self.mutation.used(4, self.full_scale) { None } else { turned_over(state, 0) }
    }
}

#[derive(Clone, Copy, Debug)]
struct ShiftRegisterCopy {
    window: i32,
    mutation: Mutation,
}

impl ShiftRegisterCopy {
    const USES: usize = 1;

    fn step_of_copy(&self, state: &mut State, sample: Position) -> Option<Change> {
        state.1 = if sample == state.0 { 0 } else { state.1 + 1 };
        if state.1 < self.mutation.used(0, self.window) { None } else { turned_over(state, 0) }
    }
}

#[derive(Clone, Copy, Debug)]
struct MajorityCopy {
    majority: i32,
    window: i32,
    mutation: Mutation,
}

impl MajorityCopy {
    const USES: usize = 2;
    /// The window once more, where the contrary samples are turned over with the output.
    const TURNING: usize = 2;

    fn step_of_copy(&self, state: &mut State, sample: Position) -> Option<Change> {
        let mask = |at| (1 << self.mutation.used(at, self.window)) - 1;
        state.1 = (state.1 << 1 | i32::from(sample != state.0)) & mask(0);
        if state.1.count_ones().cast_signed() < self.mutation.used(1, self.majority) {
            return None;
        }
        let contrary = !state.1 & mask(Self::TURNING);
        *state = (state.0.opposite(), contrary, 0);
        Some(state.0.reached_by())
    }
}

#[derive(Clone, Copy, Debug)]
struct StateMachineCopy {
    confirm: [i32; 2],
    patience: [i32; 2],
    lockout: [i32; 2],
    mutation: Mutation,
}

impl StateMachineCopy {
    const USES: usize = 6;

    fn step_of_copy(&self, state: &mut State, sample: Position) -> Option<Change> {
        let (output, seen, agree) = *state;
        let change = output.opposite().reached_by() as usize;
        if seen == 0 && agree > 0 {
            state.2 -= 1;
        } else if sample == output {
            let cleared = seen == 0 || agree + 1 >= self.mutation.used(change, self.patience[change]);
            (state.1, state.2) = if cleared { (0, 0) } else { (seen, agree + 1) };
        } else if seen + 1 >= self.mutation.used(2 + change, self.confirm[change]) {
            return turned_over(state, self.mutation.used(4 + change, self.lockout[change]).max(0));
        } else {
            (state.1, state.2) = (seen + 1, 0);
        }
        None
    }
}

/// Envelopes in which claims are made, small ones first.
fn envelopes() -> Vec<Envelope> {
    let mut envelopes = Vec::new();
    // Short dwells show a lock-out that is too long, close disturbances a count that is cleared too late.
    for dwell in [2, 3, 4, 5, 6, 7, 8, 9, 12, 30] {
        for (make, break_) in [(0, 0), (1, 1), (2, 2), (3, 3), (0, 3), (3, 0), (7, 0)] {
            for glitch in (0..=3).flat_map(|open| (0..=3).map(move |closed| (open, closed))) {
                let quiets: &[u32] = if glitch == (0, 0) { &[1] } else { &[1, 2, 3, 4, 5, 6, 9] };
                for &quiet in quiets {
                    let envelope = Envelope::clean(dwell, dwell).bounce(make, break_);
                    envelopes.push(envelope.glitch(glitch.0, glitch.1).quiet(quiet));
                }
            }
        }
    }
    // A settled sample between the rest of a bounce and a disturbance shows what a count has kept.
    for (make, break_) in [(0, 4), (4, 0)] {
        for (open, closed) in [(0, 2), (2, 0)] {
            let envelope = Envelope::clean(30, 30).bounce(make, break_).glitch(open, closed);
            envelopes.push(envelope.quiet(9).calm(1));
        }
    }
    envelopes
}

/// What the documents claim of a law in an envelope, and a mutant does not keep.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Broken {
    /// Every operation is reported once and in order.
    Faithful,
    /// No report comes later than the proven bound.
    Latency,
}

/// How many mutants broke which claim first.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
struct Tally {
    faithful: u32,
    latency: u32,
}

/// The claim about `law` that `mutant` breaks, each shown by a waveform that is followed once more
/// through both: the law keeps its promise in it, the mutant does not.
fn broken<L: Law, C: Law>(law: &L, mutant: &C, (envelope, claimed): &(Envelope, Bounds)) -> Option<Broken>
where
    L::State: Hash,
    C::State: Hash,
{
    let of_mutant = prove(mutant, envelope).expect("a sound law");
    let kept = |witness: &Witness| {
        let kept = follow(law, witness);
        assert_eq!(kept.fault(), None, "{envelope:?}: {witness:?}");
        for change in [Change::Make, Change::Break] {
            let worst = claimed.latency.at(change).worst;
            assert!(kept.slowest().at(change).is_none_or(|seen| seen <= worst), "{envelope:?}: {witness:?}");
        }
    };
    match &of_mutant.outcome {
        Outcome::Refuted { witness, .. } => {
            kept(witness);
            assert!(follow(mutant, witness).fault().is_some(), "{envelope:?}: {witness:?}");
            Some(Broken::Faithful)
        }
        Outcome::Faithful { bounds, slowest } => {
            let later = |&change: &Change| bounds.latency.at(change).worst > claimed.latency.at(change).worst;
            if let Some(change) = [Change::Make, Change::Break].into_iter().find(later) {
                let witness = slowest.of(change).clone().expect("the worst latency has a waveform");
                kept(&witness);
                let seen = follow(mutant, &witness).slowest().at(change);
                assert_eq!(seen, Some(bounds.latency.at(change).worst), "{envelope:?}: {witness:?}");
                return Some(Broken::Latency);
            }
            None
        }
    }
}

/// The law along a witness.
fn follow<L: Law>(law: &L, witness: &Witness) -> Replay {
    let row = |of: fn(&WitnessTick) -> Position| {
        let signs = |tick: &WitnessTick| if of(tick).is_closed() { '1' } else { '0' };
        let mut row: String = witness.ticks.iter().map(signs).collect();
        if let Some(from) = witness.loop_from {
            row = format!("{}({})", &row[..from], &row[from..]);
        }
        row
    };
    replay(law, witness.start, &row(|tick| tick.contact), &row(|tick| tick.sample))
}

/// Checks the copy without a mutation, then that every mutant breaks a claim; counts how many break which first.
#[track_caller]
fn caught<L: Law, C: Law + Debug>(tally: &mut Tally, law: &L, uses: usize, copy: impl Fn(Mutation) -> C)
where
    L::State: Hash,
    C::State: Hash,
{
    let machine = MachineTable::of(law).expect("a sound law");
    let of_copy = |mutation| MachineTable::of(&copy(mutation)).expect("a sound law");
    assert_eq!(compare(&machine, &of_copy(NONE)), None, "{:?}", copy(NONE));
    let bounds = |envelope: &Envelope| prove(law, envelope).expect("a sound law").bounds();
    let claims: Vec<(Envelope, Bounds)> =
        envelopes().into_iter().filter_map(|envelope| Some((envelope, bounds(&envelope)?))).collect();
    for mutation in Mutation::all(uses) {
        let mutant = copy(mutation);
        let apart =
            compare(&machine, &of_copy(mutation)).unwrap_or_else(|| panic!("{mutant:?} is equivalent"));
        let (mut good, mut bad) = (law.rest(apart.start), mutant.rest(apart.start));
        for (at, &sample) in apart.samples.iter().enumerate() {
            let edges = [law.step(&mut good, sample), mutant.step(&mut bad, sample)];
            let is_last = at + 1 == apart.samples.len();
            assert_eq!(edges[0] != edges[1], is_last, "{mutant:?}: {apart:?}");
        }
        let first = claims.iter().find_map(|claim| broken(law, &mutant, claim));
        match first.unwrap_or_else(|| panic!("{mutant:?} keeps every claim")) {
            Broken::Faithful => tally.faithful += 1,
            Broken::Latency => tally.latency += 1,
        }
    }
}

#[test]
fn mutants_of_the_integrator_are_all_caught() {
    let mut tally = Tally::default();
    for (full_scale, up, down) in [(3_u8, 1_u8, 1_u8), (7, 3, 2), (6, 2, 3), (4, 1, 1)] {
        let law = Integrator::<u8>::with_steps(full_scale, up, down);
        let [full_scale, up, down] = [full_scale, up, down].map(i32::from);
        let copy = |mutation| IntegratorCopy { full_scale, up, down, mutation };
        caught(&mut tally, &law, IntegratorCopy::USES, copy);
    }
    assert_eq!(tally, Tally { faithful: 38, latency: 2 });
}

#[test]
fn mutants_of_the_shift_register_are_all_caught() {
    let mut tally = Tally::default();
    for window in [2_u8, 3, 4] {
        let copy = |mutation| ShiftRegisterCopy { window: i32::from(window), mutation };
        caught(&mut tally, &ShiftRegister::new(window), ShiftRegisterCopy::USES, copy);
    }
    assert_eq!(tally, Tally { faithful: 6, latency: 0 });
}

#[test]
fn mutants_of_the_majority_register_are_all_caught() {
    let mut tally = Tally::default();
    for (majority, window) in [(2_u8, 3_u8), (3, 4), (4, 5)] {
        let law = MajorityRegister::<u8>::new(majority, window);
        let [majority, window] = [majority, window].map(i32::from);
        let copy = |mutation| MajorityCopy { majority, window, mutation };
        caught(&mut tally, &law, MajorityCopy::USES, copy);
    }
    assert_eq!(tally, Tally { faithful: 12, latency: 0 });
}

/// The oldest sample leaves the window at the next one, before anything is counted: no input can show how many are
/// turned over beyond it. These two are no faults, and this says why they are not among the mutants above.
#[test]
fn majority_register_that_turns_over_one_sample_more_or_less_does_the_same() {
    for (majority, window) in [(2_u8, 3_u8), (3, 4), (4, 5)] {
        let machine = MachineTable::of(&MajorityRegister::<u8>::new(majority, window)).expect("a sound law");
        let [majority, window] = [majority, window].map(i32::from);
        for by in [-1, 1] {
            let mutation = Mutation { at: MajorityCopy::TURNING, by };
            let copy = MachineTable::of(&MajorityCopy { majority, window, mutation }).expect("a sound law");
            assert_eq!(compare(&machine, &copy), None);
        }
    }
}

#[test]
fn mutants_of_the_state_machine_are_all_caught() {
    let mut tally = Tally::default();
    for (confirm, patience, lockout) in [([2_u8, 2_u8], [2_u8, 2_u8], [1_u8, 1_u8]), ([3, 2], [2, 3], [2, 3])]
    {
        let [make, break_] = [1, 0];
        let parameters = StateMachineParameters::confirm(confirm[make], confirm[break_])
            .patience(patience[make], patience[break_])
            .lockout(lockout[make], lockout[break_]);
        let law = StateMachine::<u8>::new(parameters);
        let [confirm, patience, lockout] = [confirm, patience, lockout].map(|pair| pair.map(i32::from));
        let copy = |mutation| StateMachineCopy { confirm, patience, lockout, mutation };
        caught(&mut tally, &law, StateMachineCopy::USES, copy);
    }
    assert_eq!(tally, Tally { faithful: 22, latency: 2 });
}
