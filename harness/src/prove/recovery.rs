//! What happens outside the promise: operations shorter than the dwell, and any state at power-up or upset.
//!
//! Such an operation may be missed or may be reported late; what must hold is that the output does not stay
//! wrong. From the last change on, the contact holds and only disturbances go on; the longest way to the last
//! tick with a wrong output is the time to recover, and a circle on such a way means that there is none.

use debounce_core::{Envelope, PerPosition};
use rustc_hash::FxHashMap;

use super::environment::Environment;
use super::product::{Node, Product};
use super::tabulate::LawTable;
use super::witness::Witness;
use super::{Limits, ProveError};

/// How a logic comes back.
#[derive(Clone, PartialEq, Debug)]
pub enum Recovery {
    /// The output is right, and stays right, from this many samples after the last change on; reporting the new
    /// position on the first sample is 1. From a state that is wrong from the start, the samples that it takes.
    Within(u32),
    /// The output can stay wrong, or become wrong again and again: shown as a stem and a loop.
    Never(Witness),
}

/// From operations of any length, down to one sample, until the output is right for good.
///
/// # Errors
/// As [`super::prove_within`].
pub fn recovery_from_short_operations(
    logic: &LawTable,
    envelope: &Envelope,
    limits: &Limits,
) -> Result<Recovery, ProveError> {
    let mut short = envelope.delivered();
    short.dwell = PerPosition { open: 1, closed: 1 };
    let environment = Environment::within(&short, limits)?;
    let product = Product { environment: &environment, logic };
    let mut graph = Graph::new(limits);
    for node in product.starts() {
        graph.number(node)?;
    }
    graph.explore(&product, true)?;
    Ok(graph.recovery(&product, 1))
}

/// From any state of the logic whatever, the contact settled at either position, until the output is right for
/// good. The states are those that the logic can reach from rest under any input.
///
/// # Errors
/// As [`super::prove_within`].
pub fn recovery_from_any_state(
    logic: &LawTable,
    envelope: &Envelope,
    limits: &Limits,
) -> Result<Recovery, ProveError> {
    let environment = Environment::within(envelope, limits)?;
    let product = Product { environment: &environment, logic };
    let mut graph = Graph::new(limits);
    for node in product.starts() {
        for state in 0..logic.len() {
            let number = graph.number(Node::new(node.environment(), state, false))?;
            graph.entries.push(number);
        }
    }
    graph.explore(&product, false)?;
    Ok(graph.recovery(&product, 0))
}

/// The product with its branches written out, changes of the contact kept apart from the rest.
struct Graph {
    most: usize,
    nodes: Vec<Node>,
    numbers: FxHashMap<Node, u32>,
    /// How each node was first reached.
    parents: Vec<Option<(u32, u32)>>,
    /// Branches without a change, as (target, branch) after `first[node]`.
    branches: Vec<(u32, u32)>,
    first: Vec<u32>,
    /// Nodes from which the time to recover counts.
    entries: Vec<u32>,
}

impl Graph {
    fn new(limits: &Limits) -> Self {
        // A node costs about 80 bytes with its branches, its number and the work arrays.
        let most = usize::try_from(limits.memory_bytes / 80).unwrap_or(usize::MAX).min(1 << 30);
        Self {
            most,
            nodes: Vec::new(),
            numbers: FxHashMap::default(),
            parents: Vec::new(),
            branches: Vec::new(),
            first: vec![0],
            entries: Vec::new(),
        }
    }

    fn number(&mut self, node: Node) -> Result<u32, ProveError> {
        if let Some(&number) = self.numbers.get(&node) {
            return Ok(number);
        }
        if self.nodes.len() >= self.most {
            return Err(ProveError::TooLarge {
                states: self.nodes.len() as u64,
                limit: self.most as u64 * 80,
            });
        }
        let number = self.nodes.len() as u32;
        self.numbers.insert(node, number);
        self.nodes.push(node);
        self.parents.push(None);
        Ok(number)
    }

    fn explore(&mut self, product: &Product<'_>, with_changes: bool) -> Result<(), ProveError> {
        let mut at = 0;
        while at < self.nodes.len() {
            let node = self.nodes[at];
            for (which, &branch) in product.branches(node).iter().enumerate() {
                let changes = branch.changes() != 0;
                if changes && !with_changes {
                    continue;
                }
                let entry = product.logic.entry(node.logic(), branch.sample_index());
                let known = self.nodes.len();
                let target = self.number(Node::new(branch.target(), entry.next(), false))?;
                if target as usize == known {
                    self.parents[known] = Some((at as u32, which as u32));
                }
                if changes {
                    self.entries.push(target);
                } else {
                    self.branches.push((target, which as u32));
                }
            }
            self.first.push(self.branches.len() as u32);
            at += 1;
        }
        self.entries.sort_unstable();
        self.entries.dedup();
        Ok(())
    }

