//! Samples against the plain definition: what the line was at each instant.

use debounce_core::{Period, Position, TickClock};

use super::*;

const MS: u64 = 1_000_000;
const SECOND: u64 = 1_000 * MS;

fn trace(edges: Vec<u64>, end_ns: u64) -> Trace {
    Trace::new(Position::Open, 0, end_ns, edges, 1).expect("rises")
}

#[test]
fn train_at_30_hz_over_an_hour_has_no_drift() {
    // The line turns over every second, on a sample instant of phase 0.
    let hour = trace((1..3_600).map(|second| second * SECOND).collect(), 3_600 * SECOND);
    let clock = SampleClock::new(TickClock::new(Period::from_hz(30)));
    let last = clock.period().units() - 1;
    for phase in [0, 1, last / 2, last] {
        let train = clock.phase_units(phase).train(&hour);
        let word = train.word();
        assert_eq!((word.len(), train.samples()), (3_600, 108_000), "phase {phase}");
        assert!(word.iter().all(|&(_, ticks)| ticks == 30), "phase {phase}");
    }
    // The control: a period rounded to whole nanoseconds does drift, by one tick within the hour.
    let rounded = SampleClock::new(TickClock::new(Period::from_ns(33_333_333)));
    assert_eq!(rounded.train(&hour).samples(), 108_001);
}

#[track_caller]
fn check_word(edges: &[u64], end_ns: u64, phase_ns: u64, expected: &[u64]) {
    let clock = SampleClock::new(TickClock::new(Period::from_ns(10))).phase_ns(phase_ns);
    let word = clock.train(&trace(edges.to_vec(), end_ns)).word();
    let ticks: Vec<u64> = word.iter().map(|&(_, ticks)| ticks).collect();
    assert_eq!(ticks, expected, "edges {edges:?}, end {end_ns}, phase {phase_ns}");
}

#[test]
fn train_edge_and_end_on_a_sample_instant_fall_on_its_side() {
    check_word(&[20], 40, 0, &[2, 2]);
    check_word(&[21], 40, 0, &[3, 1]);
    check_word(&[19], 40, 0, &[2, 2]);
    check_word(&[20], 41, 0, &[2, 3]);
    check_word(&[20], 40, 9, &[2, 2]);
    check_word(&[20], 40, 10, &[2, 2]);
    check_word(&[20], 39, 9, &[2, 1]);
    // Between two samples nobody looks.
    check_word(&[21, 29], 40, 0, &[4]);
    check_word(&[21, 30], 40, 0, &[4]);
    check_word(&[20, 29], 40, 0, &[2, 1, 1]);
    check_word(&[], 0, 0, &[]);
    check_word(&[], 9, 9, &[]);
}

fn bouncing() -> Trace {
    let edges = (1..=6).flat_map(|k| [0, 130_000, 700_000, 1_900_000, 2_050_000].map(|d| k * 97 * MS + d));
    trace(edges.collect(), 700 * MS)
}

/// Every sample of a drawn train: its tick, what it reads, its instant in units.
fn expanded(train: &Train) -> Vec<(u64, Position, u128)> {
    let samples = train.stretches().iter().flat_map(|stretch| {
        (0..stretch.ticks)
            .map(|offset| (stretch.first_tick + offset, stretch.position, train.instant(stretch, offset)))
    });
    samples.collect()
}

