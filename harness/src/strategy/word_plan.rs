//! What a [`Word`] is made from, and how it becomes simpler.

use debounce_core::{Envelope, Position};
use rand::{Rng, RngExt};

use super::course::{Course, Hold, Taken};
use super::draw::{Begin, extra, often_most};
use super::shrink::{Plan, less, shorter};
use super::word::{Word, WordTick};

/// A word as a list of intentions. What the envelope does not allow is cut or put off when the word is built.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct WordPlan {
    envelope: Envelope,
    /// In ticks.
    course: Course<Reads>,
    disturbances: Vec<Disturbance>,
    losses: Vec<Loss>,
}

#[derive(Clone, PartialEq, Eq, Debug)]
struct Disturbance {
    begin: Begin,
    window: Vec<Reads>,
}

#[derive(Clone, Copy, PartialEq, Eq, Debug)]
struct Loss {
    begin: Begin,
    ticks: u64,
}

/// What an arbitrary sample reads.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Reads {
    Contact,
    Contrary,
}

impl Reads {
    fn of(self, contact: Position) -> Position {
        match self {
            Self::Contact => contact,
            Self::Contrary => contact.opposite(),
        }
    }

    fn other(self) -> Self {
        match self {
            Self::Contact => Self::Contrary,
            Self::Contrary => Self::Contact,
        }
    }

    fn draw_pattern<R: Rng>(rng: &mut R, length: u64) -> Vec<Self> {
        let share = [1.0, 0.5, 0.15, 0.0][rng.random_range(0..4)];
        let one = |rng: &mut R| if rng.random_bool(share) { Self::Contrary } else { Self::Contact };
        (0..length).map(|_| one(rng)).collect()
    }
}

impl WordPlan {
    /// Draws a plan with at most `most_changes` changes of the contact.
    pub(crate) fn draw<R: Rng>(envelope: &Envelope, most_changes: usize, rng: &mut R) -> Self {
        let e = envelope;
        let [quiet, calm] = [e.quiet, e.calm].map(u64::from);
        let widest = u64::from(e.glitch.open.max(e.glitch.closed));
        let bounce = u64::from(e.bounce.make.max(e.bounce.break_));
        let dwell = u64::from(e.dwell.open.max(e.dwell.closed));
        let span = 2 * (quiet + calm + widest + bounce) + 4;
        let reach = widest + bounce + calm + quiet.min(widest + 2) + 1;
        let start = Position::closed_if(rng.random_bool(0.5));
        let mut contact = start;
        let mut holds = Vec::new();
        for _ in 0..rng.random_range(0..=most_changes) {
            contact = contact.opposite();
            let length = often_most(rng, 0, e.bounce.at(contact.reached_by()).into());
            let bounce = Reads::draw_pattern(rng, length);
            holds.push(Hold { bounce, extra: extra(rng, 4, span) });
        }
        let most_disturbances = if widest == 0 { 0 } else { 2 * (holds.len() + 1) };
        let disturbances = (0..rng.random_range(0..=most_disturbances))
            .map(|_| {
                let begin = Begin::draw(rng, reach, span);
                let width = often_most(rng, 1, widest);
                Disturbance { begin, window: Reads::draw_pattern(rng, width) }
            })
            .collect();
        let most_losses = if e.lost == 0 { 0 } else { holds.len() + 1 };
        let losses = (0..rng.random_range(0..=most_losses))
            .map(|_| {
                let begin = Begin::draw(rng, reach + u64::from(e.lost), span);
                Loss { begin, ticks: often_most(rng, 1, e.lost.into()) }
            })
            .collect();
        let tail = if rng.random_bool(0.75) { dwell + span } else { rng.random_range(1..=dwell.max(1)) };
        let lead = extra(rng, 4, span);
        let course = Course { start, lead, holds, tail };
        Self { envelope: *e, course, disturbances, losses }.pinned()
    }

    /// The same word with everything at its place, so that it stays there when something before it is taken away.
    fn pinned(mut self) -> Self {
        let (_, disturbances, losses) = self.built();
        self.disturbances = disturbances;
        self.losses = losses;
        self
    }

    /// The word, and the disturbances and losses that came about in it, with their places.
    fn built(&self) -> (Word, Vec<Disturbance>, Vec<Loss>) {
        let mut word = Word { start: self.course.start, ticks: self.contact_and_bounces() };
        let changes: Vec<u64> = word.changes().iter().map(|&at| at as u64).collect();
        let disturbances = self.disturb(&mut word.ticks, &changes);
        let losses = self.lose(&mut word.ticks, &changes);
        (word, disturbances, losses)
    }