    fn steady(&self, node: u32) -> &[(u32, u32)] {
        &self.branches[self.first[node as usize] as usize..self.first[node as usize + 1] as usize]
    }

    /// The nodes from which a wrong output can still come.
    fn doomed(&self, wrong: &[bool]) -> Vec<bool> {
        let mut sources: Vec<Vec<u32>> = vec![Vec::new(); self.nodes.len()];
        for node in 0..self.nodes.len() as u32 {
            for &(target, _) in self.steady(node) {
                sources[target as usize].push(node);
            }
        }
        let mut doomed = wrong.to_vec();
        let mut open: Vec<u32> = (0..self.nodes.len() as u32).filter(|&n| wrong[n as usize]).collect();
        while let Some(node) = open.pop() {
            for &source in &sources[node as usize] {
                if !core::mem::replace(&mut doomed[source as usize], true) {
                    open.push(source);
                }
            }
        }
        doomed
    }

    /// `at_entry` is the number of samples since the last change that an entry stands for.
    fn recovery(&self, product: &Product<'_>, at_entry: u32) -> Recovery {
        let wrong: Vec<bool> = self
            .nodes
            .iter()
            .map(|&node| product.logic.output(node.logic()) != product.wanted(node))
            .collect();
        let doomed = self.doomed(&wrong);
        // Only what an entry leads to counts.
        let mut inside = vec![false; self.nodes.len()];
        let mut open: Vec<u32> =
            self.entries.iter().copied().filter(|&entry| doomed[entry as usize]).collect();
        open.iter().for_each(|&entry| inside[entry as usize] = true);
        while let Some(node) = open.pop() {
            for &(target, _) in self.steady(node) {
                if doomed[target as usize] && !core::mem::replace(&mut inside[target as usize], true) {
                    open.push(target);
                }
            }
        }
        self.longest(product, &wrong, &inside, at_entry)
    }

    /// The longest way from an entry to a wrong node through `inside`, or a circle in it.
    fn longest(&self, product: &Product<'_>, wrong: &[bool], inside: &[bool], at_entry: u32) -> Recovery {
        let mut sources_left = vec![0_u32; self.nodes.len()];
        let members = || (0..self.nodes.len() as u32).filter(|&node| inside[node as usize]);
        for node in members() {
            for &(target, _) in self.steady(node) {
                sources_left[target as usize] += 1;
            }
        }
        let mut samples = vec![at_entry; self.nodes.len()];
        let mut ready: Vec<u32> = members().filter(|&node| sources_left[node as usize] == 0).collect();
        let (mut done, mut right_from) = (0, at_entry);
        while let Some(node) = ready.pop() {
            done += 1;
            let at = samples[node as usize];
            if wrong[node as usize] {
                right_from = right_from.max(at + 1);
            }
            for &(target, _) in self.steady(node) {
                if inside[target as usize] {
                    samples[target as usize] = samples[target as usize].max(at + 1);
                    sources_left[target as usize] -= 1;
                    if sources_left[target as usize] == 0 {
                        ready.push(target);
                    }
                }
            }
        }
        if done == members().count() {
            return Recovery::Within(right_from);
        }
        Recovery::Never(self.circle(product, inside, &sources_left))
    }

    /// A circle among the nodes that were never ready, with a shortest way to it.
    fn circle(&self, product: &Product<'_>, inside: &[bool], sources_left: &[u32]) -> Witness {
        let left = |node: u32| inside[node as usize] && sources_left[node as usize] > 0;
        // Walk backwards among the nodes left, each of which has a source among them, until one comes again.
        let start = (0..self.nodes.len() as u32).find(|&node| left(node)).expect("some node was never ready");
        let source = |node: u32| {
            (0..self.nodes.len() as u32)
                .filter(|&from| left(from))
                .find_map(|from| self.steady(from).iter().find(|b| b.0 == node).map(|b| (from, b.1)))
                .expect("a node that was never ready has a source that was not either")
        };
        let mut back: Vec<(u32, u32)> = Vec::new();
        let mut node = start;
        let circle = loop {
            let (from, branch) = source(node);
            back.push((from, branch));
            if let Some(at) = back[..back.len() - 1].iter().position(|entry| entry.0 == from) {
                let mut circle = back[at + 1..].to_vec();
                circle.reverse();
                break circle;
            }
            node = from;
        };
        let mut stem = Vec::new();
        let mut at = circle[0].0;
        while let Some((parent, branch)) = self.parents[at as usize] {
            stem.push((self.nodes[parent as usize], branch as usize));
            at = parent;
        }
        stem.reverse();
        let loop_from = stem.len();
        stem.extend(circle.iter().map(|&(from, branch)| (self.nodes[from as usize], branch as usize)));
        Witness::of(product, &stem, Some(loop_from))
    }
}
