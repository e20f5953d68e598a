//! What n operations allow to claim: one-sided upper tolerance limits by order statistics, and the exact
//! binomial bound.
//!
//! No distribution is assumed; the operations are taken to be independent and alike.
//!
//! # Method
//! S. S. Wilks, Ann. Math. Stat. 12 (1941) 91-96: the m-th largest of n values lies above the β-quantile with
//! confidence `1 - BinomCDF(m - 1; n, 1 - β)`. C. J. Clopper, E. S. Pearson, Biometrika 26 (1934) 404-413: the
//! upper bound p on a rate after k failures in n trials solves `BinomCDF(k; n, p) = 1 - confidence`.
//! The binomial sum is taken term by term in this file rather than through an incomplete beta function: its
//! terms are all positive, so nothing cancels.

/// A share strictly between 0 and 1: a coverage or a confidence.
#[derive(Clone, Copy, PartialEq, PartialOrd, Debug)]
pub struct Share(f64);

/// Why a number is not a share or a rank is not a rank.
#[derive(Clone, Copy, PartialEq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum ToleranceError {
    /// The number is not strictly between 0 and 1.
    #[error("{value} is not a share; use a number between 0 and 1, such as 0.95")]
    NotAShare {
        /// The number given.
        value: f64,
    },
    /// The rank does not exist.
    #[error("there is no rank {rank} among {n} operations; use 1 (the largest) to {n}")]
    NoSuchRank {
        /// The rank asked for, 1 being the largest.
        rank: u64,
        /// The number of operations.
        n: u64,
    },
    /// More failures than trials.
    #[error("{failures} failures cannot occur in {n} trials")]
    MoreFailuresThanTrials {
        /// The failures given.
        failures: u64,
        /// The trials given.
        n: u64,
    },
}

impl Share {
    /// A share, strictly between 0 and 1.
    ///
    /// # Errors
    /// When `value` is not.
    pub fn try_new(value: f64) -> Result<Self, ToleranceError> {
        if value > 0.0 && value < 1.0 { Ok(Self(value)) } else { Err(ToleranceError::NotAShare { value }) }
    }

    /// The number.
    #[must_use]
    pub fn get(self) -> f64 {
        self.0
    }
}

/// The confidence with which the `rank`-th largest of `n` operations (1 is the largest) is at or above the
/// `coverage` quantile of all operations.
///
/// # Errors
/// When the rank is 0 or above `n`.
pub fn confidence(n: u64, rank: u64, coverage: Share) -> Result<f64, ToleranceError> {
    if rank == 0 || rank > n {
        return Err(ToleranceError::NoSuchRank { rank, n });
    }
    Ok(1.0 - binomial_cdf(rank - 1, n, 1.0 - coverage.0, coverage.0))
}

/// The coverage of which `n` operations, none above the `rank`-th largest but the `rank - 1` larger ones, are
/// sure with `confidence`: the greatest coverage that may be claimed.
///
/// # Errors
/// When the rank is 0 or above `n`.
pub fn coverage(n: u64, rank: u64, confidence: Share) -> Result<f64, ToleranceError> {
    if rank == 0 || rank > n {
        return Err(ToleranceError::NoSuchRank { rank, n });
    }
    Ok(1.0 - upper_bound(rank - 1, n, confidence)?)
}

/// The fewest operations of which the `rank`-th largest may be claimed to cover `coverage` with `confidence`.
///
/// # Errors
/// When the rank is 0.
pub fn operations_needed(rank: u64, coverage: Share, confidence: Share) -> Result<u64, ToleranceError> {
    if rank == 0 {
        return Err(ToleranceError::NoSuchRank { rank, n: 0 });
    }
    let enough = |n: u64| binomial_cdf(rank - 1, n, 1.0 - coverage.0, coverage.0) <= 1.0 - confidence.0;
    // The confidence grows with n: find a power of two that is enough, then bisect.
    let mut above = rank;
    while !enough(above) {
        above = above.saturating_mul(2);
    }
    let mut below = rank - 1;
    while above - below > 1 {
        let middle = below + (above - below) / 2;
        if enough(middle) { above = middle } else { below = middle }
    }
    Ok(above)
}

