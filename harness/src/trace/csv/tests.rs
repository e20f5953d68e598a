//! Files as instruments and scripts write them, and what is refused. All of them invented.

use debounce_core::Position::{self, Closed, Open};

use crate::trace::{
    ChannelKind, DecimalMark, Delimiter, Lack, Note, Polarity, ReadError, ReadOptions, Recording, Thresholds,
    TimeUnit, Unknown, read_bytes,
};

fn plain() -> ReadOptions {
    ReadOptions::default()
}

fn with_thresholds(channel: Option<&str>) -> ReadOptions {
    let thresholds = Thresholds::try_new(0.8, 2.0).expect("in order");
    ReadOptions { thresholds: Some(thresholds), channel: channel.map(str::to_owned), ..plain() }
}

fn read(text: &str, options: &ReadOptions) -> Result<Recording, ReadError> {
    read_bytes("f.csv", text.as_bytes(), options)
}

#[track_caller]
fn check(text: &str, options: &ReadOptions, initial: Position, edges: &[u64], end_ns: u64) -> Recording {
    let recording = read(text, options).unwrap_or_else(|error| panic!("{text}\n{error}\n{:?}", error.help()));
    let trace = &recording.trace;
    assert_eq!((trace.initial(), trace.edges(), trace.end_ns()), (initial, edges, end_ns), "{text}");
    recording
}

#[track_caller]
fn refused(text: &str, options: &ReadOptions, lines: &[&str]) -> ReadError {
    let error = read(text, options).expect_err(text);
    let expected: Vec<_> = lines.iter().map(|line| format!("f.csv:{line}")).collect();
    assert_eq!(error.to_string(), expected.join("\n"), "{text}");
    error
}

const MS: u64 = 1_000_000;

#[test]
fn csv_changes_with_header_are_read() {
    let recording =
        check("time (ms),button\n0,0\n5,1\n9.5,0\n20,0\n", &plain(), Open, &[5 * MS, 19 * MS / 2], 20 * MS);
    assert_eq!(recording.channel, "button");
    assert_eq!(recording.trace.resolution_ns(), MS / 10);
    assert_eq!(recording.notes, []);
}

/// Oscilloscopes put the start and the step of the record into columns that only the header has.
#[test]
fn csv_header_with_more_columns_than_the_data_keeps_the_name_of_the_channel() {
    let rows = "0.0,0\n0.1,0\n0.2,3\n0.3,3\n";
    for header in
        ["Time,CH1,Start,Step\ns,V,0.0,0.1\n", "Time,CH1,Start,Step\ns,V,,\n", "Time (s),CH1,Start\n"]
    {
        let ms = 100 * MS;
        let recording = check(&[header, rows].concat(), &with_thresholds(None), Open, &[2 * ms], 4 * ms);
        assert_eq!((recording.channel.as_str(), recording.notes), ("CH1", vec![]), "{header}");
    }
    let numbered = "X,CHAN1,Start,Step\nSequence,Volt,-6e-4,2e-4\n0,3\n1,3\n2,0\n3,0\n";
    let given = ReadOptions { sample_period_ns: Some(MS), ..with_thresholds(None) };
    let recording = check(numbered, &given, Closed, &[2 * MS], 4 * MS);
    assert_eq!((recording.channel.as_str(), recording.notes), ("CHAN1", vec![]));
}

#[test]
fn csv_without_header_fractions_are_seconds() {
    let recording = check("0.000,1\n0.005,0\n0.020,1", &plain(), Closed, &[5 * MS, 20 * MS], 20 * MS);
    assert_eq!(recording.channel, "column 2");
    assert_eq!(recording.notes, [Note::SecondsAssumed]);
    assert_eq!(recording.trace.resolution_ns(), MS);
}

#[test]
fn csv_whole_times_without_unit_are_refused_unless_given() {
    let text = "0,1\n5,0\n20,1\n";
    let error = refused(text, &plain(), &[" has whole numbers as times and does not say in which unit"]);
    let help = "give the unit, or name it in the header, as in \"time (us),level\"; or the sample period, where they \
                count samples";
    assert_eq!(error.help(), Some(help));
    let given = ReadOptions { time_unit: Some(TimeUnit::Microseconds), ..plain() };
    check(text, &given, Closed, &[5_000, 20_000], 20_000);
}

