//! The published table, and every waveform of an encoder that bounces.

extern crate std;

use super::*;
use crate::meaning::Detents;
use crate::meaning::RestPhases;
use std::collections::HashSet;
use std::vec::Vec;

const RESOLUTIONS: [(Resolution, i32); 3] = [(Resolution::X1, 4), (Resolution::X2, 2), (Resolution::X4, 1)];

/// Outside check: the cycle 00 01 11 10 (b a), one bit a step, two bits a lost step.
/// Source: B. Millier, Circuit Cellar 152, 2003, table 1.
#[test]
fn quadrature_every_pair_of_samples_equals_table() {
    const PUBLISHED: [u8; 4] = [0b00, 0b01, 0b11, 0b10];
    let phases = |ba: u8| Phases { a: Position::closed_if(ba & 1 == 1), b: Position::closed_if(ba & 2 == 2) };
    for (resolution, quarters) in RESOLUTIONS {
        let encoder = Quadrature::new(resolution);
        for (from, &sample) in PUBLISHED.iter().enumerate() {
            for next in PUBLISHED {
                let mut state = Quadrature::POWER_UP;
                assert_eq!(encoder.step(&mut state, phases(sample)), None);
                let event = encoder.step(&mut state, phases(next));
                let bits = (sample ^ next).count_ones();
                let forward = PUBLISHED[(from + 1) % 4] == next;
                let step = if forward { Turn::Forward } else { Turn::Backward };
                // Where a lower resolution counts: when the number of quarters, divided, has another whole part.
                let here = i32::try_from(from).unwrap();
                let there = here + i32::from(step.sign());
                let counts = there.div_euclid(quarters) != here.div_euclid(quarters);
                let expected = match bits {
                    0 => None,
                    1 => counts.then_some(QuadratureEvent::Step(step)),
                    _ => Some(QuadratureEvent::Lost),
                };
                assert_eq!(event, expected, "{resolution:?} {sample:02b} to {next:02b}");
            }
        }
    }
}

/// What came out of exploring every waveform of a bouncing encoder.
#[derive(Default, Debug, PartialEq, Eq)]
struct Found {
    lost: bool,
    wrong_without_lost: bool,
    // A waveform was not followed to its end.
    cut: bool,
}

#[derive(Clone, Copy, PartialEq, Eq, Hash)]
struct Around<S> {
    decoder: S,
    shaft: i32,
    count: i32,
    // Bounce samples left of each phase, and samples since the last edge.
    bounce: [u32; 2],
    since: u32,
    lost: bool,
}

/// Every waveform: edges of the shaft either way at least `apart` samples from each other, after each of them the
/// phase that moved reads anything for up to `bounce` samples.
fn explore<M>(machine: M, power_up: M::State, bounce: u32, apart: u32, quarters: i32) -> Found
where
    M: Machine<Input = Phases, Output = Option<QuadratureEvent>>,
    M::State: core::hash::Hash,
{
    const QUARTERS: i32 = 5;
    let mut first = power_up;
    let _ = machine.step(&mut first, Phases::CYCLE[0]);
    let start = Around { decoder: first, shaft: 0, count: 0, bounce: [0, 0], since: apart, lost: false };
    let mut seen = HashSet::from([start]);
    let mut open = std::vec![start];
    let mut found = Found::default();
    while let Some(around) = open.pop() {
        for turn in [-1, 0, 1] {
            let mut next = around;
            if turn != 0 {
                if around.since < apart || (around.shaft + turn).abs() > QUARTERS {
                    continue;
                }
                next.shaft += turn;
                next.since = 0;
                let moved = Phases::CYCLE[usize::try_from(next.shaft.rem_euclid(4)).unwrap()].a
                    != Phases::CYCLE[usize::try_from(around.shaft.rem_euclid(4)).unwrap()].a;
                next.bounce[usize::from(!moved)] = bounce;
            }
            next.since = (next.since + 1).min(apart);
            let truth = Phases::CYCLE[usize::try_from(next.shaft.rem_euclid(4)).unwrap()];
            let settled = next.bounce == [0, 0];
            let free = next.bounce.map(|left| left > 0);
            next.bounce = next.bounce.map(|left| left.saturating_sub(1));
            for sample in Phases::CYCLE {
                if (sample.a != truth.a && !free[0]) || (sample.b != truth.b && !free[1]) {
                    continue;
                }
                let mut next = next;
                if let Some(event) = machine.step(&mut next.decoder, sample) {
                    next.count += i32::from(event.steps());
                    next.lost |= event == QuadratureEvent::Lost;
                }
                found.lost |= next.lost;
                // The count may run away once it is wrong: that is enough to know.
                if settled && next.count != next.shaft.div_euclid(quarters) {
                    found.wrong_without_lost |= !next.lost;
                    continue;
                }
                // Far off without a rest to judge it at: not followed, so that the search ends.
                if (next.count - next.shaft.div_euclid(quarters)).abs() > 4 {
                    found.cut = true;
                } else if seen.insert(next) {
                    open.push(next);
                }
            }
        }
    }
    found
}

