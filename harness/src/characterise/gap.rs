//! The gap that ends a burst, found from the recording itself.

/// How long the line must rest for a burst to be over: a run shorter than this lies inside one.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Gap {
    /// The shortest run that ends a burst.
    pub ns: u64,
    /// Where it comes from.
    pub origin: GapOrigin,
}

/// Where a gap comes from.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[non_exhaustive]
pub enum GapOrigin {
    /// The caller stated it.
    Given,
    /// The emptiest stretch among the lengths of the runs, on a logarithmic scale.
    Found {
        /// The longest run inside a burst.
        longest_inside_ns: u64,
        /// The shortest run between bursts.
        shortest_between_ns: u64,
    },
    /// As [`Found`](Self::Found), but the emptiest stretch is narrower than a factor of 4: state the gap.
    Unclear {
        /// The longest run inside a burst.
        longest_inside_ns: u64,
        /// The shortest run between bursts.
        shortest_between_ns: u64,
    },
    /// No run is short enough to lie inside a burst: the contact seems not to bounce.
    NoBursts {
        /// The shortest run.
        shortest_run_ns: u64,
    },
}

/// Runs shorter than this never part two operations of a contact that a hand or a mechanism moves, so the
/// search takes them all as this long (common practice). A few odd nanosecond pulses then cannot attract it.
const FLOOR_NS: u64 = 100_000;

/// The longest run that the search takes as inside a burst: ordinary switches bounce for a fraction of 1 ms to
/// 50 ms (Pico Technology, "Measuring switch bounce").
const CEILING_NS: u64 = 50_000_000;

/// The least ratio between the run lengths on either side of the gap for it to be called found.
const LEAST_RATIO: u64 = 4;

/// Where everything comes in pairs of edges, runs from this long on are taken for operations rather than for
/// disturbances: a transient burst lasts 15 ms (IEC 61000-4-4), shock chatter 20 ms (MIL-PRF-22885H 3.21).
const SHORTEST_OPERATION_NS: u64 = 20_000_000;

/// Finds the gap from the edges and the ends of a recording.
pub(super) fn find(edges: &[u64], start_ns: u64, end_ns: u64) -> Gap {
    let mut lengths: Vec<u64> = edges.windows(2).map(|pair| pair[1] - pair[0]).collect();
    // The first and the last run may be longer than recorded; they still show rest of at least this length.
    lengths.extend(edges.first().map(|first| first - start_ns));
    lengths.extend(edges.last().map(|last| end_ns - last));
    lengths.retain(|&ns| ns > 0);
    for ns in &mut lengths {
        *ns = (*ns).max(FLOOR_NS);
    }
    lengths.sort_unstable();
    lengths.dedup();

    let mut candidates: Vec<(u64, u64)> = lengths
        .windows(2)
        .map(|pair| (pair[0], pair[1]))
        .filter(|&(inside, _)| inside <= CEILING_NS)
        .collect();
    // Widest first; of two alike the later one, which makes bounces longer and is therefore the safe side.
    candidates.sort_by(|x, y| wider(*y, *x).then(y.0.cmp(&x.0)));

    for &(inside, between) in &candidates {
        if between / LEAST_RATIO < inside {
            break;
        }
        let ns = middle(inside, between);
        if inside < SHORTEST_OPERATION_NS || has_odd_burst(edges, ns) {
            return Gap {
                ns,
                origin: GapOrigin::Found {
                    longest_inside_ns: longest_below(edges, ns),
                    shortest_between_ns: between,
                },
            };
        }
    }
    match (candidates.first(), lengths.first()) {
        // Nothing but rest: take a gap well below the shortest.
        (_, Some(&shortest)) if shortest / LEAST_RATIO >= FLOOR_NS && shortest >= SHORTEST_OPERATION_NS => {
            Gap { ns: middle(FLOOR_NS, shortest), origin: GapOrigin::NoBursts { shortest_run_ns: shortest } }
        }
        (Some(&(inside, between)), _) => {
            let ns = middle(inside, between);
            let longest_inside_ns = longest_below(edges, ns);
            Gap { ns, origin: GapOrigin::Unclear { longest_inside_ns, shortest_between_ns: between } }
        }
        (None, shortest) => {
            let shortest_run_ns = shortest.copied().unwrap_or(end_ns - start_ns);
            let ns = middle(FLOOR_NS.min(shortest_run_ns), shortest_run_ns).max(1);
            Gap { ns, origin: GapOrigin::NoBursts { shortest_run_ns } }
        }
    }
}

/// Compares how wide two stretches are on a logarithmic scale, exactly.
fn wider(x: (u64, u64), y: (u64, u64)) -> std::cmp::Ordering {
    (u128::from(x.1) * u128::from(y.0)).cmp(&(u128::from(y.1) * u128::from(x.0)))
}

/// The geometric mean: the middle of the stretch on a logarithmic scale.
fn middle(inside: u64, between: u64) -> u64 {
    let product = u128::from(inside) * u128::from(between);
    // At most the greater of the two, so it fits.
    product.isqrt() as u64
}

fn longest_below(edges: &[u64], gap_ns: u64) -> u64 {
    edges.windows(2).map(|pair| pair[1] - pair[0]).filter(|&ns| ns < gap_ns).max().unwrap_or(0)
}

fn has_odd_burst(edges: &[u64], gap_ns: u64) -> bool {
    edges.chunk_by(|a, b| b - a < gap_ns).any(|burst| !burst.len().is_multiple_of(2))
}
