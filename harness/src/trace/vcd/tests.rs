//! The rules of IEEE 1364-2005 clause 18, a test each, and a corpus of odd but legal files.

use debounce_core::Position::{self, Closed, Open};

use crate::trace::{
    Note, Polarity, ReadError, ReadOptions, Recording, Thresholds, TimeUnit, Unknown, read_bytes,
};

/// One wire `a` and one eight-bit `bus`, in a scope.
const HEADER: &str = "$timescale 1 ns $end $scope module top $end $var wire 1 ! a $end \
    $var wire 8 \" bus [7:0] $end $var real 64 # volts $end $upscope $end $enddefinitions $end\n";

fn options(channel: &str) -> ReadOptions {
    ReadOptions { channel: Some(channel.to_owned()), ..ReadOptions::default() }
}

fn read(text: &str, channel: &str) -> Result<Recording, ReadError> {
    read_bytes("f.vcd", text.as_bytes(), &options(channel))
}

/// Reads `body` behind the header.
#[track_caller]
fn check(
    channel: &str,
    body: &str,
    initial: Position,
    edges: &[u64],
    start_ns: u64,
    end_ns: u64,
) -> Vec<Note> {
    check_file(&format!("{HEADER}{body}"), channel, initial, edges, start_ns, end_ns)
}

#[track_caller]
fn check_file(
    text: &str,
    channel: &str,
    initial: Position,
    edges: &[u64],
    start_ns: u64,
    end_ns: u64,
) -> Vec<Note> {
    let recording = read(text, channel).unwrap_or_else(|error| panic!("{text}\n{error}"));
    let trace = &recording.trace;
    assert_eq!((trace.initial(), trace.edges()), (initial, edges), "{text}");
    assert_eq!((trace.start_ns(), trace.end_ns()), (start_ns, end_ns), "{text}");
    recording.notes
}

#[track_caller]
fn refused(text: &str, channel: &str, lines: &[&str]) -> ReadError {
    let error = read(text, channel).expect_err(text);
    let got = error.to_string();
    let expected: Vec<_> = lines.iter().map(|line| format!("f.vcd:{line}")).collect();
    assert_eq!(got, expected.join("\n"), "{text}");
    error
}

// Rules. Sources: IEEE 1364-2005 clause 18 (read); its subclause numbers are from memory. Where noted, the practice of
// writers, or ours.

/// Clause 18.2: tokens are separated by any white space, so several may share a line.
#[test]
fn vcd_several_tokens_on_a_line_are_read() {
    check("top.a", "#0 0! b0 \" #5 1! #9 0! #12", Open, &[5, 9], 0, 12);
    check("top.a", "#0\t0!\x0c#5\x0b1!\n\n\n#9 0!\n#12\n", Open, &[5, 9], 0, 12);
}

/// Practice: files from other systems end lines in CR LF; the last line may have no end at all.
#[test]
fn vcd_crlf_and_missing_final_newline_are_read() {
    check("top.a", "#0\r\n0!\r\n#5\r\n1!\r\n#9\r\n", Open, &[5], 0, 9);
    check("top.a", "#0\n0!\n#5\n1!", Open, &[5], 0, 5);
}

/// Clause 18.2.3: 1, 10 or 100 of s to fs; number and unit as one token or two.
#[test]
fn vcd_every_timescale_is_exact() {
    for (text, edge, resolution) in [
        ("1 s", 3_000_000_000, 1_000_000_000),
        ("10ms", 30_000_000, 10_000_000),
        ("100 us", 300_000, 100_000),
        ("\n 1ns \n", 3, 1),
        ("100 ps", 0, 1),
    ] {
        let file = format!(
            "$timescale {text} $end $var wire 1 ! a $end $enddefinitions $end #0 0! #3 0! #13 1! #20"
        );
        let recording = read(&file, "a").expect("legal");
        let expected = if edge == 0 { 1 } else { edge / 3 * 13 };
        assert_eq!(recording.trace.edges(), [expected], "{text}");
        assert_eq!(recording.trace.resolution_ns(), resolution, "{text}");
    }
    let given = ReadOptions { resolution_ns: Some(1_000), ..options("a") };
    let recording = read_bytes("f", format!("{HEADER}#0 0! #9").as_bytes(), &given).expect("legal");
    assert_eq!(recording.trace.resolution_ns(), 1_000);
    let bad = "$timescale 2 ns $end\n$var wire 1 ! a $end $enddefinitions $end #0 0!";
    refused(bad, "a", &["1:1: \"2 ns\" is not a time scale; use 1, 10 or 100 with s, ms, us, ns, ps or fs"]);
}

