//! The waveform of a slowest report that begins with its change, depth first.
//!
//! Such a waveform is as short as the latency it shows, so none is shorter, and nearly always there is one. Of all the
//! ways on, those whose sample still shows the contact where it was are tried first: they are what keeps a logic from
//! reporting, so the search seldom has to turn back.

use debounce_core::Change;
use rustc_hash::FxHashSet;

use super::product::{Node, Product, Step};

/// The nodes of a way, with the branch taken from each.
pub(super) type Path = Vec<(Node, usize)>;

/// A way from rest whose first tick has `change` and whose tick number `latency` reports it. `None` where there is
/// none, or where it is not found before `most` nodes were seen.
///
/// While the change is unreported the contact must not be free to change again.
pub(super) fn slowest_at_once(
    product: &Product<'_>,
    change: Change,
    latency: u32,
    most: usize,
) -> Option<Path> {
    let mut seen = FxHashSet::default();
    // Of each node, how many of its choices are tried.
    let mut path = vec![(product.start(change.to().opposite()), 0)];
    while let Some((node, tried)) = path.last_mut() {
        let node = *node;
        let Some(at) = choice(product, node, *tried) else {
            path.pop();
            continue;
        };
        *tried += 1;
        let Some(at) = at else { continue };
        let ticks = path.len();
        let branch = product.branches(node)[at];
        if ticks == 1 && product.change(branch) != Some(change) {
            continue;
        }
        let Step::To(target, reported) = product.step(node, product.pending(node), branch) else {
            unreachable!("a product without violations was explored")
        };
        if reported && ticks == latency as usize {
            let taken = |(node, tried)| (node, (tried - 1) % product.branches(node).len());
            return Some(path.into_iter().map(taken).collect());
        }
        if !reported && ticks < latency as usize && seen.insert(target) {
            if seen.len() > most {
                return None;
            }
            path.push((target, 0));
        }
    }
    None
}

/// The branch to try when `tried` choices were tried before: in a first round those whose sample is not where the
/// contact is, in a second the others. The inner `None` is a branch of the other round, the outer one the end.
fn choice(product: &Product<'_>, node: Node, tried: usize) -> Option<Option<usize>> {
    let branches = product.branches(node);
    let (round, at) = (tried / branches.len(), tried % branches.len());
    let deceives = |at: usize| {
        let branch = branches[at];
        branch.sample() != product.environment.state(branch.target()).contact
    };
    (round < 2).then(|| (deceives(at) == (round == 0)).then_some(at))
}

#[cfg(test)]
mod tests {
    use debounce_core::{Change, Envelope, Integrator, Law, ShiftRegister, StateMachine};

    use super::slowest_at_once;
    use crate::prove::environment::Environment;
    use crate::prove::product::{Product, Step};
    use crate::prove::prove;
    use crate::prove::tabulate::LawTable;

    const ENVELOPE: Envelope = Envelope::clean(24, 30).bounce(6, 4).glitch(1, 2).quiet(8);

    #[track_caller]
    fn a_slowest_report_is_found_at_once<L: Law>(law: &L)
    where
        L::State: core::hash::Hash,
    {
        let environment = Environment::of(&ENVELOPE).expect("a sound envelope");
        let logic = LawTable::of(law).expect("a law");
        let product = Product { environment: &environment, logic: &logic };
        let bounds = prove(law, &ENVELOPE).expect("fits").bounds().expect("faithful");
        for change in [Change::Make, Change::Break] {
            let worst = bounds.latency.at(change).worst;
            let path =
                slowest_at_once(&product, change, worst, usize::MAX).expect("it begins with the change");
            assert_eq!(path.len(), worst as usize);
            for (tick, &(node, at)) in path.iter().enumerate() {
                let branch = product.branches(node)[at];
                assert_eq!(product.change(branch), (tick == 0).then_some(change));
                let Step::To(target, reported) = product.step(node, product.pending(node), branch) else {
                    panic!("the proof holds")
                };
                assert_eq!(reported, tick + 1 == path.len());
                assert!(path.get(tick + 1).is_none_or(|next| next.0 == target));
            }
            assert_eq!(slowest_at_once(&product, change, worst + 1, usize::MAX), None, "none is slower");
            assert_eq!(slowest_at_once(&product, change, worst, 0), None, "no room for a single node");
        }
    }

    #[test]
    fn slowest_at_once_begins_with_the_change_and_ends_with_its_report() {
        a_slowest_report_is_found_at_once(
            &StateMachine::<u8>::for_envelope(&ENVELOPE).expect("quiet is long"),
        );
        a_slowest_report_is_found_at_once(&ShiftRegister::new(8));
        a_slowest_report_is_found_at_once(&Integrator::<u8>::new(5));
    }
}
