//! The shortest operations that are always served: a frontier of closed against open, not one number.

use debounce_core::{Envelope, PerPosition};

use super::tabulate::LawTable;
use super::{Contract, Limits, ProveError, prove_contract};

/// The pairs of shortest dwells, in samples, for which the logic is faithful and neither of which can be
/// shortened alone, within the dwells of `envelope`; sorted by the closed dwell. Empty where the logic is not
/// faithful in `envelope` itself.
///
/// # Errors
/// As [`prove_within`](super::prove_within).
pub fn shortest_operations(
    logic: &LawTable,
    envelope: &Envelope,
    limits: &Limits,
) -> Result<Vec<PerPosition<u32>>, ProveError> {
    shortest_operations_under(logic, envelope, Contract::Follow, limits)
}

/// As [`shortest_operations`], against either contract.
pub(super) fn shortest_operations_under(
    logic: &LawTable,
    envelope: &Envelope,
    contract: Contract,
    limits: &Limits,
) -> Result<Vec<PerPosition<u32>>, ProveError> {
    let mut delivered = envelope.delivered();
    let mut served = |closed: u32, open: u32| {
        delivered.dwell = PerPosition { open, closed };
        Ok(prove_contract(logic, &delivered, contract, limits)?.bounds().is_some())
    };
    let most = envelope.delivered().dwell;
    if most.open == 0 || most.closed == 0 || !served(most.closed, most.open)? {
        return Ok(Vec::new());
    }
    let mut frontier = Vec::new();
    let mut closed = least(most.closed, |closed| served(closed, most.open))?;
    loop {
        let open = least(most.open, |open| served(closed, open))?;
        frontier.push(PerPosition { open, closed });
        // The next corner: the least closed dwell that allows a shorter open one.
        if open == 1 || !served(most.closed, open - 1)? {
            return Ok(frontier);
        }
        closed = least(most.closed, |closed| served(closed, open - 1))?;
    }
}

/// The least number from 1 to `most` for which `holds`, where it holds for `most` and for all above the least.
fn least(most: u32, mut holds: impl FnMut(u32) -> Result<bool, ProveError>) -> Result<u32, ProveError> {
    let (mut bad, mut good) = (0, most);
    while good - bad > 1 {
        let middle = bad + (good - bad) / 2;
        if holds(middle)? {
            good = middle;
        } else {
            bad = middle;
        }
    }
    Ok(good)
}
