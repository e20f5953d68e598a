//! Merges states that no samples tell apart.

use debounce_core::Position;

use super::subsets::Subsets;
use crate::machine::partition::coarsest;

/// The least table with the same behaviour from both rests.
pub(super) fn minimal(table: &Subsets) -> Subsets {
    let states = table.outputs.len();
    let outputs: Vec<u32> = table.outputs.iter().map(|&output| output as u32).collect();
    let class = coarsest(&outputs, &table.next);
    let classes = class.iter().max().map_or(0, |&last| last as usize + 1);
    let mut next = vec![[0; 2]; classes];
    let mut outputs = vec![Position::Open; classes];
    for state in 0..states {
        let merged = class[state] as usize;
        next[merged] = table.next[state].map(|next| class[next as usize]);
        outputs[merged] = table.outputs[state];
    }
    let rests = table.rests.map(|rest| class[rest as usize]);
    Subsets { next, outputs, rests, beliefs: table.beliefs }
}
