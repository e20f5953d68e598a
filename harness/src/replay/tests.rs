//! Replay against a second, slow telling of it: one phase after the other, one tick after the other.

use debounce_core::{Change, Law, Period, Position};
use proptest::prelude::*;
use proptest::test_runner::{RngAlgorithm, TestRng, TestRunner};

use super::laws::{Divided, Follower, Latching, LockOut, Unanimous};
use super::prepared::Joining;
use super::*;
use crate::sample::{ExactPeriod, SampleClock};
use crate::trace::Trace;
use crate::truth::TruthChange;
use debounce_core::TickClock;

/// What one phase gives. Lists are sorted.
#[derive(PartialEq, Eq, Debug, Default)]
struct OnePhase {
    /// Index, tick, latency in samples, delay in units.
    reported: Vec<(u32, u64, u64, u64)>,
    missed: Vec<u32>,
    undecided: Vec<u32>,
    false_edges: Vec<(u64, Change)>,
}

/// The matching rule on plain lists, and the line looked up anew at every tick.
fn brute<L: Law>(law: &L, trace: &Trace, truth: &[TruthChange], period: ExactPeriod, phase: u64) -> OnePhase {
    let units = |at_ns: u64| (at_ns - trace.start_ns()) * period.units_per_ns();
    let mut one = OnePhase::default();
    let mut state = law.rest(trace.initial());
    let mut waiting: Vec<u32> = Vec::new();
    let mut seen_from = Vec::new();
    let mut arrive = |index: usize, tick: u64, waiting: &mut Vec<u32>, missed: &mut Vec<u32>| {
        if let Some(place) = waiting.iter().position(|&old| truth[old as usize].change == truth[index].change)
        {
            missed.push(waiting.remove(place));
        }
        waiting.push(index as u32);
        seen_from.push(tick);
        truth[index].change.to()
    };
    let (mut contact, mut next) = (trace.initial(), 0);
    let mut reported = Vec::new();
    let mut tick = 0;
    loop {
        let instant = phase + tick * period.units();
        if instant >= units(trace.end_ns()) {
            break;
        }
        while next < truth.len() && units(truth[next].at_ns) <= instant {
            contact = arrive(next, tick, &mut waiting, &mut one.missed);
            next += 1;
        }
        let turned = trace.edges().iter().filter(|&&edge| units(edge) <= instant).count();
        let sample = trace.position_after(turned);
        let before = state;
        match law.step(&mut state, sample) {
            Some(change) => match waiting.iter().position(|&index| truth[index as usize].change == change) {
                Some(place) => {
                    one.missed.extend(waiting.drain(..place));
                    let index = waiting.remove(0);
                    reported.push((index, tick, instant - units(truth[index as usize].at_ns)));
                }
                None => one.false_edges.push((tick, change)),
            },
            None if state == before && sample == contact && law.output(&state) == contact => {
                one.missed.append(&mut waiting);
            }
            None => {}
        }
        tick += 1;
    }
    while next < truth.len() {
        arrive(next, tick, &mut waiting, &mut one.missed);
        next += 1;
    }
    if debounce_core::is_settled(law, &state, trace.position_at(trace.end_ns())) {
        one.missed.append(&mut waiting);
    }
    one.undecided = waiting;
    one.reported = reported
        .into_iter()
        .map(|(index, tick, delay)| (index, tick, tick - seen_from[index as usize] + 1, delay))
        .collect();
    one.sorted()
}

impl OnePhase {
    fn sorted(mut self) -> Self {
        self.reported.sort_unstable();
        self.missed.sort_unstable();
        self.undecided.sort_unstable();
        self.false_edges.sort_unstable();
        self
    }

    /// The part of an outcome that belongs to one phase.
    fn of(outcome: &Outcome, prepared: &PreparedTrace, phase: u64) -> Self {
        let at = |list: &[Unreported]| {
            list.iter().filter(|entry| entry.phase.contains(phase)).map(|entry| entry.change).collect()
        };
        let units = prepared.period().units();
        let reported = outcome.reported.iter().filter(|report| report.phase.contains(phase)).map(|report| {
            let point = prepared.truth_point(report.change);
            let samples = report.tick - point.first_sample(phase) + 1;
            let delay = report.tick * units + phase - (point.tick * units + point.residue);
            (report.change, report.tick, samples, delay)
        });
        let false_edges = outcome.false_edges.iter().filter(|edge| edge.phase.contains(phase));
        Self {
            reported: reported.collect(),
            missed: at(&outcome.missed),
            undecided: at(&outcome.undecided),
            false_edges: false_edges.map(|edge| (edge.tick, edge.change)).collect(),
        }
        .sorted()
    }
}

