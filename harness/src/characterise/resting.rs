//! Where the line rests, which tells whether the polarity was declared the right way round.

use debounce_core::Position;

use crate::trace::Trace;

/// A line that begins and ends in one position and is mostly there.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Resting {
    /// The position.
    pub position: Position,
    /// The share of the recording that it is there.
    pub share: f64,
}

/// The least share of the time in one position for the line to rest there (our choice: a button that is held for half
/// the recording tells nothing, and one that is pressed now and then is far above this).
const LEAST_SHARE: f64 = 0.65;

/// Where `trace` rests; `None` where it begins and ends differently or is often in both positions.
///
/// A contact that is operated now and then rests open, or closed if it is made to break. A recording whose line rests
/// closed is therefore either that of a contact that rests closed, or one whose polarity is inverted.
#[must_use]
pub fn resting(trace: &Trace) -> Option<Resting> {
    let position = trace.initial();
    if trace.position_after(trace.edges().len()) != position {
        return None;
    }
    let there: u64 =
        trace.runs().filter(|run| run.position == position).map(|run| run.until_ns - run.from_ns).sum();
    let share = there as f64 / (trace.end_ns() - trace.start_ns()).max(1) as f64;
    (share >= LEAST_SHARE).then_some(Resting { position, share })
}

#[cfg(test)]
mod tests {
    use super::*;
    use Position::{Closed, Open};

    #[track_caller]
    fn check(initial: Position, edges: &[u64], expected: Option<(Position, f64)>) {
        let trace = Trace::new(initial, 0, 1_000, edges.to_vec(), 1).unwrap();
        assert_eq!(resting(&trace).map(|found| (found.position, found.share)), expected);
    }

    #[test]
    fn resting_line_is_found_on_either_level() {
        check(Open, &[100, 200, 500, 600], Some((Open, 0.8)));
        check(Closed, &[100, 200, 500, 600], Some((Closed, 0.8)));
        check(Closed, &[100, 450], Some((Closed, 0.65)));
        check(Closed, &[100, 451], None);
        check(Closed, &[100, 200, 500], None);
    }
}
