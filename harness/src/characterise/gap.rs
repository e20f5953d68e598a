//! The gap that ends a burst, found from the recording itself.

use super::lengths::{Bin, Lengths};

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
    /// No stretch is wider than a factor of 4: the middle of the one with the fewest runs near it. State the gap.
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

/// Runs shorter than these never part two operations, so the search takes them all as this long; odd pulses then
/// cannot attract it. The first is for a contact that a hand or a mechanism moves: of all people the fastest press and
/// release a button in 62.5 ms (16 presses a second, T. Takahashi as reported by the press), and a contact holds each
/// position for far longer than 1 ms. The second is for quicker ones, such as an encoder, where the first finds nothing
/// (both our choice).
const FLOORS_NS: [u64; 2] = [1_000_000, FLOOR_NS];
const FLOOR_NS: u64 = 100_000;

/// A burst that ends where it began and is wider than this is hardly one disturbance: it holds operations or a row of
/// disturbances, and a shorter gap is looked for (the same bound as below: no bounce lasts longer).
const WIDEST_DISTURBANCE_NS: u64 = 50_000_000;

/// The longest run that the search takes as inside a burst: ordinary switches bounce for a fraction of 1 ms to
/// 50 ms (Pico Technology, "Measuring switch bounce").
const CEILING_NS: u64 = 50_000_000;

/// The least ratio between the run lengths on either side of the gap for it to be called found.
const LEAST_RATIO: u64 = 4;

/// Where everything comes in pairs of edges, runs from this long on are taken for operations rather than for
/// disturbances: a transient burst lasts 15 ms (IEC 61000-4-4), shock chatter 20 ms (MIL-PRF-22885H 3.21).
const SHORTEST_OPERATION_NS: u64 = 20_000_000;

/// Finds the gap from the edges and the ends of a recording, with its lengths of runs counted on the way.
pub(super) fn find(edges: &[u64], start_ns: u64, end_ns: u64) -> Gap {
    let mut lengths = Lengths::default();
    for pair in edges.windows(2) {
        lengths.add(pair[1] - pair[0]);
    }
    // The first and the last run may be longer than recorded; they still show rest of at least this length.
    lengths.add(edges.first().map_or(0, |first| first - start_ns));
    lengths.add(edges.last().map_or(0, |last| end_ns - last));

    let is_possible = |ns: u64, inside: u64| inside < SHORTEST_OPERATION_NS || has_odd_burst(edges, ns);
    let is_likely = |ns: u64, inside: u64| is_possible(ns, inside) && !has_wide_disturbance(edges, ns);
    let is_likely = |floor: u64| {
        let (is_likely, lengths) = (&is_likely, &lengths);
        move |ns, inside| (floor > FLOOR_NS || is_quick(lengths, ns)) && is_likely(ns, inside)
    };
    let clear_one = || FLOORS_NS.iter().find_map(|&floor| clear(&lengths, floor, edges, is_likely(floor)));
    let unclear_one = || {
        let likeliest = |&floor| {
            let is_likely = is_likely(floor);
            let mut stretches = emptiest(&lengths, floor).into_iter().take(TRIED);
            stretches.find(|&(inside, between)| is_likely(middle(inside, between), inside))
        };
        FLOORS_NS.iter().find_map(likeliest).map(|stretch| unclear(edges, stretch))
    };
    let shortest = lengths.bins().next().map(|bin| bin.least.max(FLOOR_NS));
    let nothing_but_rest = || {
        let shortest_run_ns = shortest.filter(|&ns| ns >= SHORTEST_OPERATION_NS)?;
        // A gap well below the shortest.
        let ns = middle(FLOOR_NS, shortest_run_ns);
        Some(Gap { ns, origin: GapOrigin::NoBursts { shortest_run_ns } })
    };
    let any = || emptiest(&lengths, FLOOR_NS).first().map(|&stretch| unclear(edges, stretch));
    clear_one()
        .or_else(nothing_but_rest)
        .or_else(unclear_one)
        .or_else(|| clear(&lengths, FLOOR_NS, edges, is_possible))
        .or_else(any)
        .unwrap_or_else(|| {
            let shortest_run_ns = shortest.unwrap_or(end_ns - start_ns);
            let ns = middle(FLOOR_NS.min(shortest_run_ns), shortest_run_ns).max(1);
            Gap { ns, origin: GapOrigin::NoBursts { shortest_run_ns } }
        })
}

