//! Every set of pressed keys of small matrices, wired with and without diodes.

extern crate std;

use super::*;
use crate::bank::Changes;

/// What a matrix without diodes reads: from each driven row, every column that is reached through pressed keys.
fn wired<const R: usize>(pressed: [u8; R], diodes: KeyDiodes) -> [u8; R] {
    if diodes == KeyDiodes::Everywhere {
        return pressed;
    }
    core::array::from_fn(|driven| {
        let mut columns = pressed[driven];
        for _ in 0..R {
            for row in pressed {
                if row & columns != 0 {
                    columns |= row;
                }
            }
        }
        columns
    })
}

fn keys<const R: usize, const C: usize>(set: u32) -> [u8; R] {
    core::array::from_fn(|row| u8::try_from(set >> (row * C) & ((1 << C) - 1)).unwrap())
}

/// Scans without a key until every key has its position.
fn started<const R: usize>(matrix: &Matrix<u8, R, 1>) -> MatrixState<u8, R, 1> {
    let mut state = matrix.power_up();
    for _ in 0..2 {
        let _ = matrix.step(&mut state, [0; R]);
    }
    state
}

/// Outside check: three corners of a rectangle show the fourth. Source: D. Dribin, "Keyboard Matrix Help", 2000, section 6.
#[test]
fn matrix_three_corners_show_the_published_ghost() {
    assert_eq!(wired([0b11, 0b01], KeyDiodes::None), [0b11, 0b11]);
    assert_eq!(doubtful(&[0b11u8, 0b11]), [0b11, 0b11]);
    assert_eq!(wired([0b11, 0b01], KeyDiodes::Everywhere), [0b11, 0b01]);
}

#[test]
fn matrix_every_set_of_keys_shows_no_ghost() {
    fn check<const R: usize, const C: usize>() {
        for diodes in [KeyDiodes::None, KeyDiodes::Everywhere] {
            let matrix = Matrix::<u8, R, 1>::new(diodes);
            let start = started(&matrix);
            for set in 0..1u32 << (R * C) {
                let pressed = keys::<R, C>(set);
                let read = wired(pressed, diodes);
                let mut state = start;
                let mut doubt = [0; R];
                for _ in 0..2 {
                    doubt = matrix.step(&mut state, read).doubtful;
                }
                let closed = matrix.closed(&state);
                let crossing = (0..R).any(|i| (0..i).any(|j| (read[i] & read[j]).count_ones() >= 2));
                for row in 0..R {
                    assert_eq!(closed[row] & !pressed[row], 0, "ghost: {pressed:?} read {read:?}");
                    assert_eq!(closed[row], read[row] & !doubt[row]);
                    assert_eq!(read[row] & !doubt[row], pressed[row] & !doubt[row]);
                }
                if diodes == KeyDiodes::Everywhere || !crossing {
                    assert_eq!(closed, pressed);
                    assert_eq!(doubt, [0; R]);
                }
            }
        }
    }
    check::<2, 2>();
    check::<3, 3>();
    check::<4, 3>();
    check::<3, 4>();
    check::<2, 6>();
}

#[test]
fn matrix_two_keys_in_any_places_roll_over() {
    let matrix = Matrix::<u8, 3, 1>::new(KeyDiodes::None);
    for first in 0..9 {
        for second in (0..9).filter(|&s| s != first) {
            let mut state = started(&matrix);
            let one = |key: u32, r: usize| keys::<3, 3>(1 << key)[r];
            // The next key goes down before the last is up, as fast typists do.
            for (set, change) in [
                (1 << first, (first, true)),
                (1 << first | 1 << second, (second, true)),
                (1 << second, (first, false)),
                (0, (second, false)),
            ] {
                let read = wired(keys::<3, 3>(set), KeyDiodes::None);
                let quiet = matrix.step(&mut state, read);
                assert!(quiet.rows.iter().all(|row| row.changes.is_none()));
                let report = matrix.step(&mut state, read);
                for r in 0..3 {
                    let expected = if change.1 {
                        Changes { make: one(change.0, r), break_: 0 }
                    } else {
                        Changes { make: 0, break_: one(change.0, r) }
                    };
                    assert_eq!(report.rows[r].changes, expected, "{first} {second}");
                }
            }
            assert!(matrix.is_settled(&state, [0; 3]));
        }
    }
}

