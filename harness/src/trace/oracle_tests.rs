//! Two VCD readers written by others, wellen and vcd, on what we write and on files that all three can read.
//!
//! Both have known gaps (times that go back, a missing final newline, nine-value logic, files cut short), so
//! they are asked only where they are right.

use std::io::Cursor;

use debounce_core::Position;
use proptest::prelude::*;

use super::{ReadOptions, Trace, read_bytes, write_vcd};

/// What a reader says of one bit: each time it was written, with what.
type Changes = Vec<(u64, char)>;

fn by_wellen(file: &[u8], name: &str, bit_from_right: usize) -> Changes {
    let mut waveform = wellen::simple::read_from_reader(Cursor::new(file.to_vec())).expect("wellen reads it");
    let hierarchy = waveform.hierarchy();
    let signal = hierarchy
        .all_vars()
        .map(|variable| &hierarchy[variable])
        .find(|variable| variable.full_name(hierarchy) == name)
        .expect("wellen knows it")
        .signal_ref();
    waveform.load_signals(&[signal]);
    let times = waveform.time_table().to_vec();
    let bit = |bits: String| bits.chars().rev().nth(bit_from_right).expect("wide enough");
    waveform
        .get_signal(signal)
        .expect("loaded")
        .iter_changes()
        .map(|(index, value)| (times[index as usize], bit(value.to_bit_string().expect("bits"))))
        .collect()
}

fn by_vcd(file: &[u8], path: &[&str], bit_from_right: usize) -> (Changes, u64) {
    let mut parser = vcd::Parser::new(file);
    let header = parser.parse_header().expect("vcd reads the header");
    let wanted = header.find_var(path).expect("vcd knows it").code;
    let letter = |value: vcd::Value| value.to_string().chars().next().expect("a letter");
    let (mut now, mut changes) = (0, Changes::new());
    for command in parser {
        match command.expect("vcd reads on") {
            vcd::Command::Timestamp(time) => now = time,
            vcd::Command::ChangeScalar(code, value) if code == wanted => changes.push((now, letter(value))),
            vcd::Command::ChangeVector(code, bits) if code == wanted => {
                let bits: Vec<_> = bits.into_iter().collect();
                let value = bits.len().checked_sub(1 + bit_from_right).map(|index| letter(bits[index]));
                // It does not extend short vectors; the rule for 0 and 1 is applied here.
                changes.push((now, value.unwrap_or('0')));
            }
            _ => {}
        }
    }
    (changes, now)
}

/// The position at the start and the edges, with unknown values held.
fn turned(changes: &Changes) -> (Position, Vec<u64>) {
    let known: Vec<_> = changes.iter().filter(|(_, value)| matches!(value, '0' | '1')).collect();
    let initial = known[0].1;
    let mut current = initial;
    let mut edges = Vec::new();
    for (time, value) in known {
        if *value != current {
            current = *value;
            edges.push(*time);
        }
    }
    (Position::closed_if(initial == '1'), edges)
}

fn trace_strategy() -> impl Strategy<Value = Trace> {
    let gaps = prop::collection::vec(prop_oneof![1_u64..5, 1_u64..10_000_000_000], 0..20);
    (any::<bool>(), 0_u64..1_000_000, gaps, 0_u64..1_000).prop_map(|(closed, start_ns, gaps, tail)| {
        let mut now = start_ns;
        let edges: Vec<u64> = gaps
            .into_iter()
            .map(|gap| {
                now += gap;
                now
            })
            .collect();
        Trace::new(Position::closed_if(closed), start_ns, now + tail, edges, 1).expect("in order")
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 64, ..ProptestConfig::default() })]

    #[test]
    fn write_vcd_is_read_alike_by_other_readers(
        first in trace_strategy(),
        second in trace_strategy(),
    ) {
        let mut file = Vec::new();
        write_vcd(&mut file, &[("top.panel.button", &first), ("top.lamp", &second)], "invented").expect("memory");
        for (path, trace) in [(&["top", "panel", "button"][..], &first), (&["top", "lamp"][..], &second)] {
            let expected = (trace.initial(), trace.edges().to_vec());
            prop_assert_eq!(&turned(&by_wellen(&file, &path.join("."), 0)), &expected);
            let (changes, end_ns) = by_vcd(&file, path, 0);
            prop_assert_eq!(&turned(&changes), &expected);
            prop_assert_eq!(end_ns, first.end_ns().max(second.end_ns()));
        }
    }

    #[test]
    fn vcd_reader_agrees_with_other_readers(
        steps in prop::collection::vec(
            (1_u64..1000, prop::option::of(prop::sample::select(vec!["0", "1", "x", "z"])), prop::option::of(0_u32..256)),
            1..40,
        ),
        bit in 0_usize..8,
    ) {
        let mut file = "$timescale 10 us $end\n$scope module top $end\n$var wire 1 ! a $end\n\
            $var reg 8 \"# bus [7:0] $end\n$upscope $end\n$enddefinitions $end\n#0\n$dumpvars\n0!\nb0 \"#\n$end\n"
            .to_owned();
        let mut now = 0;
        for (gap, scalar, vector) in steps {
            now += gap;
            file.push_str(&format!("#{now}\n"));
            if let Some(value) = scalar {
                file.push_str(&format!("{value}!\n"));
            }
            if let Some(value) = vector {
                file.push_str(&format!("b{value:b} \"#\n"));
            }
        }
        let bus_bit = format!("top.bus[{bit}]");
        for (channel, wellen_name, name, bit) in [("top.a", "top.a", "a", 0), (&bus_bit, "top.bus", "bus", bit)] {
            let options = ReadOptions { channel: Some(channel.to_owned()), ..ReadOptions::default() };
            let trace = read_bytes("f", file.as_bytes(), &options).expect("legal").trace;
            let scaled = |changes: &Changes| {
                let (initial, edges) = turned(changes);
                (initial, edges.into_iter().map(|edge| edge * 10_000).collect::<Vec<_>>())
            };
            let expected = (trace.initial(), trace.edges().to_vec());
            prop_assert_eq!(&scaled(&by_wellen(file.as_bytes(), wellen_name, bit)), &expected);
            let (changes, end) = by_vcd(file.as_bytes(), &["top", name], bit);
            prop_assert_eq!(&scaled(&changes), &expected);
            prop_assert_eq!(end * 10_000, trace.end_ns());
        }
    }
}