/// The widest stretch that is clear enough and whose bursts are `plausible`.
fn clear(lengths: &Lengths, floor: u64, edges: &[u64], plausible: impl Fn(u64, u64) -> bool) -> Option<Gap> {
    let stretches = stretches(lengths, floor);
    let mut clear = stretches.iter().take_while(|(inside, between)| between / LEAST_RATIO >= *inside);
    clear.find_map(|&(inside, between)| {
        let ns = middle(inside, between);
        let origin =
            GapOrigin::Found { longest_inside_ns: longest_below(edges, ns), shortest_between_ns: between };
        plausible(ns, inside).then_some(Gap { ns, origin })
    })
}

/// Whether most rests between bursts are shorter than those between operations by hand, as on a quick encoder.
fn is_quick(lengths: &Lengths, gap_ns: u64) -> bool {
    let rests = || lengths.bins().filter(|bin| bin.least >= gap_ns);
    let quick: u64 = rests().filter(|bin| bin.greatest < SHORTEST_OPERATION_NS).map(|bin| bin.count).sum();
    quick * 2 > rests().map(|bin| bin.count).sum()
}

/// So many stretches are tried where none is clear.
const TRIED: usize = 8;

fn unclear(edges: &[u64], (inside, between): (u64, u64)) -> Gap {
    let ns = middle(inside, between);
    let longest_inside_ns = longest_below(edges, ns);
    Gap { ns, origin: GapOrigin::Unclear { longest_inside_ns, shortest_between_ns: between } }
}

/// Where no stretch is clear: those with the fewest runs near their middle first, which are the runs that a slightly
/// different gap would read differently; of several alike the widest first.
fn emptiest(lengths: &Lengths, floor: u64) -> Vec<(u64, u64)> {
    let mut stretches = stretches(lengths, floor);
    stretches.sort_by_cached_key(|&(inside, between)| {
        let ns = middle(inside, between);
        let is_near = |bin: &Bin| bin.greatest >= ns / 7 * 5 && bin.least <= ns / 5 * 7;
        lengths.bins().filter(is_near).map(|bin| bin.count).sum::<u64>()
    });
    stretches
}

/// The empty stretches between the lengths, every length below `floor` taken as that: widest first; of two alike the
/// later one, which makes bounces longer and is therefore the safe side.
fn stretches(lengths: &Lengths, floor: u64) -> Vec<(u64, u64)> {
    let mut ends: Vec<(u64, u64)> =
        lengths.bins().map(|bin| (bin.least.max(floor), bin.greatest.max(floor))).collect();
    ends.dedup();
    let mut found: Vec<(u64, u64)> = ends
        .windows(2)
        .map(|pair| (pair[0].1, pair[1].0))
        .filter(|&(inside, between)| inside <= CEILING_NS && inside < between)
        .collect();
    found.sort_by(|x, y| wider(*y, *x).then(y.0.cmp(&x.0)));
    found
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

fn has_wide_disturbance(edges: &[u64], gap_ns: u64) -> bool {
    let mut bursts = edges.chunk_by(|a, b| b - a < gap_ns);
    bursts.any(|burst| {
        burst.len().is_multiple_of(2) && burst[burst.len() - 1] - burst[0] > WIDEST_DISTURBANCE_NS
    })
}

fn has_odd_burst(edges: &[u64], gap_ns: u64) -> bool {
    edges.chunk_by(|a, b| b - a < gap_ns).any(|burst| !burst.len().is_multiple_of(2))
}
