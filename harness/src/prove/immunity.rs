//! How wide a disturbance may be: the widest that a proof still bears, and the widest lone one from rest.

use debounce_core::{Envelope, PerPosition, Position};
use rustc_hash::FxHashSet;

use super::tabulate::LawTable;
use super::{Contract, Limits, ProveError, prove_contract};

/// For each position the widest disturbance, in samples, for which the logic is still faithful, everything else
/// in `envelope` as it is.
///
/// `None` where it is not faithful even without disturbances in that position. A disturbance as long as the
/// whole of the shortest operation hides it, so there always is a widest.
///
/// # Errors
/// As [`prove_within`](super::prove_within).
pub fn immunity(
    logic: &LawTable,
    envelope: &Envelope,
    limits: &Limits,
) -> Result<PerPosition<Option<u32>>, ProveError> {
    immunity_under(logic, envelope, Contract::Follow, limits)
}

/// As [`immunity`], against either contract.
pub(super) fn immunity_under(
    logic: &LawTable,
    envelope: &Envelope,
    contract: Contract,
    limits: &Limits,
) -> Result<PerPosition<Option<u32>>, ProveError> {
    let widest = |position| {
        largest(|width| {
            let glitch = match position {
                Position::Open => (width, envelope.glitch.closed),
                Position::Closed => (envelope.glitch.open, width),
            };
            let wider = envelope.glitch(glitch.0, glitch.1);
            Ok(prove_contract(logic, &wider, contract, limits)?.bounds().is_some())
        })
    };
    Ok(PerPosition { open: widest(Position::Open)?, closed: widest(Position::Closed)? })
}

/// The largest number for which `holds`, if it holds for 0; `holds` must be true up to some number and false
/// from there on.
fn largest(mut holds: impl FnMut(u32) -> Result<bool, ProveError>) -> Result<Option<u32>, ProveError> {
    if !holds(0)? {
        return Ok(None);
    }
    let (mut good, mut bad) = (0, 1);
    while holds(bad)? {
        (good, bad) = (bad, bad * 2);
    }
    while bad - good > 1 {
        let middle = good + (bad - good) / 2;
        if holds(middle)? {
            good = middle;
        } else {
            bad = middle;
        }
    }
    Ok(Some(good))
}

/// The widest lone disturbance that a logic at rest at `position` never reports, whatever its samples read;
/// `None` where it reports none however wide.
#[must_use]
pub fn widest_lone_disturbance(logic: &LawTable, position: Position) -> Option<u32> {
    let steady = position as usize;
    let reports_after = |state: usize| {
        let (mut at, mut seen) = (state, FxHashSet::default());
        // A logic that never settles runs in a circle here, and the circle ends the walk.
        while seen.insert(at) {
            let entry = logic.entry(at, steady);
            if entry.edges() != 0 {
                return true;
            }
            at = entry.next();
        }
        false
    };
    let mut reached: FxHashSet<usize> = FxHashSet::from_iter([logic.rest(position)]);
    let mut layer: Vec<usize> = reached.iter().copied().collect();
    let mut width = 0;
    while !layer.is_empty() {
        let mut next = Vec::new();
        for &state in &layer {
            for sample in 0..2 {
                let entry = logic.entry(state, sample);
                if entry.edges() != 0 || reports_after(entry.next()) {
                    return Some(width);
                }
                // A state reached before has already been tried with as many samples left to come.
                if reached.insert(entry.next()) {
                    next.push(entry.next());
                }
            }
        }
        width += 1;
        layer = next;
    }
    None
}
