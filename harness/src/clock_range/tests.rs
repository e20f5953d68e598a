//! The curve against sampling one period after another.

use debounce_core::{PerPosition, Verdict};

use super::*;
use crate::choose::laws_to_try;
use crate::logic::Logic;
use crate::prove::{LawTable, Limits, prove_within};

fn question() -> ClockQuestion {
    let mut physical = PhysicalEnvelope::clean(60_000, 50_000);
    physical.bounce_ns = PerChange { make: 5_000, break_: 3_000 };
    physical.glitch_ns = PerPosition { open: 300, closed: 200 };
    physical.quiet_ns = 9_000;
    ClockQuestion {
        physical,
        latency_ns: PerChange { make: 20_000, break_: 18_000 },
        clock: TickClock::new(Period::from_ns(100)).tolerance_ppm(20_000).jitter_ns(20),
        from_ns: 300,
    }
}

/// At every single period, each curve says what the best closed form there says, and whether it is in time.
#[test]
fn clock_range_agrees_with_every_period_looked_at_alone() {
    let question = question();
    let range = clock_range(&question);
    let mut seen = [0; 3];
    for period_ns in (range.span.from_ns..=range.span.until_ns + 50).step_by(7) {
        let clock = question.clock_at(period_ns);
        let envelope = question.physical.in_ticks(&clock);
        for (curve, seen) in range.curves.iter().filter(|curve| !curve.is_explored).zip(&mut seen) {
            let best = envelope.ok().and_then(|envelope| {
                laws_to_try(&envelope, envelope.dwell.open.max(envelope.dwell.closed))
                    .into_iter()
                    .filter(|law| law.name() == curve.family)
                    .filter_map(|law| match Logic::try_new(&law).ok()?.verdict(&envelope) {
                        Verdict::Holds(bounds) => {
                            Some(bounds.latency.make.worst.max(bounds.latency.break_.worst))
                        }
                        _ => None,
                    })
                    .min()
            });
            let found = curve.at(period_ns);
            assert_eq!(
                found.map(|piece| piece.worst.make.max(piece.worst.break_)),
                best,
                "{period_ns} {curve:?}"
            );
            let inside =
                |spans: &[Span]| spans.iter().any(|span| (span.from_ns..=span.until_ns).contains(&period_ns));
            assert_eq!(inside(&curve.works), best.is_some());
            let in_time = found.is_some_and(|piece| {
                let below = delays(&clock, piece.worst);
                below.make <= 20_000 && below.break_ <= 18_000
            });
            assert_eq!(inside(&curve.holds), in_time, "{period_ns} {found:?}");
            *seen += u32::from(best.is_some());
        }
    }
    assert!(seen.iter().all(|&seen| seen > 100), "{seen:?}");
}

/// The curve of the majority register against exploring every one of them in the whole envelope: no shorter dwells, no
/// shorter quiet, nothing passed over.
#[test]
fn clock_range_of_majority_registers_agrees_with_exploring_them_all() {
    let disturbed = question();
    let mut calm = question();
    calm.physical.glitch_ns = PerPosition { open: 0, closed: 0 };
    let mut losing = question();
    losing.clock = losing.clock.lost(1);
    let limits = Limits { memory_bytes: 1 << 20, threads: 1 };
    let tables = crate::choose::Tables::default();
    let (mut holding, mut failing) = (0, 0);
    for (question, periods) in [
        (&disturbed, &[1_150, 1_600, 2_300, 5_200][..]),
        (&calm, &[1_300, 2_600, 20_000]),
        (&losing, &[2_600]),
    ] {
        let range = clock_range(question);
        let curve = range.curves.iter().find(|curve| curve.is_explored).expect("a curve");
        assert_eq!(curve.family, "majority-register");
        for &period_ns in periods {
            let found = curve.at(period_ns).map(|piece| piece.worst);
            let Ok(envelope) = question.physical.in_ticks(&question.clock_at(period_ns)) else {
                assert_eq!(found, None, "{period_ns}");
                continue;
            };
            let registers = laws_to_try(&envelope, envelope.dwell.open.max(envelope.dwell.closed))
                .into_iter()
                .filter(|law| law.name() == curve.family);
            let explored = registers.filter_map(|law| {
                let table = tables.of(&Logic::try_new(&law).ok()?);
                let bounds = prove_within(table.get()?.as_ref().ok()?, &envelope, &limits).ok()?.bounds()?;
                Some(PerChange { make: bounds.latency.make.worst, break_: bounds.latency.break_.worst })
            });
            let merit = |worst: &PerChange<u32>| (worst.make.max(worst.break_), worst.make.min(worst.break_));
            let best = explored.map(|worst| merit(&worst)).min();
            assert_eq!(found.as_ref().map(merit), best, "{period_ns} {envelope:?}");
            if best.is_some() { holding += 1 } else { failing += 1 }
        }
    }
    assert!(holding >= 5 && failing >= 1, "{holding} {failing}");
}

