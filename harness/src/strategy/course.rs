//! Where the contact is and for how long, as a plan in samples or in time has it, and how that becomes simpler.

use debounce_core::Position;

use super::shrink::less;

/// The changes of a contact.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Course<B> {
    pub(super) start: Position,
    /// Before the first change.
    pub(super) lead: u64,
    /// One for each change of the contact.
    pub(super) holds: Vec<Hold<B>>,
    /// After the last change; the course may end before its dwell does.
    pub(super) tail: u64,
}

/// A change, its bounce, and how long the contact then stays.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Hold<B> {
    pub(super) bounce: Vec<B>,
    /// Beyond the dwell.
    pub(super) extra: u64,
}

/// A stretch that is taken out: where it began, and how long it was.
pub(super) type Taken = (u64, u64);

impl<B: Clone> Course<B> {
    /// Where the contact is after a change.
    pub(super) fn after(&self, change: usize) -> Position {
        if change.is_multiple_of(2) { self.start.opposite() } else { self.start }
    }

    /// Fewer changes: without the head, without the end, without two neighbours. `changes` are where they happen, and
    /// `length` is how long the contact stays after one that is not the last.
    pub(super) fn with_fewer_changes(
        &self,
        changes: &[u64],
        length: impl Fn(usize) -> u64,
    ) -> Vec<(Self, Option<Taken>)> {
        let mut found = Vec::new();
        for (at, &change) in changes.iter().enumerate() {
            let course = self.with(|course| {
                course.lead = if at + 1 == changes.len() { 0 } else { length(at) };
                course.holds.drain(..=at);
                course.start = self.after(at);
            });
            found.push((course, Some((0, change))));
        }
        for at in 0..changes.len() {
            let course = self.with(|course| {
                course.holds.truncate(at);
                course.tail = if at == 0 { 1 } else { length(at - 1) };
            });
            found.push((course, None));
        }
        found.extend((1..changes.len()).map(|last| {
            let course = self.with(|course| {
                course.holds.drain(last - 1..=last);
            });
            (course, Some((changes[last - 1], length(last - 1) + length(last))))
        }));
        found
    }

    /// Shorter times between changes; what begins later either stays with what follows, or where it was.
    pub(super) fn shortened(
        &self,
        changes: &[u64],
        length: impl Fn(usize) -> u64,
    ) -> Vec<(Self, Option<Taken>)> {
        let mut found: Vec<(Self, Option<Taken>)> =
            less(self.tail, 1).map(|tail| (self.with(|course| course.tail = tail), None)).collect();
        for lead in less(self.lead, 0) {
            let shorter = self.with(|course| course.lead = lead);
            found.extend([(shorter.clone(), Some((0, self.lead - lead))), (shorter, None)]);
        }
        for (at, hold) in self.holds.iter().enumerate() {
            for extra in less(hold.extra, 0) {
                let by = hold.extra - extra;
                let shorter = self.with(|course| course.holds[at].extra = extra);
                let end = (changes[at] + length(at)).saturating_sub(by);
                found.push((shorter.clone(), Some((changes[at], by))));
                found.extend([(shorter.clone(), Some((end, by))), (shorter, None)]);
            }
        }
        found
    }

    fn with(&self, change: impl FnOnce(&mut Self)) -> Self {
        let mut course = self.clone();
        change(&mut course);
        course
    }
}
