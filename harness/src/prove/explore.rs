//! All reachable states of a product.
//!
//! The order does not matter for what is reached, so it is chosen for speed: sweeps through the environment states in
//! the order of their discovery, in which most branches lead onward. A word of states that waits its turn gathers all
//! that comes in meanwhile and goes on with it at once. Two threads take one position of the contact each. A violation
//! ends the exploration; what takes the fewest samples to it is then found by [layers](super::layers).

use core::sync::atomic::{AtomicBool, Ordering::Relaxed};

use super::product::Product;
use super::reached::{Half, Pages, Reached};
use super::word::{Place, Words, ones};
use super::{Limits, ProveError};

/// Everything that can be reached, where no promise is broken.
pub(super) struct Explored {
    pub(super) reached: Reached,
    /// Number of nodes reached.
    pub(super) states: u64,
    /// Number of branches from them.
    pub(super) transitions: u64,
}

/// Whether an exploration may take two threads.
pub(super) fn is_shared(words: &Words<'_>, limits: &Limits) -> bool {
    let threads = if limits.threads == 0 { rayon::current_num_threads() } else { limits.threads };
    threads > 1 && words.are_many()
}

/// Explores everything that can be reached from both starts; `None` as soon as a promise is broken.
pub(super) fn explore(
    product: &Product<'_>,
    words: &Words<'_>,
    limits: &Limits,
) -> Result<Option<Explored>, ProveError> {
    explore_into(product, words, limits, Reached::new(words, limits))
}

fn explore_into(
    product: &Product<'_>,
    words: &Words<'_>,
    limits: &Limits,
    mut reached: Reached,
) -> Result<Option<Explored>, ProveError> {
    for node in product.starts() {
        let (place, bit) = words.place(node);
        reached.add(place, bit);
    }
    let mut counts = Counts::default();
    let holds = AtomicBool::new(true);
    if is_shared(words, limits) && !settle_both(words, &mut reached, &mut counts, &holds) {
        return Ok(None);
    }
    while !reached.is_clean() {
        for half in 0..2 {
            let allowance = reached.allowance();
            let [open, closed] = &mut reached.halves;
            let (half, other) = if half == 0 { (open, closed) } else { (closed, open) };
            match settle(words, half, other, &mut counts, allowance, &holds) {
                Pause::Clean => {}
                Pause::Full => reached.check()?,
                Pause::Broken => return Ok(None),
            }
        }
    }
    Ok(Some(Explored { reached, states: counts.states, transitions: counts.transitions }))
}

/// Explores on two threads, one for each half, in turns: what leads to the other half waits for its next turn. False
/// as soon as a promise is broken; otherwise all is clean, or the pages are full.
fn settle_both(words: &Words<'_>, reached: &mut Reached, counts: &mut Counts, holds: &AtomicBool) -> bool {
    let mut crossing = [Pages::default(), Pages::default()];
    loop {
        let allowance = reached.allowance() / 2;
        let [open, closed] = &mut reached.halves;
        let [to_closed, to_open] = &mut crossing;
        let mut counted = [Counts::default(); 2];
        let [in_open, in_closed] = &mut counted;
        let pauses = rayon::join(
            || settle(words, open, to_closed, in_open, allowance, holds),
            || settle(words, closed, to_open, in_closed, allowance, holds),
        );
        for half in counted {
            counts.states += half.states;
            counts.transitions += half.transitions;
        }
        for (half, crossing) in [(&mut *closed, to_closed), (open, to_open)] {
            while let Some(page) = crossing.take() {
                page.into_iter()
                    .filter(|&(_, bits)| bits != 0)
                    .for_each(|(place, bits)| half.add(place, bits));
            }
        }
        let pauses = [pauses.0, pauses.1];
        if pauses.contains(&Pause::Broken) {
            return false;
        }
        if pauses.contains(&Pause::Full) || reached.is_clean() {
            return true;
        }
    }
}

/// Why a half is not gone on with.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Pause {
    /// Nothing in it waits to be gone on from.
    Clean,
    /// The pages have outgrown their allowance.
    Full,
    /// A promise is broken, here or in the other half.
    Broken,
}

