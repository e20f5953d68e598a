//! One order of states for every machine: by output, then by distance from the rests.

use std::collections::VecDeque;

use debounce_core::{PerPosition, Position};

/// Outputs, next states and rests, renumbered: states with the output open first, each group in the order in which
/// a search from both rests finds it. States that are not found are left out.
pub(super) fn arrange(
    outputs: &[Position],
    next: &[[u32; 2]],
    rests: PerPosition<u32>,
) -> (Vec<Position>, Vec<[u32; 2]>, PerPosition<u32>) {
    let mut found = found_from(next, &[rests.open, rests.closed]);
    found.sort_by_key(|&state| outputs[state as usize]);
    let mut number = vec![u32::MAX; next.len()];
    // No more states than the numbers that came in.
    found.iter().enumerate().for_each(|(new, &old)| number[old as usize] = new as u32);
    let renumbered = |state: u32| number[state as usize];
    (
        found.iter().map(|&state| outputs[state as usize]).collect(),
        found.iter().map(|&state| next[state as usize].map(renumbered)).collect(),
        PerPosition { open: renumbered(rests.open), closed: renumbered(rests.closed) },
    )
}

/// All states that can be reached, nearest first.
pub(super) fn found_from(next: &[[u32; 2]], starts: &[u32]) -> Vec<u32> {
    let mut seen = vec![false; next.len()];
    let mut found = Vec::new();
    let mut open: VecDeque<u32> = starts.iter().copied().collect();
    while let Some(state) = open.pop_front() {
        if !core::mem::replace(&mut seen[state as usize], true) {
            found.push(state);
            open.extend(next[state as usize]);
        }
    }
    found
}
