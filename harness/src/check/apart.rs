//! After how few samples does it show that two laws are not the same?

use debounce_core::Position;
use rustc_hash::FxHashSet;

use crate::prove::LawTable;

/// Samples that tell two laws apart: up to the last one both report the same.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Apart {
    /// Where both rest before the first sample.
    pub(super) start: Position,
    pub(super) samples: Vec<Position>,
    /// Which of the two reports an edge at the last sample; the other does not.
    pub(super) first_reports: bool,
}

/// A shortest such sequence, walking the pairs of states that both can be in at once, nearest first.
pub(super) fn apart(one: &LawTable, other: &LawTable) -> Option<Apart> {
    let mut pairs: Vec<((usize, usize), Option<(usize, Position)>)> =
        Position::BOTH.map(|position| ((one.rest(position), other.rest(position)), None)).to_vec();
    let mut seen: FxHashSet<(usize, usize)> = pairs.iter().map(|pair| pair.0).collect();
    let mut at = 0;
    while at < pairs.len() {
        let (a, b) = pairs[at].0;
        for sample in Position::BOTH {
            let (one, other) = (one.entry(a, sample as usize), other.entry(b, sample as usize));
            if one.edges() != other.edges() {
                let mut samples = vec![sample];
                let mut from = at;
                while let Some((parent, sample)) = pairs[from].1 {
                    samples.push(sample);
                    from = parent;
                }
                samples.reverse();
                // The two pairs at rest are the first, in the order of the positions.
                return Some(Apart { start: Position::BOTH[from], samples, first_reports: one.edges() > 0 });
            }
            let next = (one.next(), other.next());
            if seen.insert(next) {
                pairs.push((next, Some((at, sample))));
            }
        }
        at += 1;
    }
    None
}
