//! Proof: how many states of contact, disturbances and law together are explored in a second, how the time grows
//! with the envelope, and what a usual proof costs.
//!
//! `cargo bench -p harness --bench prove`. Elements are product states; a proof counts whole, with the enumeration of
//! envelope and law, the exploration, the latencies and both witnesses.

use std::hint::black_box;
use std::time::Duration;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use debounce_core::{Envelope, MajorityRegister, StateMachine};
use harness::prove::{Environment, LawTable, Limits, Proof, prove, prove_within};

/// The envelope that is made four and sixteen times as large.
fn envelope(times: u32) -> Envelope {
    Envelope::clean(40 * times, 40 * times)
        .bounce(8 * times, 8 * times)
        .glitch(2 * times, 2 * times)
        .quiet(4 * times)
}

fn limits(threads: usize) -> Limits {
    let mut limits = Limits::default();
    limits.threads = threads;
    limits
}

/// The machine that reaches the limit, proved.
fn proved(envelope: &Envelope, limits: &Limits) -> Proof {
    let law = StateMachine::<u16>::for_envelope(envelope).expect("quiet is long enough");
    let proof = prove_within(&LawTable::of(&law).expect("a law"), envelope, limits).expect("fits");
    assert!(proof.bounds().is_some(), "the machine is faithful in the envelope it was made for");
    proof
}

fn growth(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("growth");
    group.sample_size(10).measurement_time(Duration::from_secs(8));
    for times in [1, 4, 16] {
        let envelope = envelope(times);
        let states = proved(&envelope, &limits(1)).states;
        group.throughput(Throughput::Elements(states));
        for (cores, threads) in [("one core", 1), ("two cores", 2)] {
            group.bench_function(format!("all numbers x{times}, {states} states, {cores}"), |bencher| {
                bencher.iter(|| proved(black_box(&envelope), &limits(threads)));
            });
        }
        group.throughput(Throughput::Elements(Environment::of(&envelope).expect("fits").len() as u64));
        group.bench_function(format!("envelope alone, all numbers x{times}"), |bencher| {
            bencher.iter(|| Environment::of(black_box(&envelope)).expect("fits"));
        });
    }
    group.finish();
}

/// A window of 16 samples scatters over its table: few pairs of it and the envelope ever occur, and they are kept in
/// pages. With a longer bounce they are more.
fn sparse(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("sparse");
    group.sample_size(10).measurement_time(Duration::from_secs(8));
    let law = LawTable::of(&MajorityRegister::<u16>::new(9, 16)).expect("a law");
    for bounce in [3, 12] {
        let envelope = Envelope::clean(60, 60).bounce(bounce, bounce).glitch(1, 1).quiet(12);
        let states = prove_within(&law, &envelope, &limits(1)).expect("fits").states;
        group.throughput(Throughput::Elements(states));
        for (cores, threads) in [("one core", 1), ("two cores", 2)] {
            group.bench_function(format!("9 of 16, {states} states, {cores}"), |bencher| {
                bencher.iter(|| prove_within(&law, black_box(&envelope), &limits(threads)).expect("fits"));
            });
        }
    }
    group.finish();
}

fn usual(criterion: &mut Criterion) {
    let envelope = Envelope::clean(40, 40).bounce(6, 6).glitch(1, 1).quiet(10);
    let law = StateMachine::<u8>::for_envelope(&envelope).expect("quiet is long enough");
    let states = prove(&law, &envelope).expect("fits").states;
    criterion.bench_function(&format!("usual proof, {states} states"), |bencher| {
        bencher.iter(|| prove(black_box(&law), &envelope).expect("fits"));
    });
}

criterion_group!(benches, usual, growth, sparse);
criterion_main!(benches);
