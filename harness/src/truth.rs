//! What the contact really did, beside what the line showed.

use debounce_core::{Change, Position};

use crate::trace::Trace;

/// One change of the contact: the instant at which its parts first touched or first parted.
///
/// Truth comes from the segmentation of a recording or from the synthesiser; a disturbance is no change.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct TruthChange {
    /// What the contact did.
    pub change: Change,
    /// When it began to.
    pub at_ns: u64,
}

/// Why a list of changes is no truth about a trace. Changes are counted from 1.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum TruthError {
    /// Two makes or two breaks in a row, or a first change to where the trace already is.
    #[error(
        "true change {number} at {at_ns} ns leads to where the contact already is; makes and breaks must alternate, beginning away from the trace's first position"
    )]
    NotAlternating {
        /// Which change.
        number: usize,
        /// Its time.
        at_ns: u64,
    },
    /// A change is not later than the one before it, or lies outside the trace.
    #[error("true change {number} at {at_ns} ns must lie after {after_ns} ns and not after {end_ns} ns")]
    OutOfOrder {
        /// Which change.
        number: usize,
        /// Its time.
        at_ns: u64,
        /// The change before it, or the start of the trace.
        after_ns: u64,
        /// The end of the trace.
        end_ns: u64,
    },
}

/// Checks that `truth` alternates, begins away from the trace's first position, rises strictly and lies in
/// `start < at <= end`.
///
/// # Errors
/// The first change that does not.
pub fn check_truth(trace: &Trace, truth: &[TruthChange]) -> Result<(), TruthError> {
    let mut position: Position = trace.initial();
    let mut after_ns = trace.start_ns();
    for (index, &TruthChange { change, at_ns }) in truth.iter().enumerate() {
        let number = index + 1;
        if change.to() == position {
            return Err(TruthError::NotAlternating { number, at_ns });
        }
        if at_ns <= after_ns || at_ns > trace.end_ns() {
            return Err(TruthError::OutOfOrder { number, at_ns, after_ns, end_ns: trace.end_ns() });
        }
        position = change.to();
        after_ns = at_ns;
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    const OPEN_1_US: fn() -> Trace =
        || Trace::new(Position::Open, 100, 1_100, vec![200, 900], 1).expect("valid");

    #[track_caller]
    fn check(changes: &[(Change, u64)], expected: Result<(), TruthError>) {
        let truth: Vec<_> = changes.iter().map(|&(change, at_ns)| TruthChange { change, at_ns }).collect();
        assert_eq!(check_truth(&OPEN_1_US(), &truth), expected);
    }

    #[test]
    fn truth_in_and_out_of_order_is_told_apart() {
        let out =
            |number, at_ns, after_ns| Err(TruthError::OutOfOrder { number, at_ns, after_ns, end_ns: 1_100 });
        check(&[], Ok(()));
        check(&[(Change::Make, 101), (Change::Break, 1_100)], Ok(()));
        check(&[(Change::Make, 100)], out(1, 100, 100));
        check(&[(Change::Make, 200), (Change::Break, 200)], out(2, 200, 200));
        check(&[(Change::Make, 200), (Change::Break, 201)], Ok(()));
        check(&[(Change::Make, 1_101)], out(1, 1_101, 100));
    }

    #[test]
    fn truth_that_does_not_alternate_is_refused() {
        check(&[(Change::Break, 200)], Err(TruthError::NotAlternating { number: 1, at_ns: 200 }));
        check(
            &[(Change::Make, 200), (Change::Make, 300)],
            Err(TruthError::NotAlternating { number: 2, at_ns: 300 }),
        );
    }
}
