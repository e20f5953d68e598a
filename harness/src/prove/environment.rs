//! The envelope as an automaton: every way in which the contact, its bounce and the disturbances may go on.

use core::hash::{Hash, Hasher};

use debounce_core::{Envelope, PerPosition, Position};
use rustc_hash::FxHashMap;

use super::{Contract, ProveError};

/// What the environment remembers between two ticks.
///
/// The counters run only as far as they matter and stop there, so the automaton is finite.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct EnvironmentState {
    /// Where the contact is.
    pub contact: Position,
    /// Where the contract wants the output once everything is answered; to follow is to want the contact.
    pub wanted: Position,
    /// Samples since the contact changed, up to the dwell.
    pub held: u32,
    /// Samples that may still bounce.
    pub bounce_left: u32,
    /// Samples that an open disturbance window may still cover; 0 when there is none.
    pub window_left: u32,
    /// Samples since the last disturbance ended, up to quiet.
    pub quiet_served: u32,
    /// Settled samples since the bounce ended, up to calm.
    pub calm_served: u32,
}

/// Three words instead of seven: most of the time that an enumeration takes is spent looking states up.
impl Hash for EnvironmentState {
    fn hash<H: Hasher>(&self, hasher: &mut H) {
        let pair = |high: u32, low: u32| u64::from(high) << 32 | u64::from(low);
        hasher.write_u64(pair(self.held, self.bounce_left));
        hasher.write_u64(pair(self.window_left, self.quiet_served));
        hasher.write_u64(pair(self.calm_served, (self.contact as u32) << 1 | self.wanted as u32));
    }
}

/// One way to go on from an environment state, packed: the target and what happened on the way.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub struct Branch(u32);

impl Branch {
    const SAMPLE: u32 = 1;
    const CHANGED: u32 = 1 << 1;
    const BOUNCING: u32 = 1 << 2;
    const COVERED: u32 = 1 << 3;
    const BEGINS: u32 = 1 << 4;
    const SHIFT: u32 = 5;

    /// Index of the environment state it leads to.
    #[inline]
    pub fn target(self) -> usize {
        (self.0 >> Self::SHIFT) as usize
    }

    /// The same with another target.
    fn moved(self, target: u32) -> Self {
        Self(self.0 & ((1 << Self::SHIFT) - 1) | target << Self::SHIFT)
    }

    /// What the logic is given.
    #[inline]
    pub fn sample(self) -> Position {
        Position::closed_if(self.0 & Self::SAMPLE != 0)
    }

    /// The sample as an index: 0 open, 1 closed.
    #[inline]
    pub fn sample_index(self) -> usize {
        (self.0 & Self::SAMPLE) as usize
    }

    /// 1 when just before the sample the contact changed in a way that the contract wants answered.
    #[inline]
    pub fn changes(self) -> u32 {
        (self.0 >> 1) & 1
    }

    /// Whether the sample lies in a bounce.
    pub fn bouncing(self) -> bool {
        self.0 & Self::BOUNCING != 0
    }

    /// Whether the sample lies in a disturbance window.
    pub fn disturbed(self) -> bool {
        self.0 & Self::COVERED != 0
    }

    /// Whether a disturbance window begins with the sample.
    pub fn begins_disturbance(self) -> bool {
        self.0 & Self::BEGINS != 0
    }

    /// Everything but the kind of disturbance: branches alike in this lead to the same place by the same word.
    fn essence(self) -> u32 {
        self.0 & !(Self::BOUNCING | Self::COVERED | Self::BEGINS)
    }
}

/// How many transitions of each kind an exploration fired; a proof in which one that the envelope allows
/// never fired would be vacuous.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub struct Fired {
    /// Changes of the contact that the contract wants answered.
    pub changes: u64,
    /// Samples inside a bounce.
    pub bouncing: u64,
    /// Beginnings of disturbances.
    pub begins: u64,
    /// Samples inside a disturbance.
    pub disturbed: u64,
}

impl Fired {
    pub(super) fn count(&mut self, branch: Branch) {
        self.changes += u64::from(branch.changes());
        self.bouncing += u64::from(branch.bouncing());
        self.begins += u64::from(branch.begins_disturbance());
        self.disturbed += u64::from(branch.disturbed());
    }

    /// Whether every kind that the other fired was fired here too.
    #[must_use]
    pub fn covers(&self, other: &Self) -> bool {
        let both = |mine: u64, theirs: u64| mine > 0 || theirs == 0;
        both(self.changes, other.changes)
            && both(self.bouncing, other.bouncing)
            && both(self.begins, other.begins)
            && both(self.disturbed, other.disturbed)
    }
}

/// All reachable states of the environment of one envelope, and every branch between them.
#[derive(Clone, Debug)]
pub struct Environment {
    states: Vec<EnvironmentState>,
    branches: Vec<Branch>,
    first: Vec<u32>,
    starts: [u32; 2],
    /// All states with the contact open come before this one.
    first_closed: usize,
    dwell: PerPosition<u32>,
}