/// The least latency or delay that keeps `percent` of all, from every single one.
fn quantile(sorted: &[u64], percent: usize) -> u64 {
    sorted[(sorted.len() * percent).div_ceil(100) - 1]
}

fn check_summary(prepared: &PreparedTrace, phases: &[OnePhase], measured: &Measurement) {
    let all = phases.len() as f64;
    let per_ns = prepared.period().units_per_ns();
    for change in [Change::Make, Change::Break] {
        let ours = |index: u32| prepared.truth()[index as usize].change == change;
        let reports = || phases.iter().flat_map(|one| &one.reported).filter(|report| ours(report.0));
        let mut samples: Vec<u64> = reports().map(|report| report.2).collect();
        let mut delays: Vec<u64> = reports().map(|report| report.3).collect();
        samples.sort_unstable();
        delays.sort_unstable();
        let figures = measured.at(change);
        let Some(latency) = &figures.latency else {
            assert!(samples.is_empty());
            continue;
        };
        let found = &latency.samples;
        assert_eq!((found.best, found.worst), (samples[0], samples[samples.len() - 1]));
        assert_eq!(
            (found.median, found.p95, found.p99),
            (quantile(&samples, 50), quantile(&samples, 95), quantile(&samples, 99))
        );
        // A whole phase stands for all phases up to the next one, hence the one unit more at the upper end.
        let above = |percent| (quantile(&delays, percent) + 1).div_ceil(per_ns);
        let expected = Delay {
            best_ns: delays[0] / per_ns,
            median_ns: above(50),
            p95_ns: above(95),
            p99_ns: above(99),
            below_ns: above(100),
        };
        assert_eq!(latency.delay, expected);
        // The delay rises up to the end of the span, and no other is longer.
        let slowest = latency.slowest;
        let last = &phases[slowest.phase.until as usize - 1].reported;
        assert!(last.iter().any(|&(index, _, samples, delay)| {
            (index, samples, Some(&delay)) == (slowest.change, slowest.samples, delays.last())
        }));
    }
    for missed in &measured.missed {
        let count = phases.iter().filter(|one| one.missed.contains(&missed.index)).count();
        assert_eq!(missed.probability, count as f64 / all);
    }
    let indices: std::collections::BTreeSet<u32> = phases.iter().flat_map(|one| one.missed.clone()).collect();
    assert_eq!(
        indices.into_iter().collect::<Vec<_>>(),
        measured.missed.iter().map(|m| m.index).collect::<Vec<_>>()
    );
    let with_false = phases.iter().filter(|one| !one.false_edges.is_empty()).count();
    assert_eq!(measured.false_edges.probability, with_false as f64 / all);
    let false_edges: usize = phases.iter().map(|one| one.false_edges.len()).sum();
    assert_eq!(measured.false_edges.mean, false_edges as f64 / all);
    let in_places: f64 = measured.false_edges.places.iter().map(|place| place.mean).sum();
    assert!((in_places - measured.false_edges.mean).abs() < 1e-9);
}

fn check_law<L: Law>(law: &L, trace: &Trace, truth: &[TruthChange], period: Period, met: &mut Met) {
    let prepared = PreparedTrace::new(trace, truth, period).expect("valid");
    let outcome = prepared.outcome(law);
    let unjoined = prepared.walk(law, Joining::Never);
    let clock = SampleClock::new(TickClock::new(period));
    let mut phases = Vec::new();
    for phase in 0..prepared.period().units() {
        let expected = brute(law, trace, truth, prepared.period(), phase);
        assert_eq!(OnePhase::of(&outcome, &prepared, phase), expected, "phase {phase}");
        assert_eq!(
            OnePhase::of(&unjoined, &prepared, phase),
            expected,
            "phase {phase}, strands never joined"
        );
        check_pass(law, trace, truth, clock.phase_units(phase), &expected);
        phases.push(expected);
    }
    check_summary(&prepared, &phases, &prepared.summarise(&outcome));
    met.add(truth, &phases, prepared.period());
}