/// Ours: without a time scale the times mean nothing, unless the user says what they mean.
#[test]
fn vcd_missing_timescale_is_refused_unless_given() {
    let file = "$var wire 1 ! a $end $enddefinitions $end #0 0! #5 1! #9";
    let error = read(file, "a").expect_err("no unit");
    assert_eq!(error.to_string(), "f.vcd: has no $timescale, so its times have no unit");
    let given = ReadOptions { time_unit: Some(TimeUnit::Microseconds), ..options("a") };
    assert_eq!(read_bytes("f", file.as_bytes(), &given).expect("given").trace.edges(), [5_000]);
}

/// Ours: times below a nanosecond are rounded down, the last value in a nanosecond counts.
#[test]
fn vcd_times_below_a_nanosecond_round_down_and_merge() {
    let file = |body: &str| format!("$timescale 1 ps $end $var wire 1 ! a $end $enddefinitions $end {body}");
    let notes = check_file(&file("#0 0! #1999 1! #5000"), "a", Open, &[1], 0, 5);
    assert_eq!(notes, [Note::RoundedTimes]);
    let notes = check_file(&file("#0 0! #2000 1! #2999 0! #5000"), "a", Open, &[], 0, 5);
    assert_eq!(notes, [Note::MergedEdges { edges: 2 }, Note::RoundedTimes]);
    let notes = check_file(&file("#0 0! #2000 1! #3000 0! #5000"), "a", Open, &[2, 3], 0, 5);
    assert_eq!(notes, []);
}

/// Ours: the same holds for a pulse of no width, such as a simulator writes.
#[test]
fn vcd_pulse_of_no_width_is_merged_and_counted() {
    let notes = check("top.a", "#0 0! #5 1! 0! #9", Open, &[], 0, 9);
    assert_eq!(notes, [Note::MergedEdges { edges: 2 }]);
    let notes = check("top.a", "#0 0! #5 1! #5 0! #7 1! #9", Open, &[7], 0, 9);
    assert_eq!(notes, [Note::MergedEdges { edges: 2 }]);
}

/// Clause 18.2.1: identifier codes are printable letters from `!` to `~`, so `#`, `$` and digits are codes too.
#[test]
fn vcd_codes_may_look_like_keywords_and_values() {
    for code in ["#", "$", "0", "1", "b", "#0", "$e", "~", "!\"#$%&'()*+,"] {
        let file = format!(
            "$timescale 1 ns $end $var wire 1 {code} a $end $var wire 1 z b $end $enddefinitions $end \
             #0 0{code} 1z #5 1{code} #9"
        );
        check_file(&file, "a", Open, &[5], 0, 9);
    }
}

/// Clause 18.2.1: several variables may share one code; each of them sees the change.
#[test]
fn vcd_variables_that_share_a_code_are_one_line() {
    let file = "$timescale 1 ns $end $scope module top $end $var wire 1 ! pin $end $scope module inner $end \
        $var wire 1 ! pin $end $upscope $end $upscope $end $enddefinitions $end #0 0! #5 1! #9";
    check_file(file, "top.pin", Open, &[5], 0, 9);
    check_file(file, "top.inner.pin", Open, &[5], 0, 9);
    check_file(file, "pin", Open, &[5], 0, 9);
    // Only one line in the file: no name is needed.
    let recording = read_bytes("f", file.as_bytes(), &ReadOptions::default()).expect("the only one");
    assert_eq!(recording.channel, "top.pin");
}

/// Clause 18.2.2: `x` and `z` in either case; nine-value logic is the practice of VHDL tools.
#[test]
fn vcd_every_unknown_value_follows_the_policy() {
    for value in ["x", "X", "z", "Z", "u", "U", "w", "W", "-"] {
        let body = format!("{HEADER}#0 1! #5 {value}! #7 1! #9");
        for (policy, edges) in
            [(Unknown::Hold, &[][..]), (Unknown::Open, &[5, 7][..]), (Unknown::Closed, &[][..])]
        {
            let given = ReadOptions { unknown: policy, ..options("a") };
            let recording = read_bytes("f", body.as_bytes(), &given).expect("a policy");
            assert_eq!(recording.trace.edges(), edges, "{value} {policy:?}");
            assert_eq!(recording.notes, [Note::UnknownValues { stretches: 1, first_ns: 5, policy }]);
        }
        let refusing = ReadOptions { unknown: Unknown::Refuse, ..options("a") };
        let error = read_bytes("f", body.as_bytes(), &refusing).expect_err("refused");
        assert_eq!(error.to_string(), format!("f:2:10: channel top.a has the unknown value \"{value}\""));
    }
}

