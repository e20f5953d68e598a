//! Characterising ten million edges, beside one plain pass over them.
//!
//! `cargo bench -p harness --bench characterise`
#![allow(missing_docs)] // `criterion_group!` makes a public function without any.

use std::hint::black_box;
use std::time::Duration;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use debounce_core::Position;
use harness::characterise::{Figures, SegmentOptions, segment};
use harness::generate::{Between, Dice};
use harness::trace::Trace;

const EDGES: u64 = 10_000_000;

/// Bounces of 19 edges, 20 to 400 us apart, one every 0.1 to 0.4 s.
fn recording() -> Trace {
    let mut dice = Dice::new(5, 0);
    let (mut now, mut edges) = (0, Vec::new());
    while (edges.len() as u64) < EDGES {
        now += dice.draw(Between(100_000_000, 400_000_000));
        edges.push(now);
        for _ in 0..18 {
            now += dice.draw(Between(20_000, 400_000));
            edges.push(now);
        }
    }
    edges.truncate(EDGES as usize);
    Trace::new(Position::Open, 0, now + 400_000_000, edges, 1_000).expect("in order")
}

fn characterise(criterion: &mut Criterion) {
    let trace = recording();
    let mut group = criterion.benchmark_group("characterise");
    group.throughput(Throughput::Elements(EDGES)).sample_size(10).measurement_time(Duration::from_secs(20));
    group.bench_function("plain_pass", |bencher| {
        bencher.iter(|| {
            let runs = trace.edges().windows(2).map(|pair| pair[1] - pair[0]);
            black_box(runs.max())
        });
    });
    group.bench_function("segment", |bencher| {
        bencher.iter(|| black_box(segment(&trace, &SegmentOptions::default()).expect("operations")));
    });
    let found = segment(&trace, &SegmentOptions::default()).expect("operations");
    assert_eq!(found.operations.len() as u64, EDGES / 19);
    group.bench_function("figures", |bencher| bencher.iter(|| black_box(Figures::of(&found))));
    group.finish();
}

criterion_group!(benches, characterise);
criterion_main!(benches);
