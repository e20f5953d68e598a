//! What the samples so far leave open: a set of environment states, each with the changes still unreported.

use debounce_core::{Envelope, Position};

use super::super::environment::{Environment, EnvironmentState};

/// One environment state that agrees with the samples, and how many of its changes are unreported.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Debug)]
struct Candidate {
    environment: u32,
    pending: u32,
}

/// Everything that matters of what a logic can know: its output, and the environment states that agree with the
/// samples.
///
/// A member packs the number of its environment state and, in bit 0, whether two or more of its changes are
/// pending; the rest follows, because pending is odd exactly when contact and output differ. Members that add
/// nothing to others are left out.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub(super) struct Belief {
    pub(super) output: Position,
    members: Box<[u32]>,
}

impl Belief {
    /// About how many bytes a belief takes, with its number and its place in a table.
    pub(super) fn bytes(&self) -> u64 {
        160 + 4 * self.members.len() as u64
    }

    /// The one environment state in which everything is settled.
    pub(super) fn settled(environment: &Environment, position: Position) -> Self {
        // The environment has at most 2^27 states.
        Self { output: position, members: Box::new([(environment.start(position) as u32) << 1]) }
    }
}

/// The largest of each counter over the members at either position: a quick look before two beliefs are compared.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
pub(super) struct Reach([[u32; 5]; 2]);

impl Reach {
    pub(super) fn at_least(&self, other: &Self) -> bool {
        let pairs = || self.0.iter().flatten().zip(other.0.iter().flatten());
        pairs().all(|(mine, theirs)| mine >= theirs)
    }
}

/// The environment, stepped on whole sets.
pub(super) struct Knowledge<'a> {
    environment: &'a Environment,
    envelope: Envelope,
    found: [Vec<Candidate>; 2],
}

impl<'a> Knowledge<'a> {
    pub(super) fn new(environment: &'a Environment, envelope: &Envelope) -> Self {
        Self { environment, envelope: envelope.delivered(), found: [Vec::new(), Vec::new()] }
    }

    /// What is known after each sample; `None` where no waveform of the envelope has that sample.
    ///
    /// An edge is reported exactly when every member has a change pending.
    pub(super) fn after(&mut self, belief: &Belief) -> [Option<Belief>; 2] {
        self.found.iter_mut().for_each(Vec::clear);
        for &member in &belief.members {
            let environment = (member >> 1) as usize;
            let differs = self.environment.state(environment).contact != belief.output;
            let pending = u32::from(differs) + 2 * (member & 1);
            for &branch in self.environment.branches(environment) {
                self.found[branch.sample_index()].push(Candidate {
                    // The environment has at most 2^27 states.
                    environment: branch.target() as u32,
                    pending: pending + branch.changes(),
                });
            }
        }
        [0, 1].map(|sample| self.decide(belief.output, sample))
    }

    fn decide(&mut self, output: Position, sample: usize) -> Option<Belief> {
        let found = &mut self.found[sample];
        found.sort_unstable();
        found.dedup();
        let found = &self.found[sample];
        let reported = u32::from(found.iter().all(|member| member.pending > 0));
        let members: Box<[u32]> = found
            .iter()
            // Whoever is four changes behind is lost to every logic, and the proof of the table will say so.
            .filter(|member| member.pending - reported <= 3)
            .filter(|member| !found.iter().any(|other| self.adds_nothing(**member, *other)))
            .map(|member| member.environment << 1 | u32::from(member.pending - reported > 1))
            .collect();
        let output = if reported > 0 { output.opposite() } else { output };
        (!members.is_empty()).then_some(Belief { output, members })
    }

    fn adds_nothing(&self, member: Candidate, other: Candidate) -> bool {
        other != member
            && other.pending == member.pending
            && self.allows_more(other.environment, member.environment)
    }

    /// Whether a logic that knows only `vaguer` does all that one must do that knows `sharper`.
    ///
    /// Every member of `sharper` must have one in `vaguer` that can do as much and whose pending change is as old.
    /// The age is `held`, so long as that has not stopped counting and no older change is pending.
    pub(super) fn may_stand_for(&self, vaguer: &Belief, sharper: &Belief) -> bool {
        let one_for_it = |member: u32| {
            let state = self.environment.state((member >> 1) as usize);
            let in_time =
                state.contact == sharper.output || state.held < self.envelope.dwell.at(state.contact);
            let stands =
                |other: u32| other == member || (other & 1 == 0 && self.allows_more(other >> 1, member >> 1));
            member & 1 == 0 && in_time && vaguer.members.iter().any(|&other| stands(other))
        };
        vaguer.output == sharper.output && sharper.members.iter().all(|&member| one_for_it(member))
    }

    /// Whether every way to go on from `less` has one from `greater` with the same contact and samples.
    fn allows_more(&self, greater: u32, less: u32) -> bool {
        let greater = self.environment.state(greater as usize);
        let less = self.environment.state(less as usize);
        greater.contact == less.contact
            && greater.held >= less.held
            && greater.bounce_left >= less.bounce_left
            && (goes_on(greater, less) || (self.may_begin(greater) && less.window_left <= self.narrowest()))
    }

    /// Whether a disturbance may begin now and at any later sample, as wide as the narrower of the two at least.
    ///
    /// A window open elsewhere that is no wider brings nothing new then, nor does one just ended.
    fn may_begin(&self, state: &EnvironmentState) -> bool {
        self.envelope.calm == 0 && state.quiet_served >= self.envelope.quiet
    }

    fn narrowest(&self) -> u32 {
        self.envelope.glitch.open.min(self.envelope.glitch.closed)
    }

    /// The greatest counters of a belief. A belief that may stand for another reaches as far in each.
    pub(super) fn reach(&self, belief: &Belief) -> Reach {
        let mut reach = Reach::default();
        for &member in &belief.members {
            let state = self.environment.state((member >> 1) as usize);
            let window = if self.may_begin(state) { self.narrowest() } else { 0 };
            let counters = [
                state.held + 1,
                state.bounce_left,
                state.window_left.max(window),
                state.quiet_served,
                state.calm_served,
            ];
            for (most, counter) in reach.0[state.contact as usize].iter_mut().zip(counters) {
                *most = counter.max(*most);
            }
        }
        reach
    }
}

/// Every counter has come as far, in the direction that allows more.
fn goes_on(greater: &EnvironmentState, less: &EnvironmentState) -> bool {
    greater.window_left >= less.window_left
        && greater.quiet_served >= less.quiet_served
        && greater.calm_served >= less.calm_served
}
