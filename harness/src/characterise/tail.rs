//! The far end of the bounce durations, by peaks over a threshold: an indication of what longer recordings would
//! show, and never a claim.
//!
//! # Method
//! J. Pickands, Ann. Stat. 3 (1975) 119-131: what lies above a high threshold u is distributed as
//! `F(y) = 1 - (1 + xi y / sigma)^(-1/xi)`, the generalised Pareto distribution of the excess y; written out for
//! practice in S. Coles, An Introduction to Statistical Modeling of Extreme Values (2001), chapter 4. The likelihood is
//! maximised over the single parameter theta = xi / sigma, for given theta of which xi is the mean of
//! `ln(1 + theta y)` (S. D. Grimshaw, Technometrics 35 (1993) 185-191). Shapes below -1 are left out: there the
//! likelihood has no greatest value (R. L. Smith, Biometrika 72 (1985) 67-90).

/// A generalised Pareto distribution of the excess over a threshold.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Pareto {
    /// Scale sigma, in the unit of the excesses.
    pub scale: f64,
    /// Shape xi: above 0 the tail is heavy, at 0 it falls exponentially, below 0 it ends.
    pub shape: f64,
}

/// Shapes nearer to 0 than this are taken as 0, where the formulas would lose their digits.
const FLAT: f64 = 1e-9;

impl Pareto {
    /// The share of excesses up to `y`.
    #[must_use]
    pub fn cdf(&self, y: f64) -> f64 {
        if y <= 0.0 {
            return 0.0;
        }
        let z = y / self.scale;
        if self.shape.abs() < FLAT {
            return -(-z).exp_m1();
        }
        let base = self.shape * z;
        if base <= -1.0 { 1.0 } else { -(-base.ln_1p() / self.shape).exp_m1() }
    }

    /// The excess that the share `beyond` of all excesses is beyond.
    #[must_use]
    pub fn excess_beyond(&self, beyond: f64) -> f64 {
        if self.shape.abs() < FLAT {
            return -self.scale * beyond.ln();
        }
        self.scale / self.shape * (-self.shape * beyond.ln()).exp_m1()
    }

    /// Where the tail ends, for a shape below 0.
    #[must_use]
    pub fn end(&self) -> Option<f64> {
        (self.shape < -FLAT).then(|| -self.scale / self.shape)
    }

    /// The logarithm of the likelihood of excesses.
    #[must_use]
    pub fn log_likelihood(&self, excesses: &[f64]) -> f64 {
        let one = |&y: &f64| {
            let z = y / self.scale;
            if self.shape.abs() < FLAT {
                return -z;
            }
            let base = self.shape * z;
            if base <= -1.0 { f64::NEG_INFINITY } else { -(1.0 + 1.0 / self.shape) * base.ln_1p() }
        };
        excesses.iter().map(one).sum::<f64>() - excesses.len() as f64 * self.scale.ln()
    }

