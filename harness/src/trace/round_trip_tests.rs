//! Written and read back, a trace is the same; and no bytes whatever make a reader panic.

use debounce_core::Position::{self, Closed, Open};
use proptest::prelude::*;

use super::{MAX_FAULTS, ReadOptions, Thresholds, TimeUnit, Trace, read_bytes, write_vcd};

fn written(traces: &[(&str, &Trace)], comment: &str) -> String {
    let mut file = Vec::new();
    write_vcd(&mut file, traces, comment).expect("memory");
    String::from_utf8(file).expect("ASCII")
}

fn trace(initial: Position, start_ns: u64, end_ns: u64, edges: &[u64]) -> Trace {
    Trace::new(initial, start_ns, end_ns, edges.to_vec(), 1).expect("in order")
}

#[track_caller]
fn read_back(file: &str, channel: &str) -> Trace {
    let options = ReadOptions { channel: Some(channel.to_owned()), ..ReadOptions::default() };
    read_bytes("f", file.as_bytes(), &options).unwrap_or_else(|error| panic!("{file}\n{error}")).trace
}

#[test]
fn write_vcd_text_is_exact_and_plain() {
    let button = trace(Open, 0, 9, &[3, 5]);
    let lamp = trace(Closed, 2, 7, &[5]);
    let expected = "$comment\n  invented; $ end of it\n$end\n$timescale 1 ns $end\n$scope module panel $end\n\
        $var wire 1 ! button $end\n$upscope $end\n$scope module harness $end\n$var wire 1 \" lamp $end\n\
        $upscope $end\n$enddefinitions $end\n#0\n$dumpvars\n0!\nx\"\n$end\n#2\n1\"\n#3\n1!\n#5\n0!\n0\"\n#7\nx\"\n#9\n";
    assert_eq!(written(&[("panel.button", &button), ("lamp", &lamp)], "invented; $end of it"), expected);
}

#[test]
fn write_vcd_edge_cases_come_back() {
    for whole in [
        trace(Open, 0, 0, &[]),
        trace(Closed, 7, 7, &[]),
        trace(Closed, 7, 9, &[]),
        trace(Open, 7, 9, &[8]),
        trace(Open, 7, 9, &[8, 9]),
        trace(Open, 0, u64::MAX, &[1, u64::MAX]),
        trace(Closed, u64::MAX, u64::MAX, &[]),
    ] {
        assert_eq!(read_back(&written(&[("a", &whole)], ""), "a"), whole);
    }
}

#[test]
fn write_vcd_strange_names_can_be_read_back() {
    let whole = trace(Open, 0, 9, &[3]);
    for (name, channel) in [
        ("Channel A", "Channel_A"),
        ("", "_"),
        ("a..b", "a._.b"),
        ("$end", "_end"),
        ("bus[3]", "bus[3]"),
        ("top.bus[3]", "top.bus[3]"),
        ("\u{b5}-switch", "\u{b5}-switch"),
    ] {
        assert_eq!(read_back(&written(&[(name, &whole)], ""), channel), whole, "{name}");
    }
}

#[test]
fn write_vcd_many_traces_get_codes_of_their_own() {
    let names: Vec<String> = (0..9100).map(|number| format!("c{number}")).collect();
    let (open, closed) = (trace(Open, 0, 9, &[]), trace(Closed, 0, 9, &[4]));
    let traces: Vec<_> = names
        .iter()
        .enumerate()
        .map(|(n, name)| (name.as_str(), if n % 7 == 0 { &closed } else { &open }))
        .collect();
    let file = written(&traces, "");
    let codes: std::collections::HashSet<_> =
        file.lines().filter_map(|line| line.strip_prefix("$var wire 1 ")?.split(' ').next()).collect();
    assert_eq!(codes.len(), names.len());
    for number in [0, 93, 94, 95, 94 * 95 - 1, 94 * 95, 9099] {
        assert_eq!(&read_back(&file, &names[number]), traces[number].1, "{number}");
    }
}

fn trace_strategy() -> impl Strategy<Value = Trace> {
    let gap = prop_oneof![Just(1_u64), 1_u64..100, 1_u64..1_000_000_000_000];
    let start = prop_oneof![Just(0_u64), any::<u64>().prop_map(|start| start / 2)];
    (any::<bool>(), start, prop::collection::vec(gap, 0..50), prop_oneof![Just(0_u64), 0_u64..1_000_000])
        .prop_map(|(closed, start_ns, gaps, tail)| {
            let edges: Vec<u64> = gaps
                .iter()
                .scan(start_ns, |now, gap| {
                    *now += gap;
                    Some(*now)
                })
                .collect();
            let end_ns = edges.last().unwrap_or(&start_ns) + tail;
            Trace::new(Position::closed_if(closed), start_ns, end_ns, edges, 1).expect("in order")
        })
}

