//! Words of samples for tests: every word of a length, and the comparison of a law with a slow model on them.

extern crate std;

use std::string::String;
use std::vec::Vec;

use crate::law::Law;
use crate::machine::{Machine, Position};

/// Every word of `length` samples.
pub(crate) fn words(length: usize) -> impl Iterator<Item = Vec<Position>> {
    (0..1_u64 << length)
        .map(move |bits| (0..length).map(|tick| Position::closed_if(bits >> tick & 1 == 1)).collect())
}

/// The samples as a row of 0 (open) and 1 (closed).
pub(crate) fn row(samples: &[Position]) -> String {
    samples.iter().map(|sample| if sample.is_closed() { '1' } else { '0' }).collect()
}

/// Asserts that `law` does what `model` does, on every word up to `length` and from both rests.
///
/// A model is made for a start position; it takes samples and returns the output after each. That an edge is
/// reported exactly when the output changes is checked on the way.
#[track_caller]
pub(crate) fn assert_same<L, M>(law: &L, length: usize, model: impl Fn(Position) -> M)
where
    L: Law,
    M: FnMut(Position) -> Position + Clone,
{
    for start in Position::BOTH {
        let rest = law.rest(start);
        assert_eq!(law.output(&rest), start);
        assert!(crate::is_settled(law, &rest, start));
        let mut word = Vec::new();
        if let Some(difference) = difference(law, rest, &model(start), length, &mut word) {
            panic!("from rest {start:?}, samples {}: {difference}", row(&word));
        }
    }
}

/// The first difference below this point of the tree of words, which are then in `word`.
fn difference<L, M>(
    law: &L,
    state: L::State,
    model: &M,
    left: usize,
    word: &mut Vec<Position>,
) -> Option<String>
where
    L: Law,
    M: FnMut(Position) -> Position + Clone,
{
    if left == 0 {
        return None;
    }
    for sample in Position::BOTH {
        let (mut next, mut model) = (state, model.clone());
        word.push(sample);
        let edge = Machine::step(law, &mut next, sample);
        let output = model(sample);
        let expected = (output != law.output(&state)).then(|| output.reached_by());
        if (edge, law.output(&next)) != (expected, output) {
            return Some(std::format!("law {edge:?}, model {expected:?}"));
        }
        if let Some(found) = difference(law, next, &model, left - 1, word) {
            return Some(found);
        }
        word.pop();
    }
    None
}
