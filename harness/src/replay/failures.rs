//! How often operations fail, as far as a replay shows it.

use super::Measurement;
use crate::characterise::tolerance::{Share, ToleranceError, upper_bound};
use crate::truth::TruthChange;

/// Changes that a law missed or answered with a further edge, of those that a replay could judge.
///
/// A change counts as failed when it fails at any phase of the tick: the safe side.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub struct Failures {
    /// Changes that were judged.
    pub changes: u64,
    /// Changes missed at some phase.
    pub missed: u64,
    /// Changes followed by a false edge at some phase, before the next change.
    pub doubled: u64,
}

impl Failures {
    /// Counts those of one replay.
    #[must_use]
    pub fn of(measurement: &Measurement, truth: &[TruthChange]) -> Self {
        let undecided = measurement.undecided.len().min(truth.len());
        let changes = (truth.len() - undecided) as u64;
        let before = |ns: u64| truth.partition_point(|change| change.at_ns <= ns);
        let mut doubled: Vec<usize> =
            measurement.false_edges.places.iter().map(|place| before(place.from_ns)).collect();
        doubled.dedup();
        Self {
            changes,
            missed: (measurement.missed.len() as u64).min(changes),
            doubled: (doubled.len() as u64).min(changes),
        }
    }

    /// Those of two replays together.
    #[must_use]
    pub fn with(self, other: Self) -> Self {
        Self {
            changes: self.changes + other.changes,
            missed: self.missed + other.missed,
            doubled: self.doubled + other.doubled,
        }
    }

    /// With `confidence`, the rate of misses is at most the first and that of doubles at most the second, were the
    /// operations independent and alike (C. J. Clopper, E. S. Pearson, 1934).
    ///
    /// # Errors
    /// None for counts made by [`of`](Self::of).
    pub fn rates_at_most(&self, confidence: Share) -> Result<(f64, f64), ToleranceError> {
        let bound = |failures| upper_bound(failures, self.changes, confidence);
        Ok((bound(self.missed)?, bound(self.doubled)?))
    }
}

#[cfg(test)]
mod tests {
    use debounce_core::{Change, Period, Position, ShiftRegister};

    use super::*;
    use crate::replay::PreparedTrace;
    use crate::trace::Trace;

    const MS: u64 = 1_000_000;

    /// 30 operations; the last `lone` of them are pulses of 20 us, which a tick of 1 ms sees at few phases, and
    /// after each of the first `disturbed` there is another such pulse, which is no operation.
    fn failures(window: u8, lone: usize, disturbed: usize) -> Failures {
        let (mut edges, mut truth) = (Vec::new(), Vec::new());
        for operation in 0..30_u64 {
            let at = (operation * 200 + 50) * MS;
            let length = if operation as usize >= 30 - lone { 20_000 } else { 50 * MS };
            edges.extend([at, at + length]);
            truth.extend([
                TruthChange { change: Change::Make, at_ns: at },
                TruthChange { change: Change::Break, at_ns: at + length },
            ]);
            if (operation as usize) < disturbed {
                edges.extend([at + 100 * MS, at + 100 * MS + 20_000]);
            }
        }
        let trace = Trace::new(Position::Open, 0, 6_100 * MS, edges, 1).unwrap();
        let prepared = PreparedTrace::new(&trace, &truth, Period::from_ms(1)).unwrap();
        let law = ShiftRegister::try_new(window).unwrap();
        Failures::of(&prepared.measure(&law), &truth)
    }

    #[test]
    fn failures_of_a_faithful_law_are_none_and_bounded_by_the_rule_of_three() {
        let found = failures(2, 0, 3);
        assert_eq!(found, Failures { changes: 60, missed: 0, doubled: 0 });
        let (missed, doubled) = found.rates_at_most(Share::try_new(0.95).unwrap()).unwrap();
        // Three in n is slightly above the exact bound 1 - 0.05^(1/n) (the "rule of three").
        assert!(missed == doubled && missed < 3.0 / 60.0 && missed > 2.9 / 60.0, "{missed}");
    }

    #[test]
    fn failures_at_any_phase_count_once_for_each_change() {
        let missing = failures(2, 4, 0);
        assert_eq!((missing.missed, missing.doubled), (8, 0));
        let doubling = failures(1, 0, 5);
        assert_eq!((doubling.missed, doubling.doubled), (0, 5));
        let both = missing.with(doubling);
        assert_eq!(both, Failures { changes: 120, missed: 8, doubled: 5 });
        let (missed, doubled) = both.rates_at_most(Share::try_new(0.95).unwrap()).unwrap();
        assert!(missed > 8.0 / 120.0 && doubled > 5.0 / 120.0 && doubled < missed);
    }
}