/// At a step the figure comes to one sample fewer than a nanosecond before, by the clock's own rounding.
#[test]
fn clock_range_steps_are_where_a_figure_loses_a_sample() {
    let question = question();
    let range = clock_range(&question);
    assert!(range.steps.len() > 300, "{}", range.steps.len());
    let PhysicalEnvelope { bounce_ns, glitch_ns, quiet_ns, dwell_ns, .. } = question.physical;
    for step in &range.steps {
        let samples = |period_ns: u64| {
            let clock = question.clock_at(period_ns);
            match step.figure {
                Figure::BounceMake => clock.samples_touched(bounce_ns.make),
                Figure::BounceBreak => clock.samples_touched(bounce_ns.break_),
                Figure::DisturbanceOpen => clock.samples_touched(glitch_ns.open),
                Figure::DisturbanceClosed => clock.samples_touched(glitch_ns.closed),
                Figure::Quiet => clock.samples_seen(quiet_ns),
                Figure::ShortestOpen => clock.samples_seen(dwell_ns.open),
                Figure::ShortestClosed => clock.samples_seen(dwell_ns.closed),
                Figure::Calm => panic!("calm is 0 and has no steps"),
            }
        };
        assert_eq!(samples(step.at_ns), step.samples, "{step:?}");
        assert!(samples(step.at_ns - 1) > step.samples, "{step:?}");
    }
}

#[test]
fn clock_recommended_is_the_slowest_with_two_digits_and_its_law_holds_around_it() {
    let question = question();
    let range = clock_range(&question);
    let best = range.recommended.expect("something holds");
    assert!(best.period_ns <= best.slowest_ns && best.slowest_ns - best.period_ns < best.slowest_ns / 10);
    assert!(best.below_ns.make <= 20_000 && best.below_ns.break_ <= 18_000);
    assert!(best.same_law.from_ns <= best.period_ns && best.period_ns <= best.same_law.until_ns);
    // Explored, and not by the closed form that the curve is made of.
    let table = Logic::try_new(&best.law).expect("a law").table().expect("a sound law");
    for period_ns in [best.same_law.from_ns, best.period_ns, best.same_law.until_ns] {
        let envelope = question.envelope_at(period_ns).expect("an envelope");
        let proof = prove_within(&table, &envelope, &Limits::default()).expect("a small product");
        let bounds = proof.bounds().unwrap_or_else(|| panic!("{best:?} at {period_ns}: {proof}"));
        let worst = PerChange { make: bounds.latency.make.worst, break_: bounds.latency.break_.worst };
        assert!(question.in_time(worst, period_ns), "{period_ns}");
    }
}

/// A less exact clock asks for a faster one.
#[test]
fn clock_with_more_tolerance_is_never_slower() {
    let slowest = slowest_by_tolerance(&question(), &[0, 20_000, 100_000]);
    let periods: Vec<u64> = slowest.iter().map(|(_, period)| period.expect("something holds")).collect();
    assert!(periods[0] > periods[1] && periods[1] > periods[2], "{periods:?}");
}

/// Ticks to settle, counted for every way a bounce can read.
#[test]
fn asleep_ticks_are_the_most_of_every_bounce() {
    use debounce_core::{Law, Machine, Position, StateMachine, StateMachineParameters, is_settled};
    let law = StateMachine::<u8>::new(StateMachineParameters::confirm(2, 3).patience(2, 2).lockout(3, 1));
    let envelope = Envelope::clean(40, 40).bounce(6, 4).glitch(2, 1).quiet(9);
    let table = LawTable::of(&law).expect("a sound law");
    let activity = Activity { operations_per_hour: 60, disturbances_per_hour: 10 };
    let clock = TickClock::new(Period::from_ms(1));
    let found = asleep(&table, &envelope, &clock, activity).expect("it settles");
    let most = |from: Position, doubtful: u32, to: Position| {
        let ticks = |word: u32| {
            let mut state = law.rest(from);
            for at in 0..doubtful {
                let _ = law.step(&mut state, Position::closed_if(word >> at & 1 != 0));
            }
            let mut ticks = doubtful;
            while !is_settled(&law, &state, to) {
                let _ = law.step(&mut state, to);
                ticks += 1;
            }
            ticks
        };
        (0..1 << doubtful).map(ticks).max().expect("some word")
    };
    use Position::{Closed, Open};
    assert_eq!(found.ticks_after, PerChange { make: most(Open, 6, Closed), break_: most(Closed, 4, Open) });
    assert_eq!(
        found.ticks_after_disturbance,
        PerPosition { open: most(Open, 2, Open), closed: most(Closed, 1, Closed) }
    );
    let awake = f64::from(60 * (found.ticks_after.make + found.ticks_after.break_))
        + 10.0 * f64::from(found.ticks_after_disturbance.open.max(found.ticks_after_disturbance.closed));
    assert!((found.share - (1.0 - awake * 1e-3 / 3600.0)).abs() < 1e-12, "{found:?}");
    assert!((found.stopping_per_second - (awake + 130.0) / 3600.0).abs() < 1e-12, "{found:?}");
    assert!((found.ticking_per_second - 1000.0).abs() < 1e-9);
}