/// IEEE 1164: weak levels are levels.
#[test]
fn vcd_weak_levels_are_levels() {
    assert_eq!(check("a", "#0 l! #5 h! #7 L! #8 H! #9", Open, &[5, 7, 8], 0, 9), []);
}

/// Table 18-1: a short vector is extended to the left, by 0 after 0 and 1, else by what it begins with.
#[test]
fn vcd_short_vector_is_extended_to_the_left() {
    for (value, bit0, bit7) in
        [("b1", '1', '0'), ("b0", '0', '0'), ("B10000000", '0', '1'), ("b11111111", '1', '1')]
    {
        for (bit, expected) in [(0, bit0), (7, bit7)] {
            let position = if expected == '1' { Closed } else { Open };
            check(&format!("bus[{bit}]"), &format!("#0 {value} \" #9"), position, &[], 0, 9);
        }
    }
    for value in ["bx1", "bz1", "bX1", "bZ1"] {
        let notes = check("bus[7]", &format!("#0 b10000000 \" #5 {value} \" #9"), Closed, &[], 0, 9);
        assert_eq!(
            notes,
            [Note::UnknownValues { stretches: 1, first_ns: 5, policy: Unknown::Hold }],
            "{value}"
        );
        check("bus[0]", &format!("#0 b0 \" #5 {value} \" #9"), Open, &[5], 0, 9);
    }
}

/// Clause 18.2.3.8: the range may touch the name or not, and may count either way or from anywhere.
#[test]
fn vcd_one_bit_of_a_vector_is_found_by_its_index() {
    for (reference, index, value, initial) in [
        ("bus[7:0]", 0, "b1", Closed),
        ("bus [7:0]", 7, "b10000000", Closed),
        ("bus [0:7]", 0, "b10000000", Closed),
        ("bus [0:7]", 7, "b1", Closed),
        ("bus [15:8]", 8, "b1", Closed),
        ("bus [3:-4]", -4, "b1", Closed),
        ("bus", 0, "b1", Closed),
        ("bus", 7, "b1111111", Open),
    ] {
        let file = format!(
            "$timescale 1 ns $end $var reg 8 ! {reference} $end $enddefinitions $end #0 {value} ! #9"
        );
        check_file(&file, &format!("bus[{index}]"), initial, &[], 0, 9);
    }
}

/// Practice: a bus may be declared bit by bit.
#[test]
fn vcd_bus_written_bit_by_bit_is_found_by_index() {
    let file = "$timescale 1 ns $end $var wire 1 ! bus [0] $end $var wire 1 \" bus [1] $end \
        $enddefinitions $end #0 0! 1\" #5 1! #9";
    check_file(file, "bus[0]", Open, &[5], 0, 9);
    check_file(file, "bus[1]", Closed, &[], 0, 9);
    assert_eq!(
        read(file, "bus[2]").expect_err("no such bit").to_string(),
        "f.vcd: \"bus[2]\" could be any of 2 channels"
    );
}

/// Clause 18.2.1: values may stand before any time mark; here they start the recording at 0.
#[test]
fn vcd_values_before_the_first_time_hold_from_zero() {
    check("a", "$dumpvars 0! $end #5 1! #9", Open, &[5], 0, 9);
    check("a", "0!\n#0\n#5 1!\n#9", Open, &[5], 0, 9);
}

/// Ours: without earlier values the first time mark is the start.
#[test]
fn vcd_first_time_mark_is_the_start() {
    check("a", "#100 $dumpvars 0! $end #105 1! #109", Open, &[105], 100, 109);
}

/// Ours: the first known value is taken for the time before it.
#[test]
fn vcd_start_without_value_takes_the_first_one() {
    let notes = check("a", "#0 b0 \" #5 1! #7 0! #9", Closed, &[7], 0, 9);
    assert_eq!(notes, [Note::StartAssumed { until_ns: 5, position: Closed }]);
    let notes = check("a", "#0 $dumpvars x! $end #5 1! #9", Closed, &[], 0, 9);
    assert_eq!(notes.len(), 2, "{notes:?}");
    let error = read(&format!("{HEADER}#0 x! #9"), "a").expect_err("never known");
    assert_eq!(error.to_string(), "f.vcd: channel top.a never has a known value");
}

/// Clause 18.2.1, practice of recorders: the last time mark, with nothing after it, is the end.
#[test]
fn vcd_last_time_without_change_is_the_end() {
    check("a", "#0 0! #5 1! #100", Open, &[5], 0, 100);
    check("a", "#0 0! #5 1!", Open, &[5], 0, 5);
}

