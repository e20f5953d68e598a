//! The set of states reached so far, and which of them are fresh: reached, and not yet gone on from.
//!
//! Where it fits it is dense, two bits for each pair of environment and logic state. Late states are few if there are
//! any, so they, and all states where the dense set would not fit, are kept in pages that exist from first touch on.

use core::sync::atomic::{AtomicU64, Ordering::Relaxed, Ordering::SeqCst};
use std::collections::VecDeque;

use rustc_hash::FxHashMap;

use super::word::{Place, Words};
use super::{Limits, ProveError};

/// A set of product states by words, two for each: the states reached, and the fresh ones among them.
pub(super) struct Reached {
    pub(super) dense: Option<Dense>,
    pub(super) pages: Pages,
    limit: u64,
}

impl Reached {
    pub(super) fn new(words: &Words<'_>, limits: &Limits) -> Self {
        let bytes = words.len() as u128 * 16;
        let dense = bytes <= u128::from(limits.memory_bytes);
        Self {
            dense: dense.then(|| Dense::new(words.len())),
            pages: Pages::default(),
            limit: limits.memory_bytes,
        }
    }

    /// A set for few states: all of it in pages.
    pub(super) fn of_few(limits: &Limits) -> Self {
        Self { dense: None, pages: Pages::default(), limit: limits.memory_bytes }
    }

    /// Adds states while no other thread does.
    #[inline]
    pub(super) fn add(&mut self, place: Place, bits: u64) {
        match &self.dense {
            Some(dense) if !place.late => dense.add_alone(place.word, bits),
            _ => self.pages.add(place, bits),
        }
    }

    /// An error when the pages have outgrown the memory allowed.
    pub(super) fn check(&self) -> Result<(), ProveError> {
        let dense = self.dense.as_ref().map_or(0, |dense| dense.cells.len() as u64 * 8);
        if self.pages.pages.is_empty() || dense + self.pages.bytes() <= self.limit {
            return Ok(());
        }
        Err(ProveError::TooLarge { states: self.len(), limit: self.limit })
    }

    /// Every word that holds a state: those on time before those late, in their order unless they are paged.
    pub(super) fn words(&self) -> impl Iterator<Item = (Place, u64)> + '_ {
        let cells = self.dense.as_ref().map_or(&[][..], |dense| &dense.cells);
        let dense = cells
            .chunks_exact(2)
            .enumerate()
            .map(|(word, cell)| (Place { word, late: false }, cell[0].load(Relaxed)));
        let paged = self.pages.keys.iter().zip(&self.pages.pages).flat_map(|(&key, page)| {
            page.reached.iter().enumerate().map(move |(at, &bits)| (Pages::place(key, at), bits))
        });
        dense.chain(paged).filter(|&(_, bits)| bits != 0)
    }

    /// Number of states.
    pub(super) fn len(&self) -> u64 {
        self.words().map(|(_, bits)| u64::from(bits.count_ones())).sum()
    }

    /// Whether the states on time are in the dense set.
    pub(super) fn is_dense(&self) -> bool {
        self.dense.is_some()
    }

    /// Whether there is a late state.
    pub(super) fn has_late(&self) -> bool {
        self.pages.keys.iter().any(|key| key % 2 != 0)
    }
}

/// Two bits for each pair, and a bit for each word that holds fresh ones.
pub(super) struct Dense {
    /// For each word the states reached, then the fresh ones.
    cells: Vec<AtomicU64>,
    dirty: Vec<AtomicU64>,
}

impl Dense {
    fn new(words: usize) -> Self {
        let zeros = |count: usize| (0..count).map(|_| AtomicU64::new(0)).collect();
        Self { cells: zeros(words * 2), dirty: zeros(words.div_ceil(64)) }
    }

    /// Groups of 64 words.
    pub(super) fn groups(&self) -> usize {
        self.dirty.len()
    }

    pub(super) fn is_clean(&self) -> bool {
        self.dirty.iter().all(|group| group.load(Relaxed) == 0)
    }

    #[inline]
    fn add_alone(&self, word: usize, bits: u64) {
        let [reached, fresh] = &self.cells[word * 2..word * 2 + 2] else { return };
        let old = reached.load(Relaxed);
        let new = bits & !old;
        if new != 0 {
            reached.store(old | new, Relaxed);
            fresh.store(fresh.load(Relaxed) | new, Relaxed);
            let group = &self.dirty[word / 64];
            group.store(group.load(Relaxed) | 1 << (word % 64), Relaxed);
        }
    }

