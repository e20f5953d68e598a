use debounce_core::{Machine, Period, Position, Recorder, RecorderMode};
use proptest::prelude::*;

use crate::trace::{Note, ReadOptions, Recording, Trace, Unknown, list_channels, read_bytes, read_channels};

const MS: u64 = 1_000_000;

fn read(text: &str) -> Recording {
    read_bytes("f", text.as_bytes(), &ReadOptions::default()).unwrap_or_else(|error| panic!("{error}"))
}

#[track_caller]
fn refused(text: &str, expected: &str) {
    let error = read_bytes("f", text.as_bytes(), &ReadOptions::default()).expect_err("refused");
    assert_eq!(error.to_string(), expected, "{text}");
}

/// What a trace should be that was sampled once a tick, `None` where ticks were lost and the position was held.
fn sampled(line: &[Option<Position>], period: Period) -> Option<Trace> {
    let at = |tick: usize| tick as u64 * period.numerator_ns() / u64::from(period.denominator());
    let first = line.iter().flatten().next()?;
    let mut held = *first;
    let mut edges = Vec::new();
    for (tick, position) in line.iter().enumerate() {
        if position.is_some_and(|position| position != held) {
            held = !held;
            edges.push(at(tick));
        }
    }
    let resolution = period.numerator_ns().div_ceil(u64::from(period.denominator()));
    Some(Trace::new(*first, 0, at(line.len()), edges, resolution).unwrap())
}

fn record<const N: usize>(line: &[Option<Position>], mode: RecorderMode) -> Recorder<N> {
    let mut recorder = Recorder::new(mode);
    for sample in line {
        match sample {
            Some(position) => recorder.sample(*position),
            None => recorder.lost(1),
        }
    }
    recorder
}

proptest! {
    #[test]
    fn recorder_text_of_any_line_reads_back(
        line in prop::collection::vec(
            prop_oneof![10 => Just(Some(Position::Open)), 10 => Just(Some(Position::Closed)), 1 => Just(None)],
            1..300,
        ),
        hz in 1_u32..50_000,
    ) {
        let period = Period::from_hz(hz);
        let text = record::<512>(&line, RecorderMode::StopWhenFull).text(period).to_string();
        match sampled(&line, period) {
            Some(expected) => {
                let recording = read(&text);
                prop_assert_eq!(recording.trace, expected);
                let lost = recording.notes.iter().any(|note| matches!(note, Note::UnknownValues { .. }));
                prop_assert_eq!(lost, line.contains(&None));
            }
            None => refused(&text, "f: holds no sample whose position is known"),
        }
    }

    #[test]
    fn recorder_text_of_any_bytes_is_read_or_refused(tail in prop::collection::vec(any::<u8>(), 0..200)) {
        let mut bytes = b"debounce-core recorder 1\ntick 1000000 ns\nforgotten 0\n".to_vec();
        bytes.extend(tail);
        if let Err(error) = read_bytes("f", &bytes, &ReadOptions::default()) {
            prop_assert!(!error.faults().is_empty());
        }
    }
}

#[test]
fn recorder_samples_of_a_replay_are_those_that_were_taken() {
    // What the firmware's law saw can be given to it again.
    let law = debounce_core::ShiftRegister::new(2);
    let line: Vec<_> =
        (0..200_u32).map(|tick| Some(Position::closed_if((tick * tick / 37) & 4 > 0))).collect();
    let text = record::<256>(&line, RecorderMode::Ring).text(Period::from_hz(30)).to_string();
    let trace = read(&text).trace;
    let mut states = [debounce_core::Law::rest(&law, Position::Open); 2];
    for (tick, sample) in line.iter().flatten().enumerate() {
        let at = tick as u64 * 100_000_000 / 3;
        let edges = [*sample, trace.position_at(at)].map(|sample| sample);
        let reports = [0, 1].map(|run| law.step(&mut states[run], edges[run]));
        assert_eq!(reports[0], reports[1], "{tick}");
    }
}

#[test]
fn recorder_ring_and_stop_are_noted() {
    let line: Vec<_> = (0..9_u32).map(|tick| Some(Position::closed_if(tick & 1 == 1))).collect();
    let ring = read(&record::<4>(&line, RecorderMode::Ring).text(Period::from_ms(1)).to_string());
    assert_eq!(ring.notes, [Note::RunsForgotten { runs: 5 }]);
    assert_eq!((ring.trace.initial(), ring.trace.end_ns()), (Position::Closed, 4 * MS));
    let stop = read(&record::<4>(&line, RecorderMode::StopWhenFull).text(Period::from_ms(1)).to_string());
    assert_eq!(stop.notes, [Note::RecorderStopped]);
    assert_eq!((stop.trace.initial(), stop.trace.end_ns()), (Position::Open, 4 * MS));
}

const HEAD: &str = "debounce-core recorder 1\ntick 1000000 ns\nforgotten 0\n";

