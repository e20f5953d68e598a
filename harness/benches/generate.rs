//! Invented operations, and a hundred candidates over them.
//!
//! `cargo bench -p harness --bench generate`. Elements are operations. The last one is the whole job: operations
//! invented, sampled once a tick period, and judged against the truth for each of a hundred candidates.

use std::hint::black_box;
use std::time::Duration;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use debounce_core::{Period, Position, TickClock};
use harness::generate::{
    Actuation, Between, Disturbances, Disturber, Habit, InputStage, Made, Panel, PanelContact, Pickup,
    Preset, Timing,
};
use harness::law_text::LawParameters;
use harness::logic::Logic;
use harness::replay::judge;
use harness::sample::SampleClock;
use harness::with_law;
use rayon::prelude::*;

fn panel(name: &str, seed: u64, operations: u64) -> Panel {
    let preset = Preset::find(name).expect("a preset");
    let contact = PanelContact {
        routines: vec![Habit::find("presses").expect("a habit").routine(operations, Actuation::Usual)],
        ..PanelContact::new(name, preset.specimen(seed))
    };
    Panel { seed, resolution_ns: 1_000, contacts: vec![contact] }
}

fn disturbed(mut panel: Panel) -> Panel {
    let kind = Disturbances {
        pulses: Between(1, 3),
        pulse_ns: Between(20_000, 900_000),
        rest_ns: Between(5_000, 90_000),
    };
    let timing = Timing::Resting { permille: 250, clear_ns: 10_000_000 };
    panel.contacts[0].disturbers = vec![Disturber { pickup: Pickup::Pulses(kind), timing }];
    panel
}

/// Twenty-five of each sort, at two tick periods half each.
fn candidates() -> Vec<(u64, Logic)> {
    let texts = (2..27).flat_map(|n| {
        [
            format!("integrator {n}"),
            format!("shift-register {n}"),
            format!("state-machine confirm={n} lockout=2/1"),
            format!("state-machine confirm={n} patience=2 lockout=3/1"),
        ]
    });
    let logics = texts.map(|text| {
        let law: LawParameters = text.parse().expect("a law");
        Logic::try_new(&law).expect("a logic")
    });
    logics.enumerate().map(|(index, logic)| ([1_000, 2_000][index % 2], logic)).collect()
}

/// Edges that the candidates got wrong or missed.
fn judged(made: &Made, candidates: &[(u64, Logic)], phase_ns: u64) -> usize {
    let line = &made.lines[0];
    let trains = [1_000, 2_000].map(|us| {
        let clock = SampleClock::new(TickClock::new(Period::from_us(us as u32))).phase_ns(phase_ns);
        (us, clock.train(&line.trace))
    });
    let one = |(tick, logic): &(u64, Logic)| {
        let train = &trains.iter().find(|(us, _)| us == tick).expect("one of the two").1;
        let pass = with_law!(logic, law => judge(law, train, Position::Open, &line.truth));
        pass.missed.len() + pass.false_edges.len()
    };
    candidates.iter().map(one).sum()
}

/// Operations of one recording; many recordings keep the memory small.
const BLOCK: u64 = 1_000;

fn whole_job(operations: u64) -> usize {
    let candidates = candidates();
    let blocks = 0..operations.div_ceil(BLOCK) as u32;
    let block = |block: u32| {
        let made = disturbed(panel("tactile", u64::from(block), BLOCK)).generate(false).expect("short");
        judged(&made, &candidates, u64::from(block) * 7_919)
    };
    blocks.into_par_iter().map(block).sum()
}

fn generate(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("invented operations");
    group.throughput(Throughput::Elements(BLOCK));
    for name in ["tactile", "relay", "membrane"] {
        let panel = panel(name, 1, BLOCK);
        group.bench_function(format!("{name}, levels"), |bencher| {
            bencher.iter(|| black_box(&panel).generate(false))
        });
    }
    let with_noise = disturbed(panel("tactile", 1, BLOCK));
    group.bench_function("tactile, disturbed", |bencher| {
        bencher.iter(|| black_box(&with_noise).generate(false))
    });
    let mut network = with_noise.clone();
    network.contacts[0].stage =
        InputStage { apart_ns: 200_000, touching_ns: 100_000, ..InputStage::default() };
    group.bench_function("tactile, disturbed, behind a network", |bencher| {
        bencher.iter(|| black_box(&network).generate(false));
    });
    group.bench_function("tactile, disturbed, behind a network, volts", |bencher| {
        bencher.iter(|| black_box(&network).generate(true));
    });
    group.finish();

    let mut group = criterion.benchmark_group("whole job");
    let operations = std::env::var("OPERATIONS").ok().and_then(|text| text.parse().ok()).unwrap_or(20_000);
    group.sample_size(10).measurement_time(Duration::from_secs(10));
    group.throughput(Throughput::Elements(operations));
    group.bench_function("100 candidates, two threads", |bencher| {
        bencher.iter(|| whole_job(black_box(operations)))
    });
    group.finish();
}

criterion_group!(benches, generate);
criterion_main!(benches);
