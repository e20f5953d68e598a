//! Shortest ways through a product: the states by the number of samples that it takes to reach them.
//!
//! The layers are kept, so a predecessor is found by looking through the layer before; nothing is stored per state.
//! The search is sequential, so the same question has the same answer on any number of cores.

use super::at_once::Path;
use super::product::{Node, Product, Step};
use super::reached::Reached;
use super::word::{Place, Words, ones};
use super::{Limits, ProveError};

/// The words of a layer with their states.
pub(super) type Layer = Vec<(Place, u64)>;

/// The product's states layer by layer, as far as was asked.
pub(super) struct Layers<'a> {
    words: &'a Words<'a>,
    reached: Reached,
    layers: Vec<Layer>,
}

impl<'a> Layers<'a> {
    /// The first layer: both starts.
    pub(super) fn new(product: &Product<'_>, words: &'a Words<'a>, limits: &Limits) -> Self {
        let mut layers = Self { words, reached: Reached::new(words, limits), layers: Vec::new() };
        for node in product.starts() {
            let (place, bit) = words.place(node);
            layers.reached.add(place, bit);
        }
        let first = layers.take();
        layers.layers.push(first);
        layers
    }

    /// For each of `wanted` questions a shortest path that ends with what `find` finds in a word of the first layer
    /// in which it finds anything; `None` where it finds nothing in any of the first `most` layers.
    pub(super) fn search<const N: usize>(
        &mut self,
        product: &Product<'_>,
        most: usize,
        mut find: impl FnMut(usize, Place, u64) -> Option<(Node, usize)>,
    ) -> Result<[Option<Path>; N], ProveError> {
        let mut paths = core::array::from_fn(|_| None);
        loop {
            let last = self.layers.last().expect("there is a first layer");
            for (question, path) in paths.iter_mut().enumerate() {
                if path.is_none()
                    && let Some(found) = last.iter().find_map(|&(place, bits)| find(question, place, bits))
                {
                    *path = Some(self.path(product, found));
                }
            }
            if paths.iter().all(Option::is_some) || self.layers.len() >= most || !self.advance()? {
                return Ok(paths);
            }
        }
    }

    /// All layers so far.
    pub(super) fn all(&self) -> &[Layer] {
        &self.layers
    }

    /// Goes one sample on; false when nothing new is reached. There must be no broken promise on the way.
    fn advance(&mut self) -> Result<bool, ProveError> {
        let last = self.layers.last().expect("there is a first layer");
        for &(place, bits) in last {
            self.words.expand(place, bits, |place, bits| self.reached.add(place, bits));
        }
        self.reached.check()?;
        let next = self.take();
        let more = !next.is_empty();
        self.layers.push(next);
        Ok(more)
    }

    fn take(&mut self) -> Layer {
        let mut layer = Layer::new();
        for half in &mut self.reached.halves {
            for group in 0..half.groups() {
                let dirty = half.take_dirty(group);
                layer.extend(ones(dirty).map(|at| half.take(group, at)));
            }
        }
        for half in &mut self.reached.halves {
            while let Some(page) = half.pages.take() {
                layer.extend(page.into_iter().filter(|&(_, fresh)| fresh != 0));
            }
        }
        layer
    }

    /// The path that ends with `last`: a node of the last layer and the branch taken from it.
    fn path(&self, product: &Product<'_>, last: (Node, usize)) -> Vec<(Node, usize)> {
        let mut path = vec![last];
        for layer in self.layers[..self.layers.len() - 1].iter().rev() {
            let target = path.last().expect("the path is not empty").0;
            let step = layer.iter().find_map(|&(place, bits)| {
                let branches = product.environment.branches(self.words.environment_of(place));
                let leads = branches.iter().any(|branch| branch.target() == target.environment());
                let mut nodes = self.words.nodes(place, if leads { bits } else { 0 });
                nodes.find_map(|node| {
                    let pending = product.pending(node);
                    let reaches = |&branch: &_| {
                        matches!(product.step(node, pending, branch), Step::To(found, _) if found == target)
                    };
                    branches.iter().position(reaches).map(|at| (node, at))
                })
            });
            path.push(step.expect("every node of a layer was reached from the layer before"));
        }
        path.reverse();
        path
    }
}
