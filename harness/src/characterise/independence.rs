//! Whether operations in their order look independent and alike: a runs test and a trend test.
//!
//! A tolerance limit takes the operations to be independent and alike. These two published tests look for the two
//! ways in which recorded operations usually are not: neighbours that resemble one another, and a drift. A test that
//! finds nothing proves nothing; one that finds something takes the ground from under the claim.

/// Below this chance of so odd an order by accident, an order is called odd (our choice: four tests are looked at
/// together, so that 5 % each would cry wolf too often).
pub const SIGNIFICANT: f64 = 0.01;

/// What the order of some values shows.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Independence {
    /// Whether values above and below the median take turns as often as they should; `None` where nearly all
    /// values are alike.
    pub runs: Option<RunsTest>,
    /// Whether the values rise or fall; `None` where all are alike or there are fewer than 4.
    pub trend: Option<TrendTest>,
}

/// The runs test about the median.
///
/// # Method
/// A. Wald, J. Wolfowitz, Ann. Math. Stat. 11 (1940) 147-162: of n1 values above the median and n2 below it
/// (those at the median are left out), every order is alike likely if the values are independent and alike; the
/// number of runs then has the distribution of that paper. It is summed exactly up to 2000 values, and taken as
/// normal with its mean and variance beyond.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct RunsTest {
    /// Values above the median.
    pub above: u64,
    /// Values below it.
    pub below: u64,
    /// Runs of neighbours on the same side.
    pub runs: u64,
    /// How many runs are to be expected.
    pub expected: f64,
    /// The chance of a number of runs at least as odd as this, on either side.
    pub p_value: f64,
}

/// The trend test.
///
/// # Method
/// H. B. Mann, Econometrica 13 (1945) 245-259; M. G. Kendall, Rank Correlation Methods (1975): S counts the pairs
/// in which the later value is greater, less those in which it is smaller. Up to 40 values without ties its
/// distribution is counted exactly; else it is taken as normal, with the variance corrected for ties and S moved
/// by 1 toward 0.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct TrendTest {
    /// Rising pairs less falling ones.
    pub s: i64,
    /// S as a share of what it could be (Kendall's tau, ties not corrected): from -1 to 1.
    pub tau: f64,
    /// The chance of an S at least as far from 0.
    pub p_value: f64,
}

impl Independence {
    /// Tests `values` in their order.
    #[must_use]
    pub fn of(values: &[u64]) -> Self {
        Self { runs: RunsTest::of(values), trend: TrendTest::of(values) }
    }

    /// Whether either test finds the order odd, so that a claim that takes the operations as independent and alike
    /// does not stand on its own.
    #[must_use]
    pub fn is_doubtful(&self) -> bool {
        self.runs.is_some_and(|test| test.p_value < SIGNIFICANT)
            || self.trend.is_some_and(|test| test.p_value < SIGNIFICANT)
    }
}

impl RunsTest {
    /// Tests `values` in their order.
    #[must_use]
    pub fn of(values: &[u64]) -> Option<Self> {
        let mut sorted = values.to_vec();
        sorted.sort_unstable();
        // Twice the median, so that it stays whole.
        let at = |index: usize| sorted.get(index).copied().map(u128::from);
        let twice_median = at(sorted.len() / 2)? + at(sorted.len().checked_sub(1)? / 2)?;
        let sides = || values.iter().map(|&v| 2 * u128::from(v)).filter(|&v| v != twice_median);
        let (mut above, mut runs, mut last) = (0, 0, None);
        for is_above in sides().map(|v| v > twice_median) {
            above += u64::from(is_above);
            runs += u64::from(last != Some(is_above));
            last = Some(is_above);
        }
        let below = sides().count() as u64 - above;
        (above > 0 && below > 0).then(|| Self {
            above,
            below,
            runs,
            expected: mean_runs(above, below),
            p_value: runs_p_value(above, below, runs),
        })
    }
}

/// Beyond so many values the number of runs is taken as normal.
const EXACT_RUNS: u64 = 2_000;

fn mean_runs(above: u64, below: u64) -> f64 {
    let (a, b) = (above as f64, below as f64);
    1.0 + 2.0 * a * b / (a + b)
}

fn runs_p_value(above: u64, below: u64, runs: u64) -> f64 {
    let (a, b) = (above as f64, below as f64);
    let n = a + b;
    if above + below > EXACT_RUNS {
        let mean = mean_runs(above, below);
        let variance = (mean - 1.0) * (mean - 2.0) / (n - 1.0);
        return two_sided((runs as f64 - mean) / variance.sqrt());
    }
    let (at_most, at_least) = (runs_at_most(above, below, runs), 1.0 - runs_at_most(above, below, runs - 1));
    (2.0 * at_most.min(at_least)).min(1.0)
}