#[test]
fn csv_even_samples_stand_for_a_period_each() {
    let recording = check("t/us,level\n0,0\n10,0\n20,1\n30,1\n", &plain(), Open, &[20_000], 40_000);
    assert_eq!(recording.trace.resolution_ns(), 10_000);
    // Rounding in the file makes steps of 3 and 4 units: the greater one is the safe period.
    let recording = check("t/us,level\n0,0\n3,0\n7,1\n10,1\n", &plain(), Open, &[7_000], 13_000);
    assert_eq!(recording.trace.resolution_ns(), 4_000);
    let given = ReadOptions { resolution_ns: Some(77), ..plain() };
    assert_eq!(read("t/us,level\n0,0\n10,1\n", &given).expect("reads").trace.resolution_ns(), 77);
    // Uneven rows are changes, and nothing is known after the last.
    check("t/us,level\n0,0\n3,0\n9,1\n10,1\n", &plain(), Open, &[9_000], 10_000);
}

#[test]
fn csv_voltages_turn_into_levels_with_hysteresis() {
    let text = "Time (ms),CH1 (V)\n0,0.1\n1,1.9\n2,2.0\n3,0.9\n4,0.8\n5,1.5\n";
    let recording = check(text, &with_thresholds(None), Open, &[2 * MS, 4 * MS], 6 * MS);
    assert_eq!(recording.channel, "CH1");
    let closed_low = ReadOptions { polarity: Polarity::ClosedIsLow, ..with_thresholds(None) };
    check(text, &closed_low, Closed, &[2 * MS, 4 * MS], 6 * MS);
}

#[test]
fn csv_unit_of_the_voltage_is_understood() {
    let text = "t/ms,CH1 in mV,CH2 in mV\n0,3300,0\n1,800,5\n2,3300,5\n";
    check(text, &with_thresholds(Some("CH1")), Closed, &[MS, 2 * MS], 3 * MS);
    // Were these volts, the upper threshold would be reached.
    let range = " channel CH2 never reaches the upper threshold of 2 V: it holds 0 V to 0.005 V";
    refused(text, &with_thresholds(Some("CH2")), &[range]);
}

fn proposed(error: &ReadError) -> Option<Thresholds> {
    match error.lacks() {
        Some(&Lack::Thresholds { proposed }) => proposed,
        _ => None,
    }
}

#[test]
fn csv_voltages_without_thresholds_are_refused_with_a_proposal() {
    let text = "time (ms),CH1 (V)\n0,0.0\n1,3.3\n2,0.1\n";
    let message = "2:3: channel CH1 holds voltages, from 0 V to 3.3 V; levels need two thresholds";
    let error = refused(text, &plain(), &[message]);
    let help =
        "give a falling and a rising threshold, such as 0.99 V and 2.31 V (30 % and 70 % of that range)";
    assert_eq!(error.help(), Some(help));
    let proposed = proposed(&error).expect("a proposal");
    check(text, &ReadOptions { thresholds: Some(proposed), ..plain() }, Open, &[MS, 2 * MS], 3 * MS);
    // Without a header too: a number that is no level gives it away.
    refused(
        "0.1,0\n0.2,2\n0.3,0\n",
        &plain(),
        &["2:5: channel column 2 holds voltages, from 0 V to 2 V; levels need two thresholds"],
    );
    let error = refused(
        "0.1,5\n0.2,5\n",
        &plain(),
        &["1:5: channel column 2 holds voltages, from 5 V to 5 V; levels need two thresholds"],
    );
    assert_eq!(error.help(), Some("the voltage never changes: is this the right channel?"));
}

#[test]
fn csv_voltage_inside_the_band_throughout_is_refused() {
    let error = refused(
        "0.1,1.0\n0.2,1.5\n",
        &with_thresholds(None),
        &[" channel column 2 never leaves the band between 0.8 V and 2 V: it holds 1 V to 1.5 V"],
    );
    assert_eq!(proposed(&error).map(|pair| pair.falling_v()), Some(1.15));
}

#[test]
fn csv_voltage_inside_the_band_at_first_takes_the_first_level() {
    let recording = check("0.1,1.0\n0.2,2.5\n0.4,0\n", &with_thresholds(None), Closed, &[400 * MS], 400 * MS);
    assert!(recording.notes.contains(&Note::StartAssumed { until_ns: 200 * MS, position: Closed }));
}