#[test]
fn quadrature_bounce_at_rated_distance_loses_nothing() {
    for (resolution, quarters) in RESOLUTIONS {
        for bounce in 0..=4 {
            let apart = Quadrature::fewest_ticks_between_edges(bounce);
            let found = explore(Quadrature::new(resolution), Quadrature::POWER_UP, bounce, apart, quarters);
            assert_eq!(found, Found::default(), "{resolution:?} {bounce}");
        }
    }
}

#[test]
fn quadrature_edges_closer_than_bounce_are_reported_or_worse() {
    let found =
        |bounce, apart| explore(Quadrature::new(Resolution::X4), Quadrature::POWER_UP, bounce, apart, 1);
    for bounce in 1..=4 {
        assert!(found(bounce, bounce).lost, "{bounce}");
    }
    // One sample closer than the bounce: both phases bounce at once, and a wrong count may come without a report.
    assert!(found(3, 1).wrong_without_lost);
}

#[test]
fn detents_bounce_at_rated_distance_loses_nothing() {
    // A click is counted on arrival at a rest, so the count lags behind the shaft between rests; at rests it is exact.
    for (rests, quarters) in [(RestPhases::BothOpen, 4), (RestPhases::BothAlike, 2)] {
        for bounce in 0..=2 {
            let clicks = explore_clicks(Detents::new(rests), bounce, quarters);
            assert_eq!(clicks, 0, "{rests:?} {bounce}");
        }
    }
}

/// Turns the shaft steadily with random bounce and returns how often clicks and shaft differ at a rest, plus lost.
fn explore_clicks(knob: Detents, bounce: u32, quarters: i32) -> u32 {
    let mut wrong = 0;
    // Every bounce pattern of 4 edges there and back, the phase that moved reading anything for `bounce` samples.
    let edges = 8u32;
    for pattern in 0..1u64 << (edges * bounce) {
        let mut state = Detents::POWER_UP;
        let _ = knob.step(&mut state, Phases::CYCLE[0]);
        let mut clicks = 0;
        let path: Vec<i32> = [1, 2, 3, 4, 3, 2, 1, 0].to_vec();
        let mut shaft = 0;
        for (edge, &next) in (0u32..).zip(&path) {
            for sample in 0..=bounce {
                let old = sample < bounce && pattern >> (edge * bounce + sample) & 1 == 1;
                let at = if old { shaft } else { next };
                let phases = Phases::CYCLE[usize::try_from(at.rem_euclid(4)).unwrap()];
                if let Some(event) = knob.step(&mut state, phases) {
                    wrong += u32::from(event == QuadratureEvent::Lost);
                    clicks += i32::from(event.steps());
                }
            }
            shaft = next;
            if shaft % quarters == 0 {
                wrong += u32::from(clicks != shaft / quarters);
            }
        }
    }
    wrong
}

/// Outside check: 60 rpm with 2 ms of bounce (Bourns PEC11R data sheet: 60 rpm at most, bounce 2 ms at 15 rpm),
/// 24 cycles a turn, sampled every millisecond: one turn forward, one back, bounce from a fixed pseudo-random row.
#[test]
fn quadrature_60_rpm_with_2_ms_bounce_loses_nothing() {
    let encoder = Quadrature::new(Resolution::X4);
    let mut state = Quadrature::POWER_UP;
    let (mut count, mut noise) = (0i32, 1u32);
    let quarter_at = |ms: u32| if ms < 1000 { ms * 96 / 1000 } else { (1999 - ms) * 96 / 1000 };
    let mut furthest = 0;
    for ms in 0..2000u32 {
        noise = noise.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
        let now = quarter_at(ms);
        let before = quarter_at(ms.saturating_sub(2));
        let read = if noise >> 31 == 1 { before } else { now };
        if let Some(event) = encoder.step(&mut state, Phases::CYCLE[usize::try_from(read % 4).unwrap()]) {
            assert_ne!(event, QuadratureEvent::Lost, "at {ms} ms");
            count += i32::from(event.steps());
        }
        furthest = furthest.max(count);
    }
    assert_eq!((furthest, count), (95, 0));
}

#[test]
fn quadrature_edges_in_lost_ticks_are_told_as_documented() {
    let encoder = Quadrature::new(Resolution::X4);
    for (edges, expected) in [
        (0, None),
        (1, Some(QuadratureEvent::Step(Turn::Forward))),
        (2, Some(QuadratureEvent::Lost)),
        (3, Some(QuadratureEvent::Step(Turn::Backward))),
        (4, None),
    ] {
        let mut state = Quadrature::POWER_UP;
        let _ = encoder.step(&mut state, Phases::CYCLE[0]);
        assert_eq!(encoder.step(&mut state, Phases::CYCLE[edges % 4]), expected, "{edges} edges");
    }
}