/// Clauses 18.2.3.9 to 18.2.3.12: `$dumpoff` writes `x` for all, `$dumpon` and `$dumpall` the values of then.
#[test]
fn vcd_dump_blocks_are_value_changes() {
    let body = "#0 $dumpvars 0! $end #3 $dumpall 0! $end #5 $dumpoff x! $end #7 $dumpon 1! $end #9";
    let notes = check("a", body, Open, &[7], 0, 9);
    assert_eq!(notes, [Note::UnknownValues { stretches: 1, first_ns: 5, policy: Unknown::Hold }]);
}

/// Clause 18.2.3: a comment may stand anywhere, and what is in it is no value.
#[test]
fn vcd_comments_and_unknown_keywords_are_skipped() {
    check("a", "$comment #3 1! $var $end #0 0! $comment\n1!\n$end #5 1! $other 0! $end #9", Open, &[5], 0, 9);
    let file = format!("$date today $end $attrbegin misc 02 a 1 $end {HEADER}#0 0! #9");
    check_file(&file, "a", Open, &[], 0, 9);
}

/// Clause 18.2.2: reals are no levels; without thresholds they are refused, unread they do no harm.
#[test]
fn vcd_real_needs_thresholds_when_chosen() {
    let body = "#0 0! r0.1 # #5 r3.3 # #6 r1.5 # #7 r0 # #8 r-1e-3 # #9";
    check("a", body, Open, &[], 0, 9);
    let file = format!("{HEADER}{body}");
    let error = read(&file, "volts").expect_err("no thresholds");
    assert_eq!(error.to_string(), "f.vcd: channel top.volts is a real number; levels need two thresholds");
    let thresholds = Thresholds::try_new(0.8, 2.0).expect("in order");
    let given = ReadOptions { thresholds: Some(thresholds), ..options("volts") };
    assert_eq!(read_bytes("f", file.as_bytes(), &given).expect("given").trace.edges(), [5, 7]);
    let nan = format!("{HEADER}#0 rnan #");
    let error = read_bytes("f", nan.as_bytes(), &given).expect_err("nan");
    assert_eq!(error.to_string().lines().next(), Some("f:2:4: \"nan\" is not a number of volts"));
}

/// Ours: polarity is turned once, here.
#[test]
fn vcd_polarity_is_turned() {
    let given = ReadOptions { polarity: Polarity::ClosedIsLow, ..options("a") };
    let recording = read_bytes("f", format!("{HEADER}#0 1! #5 0! #9").as_bytes(), &given).expect("legal");
    assert_eq!((recording.trace.initial(), recording.trace.edges()), (Open, &[5][..]));
}

// What is refused.

#[test]
fn vcd_time_going_back_is_refused_with_its_place() {
    refused(&format!("{HEADER}#5 0!\n 1! #4 0!\n#6"), "a", &["3:5: time goes back from 5 to 4"]);
    check("a", "#5 0! #5 1! #6", Closed, &[], 5, 6);
}

#[test]
fn vcd_undeclared_code_is_refused_with_its_place() {
    refused(
        &format!("{HEADER}#5 0!\n1%\nb1 %\nr1 abc"),
        "a",
        &[
            "3:1: identifier code \"%\" was not declared",
            "4:4: identifier code \"%\" was not declared",
            "5:4: identifier code \"abc\" was not declared",
        ],
    );
}

#[test]
fn vcd_bad_tokens_are_all_listed() {
    refused(
        &format!("{HEADER}#x 0!\n1\n?!\nb012 \"\nb \"\n#-1\n#\nq\n"),
        "a",
        &[
            "2:1: \"x\" is not a time; use # and a whole number",
            "3:1: value \"1\" has no identifier code behind it",
            "4:1: \"?!\" is no value change and no time",
            "5:4: \"2\" is not a digit of a vector; use 0, 1, x or z",
            "6:1: a vector value has no digits",
            "7:1: \"-1\" is not a time; use # and a whole number",
            "8:1: \"\" is not a time; use # and a whole number",
            "9:1: \"q\" is no value change and no time",
        ],
    );
}

#[test]
fn vcd_many_bad_lines_stop_at_the_maximum() {
    let text = format!("{HEADER}{}", "?\n".repeat(1000));
    let error = read(&text, "a").expect_err("bad");
    assert_eq!(error.faults().len(), crate::trace::MAX_FAULTS);
    assert!(error.to_string().ends_with("the first 20 are listed"));
}