/// The rank of the tightest upper tolerance limit: the smallest of the `n` largest values that may be claimed to cover
/// `coverage` with `confidence` has this rank, 1 being the largest. `None` where `n` values are too few for any.
#[must_use]
pub fn rank(n: u64, coverage: Share, confidence: Share) -> Option<u64> {
    let allowed = 1.0 - confidence.0;
    let mut below = 0.0;
    let ranks = binomial_terms(n, 1.0 - coverage.0, coverage.0).take_while(|term| {
        below += term;
        below <= allowed
    });
    Some(ranks.count() as u64).filter(|&rank| rank > 0)
}

/// The upper bound on the rate of failures, with `confidence`, after `failures` in `n` trials.
///
/// # Errors
/// When there are more failures than trials. No trials at all bound nothing: the answer is 1.
pub fn upper_bound(failures: u64, n: u64, confidence: Share) -> Result<f64, ToleranceError> {
    if failures > n {
        return Err(ToleranceError::MoreFailuresThanTrials { failures, n });
    }
    if failures == n {
        return Ok(1.0);
    }
    // BinomCDF falls as p grows; bisect until no double lies between. The upper end is the safe one.
    let (mut low, mut high) = (0.0_f64, 1.0_f64);
    loop {
        let middle = low + (high - low) / 2.0;
        if middle <= low || middle >= high {
            return Ok(high);
        }
        if binomial_cdf(failures, n, middle, 1.0 - middle) > 1.0 - confidence.0 {
            low = middle;
        } else {
            high = middle;
        }
    }
}

/// The probability of at most `k` failures in `n` trials, each failing with `p` and passing with `q` = 1 - `p`.
///
/// Both are given so that neither loses digits as the difference from 1. The terms are summed in logarithms,
/// since `q^n` alone may be below the smallest double.
fn binomial_cdf(k: u64, n: u64, p: f64, q: f64) -> f64 {
    if k >= n || p <= 0.0 {
        return 1.0;
    }
    if q <= 0.0 {
        return 0.0;
    }
    let terms = usize::try_from(k).unwrap_or(usize::MAX).saturating_add(1);
    binomial_terms(n, p, q).take(terms).sum::<f64>().min(1.0)
}

