//! How often each duration occurred: bins for a drawing, and the empirical distribution step by step.

/// Counts of durations in bins of equal width.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Histogram {
    /// Lower end of the first bin, in nanoseconds.
    pub from_ns: u64,
    /// Width of a bin, in nanoseconds: 1, 2 or 5 times a power of ten.
    pub bin_ns: u64,
    /// How many values lie in each bin; a value on an end counts in the upper bin.
    pub counts: Vec<u64>,
}

/// The most bins of a histogram, so that it fits a screen.
const MOST_BINS: u64 = 16;

impl Histogram {
    /// The histogram of values in rising order; no bin is narrower than `least_bin_ns`, below which the recorder
    /// tells nothing apart. `None` where there is no value.
    #[must_use]
    pub fn of_sorted(sorted: &[u64], least_bin_ns: u64) -> Option<Self> {
        let (&least, &greatest) = (sorted.first()?, sorted.last()?);
        let bins = |bin: u64| (greatest / bin - least / bin).saturating_add(1);
        let widths = (0..20).flat_map(|power| [1, 2, 5].map(|step| 10_u64.pow(power).checked_mul(step)));
        let bin_ns = widths.flatten().find(|&bin| bin >= least_bin_ns && bins(bin) <= MOST_BINS)?;
        let first = least / bin_ns;
        let mut counts = vec![0; usize::try_from(bins(bin_ns)).ok()?];
        for value in sorted {
            // At most the number of bins, by the choice of the width.
            counts[(value / bin_ns - first) as usize] += 1;
        }
        Some(Self { from_ns: first * bin_ns, bin_ns, counts })
    }

    /// The bins with their lower ends.
    pub fn bins(&self) -> impl Iterator<Item = (u64, u64)> + '_ {
        self.counts.iter().enumerate().map(|(index, &count)| {
            (self.from_ns.saturating_add((index as u64).saturating_mul(self.bin_ns)), count)
        })
    }
}

/// One step of an empirical distribution.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Step {
    /// The duration, in nanoseconds.
    pub ns: u64,
    /// How many values are no longer than it.
    pub at_most: u64,
}

/// The most steps that an empirical distribution is drawn with.
const MOST_STEPS: usize = 1_000;

/// The empirical distribution of values in rising order: at each step the share of values up to it jumps to
/// `at_most` of all. With more than 1000 different values some steps are left out; those that stay are exact, and the
/// first and the last always stay.
#[must_use]
pub fn empirical_distribution(sorted: &[u64]) -> Vec<Step> {
    let mut at_most = 0;
    let steps: Vec<Step> = sorted
        .chunk_by(|a, b| a == b)
        .map(|group| {
            at_most += group.len() as u64;
            Step { ns: group[0], at_most }
        })
        .collect();
    if steps.len() <= MOST_STEPS {
        return steps;
    }
    (0..MOST_STEPS).map(|index| steps[index * (steps.len() - 1) / (MOST_STEPS - 1)]).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn histogram_bins_are_round_and_hold_every_value() {
        let values: Vec<u64> = (0..60).map(|i| 1_000_000 + i * 137_000).collect();
        let found = Histogram::of_sorted(&values, 1).unwrap();
        assert_eq!((found.from_ns, found.bin_ns), (1_000_000, 1_000_000));
        assert_eq!(found.counts.iter().sum::<u64>(), 60);
        assert_eq!(found.bins().next(), Some((1_000_000, 8)));
    }

    #[test]
    fn histogram_value_on_a_boundary_counts_in_the_upper_bin() {
        let found = Histogram::of_sorted(&[0, 999, 1_000, 15_999], 1).unwrap();
        assert_eq!((found.bin_ns, found.counts.len()), (1_000, 16));
        assert_eq!((found.counts[0], found.counts[1], found.counts[15]), (2, 1, 1));
        let wider = Histogram::of_sorted(&[0, 999, 1_000, 16_000], 1).unwrap();
        assert_eq!((wider.bin_ns, wider.counts), (2_000, vec![3, 0, 0, 0, 0, 0, 0, 0, 1]));
    }

    #[test]
    fn histogram_bin_is_no_narrower_than_the_recorder_sees() {
        let found = Histogram::of_sorted(&[0, 3, 5], 1_500).unwrap();
        assert_eq!((found.bin_ns, found.counts), (2_000, vec![3]));
        assert_eq!(Histogram::of_sorted(&[], 1), None);
        let widest = Histogram::of_sorted(&[0, u64::MAX], 1).unwrap();
        assert_eq!(widest.counts.iter().sum::<u64>(), 2);
        assert_eq!(widest.bins().count(), widest.counts.len());
    }

    #[test]
    fn empirical_distribution_steps_at_each_different_value() {
        let steps = empirical_distribution(&[1, 1, 2, 5, 5, 5]);
        let expected = [(1, 2), (2, 3), (5, 6)].map(|(ns, at_most)| Step { ns, at_most });
        assert_eq!(steps, expected);
        assert_eq!(empirical_distribution(&[]), []);
    }

    #[test]
    fn empirical_distribution_of_very_many_values_keeps_both_ends_exact() {
        let values: Vec<u64> = (0..50_000).map(|i| 3 * i).collect();
        let steps = empirical_distribution(&values);
        assert_eq!(steps.len(), 1_000);
        assert_eq!(
            (steps[0], steps[999]),
            (Step { ns: 0, at_most: 1 }, Step { ns: 149_997, at_most: 50_000 })
        );
        assert!(steps.iter().all(|step| step.ns / 3 + 1 == step.at_most));
    }
}
