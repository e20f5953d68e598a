//! Latencies and delays of one direction of change, over a uniform phase.

use serde::Serialize;

use super::outcome::{PhaseSpan, Reported};
use super::prepared::PreparedTrace;

/// The samples from the first that could see the new position to the one that reports it, both counted.
///
/// A quantile is the least latency that at least so large a part of all (change, phase) that were reported keeps.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct SampleLatency {
    /// The shortest.
    pub best: u64,
    /// The median.
    pub median: u64,
    /// The 95 % quantile.
    pub p95: u64,
    /// The 99 % quantile.
    pub p99: u64,
    /// The longest, exactly.
    pub worst: u64,
    /// Each latency that occurs, rising.
    pub histogram: Vec<LatencyShare>,
}

/// One latency and how often it occurs.
#[derive(Clone, Copy, PartialEq, Debug, Serialize)]
pub struct LatencyShare {
    /// The latency in samples.
    pub samples: u64,
    /// Its part of all (change, phase) that were reported.
    pub share: f64,
}

/// The time from the change of the contact to the sample that reports it.
///
/// Within one class of phases the delay is uniform over an interval, closed at its lower and open at its upper end;
/// a quantile is the least delay that at least so large a part of all (change, phase) that were reported keeps.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize)]
pub struct Delay {
    /// The shortest, rounded down.
    pub best_ns: u64,
    /// The median, rounded up.
    pub median_ns: u64,
    /// The 95 % quantile, rounded up.
    pub p95_ns: u64,
    /// The 99 % quantile, rounded up.
    pub p99_ns: u64,
    /// Every delay is less than this; the least such number, rounded up.
    pub below_ns: u64,
}

/// Where the longest delay occurs.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Serialize)]
pub struct Slowest {
    /// Index of the change in the truth.
    pub change: u32,
    /// Its time in the trace.
    pub at_ns: u64,
    /// Its latency there, in samples.
    pub samples: u64,
    /// The phases; the delay rises toward the end of the span.
    pub phase: PhaseSpan,
}

/// The latencies of the reported changes of one direction.
#[derive(Clone, PartialEq, Debug, Serialize)]
pub struct Latencies {
    /// In samples.
    pub samples: SampleLatency,
    /// In time.
    pub delay: Delay,
    /// Where the longest delay occurs.
    pub slowest: Slowest,
}

/// One class of phases in which a change was reported.
struct Class {
    samples: u64,
    /// Delay at the start of the class, in units.
    delay: u64,
    width: u64,
}

impl Latencies {
    /// `None` when nothing was reported.
    pub(super) fn of<'a>(
        prepared: &PreparedTrace,
        reported: impl Iterator<Item = &'a Reported>,
    ) -> Option<Self> {
        let mut classes = Vec::new();
        let mut slowest: Option<(u64, Slowest)> = None;
        for report in reported {
            let point = prepared.truth_point(report.change);
            // The latency in samples depends on which sample is the first that could see the change.
            let cut = point.residue.clamp(report.phase.from, report.phase.until);
            for (from, until) in [(report.phase.from, cut), (cut, report.phase.until)] {
                if from == until {
                    continue;
                }
                let samples = report.tick - point.first_sample(from) + 1;
                let delay = (report.tick - point.tick) * prepared.period().units() + from - point.residue;
                let width = until - from;
                classes.push(Class { samples, delay, width });
                if slowest.is_none_or(|(below, _)| delay + width > below) {
                    let at_ns = prepared.truth()[report.change as usize].at_ns;
                    let phase = PhaseSpan { from, until };
                    slowest = Some((delay + width, Slowest { change: report.change, at_ns, samples, phase }));
                }
            }
        }
        let (_, slowest) = slowest?;
        Some(Self { samples: sample_latency(&classes), delay: delay(prepared, &classes), slowest })
    }
}

/// The least whole number that is at least `percent` of `whole`.
fn part_of(whole: u128, percent: u128) -> u128 {
    (whole * percent).div_ceil(100)
}

/// Latencies nearer to each other than this are counted in a table, which is several times faster than sorting.
const TABLE: u64 = 4_096;