    /// Adds states while other threads may too. The fresh bits are there before their word is called dirty, and
    /// [`take_shared`](Self::take_shared) looks the other way round, so none is overlooked.
    #[inline]
    pub(super) fn add_shared(&self, word: usize, bits: u64) {
        let [reached, fresh] = &self.cells[word * 2..word * 2 + 2] else { return };
        if bits & !reached.load(Relaxed) == 0 {
            return;
        }
        let new = bits & !reached.fetch_or(bits, Relaxed);
        if new != 0 {
            fresh.fetch_or(new, SeqCst);
            self.dirty[word / 64].fetch_or(1 << (word % 64), SeqCst);
        }
    }

    /// The dirty words of a group, which are then clean.
    #[inline]
    pub(super) fn take_dirty(&self, group: usize) -> u64 {
        let dirty = self.dirty[group].load(Relaxed);
        if dirty != 0 {
            self.dirty[group].store(0, Relaxed);
        }
        dirty
    }

    /// The fresh states of a word, which then are no longer.
    #[inline]
    pub(super) fn take(&self, word: usize) -> u64 {
        let fresh = self.cells[word * 2 + 1].load(Relaxed);
        self.cells[word * 2 + 1].store(0, Relaxed);
        fresh
    }

    /// As [`take_dirty`](Self::take_dirty), while other threads add.
    #[inline]
    pub(super) fn take_dirty_shared(&self, group: usize) -> u64 {
        if self.dirty[group].load(Relaxed) == 0 { 0 } else { self.dirty[group].swap(0, SeqCst) }
    }

    /// As [`take`](Self::take), while other threads add.
    #[inline]
    pub(super) fn take_shared(&self, word: usize) -> u64 {
        self.cells[word * 2 + 1].swap(0, SeqCst)
    }
}

/// Words of a page.
const PAGE: usize = 8;

/// Eight words that lie side by side.
#[derive(Clone, Copy, Default)]
pub(super) struct Page {
    reached: [u64; PAGE],
    fresh: [u64; PAGE],
    queued: bool,
}

/// The pages touched so far, and a queue of those with fresh states.
#[derive(Default)]
pub(super) struct Pages {
    numbers: FxHashMap<u64, u32>,
    keys: Vec<u64>,
    pages: Vec<Page>,
    queue: VecDeque<u32>,
}

impl Pages {
    fn key(place: Place) -> u64 {
        (place.word / PAGE) as u64 * 2 + u64::from(place.late)
    }

    fn place(key: u64, at: usize) -> Place {
        // The key was made from a word's number.
        Place { word: (key / 2) as usize * PAGE + at, late: !key.is_multiple_of(2) }
    }

    /// What the pages take: themselves, their keys and the map, each in a vector that doubles.
    fn bytes(&self) -> u64 {
        (self.pages.capacity() * (size_of::<Page>() + 8) + self.numbers.capacity() * 18) as u64
    }

    #[inline]
    pub(super) fn add(&mut self, place: Place, bits: u64) {
        let key = Self::key(place);
        let number = *self.numbers.entry(key).or_insert_with(|| {
            self.keys.push(key);
            self.pages.push(Page::default());
            // 2^32 pages are half a terabyte.
            (self.pages.len() - 1) as u32
        });
        let page = &mut self.pages[number as usize];
        let at = place.word % PAGE;
        let new = bits & !page.reached[at];
        if new != 0 {
            page.reached[at] |= new;
            page.fresh[at] |= new;
            if !core::mem::replace(&mut page.queued, true) {
                self.queue.push_back(number);
            }
        }
    }

    /// The fresh words of the page that has waited longest, which then are no longer.
    pub(super) fn take(&mut self) -> Option<[(Place, u64); PAGE]> {
        let number = self.queue.pop_front()? as usize;
        let page = &mut self.pages[number];
        page.queued = false;
        let fresh = core::mem::take(&mut page.fresh);
        Some(core::array::from_fn(|at| (Self::place(self.keys[number], at), fresh[at])))
    }
}