#[test]
fn matrix_keys_held_at_power_up_are_initial() {
    for diodes in [KeyDiodes::None, KeyDiodes::Everywhere] {
        let matrix = Matrix::<u8, 3, 1>::new(diodes);
        for set in 0..1u32 << 9 {
            let read = wired(keys::<3, 3>(set), diodes);
            let mut state = matrix.power_up();
            let mut initial = [0u8; 3];
            for _ in 0..12 {
                let report = matrix.step(&mut state, read);
                for (row, all) in report.rows.iter().zip(&mut initial) {
                    assert!(row.changes.is_none());
                    assert_eq!(*all & row.initial, 0, "twice");
                    *all |= row.initial;
                }
                for (all, doubt) in initial.iter().zip(report.doubtful) {
                    assert_eq!(all & doubt, 0, "a doubtful key was believed");
                }
            }
            for r in 0..3 {
                assert_eq!(matrix.closed(&state)[r] & !keys::<3, 3>(set)[r], 0);
            }
        }
    }
}

#[test]
fn matrix_doubt_keeps_a_key_that_was_pressed_before() {
    let matrix = Matrix::<u8, 2, 1>::new(KeyDiodes::None);
    let mut state = started(&matrix);
    let mut settle = |pressed| {
        let mut changes = [Changes::NONE; 2];
        for _ in 0..5 {
            let report = matrix.step(&mut state, wired(pressed, KeyDiodes::None));
            for (all, row) in changes.iter_mut().zip(report.rows) {
                all.make |= row.changes.make;
                all.break_ |= row.changes.break_;
            }
        }
        (matrix.closed(&state), changes.map(Changes::any))
    };
    assert_eq!(settle([0b11, 0b00]), ([0b11, 0b00], [0b11, 0b00]));
    assert_eq!(settle([0b11, 0b01]), ([0b11, 0b00], [0, 0])); // the third corner waits
    assert_eq!(settle([0b10, 0b01]), ([0b10, 0b01], [0b01, 0b01])); // and comes when the doubt is over
}

#[test]
fn matrix_stuck_key_leaves_others_alone() {
    let matrix = Matrix::<u8, 3, 1>::new(KeyDiodes::None);
    for stuck in 0..9 {
        for key in (0..9).filter(|&k| k != stuck) {
            let mut state = started(&matrix);
            for set in [1u32 << stuck, 1 << stuck | 1 << key, 1 << stuck, 1 << stuck | 1 << key] {
                for _ in 0..2 {
                    let _ = matrix.step(&mut state, wired(keys::<3, 3>(set), KeyDiodes::None));
                }
                assert_eq!(matrix.closed(&state), keys::<3, 3>(set));
            }
        }
    }
}

#[test]
fn matrix_shorted_rows_report_twin_keys() {
    // Rows 0 and 1 joined: what is pressed in either is read in both.
    let shorted = |[a, b, c]: [u8; 3]| [a | b, a | b, c];
    let matrix = Matrix::<u8, 3, 1>::new(KeyDiodes::Everywhere);
    let mut state = started(&matrix);
    let mut last = matrix.step(&mut state, shorted([0b001, 0, 0]));
    assert!(last.rows.iter().all(|row| row.changes.is_none()));
    last = matrix.step(&mut state, shorted([0b001, 0, 0]));
    assert_eq!(last.rows.map(|row| row.changes.make), [0b001, 0b001, 0]);
    let matrix = Matrix::<u8, 3, 1>::new(KeyDiodes::None);
    let mut state = started(&matrix);
    assert_eq!(matrix.step(&mut state, shorted([0b011, 0, 0])).doubtful, [0b011, 0b011, 0]);
}