/// Where states of the other half are put.
trait Elsewhere {
    fn put(&mut self, place: Place, bits: u64);
    /// Bytes of its pages.
    fn bytes(&self) -> u64;
}

impl Elsewhere for Half {
    #[inline]
    fn put(&mut self, place: Place, bits: u64) {
        self.add(place, bits);
    }

    fn bytes(&self) -> u64 {
        self.pages.bytes()
    }
}

impl Elsewhere for Pages {
    #[inline]
    fn put(&mut self, place: Place, bits: u64) {
        self.add(place, bits);
    }

    fn bytes(&self) -> u64 {
        Self::bytes(self)
    }
}

/// Goes on from everything in `half` until it is clean, unless its pages and the other's outgrow `allowance`.
fn settle(
    words: &Words<'_>,
    half: &mut Half,
    other: &mut impl Elsewhere,
    counts: &mut Counts,
    allowance: u64,
    holds: &AtomicBool,
) -> Pause {
    while !half.is_clean() {
        for group in 0..half.groups() {
            loop {
                let dirty = half.take_dirty(group);
                if dirty == 0 {
                    break;
                }
                for at in ones(dirty) {
                    let (place, fresh) = half.take(group, at);
                    if !go_on(words, half, other, counts, place, fresh) {
                        holds.store(false, Relaxed);
                    }
                }
                if !holds.load(Relaxed) {
                    return Pause::Broken;
                }
            }
        }
        while let Some(page) = half.pages.take() {
            for (place, fresh) in page.into_iter().filter(|&(_, fresh)| fresh != 0) {
                if !go_on(words, half, other, counts, place, fresh) {
                    holds.store(false, Relaxed);
                }
            }
            if !holds.load(Relaxed) {
                return Pause::Broken;
            }
            if half.bytes() + other.bytes() > allowance {
                return Pause::Full;
            }
        }
    }
    Pause::Clean
}

/// Adds all that the fresh states of a word lead to; false when a promise is broken.
#[inline]
fn go_on(
    words: &Words<'_>,
    half: &mut Half,
    other: &mut impl Elsewhere,
    counts: &mut Counts,
    place: Place,
    fresh: u64,
) -> bool {
    counts.add(words, place, fresh);
    words.expand(
        place,
        fresh,
        |place, bits| {
            if half.holds(place) { half.add(place, bits) } else { other.put(place, bits) }
        },
    )
}

/// How much was gone on from: each state once, when it is fresh.
#[derive(Clone, Copy, Default)]
struct Counts {
    states: u64,
    transitions: u64,
}

impl Counts {
    #[inline]
    fn add(&mut self, words: &Words<'_>, place: Place, fresh: u64) {
        let states = u64::from(fresh.count_ones());
        self.states += states;
        self.transitions += states * words.environment.branches(words.environment_of(place)).len() as u64;
    }
}

#[cfg(test)]
mod tests {
    use debounce_core::{Envelope, Integrator, Law, MajorityRegister, StateMachine};

    use super::explore_into;
    use crate::prove::environment::Environment;
    use crate::prove::product::Product;
    use crate::prove::reached::Reached;
    use crate::prove::tabulate::LawTable;
    use crate::prove::word::{MANY_WORDS, Words};
    use crate::prove::{Limits, ProveError, prove_within};

    fn limits(threads: usize) -> Limits {
        Limits { threads, ..Limits::default() }
    }

