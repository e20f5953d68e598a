//! Best and worst latency, exactly: longest and shortest paths through the pending part of a faithful product.
//!
//! While a change is pending no branch may lead in a circle without a report, or the latency has no bound;
//! where there is no such circle the pending nodes form an acyclic graph, and one walk in depth-first order
//! gives for each of them how many samples the next report is away, at least and at most.

use debounce_core::{Bounds, Change, Latency, PerChange};

use rustc_hash::FxHashMap;

use super::environment::Branch;
use super::explore::is_shared;
use super::product::{Node, Product, Step};
use super::reached::{Half, Reached};
use super::word::Words;
use super::{Limits, ProveError};

/// Samples until a report, at least and at most.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Remaining {
    pub(super) longest: u32,
    pub(super) shortest: u32,
}

const UNSEEN: Remaining = Remaining { longest: 0, shortest: u32::MAX };
const ON_PATH: Remaining = Remaining { longest: u32::MAX, shortest: 0 };

/// A circle in which a change stays pending: the nodes with the branch taken from each, in order.
pub(super) struct Circle(pub(super) Vec<(Node, usize)>);

/// For each pending node, how far away the report of each of its pending changes is.
pub(super) struct Reports {
    index: PendingIndex,
    nodes: Vec<Node>,
    /// `ahead[j][i]`: the (j + 1)-th report from pending node i; only nodes with that many pending count.
    ahead: Vec<Vec<Remaining>>,
}

impl Reports {
    /// Walks the pending nodes of a product in which no violation was found.
    pub(super) fn of(
        product: &Product<'_>,
        words: &Words<'_>,
        reached: &Reached,
        limits: &Limits,
    ) -> Result<Result<Self, Circle>, ProveError> {
        let mut nodes = Vec::new();
        for (place, bits) in reached.words() {
            let pending = if place.late { bits } else { bits & words.differing(place) };
            nodes.extend(words.nodes(place, pending));
        }
        // The node, two reports, its place in the order and in the index.
        if nodes.len() as u64 * 48 > limits.memory_bytes {
            return Err(ProveError::TooLarge { states: reached.len(), limit: limits.memory_bytes });
        }
        nodes.sort_unstable_by_key(|node| (node.late(), *node));
        let index = PendingIndex::of(product, &nodes, reached.is_dense());
        let mut reports = Self { index, nodes, ahead: Vec::new() };
        let order = match reports.walk(product) {
            Ok(order) => order,
            Err(circle) => return Ok(Err(circle)),
        };
        let most = reports.nodes.iter().map(|&node| product.pending(node)).max().unwrap_or(0);
        for count in 2..=most {
            reports.later(product, &order, count);
        }
        Ok(Ok(reports))
    }

    /// Fills in the first report of every node; returns the nodes so that each comes after all it leads to.
    fn walk(&mut self, product: &Product<'_>) -> Result<Vec<u32>, Circle> {
        let mut first = vec![UNSEEN; self.nodes.len()];
        let mut order = Vec::with_capacity(self.nodes.len());
        let mut path: Vec<(u32, u32, Remaining)> = Vec::new();
        for root in 0..self.nodes.len() as u32 {
            if first[root as usize] != UNSEEN {
                continue;
            }
            first[root as usize] = ON_PATH;
            path.push((root, 0, UNSEEN));
            while let Some(&mut (at, ref mut next, ref mut sum)) = path.last_mut() {
                let node = self.nodes[at as usize];
                let branches = product.branches(node);
                let Some(&branch) = branches.get(*next as usize) else {
                    first[at as usize] = *sum;
                    order.push(at);
                    path.pop();
                    continue;
                };
                match product.step(node, product.pending(node), branch) {
                    Step::To(_, true) => {
                        *sum = sum.with(0, 0);
                        *next += 1;
                    }
                    Step::To(target, false) => {
                        let child = self.index.of_node(target);
                        let known = first[child as usize];
                        if known == ON_PATH {
                            let from = path.iter().position(|entry| entry.0 == child);
                            let circle = &path[from.expect("a node on the path")..];
                            return Err(Circle(
                                circle.iter().map(|e| (self.nodes[e.0 as usize], e.1 as usize)).collect(),
                            ));
                        }
                        if known == UNSEEN {
                            first[child as usize] = ON_PATH;
                            path.push((child, 0, UNSEEN));
                        } else {
                            *sum = sum.with(known.longest, known.shortest);
                            *next += 1;
                        }
                    }
                    Step::Violates(_) => unreachable!("a product without violations was explored"),
                }
            }
        }
        self.ahead.push(first);
        Ok(order)
    }

