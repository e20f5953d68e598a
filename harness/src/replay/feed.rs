//! Steps a law through samples that all read the same, and stops as soon as nothing changes any more.

use debounce_core::{Change, Law, Position};

/// What the last step of a constant stretch left behind.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(crate) enum Motion {
    /// It left the state as it was: the law is settled there.
    Settled,
    /// It changed the state, or there was no step.
    Moving,
}

/// Feeds `ticks` samples that read `sample`, with the cost of those in which something new happens.
///
/// `on_edge` gets each reported change and the offset of its tick. A law is a function of state and sample: once a
/// step leaves the state as it is the rest of the stretch does too, and once a state comes back without an edge
/// since, whole rounds can be left out. The rounds are found by comparing with an anchor that moves on
/// after 1, 2, 4, ... steps (R. P. Brent, "An improved Monte Carlo factorization algorithm", 1980, section 2).
#[inline]
pub(crate) fn feed<L: Law>(
    law: &L,
    state: &mut L::State,
    sample: Position,
    ticks: u64,
    mut on_edge: impl FnMut(u64, Change),
) -> Motion {
    let mut anchor = *state;
    let mut anchor_at = 0;
    let mut reach = 1;
    let mut done = 0;
    while done < ticks {
        let before = *state;
        let edge = law.step(state, sample);
        done += 1;
        if let Some(change) = edge {
            on_edge(done - 1, change);
            (anchor, anchor_at, reach) = (*state, done, 1);
        } else if *state == before {
            return Motion::Settled;
        } else if *state == anchor {
            // No edge since the anchor, so every further round is silent too.
            for _ in 0..(ticks - done) % (done - anchor_at) {
                law.step(state, sample);
            }
            return Motion::Moving;
        } else if done - anchor_at == reach {
            (anchor, anchor_at, reach) = (*state, done, reach * 2);
        }
    }
    Motion::Moving
}

#[cfg(test)]
mod tests {
    use super::super::laws::{Divided, Follower, LockOut, Unanimous};
    use super::*;

    /// One step after the other, nothing left out.
    fn step_each<L: Law>(law: &L, state: &mut L::State, ticks: u64) -> (Vec<(u64, Change)>, Motion) {
        let mut edges = Vec::new();
        let mut motion = Motion::Moving;
        for tick in 0..ticks {
            let before = *state;
            let edge = law.step(state, Position::Closed);
            motion = if edge.is_none() && *state == before { Motion::Settled } else { Motion::Moving };
            edges.extend(edge.map(|change| (tick, change)));
        }
        (edges, motion)
    }

    #[track_caller]
    fn check<L: Law>(law: &L)
    where
        L::State: std::fmt::Debug,
    {
        // Every state reachable by a few samples, then a stretch of every short length.
        for word in 0..1_u32 << 8 {
            let mut start = law.rest(Position::Open);
            for bit in 0..8 {
                law.step(&mut start, Position::closed_if(word >> bit & 1 == 1));
            }
            for ticks in 0..40 {
                let (mut skipping, mut stepping) = (start, start);
                let mut edges = Vec::new();
                let motion = feed(law, &mut skipping, Position::Closed, ticks, |offset, change| {
                    edges.push((offset, change))
                });
                let expected = step_each(law, &mut stepping, ticks);
                assert_eq!((edges, motion), expected, "word {word:08b}, {ticks} ticks");
                assert_eq!(skipping, stepping, "word {word:08b}, {ticks} ticks");
            }
        }
    }

    #[test]
    fn feed_with_skipping_equals_stepping_each_tick() {
        check(&Follower);
        check(&Unanimous(3));
        check(&LockOut(5));
        check(&Divided { every: 3, confirm: 2 });
        check(&Divided { every: 7, confirm: 1 });
    }

    #[test]
    fn feed_of_a_law_that_never_settles_costs_rounds_not_ticks() {
        let law = Divided { every: 1_000, confirm: 2 };
        let mut state = law.rest(Position::Open);
        let mut edges = Vec::new();
        // Stepped one by one this would take hours.
        let ticks = 1_000_000_000_000;
        let motion =
            feed(&law, &mut state, Position::Closed, ticks, |offset, change| edges.push((offset, change)));
        assert_eq!((edges, motion), (vec![(1_999, Change::Make)], Motion::Moving));
        let mut expected = law.rest(Position::Open);
        step_each(&law, &mut expected, 3_000);
        assert_eq!(state, expected);
    }
}