    /// The distribution under which `excesses`, all above 0, are likeliest; `None` for fewer than 2 different ones,
    /// or where none with a shape of at least -1 is.
    #[must_use]
    pub fn fit(excesses: &[f64]) -> Option<Self> {
        let greatest = excesses.iter().copied().fold(0.0, f64::max);
        let least = excesses.iter().copied().fold(f64::INFINITY, f64::min);
        if excesses.len() < 2 || !(least > 0.0 && greatest > least && greatest.is_finite()) {
            return None;
        }
        let n = excesses.len() as f64;
        let mean = excesses.iter().sum::<f64>() / n;
        let at = |theta: f64| {
            if (theta * mean).abs() < FLAT {
                return Self { scale: mean, shape: 0.0 };
            }
            let shape = excesses.iter().map(|y| (theta * y).ln_1p()).sum::<f64>() / n;
            Self { scale: shape / theta, shape }
        };
        // With xi as the mean of the logarithms the likelihood is -n (ln sigma + xi + 1).
        let value = |theta: f64| {
            let Self { scale, shape } = at(theta);
            if shape < -1.0 || !scale.is_finite() || scale <= 0.0 {
                f64::NEG_INFINITY
            } else {
                -scale.ln() - shape
            }
        };
        // theta lies above -1 / greatest; below 0 as a part of that, above 0 in powers, both finely enough that the
        // greatest of the grid lies beside the greatest of all.
        let below = (1..400).rev().map(|i| -f64::from(i) / 400.0 / greatest);
        let above = (0..400).map(|i| 10_f64.powf(-4.0 + 8.0 * f64::from(i) / 399.0) / mean);
        let grid: Vec<f64> = below.chain([0.0]).chain(above).collect();
        let best = (0..grid.len()).max_by(|&a, &b| value(grid[a]).total_cmp(&value(grid[b])))?;
        if best == 0 || best + 1 == grid.len() || value(grid[best]) == f64::NEG_INFINITY {
            return None;
        }
        Some(at(golden_section(grid[best - 1], grid[best + 1], value))).filter(|fit| fit.shape > -1.0)
    }
}

/// Where `value` is greatest between two ends, for a function that rises and then falls.
fn golden_section(mut low: f64, mut high: f64, value: impl Fn(f64) -> f64) -> f64 {
    let part = (5.0_f64.sqrt() - 1.0) / 2.0;
    let (mut left, mut right) = (high - part * (high - low), low + part * (high - low));
    let (mut at_left, mut at_right) = (value(left), value(right));
    // Each step keeps 0.618 of the stretch; 100 leave nothing that a double tells apart.
    for _ in 0..100 {
        if at_left >= at_right {
            (high, right, at_right) = (right, left, at_left);
            left = high - part * (high - low);
            at_left = value(left);
        } else {
            (low, left, at_left) = (left, right, at_right);
            right = low + part * (high - low);
            at_right = value(right);
        }
    }
    (low + high) / 2.0
}

/// What the longest bounces indicate about still longer ones.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Tail {
    /// The threshold: bounces up to it are left out.
    pub threshold_ns: u64,
    /// All values.
    pub values: u64,
    /// Those above the threshold.
    pub excesses: u64,
    /// The distribution of their excess in nanoseconds.
    pub pareto: Pareto,
    /// Its logarithm of the likelihood.
    pub log_likelihood: f64,
}

/// The part of the values that is taken as their tail, and the fewest that a fit stands on (our choice).
const TAIL_PART: usize = 10;
const FEWEST: usize = 20;

impl Tail {
    /// The tail of values in rising order: the longest tenth, at least 20 of them and at most a quarter. `None` where
    /// that leaves too few different ones.
    #[must_use]
    pub fn of_sorted(sorted: &[u64]) -> Option<Self> {
        let count = (sorted.len() / TAIL_PART).max(FEWEST);
        if count > sorted.len() / 4 {
            return None;
        }
        let threshold_ns = sorted[sorted.len() - count - 1];
        let tail = &sorted[sorted.partition_point(|&ns| ns <= threshold_ns)..];
        let excesses: Vec<f64> = tail.iter().map(|ns| (ns - threshold_ns) as f64).collect();
        if excesses.len() < FEWEST {
            return None;
        }
        let pareto = Pareto::fit(&excesses)?;
        Some(Self {
            threshold_ns,
            values: sorted.len() as u64,
            excesses: excesses.len() as u64,
            pareto,
            log_likelihood: pareto.log_likelihood(&excesses),
        })
    }

    /// The value that one in `one_in` is expected to exceed; the threshold where that is not in the tail.
    #[must_use]
    pub fn exceeded_once_in(&self, one_in: f64) -> f64 {
        let beyond = self.values as f64 / (self.excesses as f64 * one_in);
        self.threshold_ns as f64 + self.pareto.excess_beyond(beyond.min(1.0))
    }
}

#[cfg(test)]
mod tests;