#[test]
fn vcd_cut_file_is_refused_with_its_place() {
    refused("$timescale 1 ns", "a", &["1:1: $timescale has no $end"]);
    refused("$timescale 1 ns $end\n", "a", &["2:1: the file ends before $enddefinitions"]);
    refused("$timescale 1 ns $end $var wire 1 ! a", "a", &["1:22: $var has no $end"]);
    refused(&format!("{HEADER}#0 0!\n#5 b10"), "a", &["3:4: the file ends after the value \"10\""]);
    refused(&format!("{HEADER}#0 0!\n#5 1"), "a", &["3:4: value \"1\" has no identifier code behind it"]);
    refused(&format!("{HEADER}#0 0!\n#5 $comment cut"), "a", &["3:4: $comment has no $end"]);
}

#[test]
fn vcd_missing_enddefinitions_is_refused() {
    let text = "$timescale 1 ns $end $var wire 1 ! a $end\n#0 0! #5 1!";
    refused(text, "a", &["2:1: \"#0\" comes before $enddefinitions"]);
}

#[test]
fn vcd_time_beyond_64_bits_is_refused() {
    let file = |unit: &str, mark: &str| {
        format!("$timescale 1 {unit} $end $var wire 1 ! a $end $enddefinitions $end\n#0 0!\n#{mark} 1!")
    };
    let message = "3:1: time 18446744073709551616 exceeds the 18446744073709551615 ns that fit 64 bits";
    refused(&file("ns", "18446744073709551616"), "a", &[message]);
    check_file(&file("ns", "18446744073709551615"), "a", Open, &[u64::MAX], 0, u64::MAX);
    check_file(
        &file("us", "18446744073709551"),
        "a",
        Open,
        &[18_446_744_073_709_551_000],
        0,
        18_446_744_073_709_551_000,
    );
    let message = "3:1: time 18446744073709552 exceeds the 18446744073709551615 ns that fit 64 bits";
    refused(&file("us", "18446744073709552"), "a", &[message]);
    check_file(&file("fs", "18446744073709551615"), "a", Open, &[18_446_744_073_709], 0, 18_446_744_073_709);
}

#[test]
fn vcd_bad_declarations_are_refused() {
    refused(
        "$timescale 1 ns $end\n$var wire 1 ! $end\n$var wire x ! a $end\n$var wire 1 ! $end\n$upscope $end\n$var $end\n$enddefinitions $end",
        "a",
        &[
            "2:1: $var has no name",
            "3:1: \"x\" is not the width of a variable",
            "4:1: $var has no name",
            "5:1: $upscope without a $scope that it closes",
            "6:1: $var needs a type, a width, an identifier code and a name",
        ],
    );
    refused(
        "$timescale 1 ns $end $enddefinitions $end #0",
        "a",
        &[" declares no variable that could be a contact"],
    );
}

#[test]
fn vcd_declaration_after_the_definitions_is_refused() {
    let text = format!("{HEADER}#0 0!\n$var wire 1 % b $end\n#5");
    refused(&text, "a", &["3:1: \"$var\" comes after $enddefinitions"]);
}

#[test]
fn vcd_unknown_channel_lists_what_there_is_and_the_nearest() {
    let text = "$timescale 1 ns $end $scope module panel $end $var wire 1 ! button $end \
        $var wire 4 \" lamps $end $upscope $end $enddefinitions $end #0 0!";
    let error = refused(text, "buton", &[" has no channel \"buton\"; did you mean \"panel.button\"?"]);
    assert_eq!(error.help(), Some("the channels are: panel.button, panel.lamps[3:0]"));
    let error = refused(text, "lamps", &[" channel panel.lamps is 4 bits wide; choose one bit of it"]);
    assert_eq!(error.help(), Some("write panel.lamps[0] to panel.lamps[3]"));
    refused(text, "lamps[4]", &[" channel panel.lamps[3:0] has no bit 4"]);
    refused(text, "button[1]", &[" channel panel.button has no bit 1: it is a single bit"]);
    let error = read_bytes("f.vcd", text.as_bytes(), &ReadOptions::default()).expect_err("two");
    assert_eq!(error.to_string(), "f.vcd: has 2 channels; choose one");
}

#[test]
fn vcd_ambiguous_ending_is_refused_and_the_full_name_is_not() {
    let text = "$timescale 1 ns $end $scope module a $end $var wire 1 ! pin $end $upscope $end \
        $scope module b $end $var wire 1 \" pin $end $upscope $end $enddefinitions $end #0 0! 1\"";
    let error = refused(text, "pin", &[" \"pin\" could be any of 2 channels"]);
    assert_eq!(error.help(), Some("write one of these in full: a.pin, b.pin"));
    check_file(text, "b.pin", Closed, &[], 0, 0);
    // Only whole parts of a name are an ending.
    assert!(read(text, "in").is_err());
}
