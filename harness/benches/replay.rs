//! Replay: the cost of measuring one law at every phase, and of an hour at 1 MHz.
//!
//! `cargo bench -p harness --bench replay`. Elements are edges of the line, unless the name says ticks.

use std::hint::black_box;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use debounce_core::{Change, Law, Machine, Period, Position, TickClock};
use harness::replay::{PreparedTrace, follow};
use harness::sample::SampleClock;
use harness::trace::Trace;
use harness::truth::TruthChange;
use rand::rngs::ChaCha8Rng;
use rand::{RngExt, SeedableRng};

/// A saturating count between 0 and this, which reports at either end.
struct Count(u32);

impl Machine for Count {
    type Input = Position;
    type Output = Option<Change>;
    type State = (u32, Position);

    fn step(&self, (count, output): &mut Self::State, sample: Position) -> Option<Change> {
        *count = if sample.is_closed() { (*count + 1).min(self.0) } else { count.saturating_sub(1) };
        let end = if sample.is_closed() { self.0 } else { 0 };
        (*count == end && *output != sample).then(|| {
            *output = sample;
            sample.reached_by()
        })
    }
}

impl Law for Count {
    fn rest(&self, position: Position) -> Self::State {
        (if position.is_closed() { self.0 } else { 0 }, position)
    }

    fn output(&self, state: &Self::State) -> Position {
        state.1
    }
}

/// This many samples in a row that differ from the output.
struct InARow(u32);

impl Machine for InARow {
    type Input = Position;
    type Output = Option<Change>;
    type State = (u32, Position);

    fn step(&self, (count, output): &mut Self::State, sample: Position) -> Option<Change> {
        *count = if sample == *output { 0 } else { *count + 1 };
        (*count == self.0).then(|| {
            (*count, *output) = (0, sample);
            sample.reached_by()
        })
    }
}

impl Law for InARow {
    fn rest(&self, position: Position) -> Self::State {
        (0, position)
    }

    fn output(&self, state: &Self::State) -> Position {
        state.1
    }
}

/// Sixty invented operations, spread over `span_ns`; every change bounces for up to 5 ms in 9 or 11 edges.
fn recording(span_ns: u64) -> (Trace, Vec<TruthChange>) {
    let mut rng = ChaCha8Rng::seed_from_u64(20);
    let (mut edges, mut truth) = (Vec::new(), Vec::new());
    let changes: u64 = 120;
    for index in 0..changes {
        let at_ns = span_ns * (index + 1) / (changes + 2) + rng.random_range(0..1_000_000);
        let change = if index % 2 == 0 { Change::Make } else { Change::Break };
        truth.push(TruthChange { change, at_ns });
        let mut bounce: Vec<u64> = (0..if rng.random_bool(0.5) { 8 } else { 10 })
            .map(|_| at_ns + rng.random_range(1..5_000_000))
            .collect();
        bounce.sort_unstable();
        edges.push(at_ns);
        edges.append(&mut bounce);
    }
    (Trace::new(Position::Open, 0, span_ns, edges, 1).expect("rises"), truth)
}

fn replay(criterion: &mut Criterion) {
    let minute = 60_000_000_000;
    let (trace, truth) = recording(minute);
    let edges = trace.edges().len() as u64;

    let mut group = criterion.benchmark_group("minute, 60 operations, every phase");
    group.throughput(Throughput::Elements(edges));
    group.bench_function("prepare at 1 ms", |bencher| {
        bencher.iter(|| PreparedTrace::new(black_box(&trace), &truth, Period::from_ms(1)).expect("fits"));
    });
    for (name, us) in [("5 ms", 5_000), ("1 ms", 1_000), ("0.1 ms", 100)] {
        let prepared = PreparedTrace::new(&trace, &truth, Period::from_us(us)).expect("fits");
        let ticks = 10_000 / us;
        group.bench_function(format!("measure 10 ms in a row at {name}"), |bencher| {
            bencher.iter(|| prepared.measure(black_box(&InARow(ticks))));
        });
        group.bench_function(format!("measure a count of 10 ms at {name}"), |bencher| {
            bencher.iter(|| prepared.measure(black_box(&Count(ticks))));
        });
        group.bench_function(format!("outcome of a count of 10 ms at {name}"), |bencher| {
            bencher.iter(|| prepared.outcome(black_box(&Count(ticks))));
        });
    }
    // The careless case: every bounce reports many false edges.
    let prepared = PreparedTrace::new(&trace, &truth, Period::from_us(100)).expect("fits");
    group.bench_function("measure no filter at 0.1 ms", |bencher| {
        bencher.iter(|| prepared.measure(black_box(&InARow(1))));
    });
    group.finish();

    let (trace, truth) = recording(60 * minute);
    let clock = SampleClock::new(TickClock::new(Period::from_us(1)));
    let train = clock.train(&trace);
    let prepared = PreparedTrace::new(&trace, &truth, clock.period()).expect("fits");
    for (name, elements) in [("edges", edges), ("ticks", train.samples())] {
        let mut group = criterion.benchmark_group(format!("hour at 1 MHz, {name}"));
        group.throughput(Throughput::Elements(elements));
        group.bench_function("one phase, 10 in a row", |bencher| {
            bencher.iter(|| follow(black_box(&InARow(10)), &train, Position::Open));
        });
        group.bench_function("one phase, 10 ms in a row", |bencher| {
            bencher.iter(|| follow(black_box(&InARow(10_000)), &train, Position::Open));
        });
        group.bench_function("every phase, 10 ms in a row", |bencher| {
            bencher.iter(|| prepared.measure(black_box(&InARow(10_000))));
        });
        group.finish();
    }
}

criterion_group!(benches, replay);
criterion_main!(benches);
