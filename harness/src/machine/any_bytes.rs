//! Whatever the bytes, reading gives a machine or faults, and a machine survives being written.

use proptest::prelude::*;
use proptest::strategy::ValueTree;

use super::{Reading, TableFileError, compare, read_csv, read_kiss2, read_table, write_csv, write_kiss2};

type Read = fn(&str, &[u8], Reading) -> Result<super::MachineTable, TableFileError>;

#[track_caller]
fn reads(read: Read, bytes: &[u8]) -> bool {
    let mut good = false;
    for reading in [Reading::Moore, Reading::Mealy] {
        match read("t", bytes, reading) {
            Err(error) => assert!(!error.faults().is_empty()),
            Ok(machine) => {
                good = true;
                let kiss2 = write_kiss2(&machine, reading);
                let again = read_kiss2("t", kiss2.as_bytes(), reading).expect("what was written");
                assert_eq!(compare(&machine, &again), None);
                let csv = write_csv(&machine, reading);
                let again = read_csv("t", csv.as_bytes(), reading).expect("what was written");
                assert_eq!(compare(&machine, &again), None);
            }
        }
    }
    good
}

/// Texts that are nearly tables: a few states, some lines spoilt, some missing.
fn nearly_kiss2() -> impl Strategy<Value = String> {
    let word = prop::sample::select(vec!["0", "1", "-", "*", "a", "b", "c", "#", ".r", "\u{fc}", ""]);
    let state = prop::sample::select(vec!["a", "b", "c"]);
    let line = prop_oneof![
        8 => (0..2_u8, state.clone(), state, 0..2_u8).prop_map(|(s, a, b, o)| format!("{s} {a} {b} {o}")),
        1 => prop::collection::vec(word, 0..6).prop_map(|words| words.join(" ")),
    ];
    prop::collection::vec(line, 0..9).prop_map(|lines| format!(".i 1\n.o 1\n.r a\n{}\n", lines.join("\n")))
}

/// Complete tables of a few states; many of them settle.
fn complete() -> impl Strategy<Value = String> {
    (2..6_usize)
        .prop_flat_map(|states| prop::collection::vec((0..states, 0..states, 0..2_u8, 0..2_u8), states))
        .prop_map(|rows| {
            let lines = rows.iter().enumerate().map(|(state, &(open, closed, at_open, at_closed))| {
                // The reset state rests; otherwise hardly any table would be sound.
                let (open, at_open) = if state == 0 { (0, 0) } else { (open, at_open) };
                format!("0 s{state} s{open} {at_open}\n1 s{state} s{closed} {at_closed}\n")
            });
            format!(".i 1\n.o 1\n.r s0\n{}", lines.collect::<String>())
        })
}

proptest! {
    #[test]
    fn table_of_any_bytes_is_read_or_refused(bytes in prop::collection::vec(any::<u8>(), 0..200)) {
        reads(read_kiss2, &bytes);
        reads(read_csv, &bytes);
        reads(read_table, &bytes);
    }

    #[test]
    fn table_of_nearly_sound_lines_is_read_or_refused(text in nearly_kiss2()) {
        reads(read_kiss2, text.as_bytes());
        reads(read_csv, text.replace(' ', ",").as_bytes());
    }
}

#[test]
fn table_of_any_complete_machine_survives_being_written() {
    let mut runner = proptest::test_runner::TestRunner::deterministic();
    let mut sound = 0;
    for _ in 0..2000 {
        let text = complete().new_tree(&mut runner).expect("a table").current();
        sound += u32::from(reads(read_kiss2, text.as_bytes()));
    }
    assert!(sound > 100, "only {sound} of 2000 tables were sound, too few to show anything");
}