    /// Dense or paged, by one thread or by two: the same states are reached. Returns how many.
    #[track_caller]
    fn alike<L: Law>(law: &L, envelope: &Envelope) -> Option<u64>
    where
        L::State: core::hash::Hash,
    {
        let environment = Environment::of(envelope).expect("a sound envelope");
        let logic = LawTable::of(law).expect("a law");
        let product = Product { environment: &environment, logic: &logic };
        let words = Words::of(&product);
        let explored = |threads, reached| {
            let found = explore_into(&product, &words, &limits(threads), reached).expect("fits");
            found.map(|found| {
                let mut all: Vec<_> = found.reached.words().map(|(p, bits)| (p.late, p.word, bits)).collect();
                all.sort_unstable();
                assert_eq!(found.states, found.reached.len());
                (found.states, found.transitions, all)
            })
        };
        let dense = explored(1, Reached::new(&words, &limits(1)));
        assert_eq!(explored(1, Reached::paged(&words, &limits(1))), dense);
        assert_eq!(explored(2, Reached::new(&words, &limits(1))), dense);
        assert_eq!(explored(2, Reached::paged(&words, &limits(1))), dense);
        dense.map(|found| found.0)
    }

    #[test]
    fn explore_dense_paged_and_shared_reach_the_same() {
        let small = Envelope::clean(12, 12).bounce(3, 2).glitch(1, 1).quiet(4);
        let machine = StateMachine::<u8>::for_envelope(&small).expect("quiet is long enough");
        assert!(alike(&machine, &small).is_some());
        // A window scatters its states over the table, and needs no more than its samples on a clean line.
        assert!(alike(&MajorityRegister::<u16>::new(6, 11), &Envelope::clean(12, 12)).is_some());
        // More samples in a row than the contact holds still for: the promise breaks.
        assert_eq!(alike(&Integrator::<u8>::new(13), &small), None);
    }

    #[test]
    fn explore_large_product_is_shared_out_and_reaches_the_same() {
        let large = Envelope::clean(160, 160).bounce(32, 32).glitch(8, 8).quiet(16);
        let machine = StateMachine::<u16>::for_envelope(&large).expect("quiet is long enough");
        let words = Environment::of(&large).expect("sound").len() * 4;
        assert!(words >= MANY_WORDS, "{words} words would not be shared out");
        assert_eq!(alike(&machine, &large), Some(258_524));
    }

    #[test]
    fn explore_in_just_enough_memory_is_finished_by_one_thread_or_two() {
        // Most of what can happen happens with the contact closed, so even shares do not fit.
        let envelope = Envelope::clean(90, 1280).bounce(20, 20).glitch(3, 3).quiet(32);
        let environment = Environment::of(&envelope).expect("sound");
        let law = StateMachine::<u8>::for_envelope(&envelope).expect("quiet is long enough");
        let logic = LawTable::of(&law).expect("a law");
        let product = Product { environment: &environment, logic: &logic };
        let words = Words::of(&product);
        assert!(words.len() >= MANY_WORDS);
        let explored = |threads, memory_bytes| {
            let limits = Limits { memory_bytes, threads };
            explore_into(&product, &words, &limits, Reached::paged(&words, &limits))
        };
        let free = explored(1, u64::MAX).expect("fits").expect("faithful");
        let [open, closed] = [0, 1].map(|half| free.reached.halves[half].pages.bytes());
        assert!(open < closed / 2, "{open} and {closed} bytes are even shares");
        for threads in [1, 2] {
            let found = explored(threads, open + closed).expect("fits").expect("faithful");
            assert_eq!((found.states, found.transitions), (free.states, free.transitions));
            let Err(ProveError::TooLarge { states, .. }) = explored(threads, closed / 2) else {
                panic!("an exploration in a fraction of what it needs")
            };
            assert!(states > 0 && states < free.states);
        }
    }

    #[test]
    fn explore_out_of_memory_says_how_far_it_got() {
        let envelope = Envelope::clean(40, 40).bounce(8, 8).glitch(2, 2).quiet(8);
        let law = StateMachine::<u8>::for_envelope(&envelope).expect("quiet is long enough");
        let table = LawTable::of(&law).expect("a law");
        let states = prove_within(&table, &envelope, &limits(1)).expect("fits").states;
        let little = Limits { memory_bytes: 4_000, threads: 1 };
        let Err(ProveError::TooLarge { states: reached, limit: 4_000 }) =
            prove_within(&table, &envelope, &little)
        else {
            panic!("a proof in 4 000 bytes")
        };
        assert!(reached > 0 && reached < states, "{reached} of {states}");
    }
}
