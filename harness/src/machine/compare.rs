//! Do two machines do the same? If not, after how few samples does it show?

use debounce_core::{Change, Position};
use rustc_hash::FxHashSet;

use super::MachineTable;

/// A shortest sequence of samples that tells two machines apart.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Apart {
    /// Where both rest before the first sample.
    pub start: Position,
    /// The samples; up to the last one both report the same.
    pub samples: Vec<Position>,
    /// What each of the two reports at the last sample.
    pub edges: [Option<Change>; 2],
}

/// A shortest sequence of samples, from rest at either position, at which `one` and `other` do not report the same;
/// `None` where there is none and the machines are equivalent.
///
/// Walks the pairs of states that both can be in at once, nearest first.
#[must_use]
pub fn compare(one: &MachineTable, other: &MachineTable) -> Option<Apart> {
    let mut pairs: Vec<(Pair, Option<(usize, Position)>)> = Vec::new();
    let mut seen = FxHashSet::default();
    for position in Position::BOTH {
        let pair = (one.rests.at(position), other.rests.at(position));
        seen.insert(pair);
        pairs.push((pair, None));
    }
    let mut at = 0;
    while at < pairs.len() {
        let (a, b) = pairs[at].0;
        for sample in Position::BOTH {
            let edges = [one.edge(a as usize, sample), other.edge(b as usize, sample)];
            if edges[0] != edges[1] {
                return Some(apart(one, &pairs, (at, sample), edges));
            }
            let next = (one.next[a as usize][sample as usize], other.next[b as usize][sample as usize]);
            if seen.insert(next) {
                pairs.push((next, Some((at, sample))));
            }
        }
        at += 1;
    }
    None
}

/// A state of each machine.
type Pair = (u32, u32);

fn apart(
    one: &MachineTable,
    pairs: &[(Pair, Option<(usize, Position)>)],
    last: (usize, Position),
    edges: [Option<Change>; 2],
) -> Apart {
    let (mut at, sample) = last;
    let mut samples = vec![sample];
    while let Some((parent, sample)) = pairs[at].1 {
        samples.push(sample);
        at = parent;
    }
    samples.reverse();
    Apart { start: one.outputs[pairs[at].0.0 as usize], samples, edges }
}
