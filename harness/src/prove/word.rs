//! Sixty-four states of the product at a time: one environment state beside a word of logic states.
//!
//! In one environment state every logic state meets the same branches, so what a sample does to them is a question
//! about sets of logic states, and a set of 64 neighbours is a word. What may not happen is a mask; where a sample
//! leads is a few shifts, because neighbours in the table mostly lead to neighbours (a count goes up by one). Only
//! where they do not, as in a window of samples, is each bit looked up by itself.

use std::sync::OnceLock;

use debounce_core::Position;

use super::environment::{Branch, Environment};
use super::product::{Node, Product};
use super::tabulate::LawTable;

/// Words whose bits scatter to more places than this are stepped bit by bit.
const MOST_MOVES: usize = 16;

/// Fewer words than this are not worth a second thread.
pub(super) const MANY_WORDS: usize = 1 << 14;

/// The bits of a word that one sample moves together.
#[derive(Clone, Copy)]
struct Move {
    mask: u64,
    /// The word they go to.
    word: u32,
    /// How far they are turned, to the left.
    turn: u32,
}

/// What is known of 64 neighbouring logic states, for either sample where there are two.
struct Word {
    /// States with the output closed.
    closed: u64,
    /// States from which the sample makes an edge.
    edges: [u64; 2],
    /// States that the sample (first index) leads to where samples of a position (second) change nothing more.
    settles: [[u64; 2]; 2],
    /// For either sample the moves; none where the word is stepped bit by bit.
    moves: [Box<[Move]>; 2],
}

/// A logic as words of states, each looked at when it is first met: few words of a large table ever are.
pub(super) struct WordLaw<'a> {
    table: &'a LawTable,
    words: Vec<OnceLock<Word>>,
}

impl<'a> WordLaw<'a> {
    pub(super) fn of(table: &'a LawTable) -> Self {
        Self { table, words: (0..table.len().div_ceil(64)).map(|_| OnceLock::new()).collect() }
    }

    /// Words for each environment state.
    pub(super) fn len(&self) -> usize {
        self.words.len()
    }

    #[inline]
    fn word(&self, word: usize) -> &Word {
        self.words[word].get_or_init(|| Word::of(self.table, word * 64))
    }

    /// Calls `each` with the words, and in them the bits, that a sample leads to from `bits` of `word`.
    #[inline]
    fn image(&self, word: usize, sample: usize, bits: u64, mut each: impl FnMut(usize, u64)) {
        let moves = &self.word(word).moves[sample];
        if moves.is_empty() {
            let (mut at, mut found) = (0, 0);
            for bit in ones(bits) {
                let next = self.table.entry(word * 64 + bit, sample).next();
                if next / 64 != at && found != 0 {
                    each(at, found);
                    found = 0;
                }
                at = next / 64;
                found |= 1 << (next % 64);
            }
            if found != 0 {
                each(at, found);
            }
            return;
        }
        for moved in moves.iter() {
            let found = (bits & moved.mask).rotate_left(moved.turn);
            if found != 0 {
                each(moved.word as usize, found);
            }
        }
    }
}

impl Word {
    /// What is known of the states from the given on.
    #[cold]
    fn of(table: &LawTable, from: usize) -> Self {
        let mut word =
            Self { closed: 0, edges: [0; 2], settles: [[0; 2]; 2], moves: [Box::new([]), Box::new([])] };
        for state in from..table.len().min(from + 64) {
            let bit = 1_u64 << (state - from);
            if table.output(state).is_closed() {
                word.closed |= bit;
            }
            for sample in 0..2 {
                let entry = table.entry(state, sample);
                if entry.edges() != 0 {
                    word.edges[sample] |= bit;
                }
                for position in Position::BOTH {
                    if table.is_settled(entry.next(), position) {
                        word.settles[sample][position as usize] |= bit;
                    }
                }
            }
        }
        word.moves = [0, 1].map(|sample| moves(table, from, sample));
        word
    }
}

/// How a sample moves the 64 states from the given on; nothing where they scatter to too many places.
fn moves(table: &LawTable, from: usize, sample: usize) -> Box<[Move]> {
    let mut moves = [Move { mask: 0, word: 0, turn: 0 }; MOST_MOVES];
    let mut found = 0;
    for state in from..table.len().min(from + 64) {
        let next = table.entry(state, sample).next();
        // A table has at most 2^26 states.
        let (word, turn) = ((next / 64) as u32, (next.wrapping_sub(state) % 64) as u32);
        let known = moves[..found].iter().position(|known| (known.word, known.turn) == (word, turn));
        let at = known.unwrap_or(found);
        if at == MOST_MOVES {
            return Box::new([]);
        }
        if at == found {
            moves[at] = Move { mask: 0, word, turn };
            found += 1;
        }
        moves[at].mask |= 1 << (state - from);
    }
    moves[..found].into()
}

/// The numbers of the bits that are set.
#[inline]
pub(super) fn ones(mut bits: u64) -> impl Iterator<Item = usize> {
    core::iter::from_fn(move || {
        (bits != 0).then(|| {
            let bit = bits.trailing_zeros() as usize;
            bits &= bits - 1;
            bit
        })
    })
}