#[track_caller]
fn check_draw(clock: TickClock, drift: Drift, seed: u64) {
    let trace = bouncing();
    let spread = Spread { drift, shortest_dwell_ns: 50 * MS };
    let train = SampleClock::new(clock).draw(&trace, spread, seed).expect("valid");
    let per_ns = train.units_per_ns;
    let samples = expanded(&train);
    let million = u128::from(MS);
    let period_ns = u128::from(clock.period().numerator_ns());
    let bounds = [million - u128::from(clock.ppm()), million + u128::from(clock.ppm())];
    let [shortest, longest] =
        bounds.map(|part| period_ns * part / u128::from(clock.period().denominator()) * per_ns / million);
    let jitter = u128::from(clock.jitter()) * per_ns;
    for &(tick, position, instant) in &samples {
        let ns = u64::try_from(instant / per_ns).expect("short");
        assert_eq!(position, trace.position_at(ns), "tick {tick}, seed {seed}");
    }
    let mut last_loss_end = None;
    for pair in samples.windows(2) {
        let ((tick, _, at), (next_tick, _, next)) = (pair[0], pair[1]);
        let ticks = next_tick - tick;
        assert!(ticks >= 1 && ticks <= u64::from(clock.lost_ticks()) + 1, "ticks {tick} to {next_tick}");
        let step = next - at;
        let (least, most) = (u128::from(ticks) * shortest - jitter, u128::from(ticks) * longest + jitter);
        assert!(least <= step && step <= most, "{least} <= {step} <= {most}, seed {seed}");
        if ticks > 1 {
            if let Some(end) = last_loss_end {
                assert!(u128::from(tick + 1 - end) * shortest >= 50 * million * per_ns, "seed {seed}");
            }
            last_loss_end = Some(next_tick);
        }
    }
    assert_eq!(last_loss_end.is_some(), clock.lost_ticks() > 0, "seed {seed}");
}

#[test]
fn draw_reads_the_line_at_every_instant_and_keeps_the_limits_of_the_clock() {
    let steady = TickClock::new(Period::from_us(100));
    for seed in 0..20 {
        for drift in [Drift::Constant, Drift::Wandering] {
            check_draw(steady, drift, seed);
            check_draw(steady.jitter_ns(99_000), drift, seed);
            check_draw(steady.tolerance_ppm(100_000), drift, seed);
            check_draw(steady.tolerance_ppm(10_000).jitter_ns(30_000).lost(3), drift, seed);
        }
    }
}

#[test]
fn draw_repeats_with_its_seed_and_differs_with_another() {
    let clock =
        SampleClock::new(TickClock::new(Period::from_hz(3_000)).tolerance_ppm(500).jitter_ns(9_000).lost(1));
    let spread = Spread { drift: Drift::Wandering, shortest_dwell_ns: 50 * MS };
    let draw = |seed| clock.draw(&bouncing(), spread, seed).expect("valid");
    assert_eq!(draw(7), draw(7));
    assert_ne!(draw(7).stretches(), draw(8).stretches());
}

#[test]
fn draw_wanders_only_where_it_is_told_to() {
    let clock = SampleClock::new(TickClock::new(Period::from_us(100)).tolerance_ppm(50_000));
    let periods = |drift| {
        let train = clock.draw(&bouncing(), Spread { drift, shortest_dwell_ns: 0 }, 3).expect("valid");
        train.stretches().iter().map(|stretch| stretch.step).collect::<std::collections::BTreeSet<_>>().len()
    };
    assert_eq!(periods(Drift::Constant), 1);
    assert!(periods(Drift::Wandering) > 100);
}

#[test]
fn draw_over_an_hour_at_1_mhz_costs_edges_not_ticks() {
    let hour = trace(vec![1_800 * SECOND], 3_600 * SECOND);
    let clock = SampleClock::new(TickClock::new(Period::from_us(1)).jitter_ns(500).tolerance_ppm(100));
    let train =
        clock.draw(&hour, Spread { drift: Drift::Wandering, shortest_dwell_ns: 0 }, 1).expect("valid");
    assert!(train.stretches().len() < 1_000, "{}", train.stretches().len());
    assert!(train.samples() > 3_599_000_000);
}

#[test]
fn draw_with_jitter_of_a_period_is_refused() {
    let draw = |clock: TickClock, shortest_dwell_ns| {
        let spread = Spread { drift: Drift::Constant, shortest_dwell_ns };
        SampleClock::new(clock).draw(&bouncing(), spread, 1).map(|_| ())
    };
    let clock = TickClock::new(Period::from_us(100)).tolerance_ppm(100_000);
    assert_eq!(draw(clock.jitter_ns(89_999), 0), Ok(()));
    let wide = SampleError::JitterTooWide { jitter_ns: 90_000, shortest_ns: 90_000 };
    assert_eq!(draw(clock.jitter_ns(90_000), 0), Err(wide));
    assert_eq!(draw(clock.lost(1), 1), Ok(()));
    assert_eq!(draw(clock.lost(1), 0), Err(SampleError::LossWithoutSpacing { lost: 1 }));
}