    /// Fills in the `count`-th report of the nodes with that many pending.
    fn later(&mut self, product: &Product<'_>, order: &[u32], count: u32) {
        let mut later = vec![UNSEEN; self.nodes.len()];
        for &at in order {
            let node = self.nodes[at as usize];
            if product.pending(node) < count {
                continue;
            }
            let mut sum = UNSEEN;
            for &branch in product.branches(node) {
                let Step::To(target, edge) = product.step(node, product.pending(node), branch) else {
                    unreachable!("a product without violations was explored")
                };
                let child = self.index.of_node(target) as usize;
                let known = if edge { self.ahead[count as usize - 2][child] } else { later[child] };
                sum = sum.with(known.longest, known.shortest);
            }
            later[at as usize] = sum;
        }
        self.ahead.push(later);
    }

    /// The latency of the change that `branch` makes from `node`.
    pub(super) fn of_change(&self, product: &Product<'_>, node: Node, step: Step) -> Remaining {
        let Step::To(target, edge) = step else { unreachable!("a product without violations was explored") };
        let count = product.pending(node) + 1 - u32::from(edge);
        if count == 0 {
            return Remaining { longest: 1, shortest: 1 };
        }
        let known = self.remaining(target, count);
        UNSEEN.with(known.longest, known.shortest)
    }

    /// The `count`-th report from a node.
    pub(super) fn remaining(&self, node: Node, count: u32) -> Remaining {
        self.ahead[count as usize - 1][self.index.of_node(node) as usize]
    }

    /// The latencies over every change that can happen.
    pub(super) fn bounds(&self, product: &Product<'_>, words: &Words<'_>, reached: &Reached) -> Bounds {
        let mut seen = Seen::default();
        for (place, bits) in reached.words() {
            for (at, &branch) in product.environment.branches(words.environment_of(place)).iter().enumerate()
            {
                let Some(change) = product.change(branch) else { continue };
                for node in words.nodes(place, bits) {
                    let branch = product.branches(node)[at];
                    let step = product.step(node, product.pending(node), branch);
                    seen.add(change, self.of_change(product, node, step));
                }
            }
        }
        seen.bounds()
    }

    /// The branches of a slowest way to the `count`-th report from `node`.
    pub(super) fn slowest(
        &self,
        product: &Product<'_>,
        mut node: Node,
        mut count: u32,
    ) -> Vec<(Node, usize)> {
        let mut path = Vec::new();
        while count > 0 {
            let wanted = self.remaining(node, count).longest;
            let pending = product.pending(node);
            let leads = |branch: &Branch| {
                let Step::To(target, edge) = product.step(node, pending, *branch) else { return None };
                let left = count - u32::from(edge);
                let rest = if left == 0 { 0 } else { self.remaining(target, left).longest };
                (rest + 1 == wanted).then_some((target, left))
            };
            let found = product.branches(node).iter().enumerate().find_map(|(at, b)| Some((at, leads(b)?)));
            let (at, (target, left)) = found.expect("some branch attains the longest");
            path.push((node, at));
            (node, count) = (target, left);
        }
        path
    }
}

impl Remaining {
    /// This, and another way that needs one sample more than the given.
    fn with(self, longest: u32, shortest: u32) -> Self {
        Self { longest: self.longest.max(longest + 1), shortest: self.shortest.min(shortest + 1) }
    }
}

/// Numbers the pending nodes, sorted by whether they are late, then by environment and logic state.
struct PendingIndex {
    logic_states: usize,
    /// Those on time.
    ranked: Option<Ranked>,
    /// All others.
    numbers: FxHashMap<Node, u32>,
}

/// A set of bits with the count of ones before each word.
struct Ranked {
    words: Vec<u64>,
    before: Vec<u32>,
}