/// Where a word of the product lies: counted through the environment states, and whether its states are late.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub(super) struct Place {
    pub(super) word: usize,
    pub(super) late: bool,
}

/// What a branch does to the states of a word.
pub(super) struct Split {
    /// Those that are on time after it, and those that are late.
    pub(super) on_time: u64,
    pub(super) late: u64,
    /// Those for which it breaks a promise.
    pub(super) broken: u64,
}

/// A product as words.
pub(super) struct Words<'a> {
    pub(super) environment: &'a Environment,
    pub(super) law: WordLaw<'a>,
}

impl<'a> Words<'a> {
    pub(super) fn of(product: &Product<'a>) -> Self {
        Self { environment: product.environment, law: WordLaw::of(product.logic) }
    }

    /// How many words hold every state that is not late, and as many every state that is.
    pub(super) fn len(&self) -> usize {
        self.environment.len() * self.law.len()
    }

    /// Whether they are so many that it pays to share them out among threads.
    pub(super) fn are_many(&self) -> bool {
        self.len() >= MANY_WORDS
    }

    /// The first word with the contact closed; all with it open come before.
    pub(super) fn first_closed(&self) -> usize {
        self.environment.first_closed() * self.law.len()
    }

    pub(super) fn place(&self, node: Node) -> (Place, u64) {
        let word = node.environment() * self.law.len() + node.logic() / 64;
        (Place { word, late: node.late() }, 1 << (node.logic() % 64))
    }

    /// The nodes of some bits of a word.
    pub(super) fn nodes(&self, place: Place, bits: u64) -> impl Iterator<Item = Node> + use<> {
        let (environment, from) = (place.word / self.law.len(), place.word % self.law.len() * 64);
        ones(bits).map(move |bit| Node::new(environment, from + bit, place.late))
    }

    /// The environment state of a word.
    #[inline]
    pub(super) fn environment_of(&self, place: Place) -> usize {
        place.word / self.law.len()
    }

    /// The bits of a word whose output is not the wanted one: an odd number of changes is unreported.
    #[inline]
    pub(super) fn differing(&self, place: Place) -> u64 {
        self.differing_at(place.word / self.law.len(), place.word % self.law.len())
    }

    #[inline]
    fn differing_at(&self, environment: usize, word: usize) -> u64 {
        let closed = self.law.word(word).closed;
        if self.environment.state(environment).wanted.is_closed() { !closed } else { closed }
    }

    /// The bits of a word from which a sample makes an edge.
    #[inline]
    pub(super) fn edges(&self, place: Place, sample: usize) -> u64 {
        self.law.word(place.word % self.law.len()).edges[sample]
    }

    /// What `branch` does to `bits`; says the same as [`Product::step`] of each of them.
    #[inline]
    pub(super) fn split(&self, place: Place, bits: u64, branch: Branch) -> Split {
        let word = place.word % self.law.len();
        let differing = self.differing_at(place.word / self.law.len(), word);
        self.split_at(word, place.late, bits, differing, branch)
    }

    #[inline]
    fn split_at(&self, word: usize, late: bool, bits: u64, differing: u64, branch: Branch) -> Split {
        let sample = branch.sample_index();
        let known = self.law.word(word);
        let (edges, changes) = (known.edges[sample], branch.changes() != 0);
        // Unreported: 0 or 1 (differing), and 2 more when late.
        let (on_time, answered, mut broken) = match (late, changes) {
            (false, false) => (bits, differing ^ !edges, bits & !differing & edges),
            (false, true) => (bits & (edges | !differing), !differing & edges, 0),
            (true, false) => (bits & !differing & edges, 0, 0),
            (true, true) => (0, 0, bits & differing & !edges),
        };
        let owing = bits & !answered;
        if owing & (known.settles[sample][0] | known.settles[sample][1]) != 0 {
            // The contact may now stay where it is, undisturbed, for ever: a settled logic will never report.
            let contact = self.environment.state(branch.target()).contact;
            broken |= owing & known.settles[sample][contact as usize];
        }
        Split { on_time, late: bits & !on_time, broken }
    }

    /// Takes every branch from `bits` and calls `each` with all they lead to; false as soon as a promise breaks.
    #[inline]
    pub(super) fn expand(&self, place: Place, bits: u64, mut each: impl FnMut(Place, u64)) -> bool {
        let words = self.law.len();
        let (environment, word) = (place.word / words, place.word % words);
        let differing = self.differing_at(environment, word);
        for &branch in self.environment.branches(environment) {
            let split = self.split_at(word, place.late, bits, differing, branch);
            if split.broken != 0 {
                return false;
            }
            let row = branch.target() * words;
            let sample = branch.sample_index();
            self.law.image(word, sample, split.on_time, |to, bits| {
                each(Place { word: row + to, late: false }, bits);
            });
            if split.late != 0 {
                self.law.image(word, sample, split.late, |to, bits| {
                    each(Place { word: row + to, late: true }, bits);
                });
            }
        }
        true
    }
}