#[test]
fn recorder_text_is_one_channel_that_may_be_named() {
    let text = format!("{HEAD}o5 c3\nend 2 running\n");
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("lid.txt");
    std::fs::write(&path, &text).unwrap();
    let options = ReadOptions::default();
    assert_eq!(list_channels(&path, &options).unwrap()[0].name, "contact");
    assert_eq!(read_channels(&path, &["contact", "1"], &options).unwrap(), [read(&text), read(&text)]);
    let error = read_channels(&path, &["lid"], &options).expect_err("no such channel");
    assert!(error.to_string().ends_with(": has no channel \"lid\""), "{error}");
    assert_eq!(error.help(), Some("its only channel is contact"));
}

#[test]
fn recorder_text_with_other_line_ends_is_the_same() {
    let text = format!("{HEAD}o5 c3\nend 2 running");
    let crlf = format!("\u{feff}{}\r\n", text.replace('\n', "\r\n"));
    assert_eq!(read(&crlf), read(&text));
    assert_eq!(read(&text).trace.edges(), [5 * MS]);
}

#[test]
fn recorder_runs_of_one_kind_in_a_row_are_one() {
    let split = read(&format!("{HEAD}o5 o2 c3\nc1\nend 4 running\n"));
    assert_eq!(split.trace, read(&format!("{HEAD}o7 c4\nend 2 running\n")).trace);
}

#[test]
fn recorder_lost_ticks_follow_the_policy() {
    let text = format!("{HEAD}o5 l2 o3\nend 3 running\n");
    let with = |unknown| {
        let options = ReadOptions { unknown, ..ReadOptions::default() };
        read_bytes("f", text.as_bytes(), &options)
    };
    assert_eq!(with(Unknown::Hold).unwrap().trace.edges(), [0; 0]);
    assert_eq!(with(Unknown::Closed).unwrap().trace.edges(), [5 * MS, 7 * MS]);
    let error = with(Unknown::Refuse).expect_err("refused");
    assert_eq!(error.to_string(), "f:4:4: 2 ticks were lost here, and unknown values are to be refused");
}

#[test]
fn recorder_every_bad_line_is_named_with_its_place() {
    let after = |head: &str, rest: &str| format!("{head}{rest}");
    refused("debounce-core recorder 2\n", "f:1:24: format \"2\" of the recorder is not known; 1 is");
    refused("debounce-core recorder\n", "f:1:23: the format of the recorder is missing; 1 is known");
    refused("debounce-core recorder 1 x\n", "f:1:26: \"x\" is one word too many");
    refused(
        "debounce-core recorders 1\n",
        "f:1:1: is not the first line of a recording; it begins with \"debounce-core recorder 1\"",
    );
    let first = "debounce-core recorder 1\n";
    let unit = "write nanoseconds, as in 1000000 or 100000000/3";
    for bad in ["0", "x", "1/0", "-5", "1.5", "99999999999999999999", "1/99999999999"] {
        let text = format!("{first}tick {bad} ns\nforgotten 0\no1\nend 1 running\n");
        refused(&text, &format!("f:2:6: \"{bad}\" is not a tick period; {unit}"));
    }
    refused(
        &after(first, "tick 5 ms\nforgotten 0\no1\nend 1 running\n"),
        "f:2:8: \"ms\" is not the unit of the tick period; write ns",
    );
    refused(
        &after(first, "tock 5 ns\nlost 0\no1\nend 1 running\n"),
        "f:2:1: \"tock\" stands where the line must begin with tick\n\
         f:3:1: \"lost\" stands where the line must begin with forgotten",
    );
    refused(
        &after(first, "tick 5 ns\nforgotten many\no1\nend 1 running\n"),
        "f:3:11: \"many\" is not a number of runs",
    );
    let run = "is not a run; write o (open), c (closed) or l (lost) and the ticks, as in c14";
    refused(
        &after(HEAD, "o1 x2 c\nc3 o0 c+1\nend 5 running\n"),
        &format!("f:4:4: \"x2\" {run}\nf:4:7: \"c\" {run}\nf:5:4: \"o0\" {run}\nf:5:7: \"c+1\" {run}"),
    );
    refused(&after(HEAD, "o1 c2\n"), "f:5:1: the recording stops before its end line");
    refused(first, "f:2:1: the recording stops before its end line");
    refused(
        &after(HEAD, "o1 c2\nend 3 running\n"),
        "f:5:5: the recording should hold 3 runs, but 2 stand here",
    );
    refused(
        &after(HEAD, "o1\nend 1 waiting\n"),
        "f:5:7: \"waiting\" is not how a recording ends; write running or stopped",
    );
    refused(&after(HEAD, "o1\nend 1 running\no2\n"), "f:6:1: stands behind the end of the recording");
    refused(
        &after(HEAD, "o18446744073709551615 c5\nend 2 running\n"),
        "f:4:1: the recording is longer than 584 years",
    );
    refused(&after(HEAD, "l4\nend 1 running\n"), "f: holds no sample whose position is known");
    refused(&after(HEAD, "end 0 running\n"), "f: holds no sample whose position is known");
}

#[test]
fn recorder_end_line_that_is_no_end_stops_reading_once() {
    refused(
        &format!("{HEAD}o1\nendless\nend 1 running\n"),
        "f:5:1: \"endless\" stands where the line must begin with end",
    );
}