#[test]
fn csv_negative_times_are_shifted_to_zero() {
    let text = "time (us),level\n-1.5,0\n0,1\n2.25,0\n";
    let recording = check(text, &plain(), Open, &[1_500, 3_750], 3_750);
    assert_eq!(recording.notes, [Note::Shifted { by_ns: 1_500 }]);
    assert_eq!(recording.trace.start_ns(), 0);
    // Less than a nanosecond below zero is a whole one up.
    let recording = check("time (ns),level\n-0.5,0\n0,1\n3,0\n", &plain(), Open, &[1, 4], 4);
    assert_eq!(recording.notes, [Note::Shifted { by_ns: 1 }, Note::RoundedTimes]);
}

#[test]
fn csv_scientific_notation_is_exact() {
    // Read as a double and scaled, 1.001 s would fall 1 ns short when rounded down.
    let recording = check(
        "0.000000e+00,0\n1.001000E+00,1\n1.002e0,0\n",
        &plain(),
        Open,
        &[1_001 * MS, 1_002 * MS],
        1_002 * MS,
    );
    assert_eq!(recording.notes, [Note::SecondsAssumed]);
}

#[test]
fn csv_times_below_a_nanosecond_round_down_and_merge() {
    let recording = check("t/ns,level\n0,0\n1.2,1\n1.7,0\n5,0\n", &plain(), Open, &[], 5);
    assert_eq!(recording.notes, [Note::MergedEdges { edges: 2 }, Note::RoundedTimes]);
}

#[test]
fn csv_every_delimiter_and_decimal_mark_is_detected() {
    for text in [
        "time (s),level\n0.5,0\n1.5,1\n",
        "time (s);level\n0.5;0\n1.5;1\n",
        "time (s);level\n0,5;0\n1,5;1\n",
        "time (s)\tlevel\n0.5\t0\n1.5\t1\n",
        "time (s)\tlevel\n0,5\t0\n1,5\t1\n",
        "time_s level\n0.5 0\n1.5   1\n",
        "time_s level\n0,5 0\n1,5 1\n",
        "\"time (s)\",\"level\"\r\n\"0,5\",\"0\"\r\n\"1,5\",\"1\"\r\n",
        "\u{feff}time (s),level\r\n0.5, 0\r\n1.5, 1\r\n",
        "time (s),level\r0.5,0\r1.5,1\r",
        "# time (s),level\n# a remark\n0.5,0\n\n1.5,1",
        "time (s),level,\n0.5,0,\n1.5,1,\n",
        "0.5 s is the trigger\ntime (s),level\n0.5,low\n1.5,HIGH\n",
    ] {
        let recording = read(text, &plain()).unwrap_or_else(|error| panic!("{text}\n{error}"));
        assert_eq!(recording.trace.edges(), [1_500 * MS], "{text}");
        assert_eq!(recording.trace.start_ns(), 500 * MS, "{text}");
    }
    // Voltages with decimal commas, where the comma could also be the delimiter.
    check("0,5 0,1\n1,5 3,3\n", &with_thresholds(None), Open, &[1_500 * MS], 1_500 * MS);
}

#[test]
fn csv_given_layout_overrides_the_detected_one() {
    let text = "0,5 1\n1,5 0\n3,5 0\n";
    let given =
        ReadOptions { delimiter: Some(Delimiter::Space), decimal_mark: Some(DecimalMark::Comma), ..plain() };
    check(text, &given, Closed, &[1_500 * MS], 3_500 * MS);
    let text = "n,when,level\n0,10,0\n1,20,1\n";
    let given = ReadOptions {
        time_column: Some("when".to_owned()),
        time_unit: Some(TimeUnit::Nanoseconds),
        channel: Some("level".to_owned()),
        ..plain()
    };
    check(text, &given, Open, &[20], 20);
    let by_number = ReadOptions { time_column: Some("2".to_owned()), channel: Some("3".to_owned()), ..given };
    check(text, &by_number, Open, &[20], 20);
}

