//! Lost ticks: samples that the logic never sees.

use rand::{Rng, RngExt};

use super::Stretch;

/// A run of lost ticks begins at most this many ticks after the change it is meant to hurt.
const REACH_TICKS: u64 = 64;

/// Takes runs of 1 to `lost` ticks away, near about half of the changes of the samples.
///
/// From the end of one run to the begin of the next there are at least `spacing` ticks, so that no stretch of
/// that length holds ticks of two runs. Elsewhere than near a change, losing ticks of a settled logic changes
/// nothing.
pub(super) fn lose<R: Rng>(stretches: &[Stretch], lost: u32, spacing: u64, rng: &mut R) -> Vec<Stretch> {
    cut(stretches, &plan(stretches, lost, spacing, rng))
}

/// The lost ticks as `(first, after)`, in order.
fn plan<R: Rng>(stretches: &[Stretch], lost: u32, spacing: u64, rng: &mut R) -> Vec<(u64, u64)> {
    let lost = u64::from(lost);
    let mut plan: Vec<(u64, u64)> = Vec::new();
    let changes = stretches.windows(2).filter(|pair| pair[0].position != pair[1].position);
    for change in changes.map(|pair| pair[1].first_tick) {
        if rng.random_bool(0.5) {
            continue;
        }
        let offset = rng.random_range(0..=lost + spacing.min(REACH_TICKS));
        let first = (change + offset).saturating_sub(lost);
        let length = rng.random_range(1..=lost);
        if plan.last().is_none_or(|&(_, after)| first >= after.saturating_add(spacing)) {
            plan.push((first, first + length));
        }
    }
    plan
}

fn cut(stretches: &[Stretch], plan: &[(u64, u64)]) -> Vec<Stretch> {
    let mut kept = Vec::with_capacity(stretches.len() + plan.len());
    let mut plan = plan.iter().copied().peekable();
    for stretch in stretches {
        let end = stretch.first_tick + stretch.ticks;
        let mut from = stretch.first_tick;
        while from < end {
            let (first, after) = plan.peek().copied().unwrap_or((u64::MAX, u64::MAX));
            if after <= from {
                plan.next();
                continue;
            }
            let until = first.clamp(from, end);
            if until > from {
                kept.push(part(stretch, from, until));
            }
            from = if until == end { end } else { after.min(end) };
        }
    }
    kept
}

fn part(stretch: &Stretch, from: u64, until: u64) -> Stretch {
    let skipped = u128::from(from - stretch.first_tick);
    Stretch { first_tick: from, ticks: until - from, at: stretch.at + skipped * stretch.step, ..*stretch }
}

#[cfg(test)]
mod tests {
    use super::*;
    use debounce_core::Position;

    fn stretch(position: Position, first_tick: u64, ticks: u64) -> Stretch {
        Stretch { position, first_tick, ticks, at: u128::from(first_tick) * 10, step: 10 }
    }

    #[track_caller]
    fn check(plan: &[(u64, u64)], expected: &[(u64, u64)]) {
        let all = [stretch(Position::Open, 0, 4), stretch(Position::Closed, 4, 3)];
        let kept: Vec<_> = cut(&all, plan).iter().map(|s| (s.first_tick, s.ticks)).collect();
        assert_eq!(kept, expected, "plan {plan:?}");
        assert!(cut(&all, plan).iter().all(|s| s.at == u128::from(s.first_tick) * 10));
    }

    #[test]
    fn cut_at_every_boundary_keeps_the_other_ticks() {
        check(&[], &[(0, 4), (4, 3)]);
        check(&[(0, 1)], &[(1, 3), (4, 3)]);
        check(&[(1, 2)], &[(0, 1), (2, 2), (4, 3)]);
        check(&[(3, 4)], &[(0, 3), (4, 3)]);
        check(&[(3, 5)], &[(0, 3), (5, 2)]);
        check(&[(0, 4)], &[(4, 3)]);
        check(&[(1, 2), (6, 9)], &[(0, 1), (2, 2), (4, 2)]);
        check(&[(7, 9)], &[(0, 4), (4, 3)]);
        check(&[(0, 7)], &[]);
    }
}
