//! Sample quantiles, by the convention called type 7.

/// The quantile of `sorted` at `permille`, by linear interpolation between order statistics.
///
/// # Method
/// R. J. Hyndman, Y. Fan, Am. Stat. 50 (1996) 361-365, definition 7: position `(n - 1) p` from 0. In whole
/// numbers, rounded to the nearest, halves up. `None` where there is no value.
#[must_use]
pub fn quantile_type_7(sorted: &[u64], permille: u32) -> Option<u64> {
    let last = sorted.len().checked_sub(1)?;
    let position = last as u128 * u128::from(permille.min(1000));
    // Whole part and thousandths of the position; the whole part is at most `last`.
    let (whole, part) = ((position / 1000) as usize, position % 1000);
    let below = u128::from(sorted[whole]);
    let above = u128::from(sorted[(whole + 1).min(last)]);
    // Between two u64, so it fits.
    Some(((below * (1000 - part) + above * part + 500) / 1000) as u64)
}

/// The spread of some figure: least, median, 95 %, 99 % (these three by [`quantile_type_7`]) and greatest.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Spread {
    /// The least value.
    pub min: u64,
    /// The median.
    pub median: u64,
    /// The 95 % quantile.
    pub p95: u64,
    /// The 99 % quantile.
    pub p99: u64,
    /// The greatest value.
    pub max: u64,
}

impl Spread {
    /// The spread of `values`, which are sorted in place; `None` where there are none.
    #[must_use]
    pub fn of(values: &mut [u64]) -> Option<Self> {
        values.sort_unstable();
        Some(Self {
            min: *values.first()?,
            median: quantile_type_7(values, 500)?,
            p95: quantile_type_7(values, 950)?,
            p99: quantile_type_7(values, 990)?,
            max: *values.last()?,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The convention's own example, computed with NumPy 2.4.6 (its default is type 7): 1 to 10 at 0.95 is 9.55.
    #[test]
    fn quantile_of_one_to_ten_at_95_percent_is_9_55() {
        let values: Vec<u64> = (1..=10).map(|i| i * 100).collect();
        assert_eq!(quantile_type_7(&values, 950), Some(955));
        assert_eq!(quantile_type_7(&values, 500), Some(550));
        assert_eq!(quantile_type_7(&values, 0), Some(100));
        assert_eq!(quantile_type_7(&values, 1000), Some(1000));
    }

    #[test]
    fn quantile_of_few_values_stays_inside_them() {
        assert_eq!(quantile_type_7(&[], 500), None);
        assert_eq!(quantile_type_7(&[7], 950), Some(7));
        assert_eq!(quantile_type_7(&[u64::MAX - 1, u64::MAX], 950), Some(u64::MAX));
        assert_eq!(Spread::of(&mut [3, 1, 2]), Some(Spread { min: 1, median: 2, p95: 3, p99: 3, max: 3 }));
    }
}