#[test]
fn csv_preambles_of_oscilloscopes_are_skipped() {
    let lines_above = "Model,SCOPE-1000\nSample Interval,1e-6\nVertical Scale,1.0,2.0\n\n";
    let recording = check(
        &format!("{lines_above}TIME,CH1\n0.001,0.0\n0.003,3.3\n"),
        &with_thresholds(None),
        Open,
        &[3 * MS],
        3 * MS,
    );
    assert_eq!(recording.notes, [Note::SecondsAssumed, Note::PreambleSkipped { lines: 3 }]);
    // Units in a row of their own, and an empty line behind them.
    let text = "Time,Channel A,Channel B\n(ms),(V),(mV)\n\n-1.0,0.0,3000\n2.0,3.3,0\n";
    let recording = check(text, &with_thresholds(Some("Channel B")), Closed, &[3 * MS], 3 * MS);
    assert_eq!(recording.notes, [Note::Shifted { by_ns: MS }]);
    check(text, &with_thresholds(Some("channel a")), Open, &[3 * MS], 3 * MS);
    check("x-axis,1\nsecond,Volt\n1e-3,0\n2e-3,3\n", &with_thresholds(Some("1")), Open, &[2 * MS], 2 * MS);
    // A preamble that stands beside the first rows.
    let text =
        "Record Length,3,Points,0.001,0.1\nSample Interval,0.001,s,0.002,3.1\n,,,0.003,3.2\n,,,0.004,0.1\n";
    check(text, &with_thresholds(Some("5")), Open, &[2 * MS, 4 * MS], 5 * MS);
    // A micro sign in Latin-1.
    let bytes = b"time (\xb5s),level\n0,0\n5,1\n7,1\n";
    assert_eq!(read_bytes("f", bytes, &plain()).expect("reads").trace.edges(), [5_000]);
}

#[test]
fn csv_several_channels_need_a_choice() {
    let text = "time (ms),door,lamp (V)\n0,0,0.5\n1,1,3.3\n3,1,3.3\n";
    let error = refused(text, &plain(), &[" has 2 channels; choose one"]);
    assert_eq!(error.help(), Some("the channels are: door, lamp (volts)"));
    for channel in ["door", "DOOR", "2", "column 2"] {
        let given = ReadOptions { channel: Some(channel.to_owned()), ..plain() };
        check(text, &given, Open, &[MS], 3 * MS);
    }
    let wrong = ReadOptions { channel: Some("dor".to_owned()), ..plain() };
    let error = refused(text, &wrong, &[" has no channel \"dor\"; did you mean \"door\"?"]);
    assert_eq!(error.help(), Some("the columns are: time, door, lamp; a number from 1 does as well"));
    let time = ReadOptions { channel: Some("time".to_owned()), ..plain() };
    refused(text, &time, &[" \"time\" is the column of times"]);
    let kinds: Vec<_> = super::channels(text.as_bytes(), &plain(), &mut Default::default())
        .into_iter()
        .map(|channel| (channel.name, channel.kind))
        .collect();
    assert_eq!(kinds, [("door".to_owned(), ChannelKind::Levels), ("lamp".to_owned(), ChannelKind::Volts)]);
}

#[test]
fn csv_unknown_levels_follow_the_policy() {
    let text = "time (ms),level\n0,1\n1,x\n3,1\n";
    let recording = check(text, &plain(), Closed, &[], 3 * MS);
    assert_eq!(recording.notes, [Note::UnknownValues { stretches: 1, first_ns: MS, policy: Unknown::Hold }]);
    let opening = ReadOptions { unknown: Unknown::Open, ..plain() };
    check(text, &opening, Closed, &[MS, 3 * MS], 3 * MS);
    let refusing = ReadOptions { unknown: Unknown::Refuse, ..plain() };
    refused(text, &refusing, &["3:3: channel level has the unknown value \"x\""]);
}

#[test]
fn csv_bad_rows_are_all_listed_with_their_places() {
    let text = "time (ms),level\n0,0\n1\nabc,1\n2,up\n 3, 0\n3,1\n2,1\n4,\nnan,1\n5,inf\n6,1\n";
    refused(
        text,
        &plain(),
        &[
            "3:2: the row has 1 of the 2 fields that it needs",
            "4:1: \"abc\" is not a time; a time is a number such as 0.001",
            "5:3: \"up\" is not a level; use 0 or 1, or low or high",
            "7:1: time 3 is also that of the row before it; export more digits of the times, or leave one of the two rows out",
            "8:1: time 2 is not later than the 3 before it; put the rows in the order of their times",
            "9:3: \"\" is not a level; use 0 or 1, or low or high",
            "10:1: \"nan\" is not a time: it is not finite; a time is a number such as 0.001",
            "11:3: \"inf\" is not a level: it is not finite; use 0 or 1, or low or high",
        ],
    );
    let text = "0.0,0.5\n0.1,NaN\n0.2,volts\n0.3,1e999\n";
    refused(
        text,
        &with_thresholds(None),
        &[
            "2:5: \"NaN\" is not a voltage: it is not finite; a voltage is a number such as 3.3",
            "3:5: \"volts\" is not a voltage; a voltage is a number such as 3.3",
            "4:5: \"1e999\" is not a voltage: it is too large; a voltage is a number such as 3.3",
        ],
    );
}

