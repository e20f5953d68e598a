//! All reachable states of a product.
//!
//! The order does not matter for what is reached, so it is chosen for speed: sweeps through the environment states in
//! the order of their discovery, in which most branches lead onward. A word of states that waits its turn gathers all
//! that comes in meanwhile and goes on with it at once. A violation ends the exploration; what takes the fewest
//! samples to it is then found by [layers](super::layers).

use core::sync::atomic::{AtomicBool, AtomicUsize, Ordering::Relaxed};
use std::sync::Mutex;

use super::product::Product;
use super::reached::{Dense, Pages, Reached};
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

/// Sets of fewer words than this are not worth sharing out.
const SHARED_WORDS: usize = 1 << 14;

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
    let mut counts = Counts::default();
    for node in product.starts() {
        let (place, bit) = words.place(node);
        reached.add(place, bit);
    }
    let threads = match limits.threads {
        0 => rayon::current_num_threads(),
        some => some,
    };
    loop {
        let holds = if threads > 1 && words.len() >= SHARED_WORDS {
            sweep_shared(words, &mut reached, threads, &mut counts)
        } else {
            sweep(words, &mut reached, &mut counts)
        };
        if !holds || !turn_pages(words, &mut reached, &mut counts)? {
            return Ok(None);
        }
        if reached.dense.as_ref().is_none_or(Dense::is_clean) {
            break;
        }
    }
    Ok(Some(Explored { reached, states: counts.states, transitions: counts.transitions }))
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

/// Goes on from every dirty word of the dense set, in order; false as soon as a promise is broken.
fn sweep(words: &Words<'_>, reached: &mut Reached, counts: &mut Counts) -> bool {
    let Some(groups) = reached.dense.as_ref().map(Dense::groups) else { return true };
    for group in 0..groups {
        loop {
            let dirty = reached.dense.as_ref().map_or(0, |dense| dense.take_dirty(group));
            if dirty == 0 {
                break;
            }
            for at in ones(dirty) {
                let place = Place { word: group * 64 + at, late: false };
                let fresh = reached.dense.as_ref().map_or(0, |dense| dense.take(place.word));
                counts.add(words, place, fresh);
                if !words.expand(place, fresh, |place, bits| reached.add(place, bits)) {
                    return false;
                }
            }
        }
    }
    true
}

/// As [`sweep`], by several threads, each of which takes the next few groups when it is done with its last.
fn sweep_shared(words: &Words<'_>, reached: &mut Reached, threads: usize, counts: &mut Counts) -> bool {
    const GROUPS: usize = 16;
    let Reached { dense: Some(dense), pages, .. } = reached else { return true };
    let dense: &Dense = dense;
    let pages: Mutex<&mut Pages> = Mutex::new(pages);
    let (next, holds) = (AtomicUsize::new(0), AtomicBool::new(true));
    let all = Mutex::new(counts);
    let work = || {
        let mut counts = Counts::default();
        while holds.load(Relaxed) {
            let from = next.fetch_add(GROUPS, Relaxed);
            if from >= dense.groups() {
                break;
            }
            for group in from..dense.groups().min(from + GROUPS) {
                loop {
                    let dirty = dense.take_dirty_shared(group);
                    if dirty == 0 {
                        break;
                    }
                    for at in ones(dirty) {
                        let place = Place { word: group * 64 + at, late: false };
                        let fresh = dense.take_shared(place.word);
                        counts.add(words, place, fresh);
                        let found = words.expand(place, fresh, |place, bits| {
                            if place.late {
                                pages.lock().expect("no thread panics").add(place, bits);
                            } else {
                                dense.add_shared(place.word, bits);
                            }
                        });
                        if !found {
                            holds.store(false, Relaxed);
                            return;
                        }
                    }
                }
            }
        }
        let mut all = all.lock().expect("no thread panics");
        all.states += counts.states;
        all.transitions += counts.transitions;
    };
    rayon::scope(|scope| {
        for _ in 0..threads {
            scope.spawn(|_| work());
        }
    });
    holds.into_inner()
}

/// Goes on from every page; false as soon as a promise is broken.
fn turn_pages(words: &Words<'_>, reached: &mut Reached, counts: &mut Counts) -> Result<bool, ProveError> {
    while let Some(page) = reached.pages.take() {
        for (place, fresh) in page.into_iter().filter(|&(_, fresh)| fresh != 0) {
            counts.add(words, place, fresh);
            if !words.expand(place, fresh, |place, bits| reached.add(place, bits)) {
                return Ok(false);
            }
        }
        reached.check()?;
    }
    Ok(true)
}

#[cfg(test)]
mod tests {
    use debounce_core::{Envelope, Integrator, Law, MajorityRegister, StateMachine};

    use super::{SHARED_WORDS, explore_into};
    use crate::prove::environment::Environment;
    use crate::prove::product::Product;
    use crate::prove::reached::Reached;
    use crate::prove::tabulate::LawTable;
    use crate::prove::word::Words;
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
        assert_eq!(explored(1, Reached::of_few(&limits(1))), dense);
        assert_eq!(explored(2, Reached::new(&words, &limits(1))), dense);
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
        assert!(words >= SHARED_WORDS, "{words} words would not be shared out");
        assert_eq!(alike(&machine, &large), Some(258_524));
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
