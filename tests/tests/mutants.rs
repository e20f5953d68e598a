//! Mutants: local copies of the built-in laws in which one use of one parameter is off by one.
//!
//! Every one must be told apart from the law by a shortest sequence of samples, and the proof of what the law
//! guarantees must fail for it in some envelope. (There are parameters for which a mutant guarantees just as much,
//! such as an integrator to 6 in steps of 2 and 3 that returns in steps of 3; comparing finds them all the same.) The copy without a mutation must do the same as the law.

use std::fmt::Debug;
use std::hash::Hash;

use debounce_core::{
    Bounds, Change, Envelope, Integrator, Law, Machine, MajorityRegister, Position, ShiftRegister,
    StateMachine, StateMachineParameters,
};
use harness::machine::{MachineTable, compare};
use harness::prove::prove;

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

/// Envelopes in which the bounds of a law are asked for.
fn envelopes() -> Vec<Envelope> {
    // Short dwells show a lock-out that is too long, close disturbances a count that is cleared too late.
    let dwells = [2, 3, 4, 6, 30];
    let glitches = (0..=3).flat_map(|open| (0..=3).map(move |closed| (open, closed)));
    let mut envelopes = Vec::new();
    for dwell in dwells {
        for bounce in [0, 1, 3] {
            for (open, closed) in glitches.clone() {
                for quiet in [1, 2, 3, 4, 5, 6, 9] {
                    let envelope = Envelope::clean(dwell, dwell).bounce(bounce, bounce);
                    envelopes.push(envelope.glitch(open, closed).quiet(quiet));
                }
            }
        }
    }
    envelopes
}

fn bounds<L: Law>(law: &L) -> Vec<Option<Bounds>>
where
    L::State: Hash,
{
    envelopes().iter().map(|envelope| prove(law, envelope).expect("a sound law").bounds()).collect()
}

/// Checks the copy without a mutation, then every mutant; returns how many there were.
#[track_caller]
fn caught<L: Law, C: Law + Debug>(law: &L, uses: usize, copy: impl Fn(Mutation) -> C) -> usize
where
    L::State: Hash,
    C::State: Hash,
{
    let machine = MachineTable::of(law).expect("a sound law");
    let of_copy = |mutation| MachineTable::of(&copy(mutation)).expect("a sound law");
    assert_eq!(compare(&machine, &of_copy(NONE)), None, "{:?}", copy(NONE));
    let proved = bounds(law);
    assert_eq!(bounds(&copy(NONE)), proved);
    assert!(proved.iter().any(Option::is_some) && proved.iter().any(Option::is_none));
    for mutation in Mutation::all(uses) {
        let mutant = copy(mutation);
        let apart = compare(&machine, &of_copy(mutation)).unwrap_or_else(|| panic!("{mutant:?} survives"));
        let (mut good, mut bad) = (law.rest(apart.start), mutant.rest(apart.start));
        for (at, &sample) in apart.samples.iter().enumerate() {
            let edges = [law.step(&mut good, sample), mutant.step(&mut bad, sample)];
            let is_last = at + 1 == apart.samples.len();
            assert_eq!(edges[0] != edges[1], is_last, "{mutant:?}: {apart:?}");
        }
        // What was proved of the law in some envelope is refuted for the mutant: an edge too many or too few, or
        // another best or worst latency.
        let refuted =
            proved.iter().zip(bounds(&mutant)).filter(|(law, mutant)| law.is_some() && **law != *mutant);
        assert!(refuted.count() > 0, "the proofs do not notice {mutant:?}");
    }
    2 * uses
}

#[test]
fn mutants_of_the_integrator_are_all_caught() {
    for (full_scale, up, down) in [(3_u8, 1_u8, 1_u8), (7, 3, 2), (4, 1, 1)] {
        let law = Integrator::<u8>::with_steps(full_scale, up, down);
        let [full_scale, up, down] = [full_scale, up, down].map(i32::from);
        let copy = |mutation| IntegratorCopy { full_scale, up, down, mutation };
        assert_eq!(caught(&law, IntegratorCopy::USES, copy), 10);
    }
}

#[test]
fn mutants_that_guarantee_as_much_are_still_told_apart() {
    let machine = MachineTable::of(&Integrator::<u8>::with_steps(6, 2, 3)).expect("a sound law");
    for mutation in Mutation::all(IntegratorCopy::USES) {
        let copy = IntegratorCopy { full_scale: 6, up: 2, down: 3, mutation };
        assert!(compare(&machine, &MachineTable::of(&copy).expect("a sound law")).is_some(), "{copy:?}");
    }
}

#[test]
fn mutants_of_the_shift_register_are_all_caught() {
    for window in [2_u8, 3, 4] {
        let copy = |mutation| ShiftRegisterCopy { window: i32::from(window), mutation };
        assert_eq!(caught(&ShiftRegister::new(window), ShiftRegisterCopy::USES, copy), 2);
    }
}

#[test]
fn mutants_of_the_majority_register_are_all_caught() {
    for (majority, window) in [(2_u8, 3_u8), (3, 4), (4, 5)] {
        let law = MajorityRegister::<u8>::new(majority, window);
        let [majority, window] = [majority, window].map(i32::from);
        let copy = |mutation| MajorityCopy { majority, window, mutation };
        assert_eq!(caught(&law, MajorityCopy::USES, copy), 4);
    }
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
    for (confirm, patience, lockout) in [([2_u8, 2_u8], [2_u8, 2_u8], [1_u8, 1_u8]), ([3, 2], [2, 3], [2, 3])]
    {
        let [make, break_] = [1, 0];
        let parameters = StateMachineParameters::confirm(confirm[make], confirm[break_])
            .patience(patience[make], patience[break_])
            .lockout(lockout[make], lockout[break_]);
        let law = StateMachine::<u8>::new(parameters);
        let [confirm, patience, lockout] = [confirm, patience, lockout].map(|pair| pair.map(i32::from));
        let copy = |mutation| StateMachineCopy { confirm, patience, lockout, mutation };
        assert_eq!(caught(&law, StateMachineCopy::USES, copy), 12);
    }
}