impl Environment {
    /// Enumerates the automaton of `envelope`, counted in delivered samples.
    ///
    /// # Errors
    /// When a dwell or quiet comes out at 0 samples, or the automaton is larger than 2^27 states.
    pub fn of(envelope: &Envelope) -> Result<Self, ProveError> {
        Self::under(envelope, Contract::Follow)
    }

    /// As [`of`](Self::of), and what the output owes under `contract`.
    ///
    /// # Errors
    /// As [`of`](Self::of).
    pub fn under(envelope: &Envelope, contract: Contract) -> Result<Self, ProveError> {
        let rules = Rules::of(envelope, contract)?;
        let mut enumeration = Enumeration::default();
        let starts = Position::BOTH.map(|contact| enumeration.number(rules.settled(contact)));
        let mut branches: Vec<Branch> = Vec::new();
        let mut first = vec![0];
        let mut next = 0;
        let mut fan = Vec::new();
        while next < enumeration.states.len() {
            let state = enumeration.states[next];
            fan.clear();
            rules.branches(state, |flags, target, misread| {
                let branch = Branch(flags | (enumeration.number(target) << Branch::SHIFT));
                fan.push(branch);
                if misread {
                    fan.push(Branch(branch.0 ^ Branch::SAMPLE));
                }
            });
            // Two readings of one sample that lead to the same state are one branch; the plainer one stays.
            fan.sort_unstable_by_key(|branch| (branch.essence(), branch.0));
            fan.dedup_by_key(|branch| branch.essence());
            branches.extend_from_slice(&fan);
            first.push(u32::try_from(branches.len()).map_err(|_| ProveError::environment_too_large())?);
            next += 1;
            if next > 1 << 27 {
                return Err(ProveError::environment_too_large());
            }
        }
        Ok(Self::by_contact(enumeration.states, &branches, &first, starts, rules.envelope.dwell))
    }

    /// The automaton with its states sorted by where the contact is, and else in the order of their discovery.
    fn by_contact(
        found: Vec<EnvironmentState>,
        fans: &[Branch],
        fan: &[u32],
        starts: [u32; 2],
        dwell: PerPosition<u32>,
    ) -> Self {
        let (mut order, closed): (Vec<usize>, Vec<usize>) =
            (0..found.len()).partition(|&state| found[state].contact == Position::Open);
        let first_closed = order.len();
        order.extend(closed);
        let mut numbers = vec![0; found.len()];
        order.iter().zip(0..).for_each(|(&old, new)| numbers[old] = new);
        let (mut branches, mut first) = (Vec::with_capacity(fans.len()), Vec::with_capacity(fan.len()));
        first.push(0);
        for &old in &order {
            let fan = &fans[fan[old] as usize..fan[old + 1] as usize];
            branches.extend(fan.iter().map(|branch| branch.moved(numbers[branch.target()])));
            // No more branches than before, and those were counted.
            first.push(branches.len() as u32);
        }
        let starts = starts.map(|old| numbers[old as usize]);
        let states = order.into_iter().map(|old| found[old]).collect();
        Self { states, branches, first, starts, first_closed, dwell }
    }

    /// Whether `envelope` is one at all, without enumerating it.
    ///
    /// # Errors
    /// When a dwell or quiet comes out at 0 samples.
    pub fn check(envelope: &Envelope) -> Result<(), ProveError> {
        Rules::of(envelope, Contract::Follow).map(|_| ())
    }

    /// Number of states.
    #[must_use]
    pub fn len(&self) -> usize {
        self.states.len()
    }

    /// Whether there is no state; there always is one.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.states.is_empty()
    }

    /// Index of the start: settled at `contact`, dwell, quiet and calm served.
    #[must_use]
    pub fn start(&self, contact: Position) -> usize {
        self.starts[contact as usize] as usize
    }

    /// The first index with the contact closed; all with it open come before.
    pub(super) fn first_closed(&self) -> usize {
        self.first_closed
    }

    /// The state of an index.
    #[must_use]
    #[inline]
    pub fn state(&self, index: usize) -> &EnvironmentState {
        &self.states[index]
    }

    /// Whether the contact has held its position for the dwell, and so may change.
    #[inline]
    pub(super) fn dwell_served(&self, index: usize) -> bool {
        let state = &self.states[index];
        state.held >= self.dwell.at(state.contact)
    }

    /// Every way to go on from a state.
    #[must_use]
    #[inline]
    pub fn branches(&self, index: usize) -> &[Branch] {
        &self.branches[self.first[index] as usize..self.first[index + 1] as usize]
    }

    /// Every kind of transition that the envelope allows.
    #[must_use]
    pub fn allowed(&self) -> Fired {
        let mut all = Fired::default();
        self.branches.iter().for_each(|&branch| all.count(branch));
        all
    }
}

#[derive(Default)]
struct Enumeration {
    states: Vec<EnvironmentState>,
    numbers: FxHashMap<EnvironmentState, u32>,
}

