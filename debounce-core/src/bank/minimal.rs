//! How few operations a bank of two planes can do with: every shorter program is tried.
//!
//! A program is a row of two-operand operations, each over what is there at the start (sample, output, two planes) or
//! what an operation before it gave. A value is its truth table over those four bits of a lane, 16 rows, so that two
//! programs for the same function count as one. The code of the count is not given: at rest both planes are zero, and
//! the other three counts may be coded in any way, for an open lane differently from a closed one.

extern crate std;

use std::vec::Vec;

/// What a value is for each of the 16 cases of sample, output and the two planes, these being bits 0 to 3 of the case.
type Value = u16;

const SAMPLE: Value = 0xaaaa;
const OUTPUT: Value = 0xcccc;
const PLANES: [Value; 2] = [0xf0f0, 0xff00];

/// What one operation can make of two values.
type Operation = fn(Value, Value) -> Value;

const AND_NOT_XOR: &[Operation] = &[|x, y| x & y, |x, y| x & !y, |x, y| y & !x, |x, y| x ^ y];
const AND_NOT_XOR_OR: &[Operation] =
    &[|x, y| x & y, |x, y| x & !y, |x, y| y & !x, |x, y| x ^ y, |x, y| x | y];

/// The planes at each count from rest on; the first is zero.
type Code = [u16; 4];

/// Every code that is zero at rest.
fn codes() -> Vec<Code> {
    let orders = [[1, 2, 3], [1, 3, 2], [2, 1, 3], [2, 3, 1], [3, 1, 2], [3, 2, 1]];
    orders.iter().map(|[a, b, c]| [0, *a, *b, *c]).collect()
}

/// What output and planes must be after a tick of a lane that changes at its fourth contrary sample in a row.
fn wanted(open: Code, closed: Code) -> [Value; 3] {
    let mut wanted = [0; 3];
    for case in 0..16u16 {
        let (sample, output, planes) = (case & 1, case >> 1 & 1, case >> 2);
        let code = if output == 0 { open } else { closed };
        let count = code.iter().position(|&at| at == planes).expect("a code has every pair of bits");
        let (output, planes) = match (sample == output, count) {
            (true, _) => (output, 0),
            (false, 3) => (sample, 0),
            (false, _) => (output, code[count + 1]),
        };
        for (value, bit) in wanted.iter_mut().zip([output, planes & 1, planes >> 1]) {
            *value |= bit << case;
        }
    }
    wanted
}

/// Whether `left` more operations can bring about all that is wanted.
fn reaches(values: &mut Vec<Value>, wanted: &[Value], operations: &[Operation], left: usize) -> bool {
    let missing = wanted.iter().filter(|value| !values.contains(value)).count();
    if missing == 0 {
        return true;
    }
    // Each operation gives one value, so no operation may be spent on anything else once as many are missing.
    if missing > left {
        return false;
    }
    for second in 1..values.len() {
        for first in 0..second {
            for operation in operations {
                let value = operation(values[first], values[second]);
                if values.contains(&value) || (missing == left && !wanted.contains(&value)) {
                    continue;
                }
                values.push(value);
                let found = reaches(values, wanted, operations, left - 1);
                values.pop();
                if found {
                    return true;
                }
            }
        }
    }
    false
}

/// The least number of operations, over all codes.
fn fewest(operations: &[Operation]) -> usize {
    let pairs: Vec<_> =
        codes().into_iter().flat_map(|open| codes().into_iter().map(move |closed| (open, closed))).collect();
    let possible = |length: &usize| {
        pairs.iter().any(|&(open, closed)| {
            let mut start = std::vec![SAMPLE, OUTPUT, PLANES[0], PLANES[1]];
            reaches(&mut start, &wanted(open, closed), operations, *length)
        })
    };
    (0..).find(possible).expect("the bank's own program is found at the latest")
}

#[test]
fn bank_of_two_planes_without_or_needs_six_operations() {
    assert_eq!(fewest(AND_NOT_XOR), 6);
}

#[test]
fn bank_of_two_planes_needs_five_operations() {
    assert_eq!(fewest(AND_NOT_XOR_OR), 5);
}
