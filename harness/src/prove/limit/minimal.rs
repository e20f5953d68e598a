//! Merges states that no samples tell apart.

use debounce_core::Position;
use rustc_hash::FxHashMap;

use super::subsets::Subsets;

/// The least table with the same behaviour from both rests.
///
/// Partition refinement after Moore (Gedanken-experiments on sequential machines, 1956; cited from memory):
/// states are split by output, then again and again by the classes their samples lead to, until no class splits.
pub(super) fn minimal(table: &Subsets) -> Subsets {
    let states = table.outputs.len();
    let mut class: Vec<u32> = table.outputs.iter().map(|&output| output as u32).collect();
    let mut classes = 0;
    let mut numbers: FxHashMap<[u32; 3], u32> = FxHashMap::default();
    loop {
        numbers.clear();
        let refined: Vec<u32> = (0..states)
            .map(|state| {
                let [open, closed] = table.next[state].map(|next| class[next as usize]);
                let fresh = numbers.len() as u32;
                *numbers.entry([class[state], open, closed]).or_insert(fresh)
            })
            .collect();
        class = refined;
        if numbers.len() == classes {
            break;
        }
        classes = numbers.len();
    }
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