/// The same phase through a train of samples.
fn check_pass<L: Law>(
    law: &L,
    trace: &Trace,
    truth: &[TruthChange],
    clock: SampleClock,
    expected: &OnePhase,
) {
    let pass = judge(law, &clock.train(trace), trace.initial(), truth);
    let per_ns = clock.period().units_per_ns();
    let indices = |list: &[usize]| {
        let mut list: Vec<u32> = list.iter().map(|&index| index as u32).collect();
        list.sort_unstable();
        list
    };
    let mut reported: Vec<_> =
        pass.reported.iter().map(|r| (r.change as u32, r.tick, r.samples, r.delay_ns)).collect();
    reported.sort_unstable();
    let in_ns: Vec<_> = expected.reported.iter().map(|r| (r.0, r.1, r.2, r.3.div_ceil(per_ns))).collect();
    assert_eq!(reported, in_ns);
    assert_eq!(indices(&pass.missed), expected.missed);
    assert_eq!(indices(&pass.undecided), expected.undecided);
    let mut ticks: Vec<_> = Replay::new(law, clock).run(trace, trace.initial());
    assert_eq!(ticks.len(), expected.reported.len() + expected.false_edges.len());
    ticks.retain(|edge| expected.false_edges.contains(&(edge.tick, edge.change)));
    assert_eq!(ticks, pass.false_edges);
}

/// A trace of a few edges with a truth of its own, which need not lie on the edges, and a period.
fn scenes() -> impl Strategy<Value = (Trace, Vec<TruthChange>, Period)> {
    let gaps = |longest: u64, most| prop::collection::vec(1..=longest, 0..=most);
    (
        0..20_u64,
        any::<bool>(),
        gaps(9, 14_usize),
        gaps(20, 8_usize),
        0..30_u64,
        any::<bool>(),
        1..=12_u64,
        1..=3_u32,
    )
        .prop_map(|(start, closed, edge_gaps, truth_gaps, tail, on_edges, numerator, denominator)| {
            let instants = |gaps: &[u64]| {
                let sums = gaps.iter().scan(start, |at, gap| {
                    *at += gap;
                    Some(*at)
                });
                sums.collect::<Vec<_>>()
            };
            let initial = Position::closed_if(closed);
            let edges = instants(&edge_gaps);
            let end = edges.last().copied().unwrap_or(start) + tail;
            let mut changes = instants(&truth_gaps);
            if on_edges {
                // The usual case: a change is the first edge of its bounce.
                changes = edges.iter().copied().step_by(3).collect();
            }
            changes.retain(|&at| at <= end);
            let truth = changes.into_iter().scan(initial, |position, at_ns| {
                *position = position.opposite();
                Some(TruthChange { change: position.reached_by(), at_ns })
            });
            let truth = truth.collect();
            let trace = Trace::new(initial, start, end, edges, 1).expect("rises");
            (trace, truth, Period::try_from_ratio(numerator, denominator).expect("not 0"))
        })
}

/// How often each kind of ending was met, so that no comparison is an empty one.
#[derive(Debug, Default)]
struct Met {
    reported: usize,
    missed: usize,
    undecided: usize,
    false_edges: usize,
    /// Phases at which a change was reported after the next one had come.
    late: usize,
    /// Traces in which phases differ.
    differing: usize,
}

impl Met {
    fn add(&mut self, truth: &[TruthChange], phases: &[OnePhase], period: ExactPeriod) {
        for one in phases {
            self.reported += one.reported.len();
            self.missed += one.missed.len();
            self.undecided += one.undecided.len();
            self.false_edges += one.false_edges.len();
            self.late += one
                .reported
                .iter()
                .filter(|&&(index, _, _, delay)| {
                    let next = truth.get(index as usize + 1);
                    next.is_some_and(|next| {
                        (next.at_ns - truth[index as usize].at_ns) * period.units_per_ns() < delay
                    })
                })
                .count();
        }
        self.differing += usize::from(phases.windows(2).any(|pair| pair[0].missed != pair[1].missed));
    }
}

