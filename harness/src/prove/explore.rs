//! All reachable states of a product, layer by layer, in a dense set of one bit each.

use core::sync::atomic::{AtomicU64, Ordering::Relaxed};

use debounce_core::Clause;
use rayon::prelude::*;

use super::product::{Node, Product, Step};
use super::{Limits, ProveError};

/// A set of nodes: one bit for each pair of environment and logic state, and as much again only once some
/// node is late.
pub(super) struct Visited {
    logic_states: usize,
    on_time: Vec<AtomicU64>,
    late: std::sync::OnceLock<Vec<AtomicU64>>,
}

impl Visited {
    pub(super) fn for_product(product: &Product<'_>, limits: &Limits) -> Result<Self, ProveError> {
        let pairs = product.environment.len() as u128 * product.logic.len() as u128;
        // Two bits a pair in the worst case.
        let bytes = pairs / 4 + 16;
        if bytes > u128::from(limits.memory_bytes) {
            return Err(ProveError::TooLarge { pairs, bytes, limit: limits.memory_bytes });
        }
        let words = (pairs as usize).div_ceil(64);
        Ok(Self {
            logic_states: product.logic.len(),
            on_time: zeros(words),
            late: std::sync::OnceLock::new(),
        })
    }

    #[inline]
    fn index(&self, node: Node) -> usize {
        node.environment() * self.logic_states + node.logic()
    }

    #[inline]
    fn word(&self, node: Node) -> (&AtomicU64, u64) {
        let index = self.index(node);
        let words =
            if node.late() { self.late.get_or_init(|| zeros(self.on_time.len())) } else { &self.on_time };
        (&words[index / 64], 1 << (index % 64))
    }

    /// Adds a node while no other thread does; true when it is new.
    #[inline]
    fn insert_alone(&self, node: Node) -> bool {
        let (word, bit) = self.word(node);
        let old = word.load(Relaxed);
        if old & bit != 0 {
            return false;
        }
        word.store(old | bit, Relaxed);
        true
    }

    /// Adds a node while other threads may too; true for exactly one of them.
    #[inline]
    fn insert_shared(&self, node: Node) -> bool {
        let (word, bit) = self.word(node);
        word.load(Relaxed) & bit == 0 && word.fetch_or(bit, Relaxed) & bit == 0
    }

    /// Every node of the set, in the order of environment and logic states.
    pub(super) fn nodes(&self) -> impl Iterator<Item = Node> + '_ {
        let late = self.late.get().map_or(&[][..], |words| words);
        ones(&self.on_time, self.logic_states, false).chain(ones(late, self.logic_states, true))
    }
}

fn zeros(words: usize) -> Vec<AtomicU64> {
    let mut set = Vec::new();
    set.resize_with(words, AtomicU64::default);
    set
}

fn ones(words: &[AtomicU64], logic_states: usize, late: bool) -> impl Iterator<Item = Node> + '_ {
    words.iter().enumerate().flat_map(move |(at, word)| {
        let mut left = word.load(Relaxed);
        core::iter::from_fn(move || {
            if left == 0 {
                return None;
            }
            let index = at * 64 + left.trailing_zeros() as usize;
            left &= left - 1;
            Some(Node::new(index / logic_states, index % logic_states, late))
        })
    })
}

/// What an exploration came to.
pub(super) struct Explored {
    pub(super) visited: Visited,
    /// Number of nodes reached.
    pub(super) states: u64,
    /// Number of branches taken.
    pub(super) transitions: u64,
    /// The first violation, by the number of samples it takes.
    pub(super) violation: Option<Clause>,
}

/// Layers smaller than this are not worth sharing out.
const SHARED_LAYER: usize = 1 << 14;

