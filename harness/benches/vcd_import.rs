//! VCD import in bytes per second, beside plain reading of the same file.
//!
//! `cargo bench -p harness --bench vcd_import`
#![allow(missing_docs)] // `criterion_group!` makes a public function without any.

use std::fs::File;
use std::hint::black_box;
use std::io::{self, BufWriter, Read, Write};
use std::path::Path;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use harness::trace::{ReadOptions, read_path};

/// Time marks in the file, about 54 MB in all.
const MARKS: u64 = 3_000_000;

/// Sixteen wires and a bus of eight bits, two changes at each time mark; the wire `s.w0` changes every 8 marks.
fn write_recording(path: &Path) -> io::Result<u64> {
    let mut out = BufWriter::new(File::create(path)?);
    writeln!(out, "$timescale 1 ns $end\n$scope module s $end")?;
    let code = |wire: u8| char::from(b'!' + wire);
    for wire in 0..16 {
        writeln!(out, "$var wire 1 {} w{wire} $end", code(wire))?;
    }
    writeln!(out, "$var wire 8 ~ bus [7:0] $end\n$upscope $end\n$enddefinitions $end")?;
    let mut levels = [0_u8; 16];
    for mark in 0..MARKS {
        writeln!(out, "#{}", 1_000_000_000 + mark * 250)?;
        let wire = (mark % 8) as u8;
        levels[usize::from(wire)] ^= 1;
        writeln!(out, "{}{}", levels[usize::from(wire)], code(wire))?;
        if mark % 4 == 0 {
            writeln!(out, "b{:08b} ~", mark as u8)?;
        }
    }
    out.flush()?;
    Ok(path.metadata()?.len())
}

/// The floor: every byte once through a buffer of the size that the importer uses.
fn read_plainly(path: &Path) -> io::Result<u64> {
    let mut file = File::open(path)?;
    let mut block = vec![0; 1 << 18];
    let mut sum = 0;
    loop {
        let read = file.read(&mut block)?;
        if read == 0 {
            return Ok(sum);
        }
        black_box(&block[..read]);
        sum += read as u64;
    }
}

fn import(criterion: &mut Criterion) {
    let folder = tempfile::tempdir().expect("a folder for the recording");
    let path = folder.path().join("recording.vcd");
    let bytes = write_recording(&path).expect("room for the recording");
    let mut group = criterion.benchmark_group("vcd");
    group.throughput(Throughput::Bytes(bytes)).sample_size(10);
    group.bench_function("plain_reading", |bencher| {
        bencher.iter(|| assert_eq!(read_plainly(&path).expect("reads"), bytes));
    });
    for channel in ["s.w0", "s.bus[0]"] {
        let mut options = ReadOptions::default();
        options.channel = Some(channel.to_owned());
        let edges = read_path(&path, &options).expect("imports").trace.edges().len();
        assert!(edges as u64 >= MARKS / 8 - 2 || channel != "s.w0", "{channel} has {edges} edges");
        group.bench_function(format!("import_{channel}"), |bencher| {
            bencher.iter(|| black_box(read_path(&path, &options).expect("imports")));
        });
    }
    group.finish();
}

criterion_group!(benches, import);
criterion_main!(benches);
