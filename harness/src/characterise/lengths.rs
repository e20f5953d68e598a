//! How often each length occurs, on a logarithmic scale, in memory that does not grow with the recording.

/// Bins for each power of two: neighbours in one bin differ by less than a thirtieth.
const PER_OCTAVE: u32 = 32;

/// The lengths seen in one bin.
#[derive(Clone, Copy, Debug)]
pub(super) struct Bin {
    pub(super) least: u64,
    pub(super) greatest: u64,
    pub(super) count: u64,
}

/// Lengths above 0 by size.
#[derive(Clone, Debug, Default)]
pub(super) struct Lengths {
    bins: Vec<Option<Bin>>,
    total: u64,
}

/// Below 32 each length has a bin of its own; above, each power of two is parted into 32.
fn bin_of(length: u64) -> usize {
    let power = length.checked_ilog2().unwrap_or(0);
    let step = power.saturating_sub(5);
    // The five bits below the leading one; the number of a bin is below 2048.
    (step * PER_OCTAVE) as usize + (length >> step) as usize
}

impl Lengths {
    /// Counts `length`; 0 is left out.
    pub(super) fn add(&mut self, length: u64) {
        if length == 0 {
            return;
        }
        let index = bin_of(length);
        if index >= self.bins.len() {
            self.bins.resize(index + 1, None);
        }
        let bin = self.bins[index].get_or_insert(Bin { least: length, greatest: length, count: 0 });
        bin.least = bin.least.min(length);
        bin.greatest = bin.greatest.max(length);
        bin.count += 1;
        self.total += 1;
    }

    /// How many were counted.
    pub(super) fn total(&self) -> u64 {
        self.total
    }

    /// The bins that hold something, from the shortest to the longest.
    pub(super) fn bins(&self) -> impl Iterator<Item = Bin> + '_ {
        self.bins.iter().flatten().copied()
    }

    /// A length that at least `percent` of all are no longer than: the greatest of its bin.
    pub(super) fn at_least_percent(&self, percent: u64) -> Option<u64> {
        let mut below = 0;
        self.bins().find_map(|bin| {
            below += bin.count;
            (u128::from(below) * 100 >= u128::from(self.total) * u128::from(percent)).then_some(bin.greatest)
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lengths_bins_rise_with_the_length_and_are_narrow() {
        let mut last = (0, 0);
        for length in (1..5_000).chain((13..64).map(|power| 1 << power)).chain([u64::MAX]) {
            let bin = bin_of(length);
            assert!(bin >= last.1, "{length}");
            assert!(bin > last.1 || length < last.0 + last.0 / 30 + 1, "{length} lies with {}", last.0);
            last = (length, bin);
        }
        assert!(last.1 < 2048);
    }

    #[test]
    fn lengths_keep_the_ends_of_each_bin_and_the_shares() {
        let mut lengths = Lengths::default();
        for length in [0, 7, 1_000, 1_001, 90_000] {
            lengths.add(length);
        }
        let ends: Vec<(u64, u64)> = lengths.bins().map(|bin| (bin.least, bin.greatest)).collect();
        assert_eq!((lengths.total(), ends), (4, vec![(7, 7), (1_000, 1_001), (90_000, 90_000)]));
        assert_eq!(lengths.at_least_percent(75), Some(1_001));
        assert_eq!(lengths.at_least_percent(76), Some(90_000));
        assert_eq!(Lengths::default().at_least_percent(50), None);
    }
}
