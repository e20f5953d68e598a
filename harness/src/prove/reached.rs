//! The set of states reached so far, and which of them are fresh: reached, and not yet gone on from.
//!
//! It lies in two halves, by where the contact is. Only a change of the contact leads from one to the other, so two
//! threads can fill them without a word that both write to. Where it fits a half is dense, two bits for each pair of
//! environment and logic state. Late states are few if there are any, so they, and all states where the dense set
//! would not fit or would stay empty, are kept in pages that exist from first touch on.

use std::collections::VecDeque;

use rustc_hash::FxHashMap;

use super::word::{Place, Words};
use super::{Limits, ProveError};

/// A law of more words than this is taken to be scattered, as windows of samples are: each state of the envelope meets
/// only few of its words, and to clear memory for all of them would take longer than the exploration.
const FILLED_WORDS: usize = 64;

/// A set of product states by words, two for each: the states reached, and the fresh ones among them.
pub(super) struct Reached {
    /// With the contact open, and closed.
    pub(super) halves: [Half; 2],
    limit: u64,
}

impl Reached {
    pub(super) fn new(words: &Words<'_>, limits: &Limits) -> Self {
        let bytes = words.len() as u128 * 16;
        let fits = bytes <= u128::from(limits.memory_bytes);
        Self::of(words, limits, fits && words.law.len() <= FILLED_WORDS)
    }

    /// A set that is all in pages.
    #[cfg(test)]
    pub(super) fn paged(words: &Words<'_>, limits: &Limits) -> Self {
        Self::of(words, limits, false)
    }

    fn of(words: &Words<'_>, limits: &Limits, dense: bool) -> Self {
        let split = words.first_closed();
        let halves = [0..split, split..words.len()].map(|range| Half {
            first: range.start,
            end: range.end,
            dense: dense.then(|| Dense::new(range.len())),
            pages: Pages::default(),
        });
        Self { halves, limit: limits.memory_bytes }
    }

    /// Adds states to the half that they belong to.
    #[inline]
    pub(super) fn add(&mut self, place: Place, bits: u64) {
        let half = usize::from(place.word >= self.halves[1].first);
        self.halves[half].add(place, bits);
    }

    /// An error when the pages have outgrown the memory allowed.
    pub(super) fn check(&self) -> Result<(), ProveError> {
        if self.allowance() >= self.halves.iter().map(|half| half.pages.bytes()).sum() {
            return Ok(());
        }
        Err(ProveError::TooLarge { states: self.len(), limit: self.limit })
    }

    /// Bytes that all pages together may take: what the dense set leaves, and as much as the first few take anyway.
    pub(super) fn allowance(&self) -> u64 {
        self.limit.saturating_sub(self.halves.iter().map(Half::dense_bytes).sum())
    }

    /// Whether nothing waits to be gone on from.
    pub(super) fn is_clean(&self) -> bool {
        self.halves.iter().all(Half::is_clean)
    }

    /// Every word that holds a state: those on time before those late, in their order unless they are paged.
    pub(super) fn words(&self) -> impl Iterator<Item = (Place, u64)> + '_ {
        let dense = self.halves.iter().flat_map(Half::dense_words);
        dense.chain(self.halves.iter().flat_map(|half| half.pages.words()))
    }

    /// Number of states.
    pub(super) fn len(&self) -> u64 {
        self.words().map(|(_, bits)| u64::from(bits.count_ones())).sum()
    }

    /// Whether the states on time are in the dense set.
    pub(super) fn is_dense(&self) -> bool {
        self.halves.iter().all(|half| half.dense.is_some())
    }

    /// Whether there is a late state.
    pub(super) fn has_late(&self) -> bool {
        self.halves.iter().any(|half| half.pages.keys.iter().any(|key| key % 2 != 0))
    }
}

/// The states with the contact in one position.
pub(super) struct Half {
    first: usize,
    end: usize,
    pub(super) dense: Option<Dense>,
    pub(super) pages: Pages,
}

impl Half {
    /// Whether a word belongs to this half.
    #[inline]
    pub(super) fn holds(&self, place: Place) -> bool {
        (self.first..self.end).contains(&place.word)
    }

    #[inline]
    pub(super) fn add(&mut self, place: Place, bits: u64) {
        match &mut self.dense {
            Some(dense) if !place.late => dense.add(place.word - self.first, bits),
            _ => self.pages.add(place, bits),
        }
    }

    /// Groups of 64 words in the dense set.
    pub(super) fn groups(&self) -> usize {
        self.dense.as_ref().map_or(0, |dense| dense.dirty.len())
    }

    /// The dirty words of a group, as bits, which then are clean.
    #[inline]
    pub(super) fn take_dirty(&mut self, group: usize) -> u64 {
        self.dense.as_mut().map_or(0, |dense| core::mem::take(&mut dense.dirty[group]))
    }

    /// A word of a group with its fresh states, which then are no longer.
    #[inline]
    pub(super) fn take(&mut self, group: usize, at: usize) -> (Place, u64) {
        let word = group * 64 + at;
        let fresh = self.dense.as_mut().map_or(0, |dense| core::mem::take(&mut dense.cells[word][1]));
        (Place { word: self.first + word, late: false }, fresh)
    }

    /// Whether nothing waits to be gone on from.
    pub(super) fn is_clean(&self) -> bool {
        let dense = self.dense.as_ref().is_none_or(|dense| dense.dirty.iter().all(|&group| group == 0));
        dense && self.pages.queue.is_empty()
    }

    /// Every word that holds a state.
    pub(super) fn words(&self) -> impl Iterator<Item = (Place, u64)> + '_ {
        self.dense_words().chain(self.pages.words())
    }

    fn dense_words(&self) -> impl Iterator<Item = (Place, u64)> + '_ {
        let cells = self.dense.as_ref().map_or(&[][..], |dense| &dense.cells);
        let place = |at| Place { word: self.first + at, late: false };
        cells.iter().enumerate().map(move |(at, cell)| (place(at), cell[0])).filter(|&(_, bits)| bits != 0)
    }

    fn dense_bytes(&self) -> u64 {
        self.dense.as_ref().map_or(0, |dense| dense.cells.len() as u64 * 16)
    }
}

/// Two bits for each pair, and a bit for each word that holds fresh ones.
pub(super) struct Dense {
    /// For each word the states reached, then the fresh ones.
    cells: Vec<[u64; 2]>,
    dirty: Vec<u64>,
}

impl Dense {
    fn new(words: usize) -> Self {
        Self { cells: vec![[0; 2]; words], dirty: vec![0; words.div_ceil(64)] }
    }

    #[inline]
    fn add(&mut self, word: usize, bits: u64) {
        let cell = &mut self.cells[word];
        let new = bits & !cell[0];
        if new != 0 {
            cell[0] |= new;
            cell[1] |= new;
            self.dirty[word / 64] |= 1 << (word % 64);
        }
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

    /// Every word that holds a state.
    fn words(&self) -> impl Iterator<Item = (Place, u64)> + '_ {
        let words = self.keys.iter().zip(&self.pages).flat_map(|(&key, page)| {
            page.reached.iter().enumerate().map(move |(at, &bits)| (Self::place(key, at), bits))
        });
        words.filter(|&(_, bits)| bits != 0)
    }

    /// What the pages take: themselves, their keys and the map, each in a vector that doubles.
    pub(super) fn bytes(&self) -> u64 {
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