/// Each latency that occurs, rising, with the sum of its widths.
fn count(classes: &[Class]) -> Vec<(u64, u128)> {
    let all = || classes.iter().map(|class| class.samples);
    let (Some(least), Some(most)) = (all().min(), all().max()) else { return Vec::new() };
    let widths = classes.iter().map(|class| (class.samples, u128::from(class.width)));
    if most - least < TABLE {
        let mut table = vec![0_u128; usize::try_from(most - least).expect("short of the table") + 1];
        for (samples, width) in widths {
            table[usize::try_from(samples - least).expect("short of the table")] += width;
        }
        return (least..).zip(table).filter(|&(_, width)| width > 0).collect();
    }
    let mut tree = std::collections::BTreeMap::new();
    for (samples, width) in widths {
        *tree.entry(samples).or_default() += width;
    }
    tree.into_iter().collect()
}

fn sample_latency(classes: &[Class]) -> SampleLatency {
    let sorted = count(classes);
    let whole: u128 = sorted.iter().map(|&(_, width)| width).sum();
    let quantile = |percent| {
        let wanted = part_of(whole, percent);
        let mut kept = 0;
        let reached = sorted.iter().find(|&&(_, width)| {
            kept += width;
            kept >= wanted
        });
        reached.map_or(0, |&(samples, _)| samples)
    };
    SampleLatency {
        best: sorted.first().map_or(0, |&(samples, _)| samples),
        median: quantile(50),
        p95: quantile(95),
        p99: quantile(99),
        worst: sorted.last().map_or(0, |&(samples, _)| samples),
        histogram: sorted
            .iter()
            .map(|&(samples, width)| LatencyShare { samples, share: width as f64 / whole as f64 })
            .collect(),
    }
}

/// All classes have the same density, 1 a unit, so the number of (change, phase) with a delay below d grows at the
/// number of intervals that d lies in: two sorted lists of their ends are all it takes.
fn delay(prepared: &PreparedTrace, classes: &[Class]) -> Delay {
    let mut begins: Vec<u64> = classes.iter().map(|class| class.delay).collect();
    let mut ends: Vec<u64> = classes.iter().map(|class| class.delay + class.width).collect();
    begins.sort_unstable();
    ends.sort_unstable();
    let whole: u128 = classes.iter().map(|class| u128::from(class.width)).sum();
    let mut quantiles = [50, 95, 99].map(|percent| (part_of(whole, percent), 0));
    let (mut begun, mut ended) = (0, 0);
    let (mut at, mut below) = (0_u64, 0_u128);
    while ended < ends.len() {
        let next = begins.get(begun).map_or(ends[ended], |&begin| begin.min(ends[ended]));
        let open = (begun - ended) as u128;
        let after = below + open * u128::from(next - at);
        for (wanted, found) in &mut quantiles {
            if below < *wanted && *wanted <= after {
                // `open` is not 0 here, since the count has grown; the quotient is at most next - at.
                let further = (*wanted - below).div_ceil(open);
                *found = at + u64::try_from(further).unwrap_or(u64::MAX);
            }
        }
        (at, below) = (next, after);
        while begins.get(begun).is_some_and(|&begin| begin == at) {
            begun += 1;
        }
        while ends.get(ended).is_some_and(|&end| end == at) {
            ended += 1;
        }
    }
    let per_ns = prepared.period().units_per_ns();
    let [median, p95, p99] = quantiles.map(|(_, found)| found.div_ceil(per_ns));
    Delay {
        best_ns: begins.first().map_or(0, |begin| begin / per_ns),
        median_ns: median,
        p95_ns: p95,
        p99_ns: p99,
        below_ns: ends.last().map_or(0, |end| end.div_ceil(per_ns)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(latencies: &[u64], expected: &[(u64, u128)]) {
        let classes: Vec<_> =
            latencies.iter().map(|&samples| Class { samples, delay: 0, width: samples + 1 }).collect();
        assert_eq!(count(&classes), expected);
    }

    #[test]
    fn latencies_within_and_beyond_the_table_are_counted_alike() {
        check(&[], &[]);
        check(&[7], &[(7, 8)]);
        check(&[9, 7, 9], &[(7, 8), (9, 20)]);
        check(&[TABLE, 1, TABLE], &[(1, 2), (TABLE, 2 * u128::from(TABLE + 1))]);
        check(&[TABLE + 1, 1, TABLE + 1], &[(1, 2), (TABLE + 1, 2 * u128::from(TABLE + 2))]);
    }
}