/// Pieces that get far into the readers, joined at random.
fn piece() -> impl Strategy<Value = String> {
    let known = prop::sample::select(vec![
        "$timescale 1 ns $end ",
        "$timescale ",
        "100fs",
        "$scope module top $end\n",
        "$upscope $end ",
        "$var wire 1 ! a $end\n",
        "$var wire 8 \" bus [7:0] $end ",
        "$var real 64 # v $end ",
        "$var ",
        "$end ",
        "$",
        "$enddefinitions $end\n",
        "$dumpvars ",
        "$dumpoff\n",
        "$comment ",
        "#0 ",
        "#5\n",
        "#",
        "#18446744073709551615 ",
        "0! ",
        "1!\n",
        "x!",
        "b01x ",
        "bz \" ",
        "r1.5 # ",
        "rnan #",
        "s",
        "p",
        "b",
        "\r\n",
        "\n",
        "\t",
        " ",
        "time (ms),level\n",
        "(s),(V)\n",
        "0.5,1\n",
        "1;0\n",
        "1,5;0,5\n",
        "-1e-9,0\n",
        "1e30,2\n",
        "nan,inf\n",
        ",,,\n",
        "\"",
        "0,1\n",
        "5,x\n",
        "9 9\n",
        "-170141183460469231731687303715884105728,1\n",
        "1e-40,1\n",
        "-1e-300000,0\n",
        "18446744073709551615,1\n",
        "e",
        "-",
        "+",
        ".",
        "[",
        "\u{b5}",
        "# ",
        ";",
    ]);
    prop_oneof![8 => known.prop_map(str::to_owned), 1 => "[ -~]{0,6}", 1 => "\\PC{0,3}"]
}

fn option_sets() -> Vec<ReadOptions> {
    let thresholds = Thresholds::try_new(0.8, 2.0).ok();
    let channel = |name: &str| Some(name.to_owned());
    vec![
        ReadOptions::default(),
        ReadOptions {
            channel: channel("a"),
            time_unit: Some(TimeUnit::Nanoseconds),
            ..ReadOptions::default()
        },
        ReadOptions { channel: channel("bus[9]"), ..ReadOptions::default() },
        ReadOptions { channel: channel("bus[3]"), ..ReadOptions::default() },
        ReadOptions {
            channel: channel("2"),
            time_unit: Some(TimeUnit::Seconds),
            thresholds,
            ..ReadOptions::default()
        },
        ReadOptions { channel: channel("v"), thresholds, ..ReadOptions::default() },
    ]
}

/// Reads with every set of options; a result must be one or the other, and an error must say something.
fn read_all_ways(bytes: &[u8]) {
    for options in option_sets() {
        if let Err(error) = read_bytes("f", bytes, &options) {
            assert!((1..=MAX_FAULTS).contains(&error.faults().len()));
            assert!(error.faults().iter().all(|fault| !fault.message().is_empty()));
        }
    }
}

proptest! {
    #[test]
    fn write_vcd_read_back_gives_the_same_trace(whole in trace_strategy()) {
        prop_assert_eq!(read_back(&written(&[("top.a", &whole)], "any"), "top.a"), whole);
    }

    #[test]
    fn csv_of_a_trace_reads_back_as_the_same_trace(whole in trace_strategy()) {
        let mut file = "time (us);level\n".to_owned();
        let changes = std::iter::once(whole.start_ns()).chain(whole.edges().iter().copied());
        let mut last = 0;
        for (index, at_ns) in changes.enumerate() {
            let level = u8::from(whole.position_after(index).is_closed());
            file.push_str(&format!("{},{:03};{level}\n", at_ns / 1000, at_ns % 1000));
            last = at_ns;
        }
        let read = read_bytes("f", file.as_bytes(), &ReadOptions::default()).expect("legal").trace;
        prop_assert_eq!(read.edges(), whole.edges());
        prop_assert_eq!((read.initial(), read.start_ns(), read.end_ns()), (whole.initial(), whole.start_ns(), last));
    }

    #[test]
    fn readers_never_panic_on_any_bytes(bytes in prop::collection::vec(any::<u8>(), 0..300)) {
        read_all_ways(&bytes);
    }

    #[test]
    fn readers_never_panic_on_joined_pieces(pieces in prop::collection::vec(piece(), 0..40)) {
        read_all_ways(pieces.concat().as_bytes());
    }

    #[test]
    fn vcd_reader_never_panics_behind_a_sound_header(pieces in prop::collection::vec(piece(), 0..40)) {
        let header = "$timescale 10 ps $end $var wire 1 ! a $end $var wire 8 \" bus $end $var real 1 # v $end \
            $enddefinitions $end ";
        read_all_ways(format!("{header}{}", pieces.concat()).as_bytes());
    }
}
