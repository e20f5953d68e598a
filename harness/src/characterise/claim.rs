//! What the recorded bounces allow to claim of those to come.

use super::tolerance::{self, Share, ToleranceError};

/// A claim about the bounce after one kind of change, were the operations independent and alike (Wilks).
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Claim {
    /// Operations recorded whole.
    pub operations: u64,
    /// The longest bounce among them on the safe side: doubtful tails included, the recorder's sample period added.
    pub longest_ns: u64,
    /// With the wanted confidence, at least this share of all operations bounces no longer than that.
    pub covered: f64,
    /// Operations that would be needed for the wanted coverage.
    pub needed: u64,
    /// The upper tolerance limit of the wanted coverage and confidence, where the operations are enough for one.
    pub limit: Option<Limit>,
}

/// An upper tolerance limit: one of the longest bounces recorded.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Limit {
    /// Which of them, 1 being the longest.
    pub rank: u64,
    /// How long it is, on the safe side.
    pub ns: u64,
    /// How sure it is that the wanted share of all operations bounces no longer.
    pub confidence: f64,
}

impl Claim {
    /// The claim that bounces in rising order, on the safe side, allow; `None` where there is none.
    ///
    /// # Errors
    /// None that `coverage` and `confidence`, being shares, leave possible.
    pub fn of_sorted(
        safe_bounces_ns: &[u64],
        coverage: Share,
        confidence: Share,
    ) -> Result<Option<Self>, ToleranceError> {
        let Some(&longest_ns) = safe_bounces_ns.last() else { return Ok(None) };
        let operations = safe_bounces_ns.len() as u64;
        let limit = match tolerance::rank(operations, coverage, confidence) {
            Some(rank) => Some(Limit {
                rank,
                // A rank is at most the number of values.
                ns: safe_bounces_ns[safe_bounces_ns.len() - rank as usize],
                confidence: tolerance::confidence(operations, rank, coverage)?,
            }),
            None => None,
        };
        Ok(Some(Self {
            operations,
            longest_ns,
            covered: tolerance::coverage(operations, 1, confidence)?,
            needed: tolerance::operations_needed(1, coverage, confidence)?,
            limit,
        }))
    }

    /// How many more operations the wanted claim needs; 0 where there are enough.
    #[must_use]
    pub fn more_needed(&self) -> u64 {
        self.needed.saturating_sub(self.operations)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn claim(n: u64, coverage: f64, confidence: f64) -> Claim {
        let bounces: Vec<u64> = (1..=n).map(|i| 10 * i).collect();
        let share = |value| Share::try_new(value).unwrap();
        Claim::of_sorted(&bounces, share(coverage), share(confidence)).unwrap().unwrap()
    }

    /// 59 and 93 operations are the published first and second sizes for 95 %/95 % (S. S. Wilks, 1941).
    #[test]
    fn claim_beside_the_published_sizes_takes_the_right_rank() {
        let short = claim(58, 0.95, 0.95);
        assert_eq!((short.limit, short.needed, short.more_needed()), (None, 59, 1));
        let first = claim(59, 0.95, 0.95);
        assert_eq!(first.limit.map(|limit| (limit.rank, limit.ns)), Some((1, 590)));
        assert_eq!(first.more_needed(), 0);
        assert!(first.covered >= 0.95 && first.limit.unwrap().confidence >= 0.95);
        let second = claim(93, 0.95, 0.95);
        assert_eq!(second.limit.map(|limit| (limit.rank, limit.ns)), Some((2, 920)));
        assert_eq!(second.longest_ns, 930);
    }

    /// Twenty presses, doubled: what the screen suggests. With 95 % confidence they cover 86 % (1 - 0.05^(1/20)).
    #[test]
    fn claim_of_twenty_operations_covers_86_percent() {
        let twenty = claim(20, 0.99, 0.95);
        assert!((twenty.covered - 0.860_89).abs() < 5e-6, "{}", twenty.covered);
        assert_eq!((twenty.needed, twenty.more_needed()), (299, 279));
    }

    #[test]
    fn claim_of_no_operation_is_none() {
        let share = Share::try_new(0.5).unwrap();
        assert_eq!(Claim::of_sorted(&[], share, share), Ok(None));
        assert_eq!(claim(1, 0.5, 0.5).limit.map(|limit| limit.rank), Some(1));
    }
}