    fn contact_and_bounces(&self) -> Vec<WordTick> {
        let tick =
            |contact| WordTick { contact, sample: contact, bouncing: false, disturbed: false, lost: false };
        let mut ticks = Vec::new();
        let mut contact = self.course.start;
        let mut put = |contact, length: u64| ticks.extend((0..length).map(|_| tick(contact)));
        put(
            contact,
            if self.course.holds.is_empty() { self.course.lead + self.course.tail } else { self.course.lead },
        );
        let mut changes = Vec::new();
        let mut at = self.course.lead as usize;
        for (index, hold) in self.course.holds.iter().enumerate() {
            contact = contact.opposite();
            changes.push((at, contact, &hold.bounce));
            let dwell = u64::from(self.envelope.dwell.at(contact)) + hold.extra;
            let length = if index + 1 == self.course.holds.len() { self.course.tail.max(1) } else { dwell };
            put(contact, length);
            at += length as usize;
        }
        for (from, contact, bounce) in changes {
            let most = self.envelope.bounce.at(contact.reached_by()) as usize;
            for (tick, reads) in ticks.iter_mut().skip(from).zip(bounce.iter().take(most)) {
                tick.bouncing = true;
                tick.sample = reads.of(tick.contact);
            }
        }
        ticks
    }

    fn disturb(&self, ticks: &mut [WordTick], changes: &[u64]) -> Vec<Disturbance> {
        let e = &self.envelope;
        let mut begun = Vec::new();
        let (mut quiet, mut calm) = (e.quiet, e.calm);
        let mut waiting = self.disturbances.iter().filter(|disturbance| !disturbance.window.is_empty());
        let mut next = waiting.next();
        // `Later` counts from where the disturbance could begin; the other places are known at once.
        let put_off = |next: Option<&Disturbance>| match next {
            Some(Disturbance { begin: Begin::Later(by), .. }) => *by,
            _ => 0,
        };
        let (mut free_from, mut left) = (0, put_off(next));
        let mut window: &[Reads] = &[];
        for (at, tick) in ticks.iter_mut().enumerate() {
            if changes.binary_search(&(at as u64)).is_ok() {
                calm = 0;
            }
            if let (true, Some(disturbance)) = (window.is_empty(), next) {
                let width = e.glitch.at(tick.contact) as usize;
                let is_calm = e.calm == 0 || (!tick.bouncing && calm >= e.calm);
                let place = match disturbance.begin {
                    Begin::Later(_) => free_from,
                    begin => begin.place(free_from, changes),
                };
                if width > 0 && quiet >= e.quiet && is_calm && at as u64 >= place {
                    if left == 0 {
                        window = &disturbance.window[..width.min(disturbance.window.len())];
                        begun.push(Disturbance { begin: Begin::At(at as u64), window: window.to_vec() });
                        next = waiting.next();
                        left = put_off(next);
                    } else {
                        left -= 1;
                    }
                }
            }
            if let Some((reads, rest)) = window.split_first() {
                (tick.disturbed, tick.sample) = (true, reads.of(tick.contact));
                (window, quiet, free_from) = (rest, 0, at as u64 + 1);
            } else {
                quiet = quiet.saturating_add(1);
                calm = if tick.bouncing { calm } else { calm.saturating_add(1) };
            }
        }
        begun
    }

    fn lose(&self, ticks: &mut [WordTick], changes: &[u64]) -> Vec<Loss> {
        let e = &self.envelope;
        let mut begun = Vec::new();
        let spacing = e.dwell.open.max(e.dwell.closed).max(e.quiet).max(e.calm).max(1);
        let mut from = 0;
        for loss in &self.losses {
            let first = loss.begin.place(from, changes);
            let length = loss.ticks.min(e.lost.into());
            if length == 0 || first >= ticks.len() as u64 {
                continue;
            }
            ticks.iter_mut().skip(first as usize).take(length as usize).for_each(|tick| tick.lost = true);
            // No stretch of `spacing` ticks holds both the last tick of this run and the first of the next.
            from = first + length - 1 + u64::from(spacing);
            begun.push(Loss { begin: Begin::At(first), ticks: length });
        }
        begun
    }

    fn weight(&self) -> u64 {
        let holds = self.course.holds.iter().map(|hold| 1 + hold.bounce.len() as u64 + hold.extra);
        let disturbances = self.disturbances.iter().map(|d| 1 + d.window.len() as u64 + d.begin.weight());
        let losses = self.losses.iter().map(|loss| 1 + loss.ticks + loss.begin.weight());
        self.course.lead + self.course.tail + holds.chain(disturbances).chain(losses).sum::<u64>()
    }