#[test]
fn csv_bad_first_row_behind_a_header_is_no_preamble() {
    refused(
        "time (ms),level\nabc,1\n0,0\n5,1\n",
        &plain(),
        &["2:1: \"abc\" is not a time; a time is a number such as 0.001"],
    );
    refused(
        "time (ms),level\n1,\n2,0\n5,1\n",
        &plain(),
        &["2:3: \"\" is not a level; use 0 or 1, or low or high"],
    );
    // Without a header it looks like one more line of a preamble: that is told.
    let recording = check("abc,1\n0.1,0\n0.5,1\n", &plain(), Open, &[500 * MS], 500 * MS);
    assert!(recording.notes.contains(&Note::PreambleSkipped { lines: 1 }));
}

#[test]
fn csv_many_bad_rows_stop_at_the_maximum() {
    let text = format!("time (ms),level\n0,0\n{}", "1\n".repeat(1000));
    let error = read(&text, &plain()).expect_err("bad");
    assert_eq!(error.faults().len(), crate::trace::MAX_FAULTS);
    assert!(error.to_string().ends_with("the first 20 are listed"));
}

#[test]
fn csv_times_beyond_64_bits_are_refused() {
    check("t/ns,level\n0,0\n18446744073709551615,1\n", &plain(), Open, &[u64::MAX], u64::MAX);
    refused(
        "t/ns,level\n0,0\n18446744073709551616,1\n",
        &plain(),
        &["3:1: time \"18446744073709551616\" exceeds the 18446744073709551615 ns that fit 64 bits"],
    );
    refused(
        "t/s,level\n0,0\n1e30,1\n",
        &plain(),
        &["3:1: \"1e30\" is not a time: it is too large; a time is a number such as 0.001"],
    );
}

#[test]
fn csv_text_without_rows_is_refused() {
    for text in ["hello world\n", "time,level\n", "1\n2\n3\n", "a,b\nc,d\n", "# only,a remark\n"] {
        refused(text, &plain(), &[" holds no row of a time and a level"]);
    }
}

/// As exported by an instrument that numbers its samples and writes their spacing elsewhere.
#[test]
fn csv_sample_numbers_are_times_with_the_sample_period() {
    let text = "X,CHAN1\nSequence,Volt\n0,3.3\n1,3.3\n2,0.1\n3,0.1\n4,3.3\n";
    let options = ReadOptions { sample_period_ns: Some(50_000), ..with_thresholds(None) };
    let recording = check(text, &options, Closed, &[100_000, 200_000], 250_000);
    assert_eq!(recording.trace.resolution_ns(), 50_000);
    assert!(!recording.notes.contains(&Note::SecondsAssumed));
    let huge = ReadOptions { sample_period_ns: Some(u64::MAX), ..with_thresholds(None) };
    let error = read(text, &huge).expect_err("beyond 64 bits");
    assert!(error.to_string().contains("f.csv:6:1: \"3\" is not a time: it is too large"), "{error}");
}

#[test]
fn csv_infinite_voltage_is_a_level_and_noted() {
    let text = "Zeit;Kanal A\n(ms);(V)\n\n0,0;\u{221e}\n0,5;3,2\n1,0;-inf\n1,5;0,1\n2,0;3,2\n";
    let recording = check(text, &with_thresholds(None), Closed, &[1_000_000, 2_000_000], 2_500_000);
    assert!(recording.notes.contains(&Note::Clipped { readings: 2 }), "{:?}", recording.notes);
    // Without thresholds they are asked for, rather than each such reading refused.
    let error = read(text, &plain()).expect_err("volts");
    assert!(matches!(error.lacks(), Some(Lack::Thresholds { .. })), "{error}");
}