/// The chance of at most `runs` runs.
fn runs_at_most(above: u64, below: u64, runs: u64) -> f64 {
    let all = log_choose(above + below, above);
    // r runs: the values of either side are parted into groups that take turns.
    let ways = |groups_above: u64, groups_below: u64| {
        let parted = |n: u64, groups: u64| log_choose(n - 1, groups - 1);
        if groups_above > above || groups_below > below {
            0.0
        } else {
            (parted(above, groups_above) + parted(below, groups_below) - all).exp()
        }
    };
    let chance = |r: u64| match r % 2 {
        0 => 2.0 * ways(r / 2, r / 2),
        _ => ways(r / 2, r / 2 + 1) + ways(r / 2 + 1, r / 2),
    };
    (2..=runs).map(chance).sum::<f64>().min(1.0)
}

fn log_choose(n: u64, k: u64) -> f64 {
    let log_factorial = |n: u64| libm::lgamma(n as f64 + 1.0);
    log_factorial(n) - log_factorial(k) - log_factorial(n - k)
}

impl TrendTest {
    /// Tests `values` in their order.
    #[must_use]
    pub fn of(values: &[u64]) -> Option<Self> {
        if values.len() < 4 {
            return None;
        }
        let n = values.len() as f64;
        let mut sorted = values.to_vec();
        let falling = inversions(&mut sorted, &mut vec![0; values.len()]);
        let pairs = |n: u64| (u128::from(n) * u128::from(n.saturating_sub(1)) / 2).cast_signed();
        let groups = || sorted.chunk_by(|a, b| a == b).map(|group| group.len() as u64);
        let alike: i128 = groups().map(pairs).sum();
        let all = pairs(values.len() as u64);
        let s = all - alike - 2 * falling.cast_signed();
        let spread = |t: f64| t * (t - 1.0) * (2.0 * t + 5.0);
        let variance = (spread(n) - groups().map(|t| spread(t as f64)).sum::<f64>()) / 18.0;
        if variance <= 0.0 {
            return None;
        }
        let p_value = if alike == 0 && values.len() <= EXACT_TREND {
            trend_p_value(values.len(), s.unsigned_abs() as usize)
        } else {
            two_sided((s.unsigned_abs() as f64 - 1.0).max(0.0) / variance.sqrt())
        };
        // At most the number of pairs, which fits for any list that fits memory.
        Some(Self { s: s as i64, tau: s as f64 / all as f64, p_value })
    }
}

/// Up to so many values the trend test counts orders exactly.
const EXACT_TREND: usize = 40;

/// The chance of an S at least as far from 0, over all orders of `n` values.
fn trend_p_value(n: usize, s: usize) -> f64 {
    // The share of orders with each number of inversions: value i may stand before 0 to i of the earlier ones.
    let mut shares = vec![1.0_f64];
    for i in 1..n {
        let mut next = vec![0.0; shares.len() + i];
        for (inversions, share) in shares.iter().enumerate() {
            for step in 0..=i {
                next[inversions + step] += share / (i + 1) as f64;
            }
        }
        shares = next;
    }
    let pairs = n * (n - 1) / 2;
    // S = pairs - 2 inversions; the distribution is symmetric.
    let tail: f64 = shares[..=(pairs - s) / 2].iter().sum();
    if s == 0 { 1.0 } else { (2.0 * tail).min(1.0) }
}

/// The pairs in which the later value is smaller; sorts `values` on the way.
fn inversions(values: &mut [u64], space: &mut [u64]) -> u128 {
    if values.len() < 2 {
        return 0;
    }
    let middle = values.len() / 2;
    let (left, right) = values.split_at_mut(middle);
    let (space_left, space_right) = space.split_at_mut(middle);
    let mut count = inversions(left, space_left) + inversions(right, space_right);
    let (mut l, mut r) = (0, 0);
    for slot in space.iter_mut() {
        let from_right = l == left.len() || (r < right.len() && right[r] < left[l]);
        if from_right {
            count += (left.len() - l) as u128;
            *slot = right[r];
            r += 1;
        } else {
            *slot = left[l];
            l += 1;
        }
    }
    values.copy_from_slice(space);
    count
}

/// The chance that a normal variable lies at least so many standard deviations from its mean, on either side.
fn two_sided(deviations: f64) -> f64 {
    libm::erfc(deviations.abs() / core::f64::consts::SQRT_2)
}

#[cfg(test)]
mod tests;