/// The probabilities of 0, 1, 2 ... `n` failures in `n` trials.
fn binomial_terms(n: u64, p: f64, q: f64) -> impl Iterator<Item = f64> {
    // Counts of operations stay far below 2^53, so the conversions are exact.
    let log_odds = p.ln() - q.ln();
    let mut log_term = n as f64 * q.ln();
    (0..=n).map(move |i| {
        let term = log_term.exp();
        log_term += ((n - i) as f64).ln() - ((i + 1) as f64).ln() + log_odds;
        term
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn share(value: f64) -> Share {
        Share::try_new(value).unwrap()
    }

    #[track_caller]
    fn check_row(beta: f64, gamma: f64, expected: [u64; 10]) {
        let found: Vec<u64> =
            (1..=10).map(|m| operations_needed(m, share(beta), share(gamma)).unwrap()).collect();
        assert_eq!(found, expected, "coverage {beta}, confidence {gamma}");
        for (m, &n) in (1..=10).zip(&expected) {
            assert!(confidence(n, m, share(beta)).unwrap() >= gamma);
            assert!(n == m || confidence(n - 1, m, share(beta)).unwrap() < gamma);
        }
    }

    /// Wilks' formula (1941, 1942), computed independently with SciPy 1.17.1's binomial distribution. 59, 29 and
    /// 299 were also read in published notes on Wilks' formula; row 0.90/0.95 is the rank table of MIL-HDBK-17
    /// (from memory).
    #[test]
    fn tolerance_operations_needed_agree_with_the_published_table() {
        check_row(0.90, 0.90, [22, 38, 52, 65, 78, 91, 104, 116, 128, 140]);
        check_row(0.90, 0.95, [29, 46, 61, 76, 89, 103, 116, 129, 142, 154]);
        check_row(0.95, 0.90, [45, 77, 105, 132, 158, 184, 209, 234, 258, 282]);
        check_row(0.95, 0.95, [59, 93, 124, 153, 181, 208, 234, 260, 286, 311]);
        check_row(0.95, 0.99, [90, 130, 165, 198, 229, 259, 288, 316, 344, 371]);
        check_row(0.99, 0.90, [230, 388, 531, 667, 798, 926, 1051, 1175, 1297, 1418]);
        check_row(0.99, 0.95, [299, 473, 628, 773, 913, 1049, 1182, 1312, 1441, 1568]);
        check_row(0.99, 0.99, [459, 662, 838, 1001, 1157, 1307, 1453, 1596, 1736, 1874]);
        check_row(0.999, 0.95, [2995, 4742, 6294, 7752, 9151, 10511, 11840, 13146, 14432, 15702]);
    }

    #[track_caller]
    fn check_close(found: f64, expected: f64, within: f64) {
        assert!((found - expected).abs() <= within, "found {found}, expected {expected}");
    }

    /// Neighbours of the edge, computed with SciPy 1.17.1.
    #[test]
    fn tolerance_confidence_beside_the_edge_agrees() {
        check_close(confidence(58, 1, share(0.95)).unwrap(), 0.948_953, 5e-7);
        check_close(confidence(59, 1, share(0.95)).unwrap(), 0.951_505, 5e-7);
        check_close(confidence(92, 2, share(0.95)).unwrap(), 0.947_864, 5e-7);
        check_close(confidence(93, 2, share(0.95)).unwrap(), 0.950_024, 5e-7);
        check_close(confidence(124, 3, share(0.95)).unwrap(), 0.950_470, 5e-7);
        check_close(coverage(32, 1, share(0.95)).unwrap(), 0.910_63, 5e-6);
    }

    /// Clopper and Pearson (1934), computed with SciPy 1.17.1; for no failure also `1 - 0.05^(1/n)`.
    #[test]
    fn tolerance_upper_bound_agrees_with_clopper_pearson() {
        for (k, n, expected, within) in [
            (0, 59, 0.049_507_6, 5e-8),
            (0, 299, 0.009_969_15, 5e-9),
            (0, 1000, 0.002_991_25, 5e-9),
            (0, 100, 0.029_513_0, 5e-8),
            (1, 100, 0.046_559_8, 5e-8),
            (2, 100, 0.061_619_2, 5e-8),
        ] {
            check_close(upper_bound(k, n, share(0.95)).unwrap(), expected, within);
        }
        for n in [1, 59, 1000, 1_000_000] {
            let exact = -(0.05_f64.ln() / n as f64).exp_m1();
            check_close(upper_bound(0, n, share(0.95)).unwrap() / exact, 1.0, 1e-9);
        }
    }

    /// Computed with SciPy 1.17.1, `scipy.stats.beta.ppf(0.95, k + 1, n - k)`. Many trials with few failures are where
    /// general inverse incomplete beta functions are known to hang or to lose digits.
    #[test]
    fn tolerance_upper_bound_after_very_many_trials_keeps_its_digits() {
        let found = upper_bound(10, 10_000_000, share(0.95)).unwrap();
        check_close(found / 1.696_221_333_184_968e-6, 1.0, 1e-9);
        let found = upper_bound(10, 10_000_000, share(0.999)).unwrap();
        check_close(found / 2.413_395_409_056_698e-6, 1.0, 1e-9);
    }

    #[test]
    fn tolerance_rank_is_the_greatest_that_the_table_allows() {
        // The rows of the table above, 0.95/0.95 and 0.90/0.95 (MIL-HDBK-17), read the other way round.
        for (n, m) in
            [(58, None), (59, Some(1)), (92, Some(1)), (93, Some(2)), (311, Some(10)), (310, Some(9))]
        {
            assert_eq!(rank(n, share(0.95), share(0.95)), m, "{n}");
        }
        for (n, m) in [(28, None), (29, Some(1)), (154, Some(10)), (153, Some(9))] {
            assert_eq!(rank(n, share(0.90), share(0.95)), m, "{n}");
        }
        assert_eq!(rank(0, share(0.5), share(0.5)), None);
        let many = rank(500_000, share(0.95), share(0.95)).unwrap();
        assert!(confidence(500_000, many, share(0.95)).unwrap() >= 0.95);
        assert!(confidence(500_000, many + 1, share(0.95)).unwrap() < 0.95);
    }

    #[test]
    fn tolerance_nonsense_is_refused_with_a_reason() {
        assert_eq!(Share::try_new(1.0), Err(ToleranceError::NotAShare { value: 1.0 }));
        assert_eq!(Share::try_new(0.0), Err(ToleranceError::NotAShare { value: 0.0 }));
        assert!(Share::try_new(f64::NAN).is_err());
        assert!(confidence(5, 0, share(0.9)).is_err());
        assert!(confidence(5, 6, share(0.9)).is_err());
        assert!(upper_bound(3, 2, share(0.9)).is_err());
        assert_eq!(upper_bound(0, 0, share(0.9)), Ok(1.0));
        assert!(operations_needed(0, share(0.9), share(0.9)).is_err());
    }
}
