//! The search for the reading that leaves the least time outside the envelope.
//!
//! Dynamic programming over the edges: after each edge it keeps every reading that no other one beats in time
//! outside so far and in every clock that a clause may still look at. With nothing outside, the clocks are
//! compared exactly, so no conforming reading is lost. A run longer than every clause leaves one reading.

use super::Search;
use super::reading::{AWAY, Burden, Clocks, Role, Rules, Stretch, stretches};
use crate::envelope::PhysicalEnvelope;
use crate::trace::Trace;

/// How many readings are followed at once. The envelopes of ordinary contacts need a handful.
const MOST_READINGS: usize = 512;

/// One reading so far.
struct Path {
    clocks: Clocks,
    outside_ns: u64,
    /// Disturbances so far: of two readings alike, the one with fewer is taken.
    disturbances: u32,
    burden: Burden,
    /// Its last step in the arena.
    node: usize,
}

/// The steps of all readings followed, each pointing to the one before.
struct Node {
    parent: usize,
    role: Role,
}

const ROOT: usize = usize::MAX;

/// The role of each edge in the best reading.
pub(super) fn best_reading(trace: &Trace, envelope: &PhysicalEnvelope) -> (Vec<Role>, Search) {
    let rules = Rules::new(envelope);
    let clocks = Rules::start(trace.initial());
    let burden = rules.burden(&clocks, trace.start_ns());
    let mut paths = vec![Path { clocks, outside_ns: 0, disturbances: 0, burden, node: ROOT }];
    let mut arena: Vec<Node> = Vec::new();
    let mut roles = Vec::with_capacity(trace.edges().len());
    let mut search = Search::Complete;
    for stretch in stretches(trace) {
        let mut next = Vec::with_capacity(paths.len() * 2);
        for path in &paths {
            extend(&rules, path, &stretch, &mut next, &mut arena);
        }
        paths = keep_best(next);
        if paths.len() > MOST_READINGS {
            paths.truncate(MOST_READINGS);
            search = Search::Narrowed;
        }
        // With one reading left its past is settled: write it down and start a new arena.
        if let [only] = paths.as_mut_slice() {
            write_down(&arena, only.node, &mut roles);
            only.node = ROOT;
            only.outside_ns = 0;
            only.disturbances = 0;
            arena.clear();
        }
    }
    if let Some(best) = paths.iter().min_by_key(|path| (path.outside_ns, path.disturbances)) {
        write_down(&arena, best.node, &mut roles);
    }
    (roles, search)
}

fn extend(rules: &Rules<'_>, path: &Path, stretch: &Stretch, next: &mut Vec<Path>, arena: &mut Vec<Node>) {
    let mut take = |role| {
        if let Some(step) = rules.step(path.clocks, role, stretch) {
            arena.push(Node { parent: path.node, role });
            next.push(Path {
                burden: rules.burden(&step.clocks, stretch.until),
                clocks: step.clocks,
                outside_ns: path.outside_ns.saturating_add(step.outside_ns),
                disturbances: path.disturbances + u32::from(role == Role::NewDisturbance),
                node: arena.len() - 1,
            });
        }
    };
    if path.clocks.contact == stretch.line {
        take(Role::Return);
    } else {
        AWAY.into_iter().for_each(take);
    }
}

/// Drops every reading that another one beats or equals.
fn keep_best(mut paths: Vec<Path>) -> Vec<Path> {
    paths.sort_by_key(|path| (path.outside_ns, path.disturbances));
    let mut kept: Vec<Path> = Vec::with_capacity(paths.len());
    for path in paths {
        // Those kept already are no worse in time outside and in disturbances.
        let beaten = kept.iter().any(|better| {
            better.clocks.contact == path.clocks.contact
                && better.burden.iter().zip(&path.burden).all(|(b, p)| b <= p)
        });
        if !beaten {
            kept.push(path);
        }
    }
    kept
}

fn write_down(arena: &[Node], last: usize, roles: &mut Vec<Role>) {
    let settled = roles.len();
    let mut node = last;
    while node != ROOT {
        roles.push(arena[node].role);
        node = arena[node].parent;
    }
    roles[settled..].reverse();
}
