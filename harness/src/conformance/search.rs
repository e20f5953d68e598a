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
///
/// A run longer than every clause binds nothing on its far side, so the stretches between such runs are searched
/// one by one: first for a reading inside the envelope, and only where there is none for the nearest.
pub(super) fn best_reading(trace: &Trace, envelope: &PhysicalEnvelope) -> (Vec<Role>, Search) {
    let rules = Rules::new(envelope);
    let mut roles = Vec::with_capacity(trace.edges().len());
    let mut search = Search::Complete;
    let mut position = trace.initial();
    let mut cluster: Vec<Stretch> = Vec::new();
    let mut rest = stretches(trace).peekable();
    while let Some(stretch) = rest.next() {
        cluster.push(stretch);
        if !rules.is_long(&stretch) && rest.peek().is_some() {
            continue;
        }
        let start = Rules::start(position);
        let strict = search_cluster(&rules, start, &cluster, 0);
        let found = match strict.roles {
            Some(found) => found,
            None => {
                let nearest = search_cluster(&rules, start, &cluster, u64::MAX);
                if strict.search == Search::Narrowed || nearest.search == Search::Narrowed {
                    search = Search::Narrowed;
                }
                let Some(found) = nearest.roles else {
                    unreachable!("taking every edge for a change is always a reading");
                };
                found
            }
        };
        roles.extend(found);
        // After the long run the contact is where the line is.
        position = stretch.line;
        cluster.clear();
    }
    (roles, search)
}

/// The best reading of a cluster, if one leaves at most `most_outside_ns` outside the envelope.
struct Found {
    roles: Option<Vec<Role>>,
    search: Search,
}

fn search_cluster(rules: &Rules<'_>, start: Clocks, cluster: &[Stretch], most_outside_ns: u64) -> Found {
    let burden = rules.burden(&start, cluster.first().map_or(0, |first| first.from));
    let mut paths = vec![Path { clocks: start, outside_ns: 0, disturbances: 0, burden, node: ROOT }];
    let mut arena: Vec<Node> = Vec::new();
    let mut search = Search::Complete;
    for stretch in cluster {
        let mut next = Vec::with_capacity(paths.len() * 2);
        for path in &paths {
            extend(rules, path, stretch, most_outside_ns, &mut next, &mut arena);
        }
        paths = keep_best(next);
        if paths.len() > MOST_READINGS {
            paths.truncate(MOST_READINGS);
            search = Search::Narrowed;
        }
    }
    let best = paths.iter().min_by_key(|path| (path.outside_ns, path.disturbances));
    Found { roles: best.map(|path| steps(&arena, path.node)), search }
}

fn extend(
    rules: &Rules<'_>,
    path: &Path,
    stretch: &Stretch,
    most_outside_ns: u64,
    next: &mut Vec<Path>,
    arena: &mut Vec<Node>,
) {
    let mut take = |role| {
        if let Some(step) = rules.step(path.clocks, role, stretch) {
            let outside_ns = path.outside_ns.saturating_add(step.outside_ns);
            if outside_ns > most_outside_ns {
                return;
            }
            arena.push(Node { parent: path.node, role });
            next.push(Path {
                burden: rules.burden(&step.clocks, stretch.until),
                clocks: step.clocks,
                outside_ns,
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

/// The roles that lead to `last`, in order of time.
fn steps(arena: &[Node], last: usize) -> Vec<Role> {
    let mut roles = Vec::new();
    let mut node = last;
    while node != ROOT {
        roles.push(arena[node].role);
        node = arena[node].parent;
    }
    roles.reverse();
    roles
}