    /// Ticks of a hold that is not the last.
    fn length(&self, at: usize) -> u64 {
        let contact = self.course.after(at);
        u64::from(self.envelope.dwell.at(contact)) + self.course.holds[at].extra
    }

    /// The tick before which each change happens.
    fn changes(&self) -> Vec<u64> {
        let mut at = self.course.lead;
        (0..self.course.holds.len())
            .map(|index| {
                let change = at;
                at += self.length(index);
                change
            })
            .collect()
    }

    /// Moves what begins after a stretch that is taken out.
    fn take_out(&mut self, from: u64, length: u64) {
        for disturbance in &mut self.disturbances {
            disturbance.begin = disturbance.begin.without(from, length);
        }
        for loss in &mut self.losses {
            loss.begin = loss.begin.without(from, length);
        }
    }

    /// Another course, and what begins after the stretch that it takes out moved with what follows.
    fn with_course(&self, (course, taken): (Course<Reads>, Option<Taken>)) -> Self {
        self.with(|plan| {
            plan.course = course;
            if let Some((from, length)) = taken {
                plan.take_out(from, length);
            }
        })
    }

    fn with(&self, change: impl FnOnce(&mut Self)) -> Self {
        let mut plan = self.clone();
        change(&mut plan);
        plan
    }
}

impl Plan for WordPlan {
    type Value = Word;

    fn value(&self) -> Word {
        self.built().0
    }

    fn measure(&self) -> (usize, u64, u64) {
        let word = self.value();
        let lost = word.ticks.windows(2).filter(|pair| pair[0].lost != pair[1].lost).count();
        // A word cut off within a disturbance has not saved the edge back.
        let cut_off = word.ticks.last().is_some_and(|tick| tick.sample != tick.contact);
        let edges = word.edges() + usize::from(cut_off) + word.changes().len() + lost;
        (edges, word.ticks.len() as u64, self.weight())
    }

    fn simpler(&self) -> Vec<Self> {
        let changes = self.changes();
        let length = |at| self.length(at);
        let fewer = self.course.with_fewer_changes(&changes, length).into_iter();
        let mut found: Vec<Self> = fewer.map(|course| self.with_course(course)).collect();
        let fewer = shorter(&self.disturbances).into_iter();
        found.extend(fewer.map(|disturbances| self.with(|plan| plan.disturbances = disturbances)));
        found.extend(shorter(&self.losses).into_iter().map(|losses| self.with(|plan| plan.losses = losses)));
        for (at, hold) in self.course.holds.iter().enumerate() {
            let calmer = simpler_patterns(&hold.bounce).into_iter();
            found.extend(calmer.map(|bounce| self.with(|plan| plan.course.holds[at].bounce = bounce)));
        }
        for (at, disturbance) in self.disturbances.iter().enumerate() {
            let calmer = simpler_patterns(&disturbance.window).into_iter();
            found.extend(calmer.map(|window| self.with(|plan| plan.disturbances[at].window = window)));
        }
        let quicker = self.course.shortened(&changes, length).into_iter();
        found.extend(quicker.map(|course| self.with_course(course)));
        for (at, disturbance) in self.disturbances.iter().enumerate() {
            let sooner = disturbance.begin.simpler().into_iter();
            found.extend(sooner.map(|begin| self.with(|plan| plan.disturbances[at].begin = begin)));
        }
        for (at, loss) in self.losses.iter().enumerate() {
            found.extend(less(loss.ticks, 1).map(|ticks| self.with(|plan| plan.losses[at].ticks = ticks)));
            let sooner = loss.begin.simpler().into_iter();
            found.extend(sooner.map(|begin| self.with(|plan| plan.losses[at].begin = begin)));
        }
        found
    }
}

/// Patterns that may turn over less often, or are shorter.
fn simpler_patterns(pattern: &[Reads]) -> Vec<Vec<Reads>> {
    let mut found = vec![Vec::new()];
    for all in [Reads::Contact, Reads::Contrary] {
        found.push(vec![all; pattern.len()]);
    }
    if !pattern.is_empty() {
        found.push(pattern[..pattern.len() / 2].to_vec());
        found.push(pattern[1..].to_vec());
        found.push(pattern[..pattern.len() - 1].to_vec());
    }
    found.extend((0..pattern.len()).map(|at| {
        let mut flipped = pattern.to_vec();
        flipped[at] = flipped[at].other();
        flipped
    }));
    found
}