impl PendingIndex {
    fn of(product: &Product<'_>, nodes: &[Node], dense: bool) -> Self {
        let logic_states = product.logic.len();
        let on_time = if dense { nodes.partition_point(|node| !node.late()) } else { 0 };
        let ranked = dense.then(|| {
            let mut words = vec![0_u64; (product.environment.len() * logic_states).div_ceil(64)];
            for node in &nodes[..on_time] {
                let index = node.environment() * logic_states + node.logic();
                words[index / 64] |= 1 << (index % 64);
            }
            let mut so_far = 0;
            let mut count = |word: &u64| {
                let before = so_far;
                so_far += word.count_ones();
                before
            };
            let before = words.iter().map(&mut count).collect();
            Ranked { words, before }
        });
        let numbers = (on_time..nodes.len()).map(|at| (nodes[at], at as u32)).collect();
        Self { logic_states, ranked, numbers }
    }

    #[inline]
    fn of_node(&self, node: Node) -> u32 {
        match &self.ranked {
            Some(set) if !node.late() => {
                let index = node.environment() * self.logic_states + node.logic();
                let below = set.words[index / 64] & ((1 << (index % 64)) - 1);
                set.before[index / 64] + below.count_ones()
            }
            _ => self.numbers[&node],
        }
    }
}

/// The least and the greatest latency seen so far at each change.
#[derive(Default)]
struct Seen(PerChange<Option<Latency>>);

impl Seen {
    fn add(&mut self, change: Change, found: Remaining) {
        let slot = match change {
            Change::Make => &mut self.0.make,
            Change::Break => &mut self.0.break_,
        };
        let so_far = slot.unwrap_or(Latency { best: u32::MAX, worst: 0 });
        *slot =
            Some(Latency { best: so_far.best.min(found.shortest), worst: so_far.worst.max(found.longest) });
    }

    fn each(self) -> impl Iterator<Item = (Change, Latency)> {
        let Self(PerChange { make, break_ }) = self;
        let of = |change, latency: Option<Latency>| latency.map(|latency| (change, latency));
        of(Change::Make, make).into_iter().chain(of(Change::Break, break_))
    }

    fn bounds(self) -> Bounds {
        Bounds {
            latency: PerChange {
                make: self.0.make.unwrap_or_default(),
                break_: self.0.break_.unwrap_or_default(),
            },
        }
    }
}

/// The latencies read off the age of each change; `None` where some change can still be pending once the contact
/// has served its dwell and may change again.
///
/// Until then the environment itself counts the samples since the change, and at most that one is pending; so
/// every report tells its own latency, and since the count only rises there is no circle.
pub(super) fn by_age(words: &Words<'_>, reached: &Reached, limits: &Limits) -> Option<Bounds> {
    if reached.has_late() {
        return None;
    }
    let [open, closed] = &reached.halves;
    let (open, closed) = if is_shared(words, limits) {
        rayon::join(|| seen_in(words, open), || seen_in(words, closed))
    } else {
        (seen_in(words, open), seen_in(words, closed))
    };
    let mut seen = open?;
    for (change, latency) in closed?.each() {
        seen.add(change, Remaining { longest: latency.worst, shortest: latency.best });
    }
    Some(seen.bounds())
}

/// The latencies of the reports that the states of a half make.
fn seen_in(words: &Words<'_>, half: &Half) -> Option<Seen> {
    let environment = words.environment;
    let mut seen = Seen::default();
    for (place, bits) in half.words() {
        let at = words.environment_of(place);
        let differing = words.differing(place);
        let pending = bits & differing;
        if pending != 0 {
            if environment.dwell_served(at) {
                return None;
            }
            let state = environment.state(at);
            let reports = |branch: &Branch| pending & words.edges(place, branch.sample_index()) != 0;
            if environment.branches(at).iter().any(reports) {
                let age = state.held + 1;
                seen.add(state.wanted.reached_by(), Remaining { longest: age, shortest: age });
            }
        }
        let answered = bits & !differing;
        if answered != 0 && environment.dwell_served(at) {
            for branch in environment.branches(at) {
                if branch.changes() != 0 && answered & words.edges(place, branch.sample_index()) != 0 {
                    let change = environment.state(branch.target()).wanted.reached_by();
                    seen.add(change, Remaining { longest: 1, shortest: 1 });
                }
            }
        }
    }
    Some(seen)
}
