//! Making a failing case simpler while it still fails.

/// What a case is made from. Simplifying changes the plan; the case is built anew from it, so it never leaves its
/// envelope.
pub(crate) trait Plan: Clone {
    /// The case.
    type Value;

    /// Builds the case.
    fn value(&self) -> Self::Value;

    /// How simple the case is: edges, then length, then what is left of the plan. Less is simpler.
    fn measure(&self) -> (usize, u64, u64);

    /// Plans that may be simpler, the boldest first. One that is not, by its measure, is passed over.
    fn simpler(&self) -> Vec<Self>;
}

/// One failing plan, and the simpler ones that are tried in its place.
///
/// Every step lowers the measure, so it ends. After a success the search goes on where it was, and begins anew
/// only when it has come to the end.
#[derive(Clone, Debug)]
pub(crate) struct Shrink<P> {
    failing: P,
    current: P,
    candidates: Vec<P>,
    at: usize,
    trying: bool,
    moved: bool,
}

impl<P: Plan> Shrink<P> {
    pub(crate) fn new(plan: P) -> Self {
        Self {
            failing: plan.clone(),
            current: plan,
            candidates: Vec::new(),
            at: 0,
            trying: false,
            moved: false,
        }
    }

    /// The case to try, or the simplest failing one when there is no other left.
    pub(crate) fn current(&self) -> P::Value {
        self.current.value()
    }

    /// The current case fails: goes on to a simpler one, if there is one.
    pub(crate) fn simplify(&mut self) -> bool {
        if self.trying {
            self.failing = self.current.clone();
            self.moved = true;
        }
        self.candidates = self.failing.simpler();
        self.advance()
    }

    /// The current case passes: goes on to another one, if there is one.
    pub(crate) fn complicate(&mut self) -> bool {
        if !self.trying {
            return false;
        }
        self.at += 1;
        self.advance()
    }

    fn advance(&mut self) -> bool {
        let measure = self.failing.measure();
        loop {
            if let Some(found) =
                (self.at..self.candidates.len()).find(|&at| self.candidates[at].measure() < measure)
            {
                self.at = found;
                self.current = self.candidates[found].clone();
                self.trying = true;
                return true;
            }
            self.at = 0;
            if !core::mem::replace(&mut self.moved, false) {
                self.current = self.failing.clone();
                self.trying = false;
                return false;
            }
        }
    }
}

/// The simplest plan that `fails` and can be reached from a failing one.
pub(crate) fn simplest<P: Plan>(plan: P, mut fails: impl FnMut(&P::Value) -> bool) -> P::Value {
    let mut shrink = Shrink::new(plan);
    let mut goes_on = shrink.simplify();
    while goes_on {
        goes_on = if fails(&shrink.current()) { shrink.simplify() } else { shrink.complicate() };
    }
    shrink.current()
}

/// A list with less in it: nothing, either half, without two neighbours, without one.
pub(crate) fn shorter<T: Clone>(list: &[T]) -> Vec<Vec<T>> {
    let without = |from: usize, until: usize| [&list[..from], &list[until..]].concat();
    let (length, half) = (list.len(), list.len() / 2);
    let mut found = Vec::new();
    if length > 0 {
        found.push(Vec::new());
    }
    if length > 2 {
        found.push(without(half, length));
        found.push(without(0, half));
    }
    // Two neighbours at once: contact changes go in pairs, or everything after them would turn over.
    found.extend((1..length).map(|last| without(last - 1, last + 1)));
    found.extend((0..length).map(|at| without(at, at + 1)));
    found
}

/// A number made less: by all that is above `least`, by half of that, by a quarter, ..., by one.
pub(crate) fn less(number: u64, least: u64) -> impl Iterator<Item = u64> {
    let above = number.saturating_sub(least);
    // Nanoseconds are many: steps of one alone would take for ever.
    (0..u64::BITS - above.leading_zeros()).map(move |halvings| number - (above >> halvings))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A list of numbers; simpler is shorter, then smaller.
    impl Plan for Vec<u64> {
        type Value = Self;

        fn value(&self) -> Self {
            self.clone()
        }

        fn measure(&self) -> (usize, u64, u64) {
            (self.len(), self.iter().sum(), 0)
        }

        fn simpler(&self) -> Vec<Self> {
            let mut found = shorter(self);
            for (at, &number) in self.iter().enumerate() {
                found.extend(less(number, 0).map(|smaller| {
                    let mut list = self.clone();
                    list[at] = smaller;
                    list
                }));
            }
            found
        }
    }

    #[test]
    fn simplest_of_numbers_that_must_stay_large_is_at_the_boundary() {
        let fails = |list: &Vec<u64>| list.iter().filter(|&&number| number >= 17).count() >= 2;
        assert_eq!(simplest(vec![3, 900, 4, 17, 5000, 18], fails), [17, 17]);
    }

    #[test]
    fn simplest_of_a_case_that_cannot_be_simpler_is_itself() {
        assert_eq!(simplest(vec![1, 2, 3], |list| list == &[1, 2, 3]), [1, 2, 3]);
    }

    #[test]
    fn shrink_that_has_ended_stays_at_the_failing_case() {
        let mut shrink = Shrink::new(vec![5]);
        assert!(shrink.simplify());
        while shrink.complicate() {}
        assert_eq!(shrink.current(), [5]);
        assert!(!shrink.complicate());
        assert_eq!(shrink.current(), [5]);
    }

    #[test]
    fn less_at_its_least_is_nothing() {
        assert_eq!(less(3, 3).count(), 0);
        assert_eq!(less(4, 3).collect::<Vec<_>>(), [3]);
        assert_eq!(less(9, 1).collect::<Vec<_>>(), [1, 5, 7, 8]);
    }
}
