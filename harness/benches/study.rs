//! The main job on the built-in demonstration: all of it, and its parts.
//!
//! `cargo bench -p harness --bench study`. Elements are candidates. For the whole process, with reading and writing:
//! `cargo build --release -p harness`, then `time target/release/harness study`.

use std::hint::black_box;
use std::path::Path;
use std::time::Duration;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use harness::choose::{Candidate, Preference};
use harness::demo;
use harness::law_text::LawParameters;
use harness::problem::SourceText;
use harness::requirement::{Requirement, parse};
use harness::study::{Observed, Study, observe};
use harness::trace::{ReadOptions, read_bytes};

/// A kind of law and how it is told from the others.
type Kind = (&'static str, fn(&LawParameters) -> bool);

fn requirement() -> Requirement {
    parse(SourceText::new(demo::REQUIREMENT_NAME, demo::REQUIREMENT)).expect("the demo's own")
}

fn observed() -> Observed {
    let mut options = ReadOptions::default();
    options.resolution_ns = Some(demo::RESOLUTION_NS);
    let recording = read_bytes(demo::RECORDING_NAME, demo::RECORDING, &options).expect("the demo's own");
    let name = Path::new(demo::RECORDING_NAME).display().to_string();
    observe(name, recording, &Default::default()).expect("the demo's own")
}

fn studied(observed: Observed, requirement: &Requirement, only: Option<Vec<LawParameters>>) -> Study {
    Study::among(vec![observed], requirement, Preference::default(), only, |_| ()).expect("the demo holds")
}

fn study(criterion: &mut Criterion) {
    let mut group = criterion.benchmark_group("study of the demo");
    group.sample_size(10).measurement_time(Duration::from_secs(8));
    group.bench_function("reading and segmentation", |bencher| bencher.iter(observed));
    let (requirement, observed) = (requirement(), observed());
    let all = studied(observed.clone(), &requirement, None).ranking.candidates;
    group.throughput(Throughput::Elements(all.len() as u64));
    group.bench_function(format!("all {} candidates", all.len()), |bencher| {
        bencher.iter(|| studied(black_box(observed.clone()), &requirement, None));
    });
    let kinds: [Kind; 4] = [
        ("integrators", |law| matches!(law, LawParameters::Integrator { .. })),
        ("shift registers", |law| matches!(law, LawParameters::ShiftRegister { .. })),
        ("majority registers", |law| matches!(law, LawParameters::MajorityRegister { .. })),
        ("state machines", |law| matches!(law, LawParameters::StateMachine { .. })),
    ];
    for (name, is_of_kind) in kinds {
        let mut laws: Vec<LawParameters> =
            all.iter().map(|one: &Candidate| one.parameters).filter(is_of_kind).collect();
        laws.sort_by_key(ToString::to_string);
        laws.dedup();
        let judged = studied(observed.clone(), &requirement, Some(laws.clone())).ranking.candidates.len();
        group.throughput(Throughput::Elements(judged as u64));
        group.bench_function(format!("{name} alone, {judged} candidates"), |bencher| {
            bencher.iter(|| studied(observed.clone(), &requirement, Some(laws.clone())));
        });
    }
    group.finish();
}

criterion_group!(benches, study);
criterion_main!(benches);
