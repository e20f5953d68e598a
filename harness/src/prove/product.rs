//! Environment and logic side by side: one node, one step, and what a step may not do.

use debounce_core::{Change, Clause, Position};

use super::environment::{Branch, Environment};
use super::tabulate::LawTable;

/// One state of the product: environment, logic, and how far the reports lag behind the contact.
///
/// A change of the contact is *pending* until its edge is reported. The output differs from the wanted one (under
/// [`Contract::Follow`](super::Contract::Follow), from the contact) exactly when an odd number is pending, so one bit more, `late`, tells 0 or 1 from 2 or 3. A logic that falls four changes
/// behind has lost two whole operations out of sight and counts as missing them.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub(super) struct Node(u64);

impl Node {
    pub(super) fn new(environment: usize, logic: usize, late: bool) -> Self {
        Self((environment as u64) << 32 | (logic as u64) << 1 | u64::from(late))
    }

    #[inline]
    pub(super) fn environment(self) -> usize {
        (self.0 >> 32) as usize
    }

    #[inline]
    pub(super) fn logic(self) -> usize {
        (self.0 as u32 >> 1) as usize
    }

    #[inline]
    pub(super) fn late(self) -> bool {
        self.0 & 1 != 0
    }
}

/// Where a branch leads.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Step {
    /// To this node; the flag tells whether an edge was reported.
    To(Node, bool),
    /// Out of what was promised.
    Violates(Clause),
}

pub(super) struct Product<'a> {
    pub(super) environment: &'a Environment,
    pub(super) logic: &'a LawTable,
}

impl Product<'_> {
    /// The two starts: everything settled, at open and at closed.
    pub(super) fn starts(&self) -> [Node; 2] {
        Position::BOTH.map(|position| self.start(position))
    }

    /// Everything settled at `position`.
    pub(super) fn start(&self, position: Position) -> Node {
        Node::new(self.environment.start(position), self.logic.rest(position), false)
    }

    /// Where the contract wants the output once everything pending is reported.
    #[inline]
    pub(super) fn wanted(&self, node: Node) -> Position {
        self.environment.state(node.environment()).wanted
    }

    /// How many changes of the contact are unreported.
    #[inline]
    pub(super) fn pending(&self, node: Node) -> u32 {
        let differs = self.logic.output(node.logic()) != self.wanted(node);
        u32::from(differs) + 2 * u32::from(node.late())
    }

    #[inline]
    pub(super) fn branches(&self, node: Node) -> &[Branch] {
        self.environment.branches(node.environment())
    }

    /// The step that `branch` makes from `node`, at which `pending` changes are unreported.
    #[inline]
    pub(super) fn step(&self, node: Node, pending: u32, branch: Branch) -> Step {
        let entry = self.logic.entry(node.logic(), branch.sample_index());
        let before = pending + branch.changes();
        if before < entry.edges() {
            return Step::Violates(Clause::FalseEdge);
        }
        let after = before - entry.edges();
        if after == 0 {
            // By far the commonest case, and the one that needs no further look.
            return Step::To(Node::new(branch.target(), entry.next(), false), entry.edges() != 0);
        }
        let contact = self.environment.state(branch.target()).contact;
        // The contact may now stay where it is, undisturbed, for ever: a settled logic will never report.
        if after > 3 || self.logic.is_settled(entry.next(), contact) {
            return Step::Violates(Clause::Missed);
        }
        Step::To(Node::new(branch.target(), entry.next(), after > 1), entry.edges() != 0)
    }

    /// The change of the output that `branch` asks for, if it asks for one.
    #[inline]
    pub(super) fn change(&self, branch: Branch) -> Option<Change> {
        (branch.changes() != 0).then(|| self.environment.state(branch.target()).wanted.reached_by())
    }
}