/// Explores everything that can be reached from both starts, or up to the first layer with a violation.
pub(super) fn explore(product: &Product<'_>, limits: &Limits) -> Result<Explored, ProveError> {
    let visited = Visited::for_product(product, limits)?;
    let mut layer: Vec<Node> = Vec::new();
    for node in product.starts() {
        if visited.insert_alone(node) {
            layer.push(node);
        }
    }
    let (mut states, mut transitions) = (0, 0);
    let mut next = Vec::new();
    let mut violation = None;
    while !layer.is_empty() && violation.is_none() {
        states += layer.len() as u64;
        if layer.len() < SHARED_LAYER || limits.threads == 1 {
            let found = expand(product, &layer, &mut next, |node| visited.insert_alone(node));
            transitions += found.0;
            violation = found.1;
        } else {
            let parts: Vec<_> = layer
                .par_chunks(SHARED_LAYER / 4)
                .map(|part| {
                    let mut mine = Vec::with_capacity(part.len() * 2);
                    let found = expand(product, part, &mut mine, |node| visited.insert_shared(node));
                    (mine, found)
                })
                .collect();
            for (mine, found) in parts {
                next.extend_from_slice(&mine);
                transitions += found.0;
                violation = violation.or(found.1);
            }
        }
        layer.clear();
        core::mem::swap(&mut layer, &mut next);
    }
    Ok(Explored { visited, states, transitions, violation })
}

/// Takes every branch of every node of `layer`; returns how many, and a violation if there was one.
#[inline]
fn expand(
    product: &Product<'_>,
    layer: &[Node],
    next: &mut Vec<Node>,
    mut insert: impl FnMut(Node) -> bool,
) -> (u64, Option<Clause>) {
    let mut transitions = 0;
    let mut violation = None;
    for &node in layer {
        let pending = product.pending(node);
        let branches = product.branches(node);
        transitions += branches.len() as u64;
        for &branch in branches {
            match product.step(node, pending, branch) {
                Step::To(target, _) => {
                    if insert(target) {
                        next.push(target);
                    }
                }
                Step::Violates(clause) => violation = violation.or(Some(clause)),
            }
        }
    }
    (transitions, violation)
}

/// A shortest path from a start to the first branch, in a fixed order, for which `wanted` holds.
///
/// The layers are kept, so a predecessor is found by looking through the layer before; nothing is stored per
/// node. The search is sequential, so the same question has the same answer on any number of cores.
pub(super) fn shortest_path(
    product: &Product<'_>,
    limits: &Limits,
    mut wanted: impl FnMut(Node, usize, Step) -> bool,
) -> Result<Option<Vec<(Node, usize)>>, ProveError> {
    let visited = Visited::for_product(product, limits)?;
    let mut layers: Vec<Vec<Node>> = vec![Vec::new()];
    for node in product.starts() {
        if visited.insert_alone(node) {
            layers[0].push(node);
        }
    }
    loop {
        let layer = layers.last().expect("there is a first layer");
        if layer.is_empty() {
            return Ok(None);
        }
        let mut next = Vec::new();
        let mut found = None;
        'layer: for &node in layer {
            let pending = product.pending(node);
            for (at, &branch) in product.branches(node).iter().enumerate() {
                let step = product.step(node, pending, branch);
                if wanted(node, at, step) {
                    found = Some((node, at));
                    break 'layer;
                }
                if let Step::To(target, _) = step
                    && visited.insert_alone(target)
                {
                    next.push(target);
                }
            }
        }
        if let Some(last) = found {
            return Ok(Some(walk_back(product, &layers, last)));
        }
        layers.push(next);
    }
}

/// The path through `layers` that ends with `last`, a node of the last layer and the branch taken from it.
fn walk_back(product: &Product<'_>, layers: &[Vec<Node>], last: (Node, usize)) -> Vec<(Node, usize)> {
    let mut path = vec![last];
    for layer in layers[..layers.len() - 1].iter().rev() {
        let target = path.last().expect("the path is not empty").0;
        let step = layer.iter().find_map(|&node| {
            let pending = product.pending(node);
            let reaches = |&branch: &_| {
                matches!(product.step(node, pending, branch), Step::To(found, _) if found == target)
            };
            product.branches(node).iter().position(reaches).map(|at| (node, at))
        });
        path.push(step.expect("every node of a layer was reached from the layer before"));
    }
    path.reverse();
    path
}
