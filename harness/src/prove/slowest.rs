//! What an unbroken product comes to: its latencies, each with a waveform that attains it, or a change that may
//! stay unreported for ever.

use debounce_core::{Bounds, Change, Clause, PerChange};

use super::at_once::slowest_at_once;
use super::latency::{Circle, Reports, by_age};
use super::layers::Layers;
use super::product::{Node, Product, Step};
use super::reached::Reached;
use super::word::{Place, Words};
use super::{Limits, Outcome, ProveError, Witness};

const CHANGES: [Change; 2] = [Change::Make, Change::Break];

/// The outcome of a product in which no promise is broken by any single step.
pub(super) fn outcome(
    product: &Product<'_>,
    words: &Words<'_>,
    limits: &Limits,
    reached: &Reached,
) -> Result<Outcome, ProveError> {
    if let Some(bounds) = by_age(words, reached, limits) {
        return reports_in_time(product, words, limits, bounds);
    }
    match Reports::of(product, words, reached, limits)? {
        Ok(reports) => {
            let bounds = reports.bounds(product, words, reached);
            reports_late(product, words, limits, &reports, bounds)
        }
        Err(circle) => never_reported(product, words, limits, &circle),
    }
}

/// The slowest waveforms where every change is reported before the next one can come: a shortest way to a report
/// whose change is as old as the worst.
fn reports_in_time(
    product: &Product<'_>,
    words: &Words<'_>,
    limits: &Limits,
    bounds: Bounds,
) -> Result<Outcome, ProveError> {
    let environment = product.environment;
    let slowest = |question: usize, place: Place, bits: u64| {
        let change = CHANGES[question];
        let worst = bounds.latency.at(change).worst;
        let from = words.environment_of(place);
        let state = environment.state(from);
        let differing = words.differing(place);
        let waiting = if worst == 1 {
            bits & !differing
        } else if state.held + 1 == worst && state.wanted.reached_by() == change {
            bits & differing
        } else {
            return None;
        };
        environment.branches(from).iter().enumerate().find_map(|(at, &branch)| {
            if worst == 1 && product.change(branch) != Some(change) {
                return None;
            }
            let reporting = waiting & words.edges(place, branch.sample_index());
            words.nodes(place, reporting).next().map(|node| (node, at))
        })
    };
    // A hash set takes about 18 bytes a node.
    let most = usize::try_from(limits.memory_bytes / 18).unwrap_or(usize::MAX);
    let mut paths = CHANGES.map(|change| {
        let worst = bounds.latency.at(change).worst;
        (worst > 1).then(|| slowest_at_once(product, change, worst, most)).flatten()
    });
    if paths.iter().any(Option::is_none) {
        let all = Layers::new(product, words, limits).search::<2>(product, usize::MAX, slowest)?;
        for (path, other) in paths.iter_mut().zip(all) {
            *path = path.take().or(other);
        }
    }
    Ok(faithful(product, bounds, paths))
}

/// The slowest waveforms where a change may still be pending when the next one comes.
fn reports_late(
    product: &Product<'_>,
    words: &Words<'_>,
    limits: &Limits,
    reports: &Reports,
    bounds: Bounds,
) -> Result<Outcome, ProveError> {
    let slowest = |question: usize, place: Place, bits: u64| {
        let change = CHANGES[question];
        let worst = bounds.latency.at(change).worst;
        let branches = product.environment.branches(words.environment_of(place));
        if branches.iter().all(|&branch| product.change(branch) != Some(change)) {
            return None;
        }
        words.nodes(place, bits).find_map(|node| {
            let attains = |&branch: &_| {
                product.change(branch) == Some(change)
                    && reports
                        .of_change(product, node, product.step(node, product.pending(node), branch))
                        .longest
                        == worst
            };
            branches.iter().position(attains).map(|at| (node, at))
        })
    };
    let mut paths = Layers::new(product, words, limits).search::<2>(product, usize::MAX, slowest)?;
    for path in paths.iter_mut().flatten() {
        let &(node, at) = path.last().expect("the path ends with the change");
        let pending = product.pending(node);
        let Step::To(target, edge) = product.step(node, pending, product.branches(node)[at]) else {
            unreachable!("a product without violations was explored")
        };
        path.extend(reports.slowest(product, target, pending + 1 - u32::from(edge)));
    }
    Ok(faithful(product, bounds, paths))
}

fn faithful(product: &Product<'_>, bounds: Bounds, paths: [Option<Vec<(Node, usize)>>; 2]) -> Outcome {
    let [make, break_] = paths.map(|path| path.map(|path| Witness::of(product, &path, None)));
    Outcome::Faithful { bounds, slowest: PerChange { make, break_ } }
}

/// A shortest way to a circle in which a change stays pending, and the circle.
fn never_reported(
    product: &Product<'_>,
    words: &Words<'_>,
    limits: &Limits,
    circle: &Circle,
) -> Result<Outcome, ProveError> {
    let first = circle.0[0].0;
    let [path] = Layers::new(product, words, limits).search::<1>(product, usize::MAX, |_, place, bits| {
        let branches = product.environment.branches(words.environment_of(place));
        let leads = branches.iter().any(|branch| branch.target() == first.environment());
        words.nodes(place, if leads { bits } else { 0 }).find_map(|node| {
            let pending = product.pending(node);
            let reaches =
                |&branch: &_| matches!(product.step(node, pending, branch), Step::To(to, _) if to == first);
            branches.iter().position(reaches).map(|at| (node, at))
        })
    })?;
    let mut path = path.expect("every state reached has a path");
    let loop_from = path.len();
    path.extend_from_slice(&circle.0);
    let witness = Witness::of(product, &path, Some(loop_from));
    Ok(Outcome::Refuted { clause: Clause::Missed, witness })
}