impl Enumeration {
    fn number(&mut self, state: EnvironmentState) -> u32 {
        // `Environment::of` stops long before the numbers reach the width of the packed target.
        *self.numbers.entry(state).or_insert_with(|| {
            self.states.push(state);
            (self.states.len() - 1) as u32
        })
    }
}

/// The envelope's rules, applied to one state at a time.
struct Rules {
    envelope: Envelope,
    contract: Contract,
}

impl Rules {
    fn of(envelope: &Envelope, contract: Contract) -> Result<Self, ProveError> {
        let envelope = envelope.delivered();
        for position in Position::BOTH {
            if envelope.dwell.at(position) == 0 {
                return Err(ProveError::DwellUnseen { position });
            }
        }
        if envelope.quiet == 0 && (envelope.glitch.open > 0 || envelope.glitch.closed > 0) {
            return Err(ProveError::NoQuiet);
        }
        Ok(Self { envelope, contract })
    }

    fn settled(&self, contact: Position) -> EnvironmentState {
        EnvironmentState {
            contact,
            wanted: contact,
            held: self.envelope.dwell.at(contact),
            bounce_left: 0,
            window_left: 0,
            quiet_served: self.quiet(),
            calm_served: self.envelope.calm,
        }
    }

    /// Quiet as far as it matters: without disturbances nobody waits for it.
    fn quiet(&self) -> u32 {
        if self.envelope.glitch.open == 0 && self.envelope.glitch.closed == 0 {
            0
        } else {
            self.envelope.quiet
        }
    }

    /// Calls `found` with the flags and the target of every way to go on, and whether the sample may as well be the
    /// other one.
    fn branches(&self, state: EnvironmentState, mut found: impl FnMut(u32, EnvironmentState, bool)) {
        self.with_position(state, 0, &mut found);
        if state.held >= self.envelope.dwell.at(state.contact) {
            let contact = state.contact.opposite();
            let wanted = self.contract.wanted_after(contact, state.wanted);
            let changed = EnvironmentState {
                contact,
                wanted,
                held: 0,
                // A bounce that is cut short by the next change may still ring on under it.
                bounce_left: state.bounce_left.max(self.envelope.bounce.at(contact.reached_by())),
                calm_served: 0,
                ..state
            };
            self.with_position(changed, if wanted == state.wanted { 0 } else { Branch::CHANGED }, &mut found);
        }
    }

    /// The contact's position at this sample is fixed; does its bounce go on?
    fn with_position(
        &self,
        state: EnvironmentState,
        flags: u32,
        found: &mut impl FnMut(u32, EnvironmentState, bool),
    ) {
        self.with_bounce(state, flags, found);
        // Without calm nothing depends on when a bounce ends, and a longer one can do all that a shorter can.
        if state.bounce_left > 0 && self.envelope.calm > 0 {
            self.with_bounce(EnvironmentState { bounce_left: 0, ..state }, flags, found);
        }
    }

    /// The bounce is fixed; is the sample disturbed?
    fn with_bounce(
        &self,
        state: EnvironmentState,
        flags: u32,
        found: &mut impl FnMut(u32, EnvironmentState, bool),
    ) {
        let bouncing = state.bounce_left > 0;
        if state.window_left > 0 {
            self.with_window(state, flags | Branch::COVERED, found);
            self.with_window(EnvironmentState { window_left: 0, quiet_served: 0, ..state }, flags, found);
            return;
        }
        self.with_window(state, flags, found);
        let width = self.envelope.glitch.at(state.contact);
        let quiet = state.quiet_served >= self.quiet();
        // With calm, what strikes during a bounce and outlasts it is no disturbance but a longer bounce.
        let calm = self.envelope.calm == 0 || (!bouncing && state.calm_served >= self.envelope.calm);
        if width > 0 && quiet && calm {
            let begun = EnvironmentState { window_left: width, ..state };
            self.with_window(begun, flags | Branch::COVERED | Branch::BEGINS, found);
        }
    }

    /// Everything is fixed but the reading.
    fn with_window(
        &self,
        state: EnvironmentState,
        mut flags: u32,
        found: &mut impl FnMut(u32, EnvironmentState, bool),
    ) {
        let covered = flags & Branch::COVERED != 0;
        let bouncing = state.bounce_left > 0;
        if bouncing {
            flags |= Branch::BOUNCING;
        }
        let mut next = state;
        next.held = (state.held + 1).min(self.envelope.dwell.at(state.contact));
        next.bounce_left = state.bounce_left.saturating_sub(1);
        if covered {
            next.window_left = state.window_left - 1;
            next.quiet_served = 0;
        } else {
            next.quiet_served = (state.quiet_served + 1).min(self.quiet());
        }
        if !covered && !bouncing {
            next.calm_served = (state.calm_served + 1).min(self.envelope.calm);
        }
        found(flags | u32::from(state.contact.is_closed()), next, covered || bouncing);
    }
}