#[test]
fn replay_at_every_phase_equals_brute_force() {
    let config = ProptestConfig { cases: 1_500, failure_persistence: None, ..ProptestConfig::default() };
    let met = std::cell::RefCell::new(Met::default());
    let run = TestRunner::new_with_rng(config, TestRng::deterministic_rng(RngAlgorithm::ChaCha)).run(
        &scenes(),
        |(trace, truth, period)| {
            let mut met = met.borrow_mut();
            check_law(&Follower, &trace, &truth, period, &mut met);
            check_law(&Unanimous(2), &trace, &truth, period, &mut met);
            check_law(&Unanimous(4), &trace, &truth, period, &mut met);
            check_law(&LockOut(1), &trace, &truth, period, &mut met);
            check_law(&LockOut(6), &trace, &truth, period, &mut met);
            check_law(&Divided { every: 3, confirm: 2 }, &trace, &truth, period, &mut met);
            check_law(&Latching, &trace, &truth, period, &mut met);
            Ok(())
        },
    );
    if let Err(failure) = run {
        panic!("{failure}");
    }
    let met = met.into_inner();
    let least = [met.reported, met.missed, met.undecided, met.false_edges, met.late, met.differing];
    assert!(least.iter().all(|&count| count > 500), "{met:?}");
}

const MS: u64 = 1_000_000;

fn truth(changes: &[(Change, u64)]) -> Vec<TruthChange> {
    changes.iter().map(|&(change, at_ns)| TruthChange { change, at_ns }).collect()
}

/// A press of `press_ms` with a bounce of `bounce_ms` at both ends, the line turning over every `every_ms` of it.
fn press(press_ms: u64, bounce_ms: u64, every_ms: u64) -> (Trace, Vec<TruthChange>) {
    let bounce = |at: u64| {
        let inner =
            (1..).map(move |k| at + k * every_ms * MS).take_while(move |&edge| edge < at + bounce_ms * MS);
        let mut edges: Vec<u64> = std::iter::once(at).chain(inner).collect();
        if edges.len().is_multiple_of(2) {
            edges.push(at + bounce_ms * MS);
        }
        edges
    };
    let (make, break_) = (500 * MS, (500 + press_ms) * MS);
    let edges = [bounce(make), bounce(break_)].concat();
    let trace = Trace::new(Position::Open, 0, 1_500 * MS, edges, 1).expect("rises");
    (trace, truth(&[(Change::Make, make), (Change::Break, break_)]))
}

#[track_caller]
fn check_press(hz: u32, press_ms: u64, bounce_ms: u64, every_ms: u64, missed: f64) {
    let (trace, truth) = press(press_ms, bounce_ms, every_ms);
    let prepared = PreparedTrace::new(&trace, &truth, Period::from_hz(hz)).expect("valid");
    let measured = prepared.measure(&Follower);
    assert_eq!(measured.make.missed, missed, "{hz} Hz, press of {press_ms} ms, bounce of {bounce_ms} ms");
    assert_eq!(measured.false_edges.places, [], "{hz} Hz, press of {press_ms} ms, bounce of {bounce_ms} ms");
}

/// Common practice of the trade: for a hand-operated button, one sample a tick without any filter at 30 Hz catches
/// every press of 70 ms and more with bounce up to 33 ms; 10 Hz does not.
#[test]
fn follower_at_30_hz_catches_a_press_of_70_ms_and_at_10_hz_does_not() {
    for every_ms in [1, 2, 3, 5, 11, 32] {
        check_press(30, 70, 33, every_ms, 0.0);
        check_press(30, 150, 33, every_ms, 0.0);
    }
    // 10 Hz: of the 100 ms between two samples, 30 ms miss a clean press of 70 ms.
    check_press(10, 70, 0, 1, 0.3);
    check_press(10, 99, 0, 1, 0.01);
    check_press(10, 100, 0, 1, 0.0);
}

#[test]
fn replay_edge_exactly_on_a_sample_is_seen_by_that_sample() {
    let trace = Trace::new(Position::Open, 0, 100, vec![20, 45], 1).expect("rises");
    let changes = truth(&[(Change::Make, 20), (Change::Break, 45)]);
    let prepared = PreparedTrace::new(&trace, &changes, Period::from_ns(10)).expect("valid");
    let outcome = prepared.outcome(&Follower);
    let whole = |from, until| PhaseSpan { from, until };
    assert_eq!(
        outcome.reported,
        [
            // From phase 0 on, tick 2 falls at 20 ns or later.
            Reported { change: 0, tick: 2, phase: whole(0, 10) },
            Reported { change: 1, tick: 5, phase: whole(0, 5) },
            Reported { change: 1, tick: 4, phase: whole(5, 10) },
        ]
    );
    let latency = prepared.summarise(&outcome).make.latency.expect("reported");
    assert_eq!((latency.samples.best, latency.samples.worst), (1, 1));
    assert_eq!((latency.delay.best_ns, latency.delay.median_ns, latency.delay.below_ns), (0, 5, 10));
}

