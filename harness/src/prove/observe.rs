//! Any machine of the core, explored in any world against a contract written as a small machine of its own.
//!
//! Where [`prove`](super::prove) knows contacts and laws, this knows nothing: a [`World`] says which inputs may come,
//! a [`Machine`] turns them into outputs, and an [`Observer`] watches both and objects. Every state the three can be
//! in together is visited, nearest first, so an objection comes with a shortest sequence of inputs.

use core::hash::Hash;

use debounce_core::Machine;
use rustc_hash::FxHashMap;

/// What may happen: a machine that, instead of reading inputs, makes them.
pub trait World {
    /// What a machine is given each tick.
    type Input: Copy;
    /// What the world remembers.
    type State: Copy + Eq + Hash;

    /// Calls `each` with every input that may come next, and where the world then is.
    fn each(&self, state: &Self::State, each: &mut dyn FnMut(Self::Input, Self::State));
}

/// A contract: sees where the world is and what the machine says, and objects when that is wrong.
pub trait Observer<W: World, O> {
    /// What the observer remembers.
    type State: Copy + Eq + Hash;

    /// Takes one tick: the world after its input, and the output of the machine.
    ///
    /// # Errors
    /// What is wrong, in words.
    fn watch(&self, state: &mut Self::State, world: &W::State, output: &O) -> Result<(), &'static str>;
}

/// Where world, machine and observer begin.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub struct Start<W, M, O> {
    /// The world.
    pub world: W,
    /// The machine.
    pub machine: M,
    /// The observer.
    pub observer: O,
}

/// What an exploration with an observer came to.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Observed<I> {
    /// Every state was visited and nothing was objected to.
    Holds {
        /// States of world, machine and observer together.
        states: usize,
        /// Steps between them.
        transitions: u64,
    },
    /// The observer objected.
    Broken {
        /// What it said.
        objection: &'static str,
        /// A shortest sequence of inputs that leads there.
        inputs: Vec<I>,
    },
}

/// Why an exploration with an observer has no answer.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum ObserveError {
    /// There are more states than allowed.
    #[error("unfinished: more than {most} states; none of those visited was objected to")]
    TooLarge {
        /// The most allowed.
        most: usize,
    },
    /// Two steps from the same state with the same input differ.
    #[error(
        "the machine is no machine: one of its steps gave two different results for the same state and input"
    )]
    NotAFunction,
}

/// Where world, machine and observer are together.
type Together<W, M, Obs> =
    Start<<W as World>::State, <M as Machine>::State, <Obs as Observer<W, <M as Machine>::Output>>::State>;

/// Explores `machine` in `world` against `observer` from every start, in at most `most_states` states.
///
/// # Errors
/// When there are more states, or a step of the machine (each is computed twice) is not a function of its arguments.
pub fn observe<W, M, Obs>(
    world: &W,
    machine: &M,
    observer: &Obs,
    starts: &[Together<W, M, Obs>],
    most_states: usize,
) -> Result<Observed<W::Input>, ObserveError>
where
    W: World,
    M: Machine<Input = W::Input>,
    M::Output: PartialEq,
    M::State: Hash,
    Obs: Observer<W, M::Output>,
{
    let mut numbers: FxHashMap<Together<W, M, Obs>, usize> = FxHashMap::default();
    let mut states = Vec::new();
    let mut parents: Vec<Option<(usize, W::Input)>> = Vec::new();
    for &start in starts {
        numbers.entry(start).or_insert_with(|| {
            states.push(start);
            parents.push(None);
            states.len() - 1
        });
    }
    let mut transitions = 0;
    let mut fan = Vec::new();
    let mut at = 0;
    while at < states.len() {
        let Start { world: here, machine: before, observer: watching } = states[at];
        fan.clear();
        world.each(&here, &mut |input, there| fan.push((input, there)));
        for &(input, there) in &fan {
            transitions += 1;
            let (mut after, mut again) = (before, before);
            let output = machine.step(&mut after, input);
            if machine.step(&mut again, input) != output || again != after {
                return Err(ObserveError::NotAFunction);
            }
            let mut watched = watching;
            if let Err(objection) = observer.watch(&mut watched, &there, &output) {
                return Ok(Observed::Broken { objection, inputs: inputs(&parents, at, input) });
            }
            let next = Start { world: there, machine: after, observer: watched };
            numbers.entry(next).or_insert_with(|| {
                states.push(next);
                parents.push(Some((at, input)));
                states.len() - 1
            });
            if states.len() > most_states {
                return Err(ObserveError::TooLarge { most: most_states });
            }
        }
        at += 1;
    }
    Ok(Observed::Holds { states: states.len(), transitions })
}

/// The inputs on the way to state `at`, and the last one.
fn inputs<I: Copy>(parents: &[Option<(usize, I)>], mut at: usize, last: I) -> Vec<I> {
    let mut inputs = vec![last];
    while let Some((parent, input)) = parents[at] {
        inputs.push(input);
        at = parent;
    }
    inputs.reverse();
    inputs
}