#[test]
fn replay_operation_without_an_edge_counts_as_a_missed_make_and_a_missed_break() {
    let trace = Trace::new(Position::Open, 0, 1_000, vec![205, 209], 1).expect("rises");
    let changes = truth(&[(Change::Make, 205), (Change::Break, 209)]);
    let measured =
        PreparedTrace::new(&trace, &changes, Period::from_ns(10)).expect("valid").measure(&Follower);
    let missed: Vec<_> =
        measured.missed.iter().map(|m| (m.change, m.at_ns, m.probability, m.phase)).collect();
    let first = PhaseSpan { from: 0, until: 5 };
    assert_eq!(missed, [(Change::Make, 205, 0.6, first), (Change::Break, 209, 0.6, first)]);
    assert_eq!(measured.make.missed_at_some_phase, 1);
    assert!(!measured.is_faithful());
}

#[test]
fn replay_false_edge_is_placed_in_the_trace() {
    let trace = Trace::new(Position::Open, 1_000, 2_000, vec![1_305, 1_309], 1).expect("rises");
    let measured = PreparedTrace::new(&trace, &[], Period::from_ns(10)).expect("valid").measure(&Follower);
    let places: Vec<_> =
        measured.false_edges.places.iter().map(|p| (p.change, p.from_ns, p.until_ns, p.mean)).collect();
    assert_eq!(places, [(Change::Make, 1_305, 1_309, 0.4), (Change::Break, 1_315, 1_319, 0.4)]);
    assert_eq!(measured.false_edges.probability, 0.4);
    let json = serde_json::to_value(&measured).expect("plain data");
    assert_eq!(json["false_edges"]["places"][1]["change"], "break");
    assert_eq!(json["break"]["latency"], serde_json::Value::Null);
}

#[test]
fn prepared_trace_too_long_for_exact_units_is_refused() {
    let period = Period::try_from_ratio(1, u32::MAX).expect("not 0");
    let fits = u64::MAX / 2 / u64::from(u32::MAX);
    let prepare = |end| {
        let trace = Trace::new(Position::Open, 0, end, vec![], 1).expect("empty");
        PreparedTrace::new(&trace, &[], period).map(|_| ())
    };
    assert_eq!(prepare(fits - 1), Ok(()));
    let refused = PrepareError::TooLong { span_ns: fits + 1, units_per_ns: u32::MAX.into() };
    assert_eq!(prepare(fits + 1), Err(refused));
}

#[test]
fn clock_measurement_with_tolerance_jitter_and_loss_stays_within_the_rounding_of_the_clock() {
    let (trace, truth) = press(200, 6, 1);
    let clock = TickClock::new(Period::from_ms(1)).tolerance_ppm(20_000).jitter_ns(100_000).lost(2);
    let draws = Draws { count: 200, seed: 1, shortest_dwell_ns: 150 * MS };
    let prepared = PreparedClock::new(&trace, &truth, &clock, draws).expect("valid");
    let measured = prepared.measure(&Unanimous(5));
    assert!(measured.is_faithful());
    assert_eq!(measured.exact().count(), 3);
    let drawn = measured.drawn.as_ref().expect("drawn");
    for (change, worst) in [(Change::Make, drawn.make), (Change::Break, drawn.break_)] {
        let worst = worst.expect("reported");
        let exact = measured.nominal.at(change).latency.as_ref().expect("reported");
        // 6 ms of bounce touch 7 samples at the most, 5 more confirm.
        assert!(worst.samples <= 12, "{worst:?}");
        let (_, below_ns) = clock.delay_ns(u32::try_from(worst.samples).expect("small"));
        assert!(worst.delay_ns <= below_ns, "{worst:?} against {below_ns}");
        // Loss and jitter do take longer than the nominal clock ever does.
        assert!(worst.delay_ns > exact.delay.below_ns, "{worst:?} against {exact:?}");
        assert!(measured.worst_delay_ns(change) >= Some(worst.delay_ns));
    }
    // Blind as it is after the first sample, this law survives the bounce only while it is longer than that.
    assert!(prepared.measure(&LockOut(8)).is_faithful());
    let careless = prepared.measure(&LockOut(3));
    assert!(!careless.is_faithful());
    assert!(
        careless.drawn.is_some_and(|drawn| drawn.unfaithful > 0 && drawn.first_unfaithful_seed.is_some())
    );
}
