//! What a [`Wave`] is made from, and how it becomes simpler.

use debounce_core::{Position, TickClock};
use rand::{Rng, RngExt};

use super::clock_plan::{ClockPlan, units_per_ns};
use super::course::{Course, Hold, Taken};
use super::draw::{Begin, extra, often_most};
use super::shrink::{Plan, less, shorter};
use super::wave::{Wave, WaveSample};
use crate::envelope::PhysicalEnvelope;
use crate::sample::SampleClock;
use crate::trace::Trace;
use crate::truth::TruthChange;

/// A contact in time as a list of intentions, in nanoseconds. What the envelope does not allow is cut or put off.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct WavePlan {
    envelope: PhysicalEnvelope,
    tick: TickClock,
    course: Course<Pulse>,
    disturbances: Vec<Disturbance>,
    clock: ClockPlan,
}

#[derive(Clone, PartialEq, Eq, Debug)]
struct Disturbance {
    begin: Begin,
    width: u64,
    pulses: Vec<Pulse>,
}

/// A stretch, after the begin of its bounce or disturbance, in which the line is contrary to the contact.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
struct Pulse {
    from: u64,
    until: u64,
}

/// Something that makes the line arbitrary.
struct Strike {
    from: u64,
    until: u64,
    pulses: Vec<Pulse>,
}

impl Pulse {
    /// Pulses within `from..=until`: the whole of it, or a few drawn ones.
    fn draw<R: Rng>(rng: &mut R, from: u64, until: u64) -> Vec<Self> {
        if from >= until {
            return Vec::new();
        }
        if rng.random_bool(0.5) {
            return vec![Self { from, until }];
        }
        let mut ends: Vec<u64> =
            (0..2 * rng.random_range(0..4)).map(|_| rng.random_range(from..=until)).collect();
        ends.sort_unstable();
        ends.chunks(2).map(|pair| Self { from: pair[0], until: pair[1] }).collect()
    }

    fn cut(self, from: u64, until: u64) -> Option<Self> {
        let cut = Self { from: self.from.max(from), until: self.until.min(until) };
        (cut.from < cut.until).then_some(cut)
    }
}

impl WavePlan {
    pub(crate) fn draw<R: Rng>(
        envelope: &PhysicalEnvelope,
        tick: &TickClock,
        most_changes: usize,
        rng: &mut R,
    ) -> Self {
        let e = envelope;
        let period = tick.period().numerator_ns() / u64::from(tick.period().denominator()) + 1;
        let widest = e.glitch_ns.open.max(e.glitch_ns.closed);
        let bounce = e.bounce_ns.make.max(e.bounce_ns.break_);
        let dwell = e.dwell_ns.open.max(e.dwell_ns.closed);
        let span = 2 * (e.quiet_ns + e.calm_ns + widest + bounce) + 4 * period;
        let reach = widest + bounce + e.calm_ns + e.quiet_ns.min(widest + period) + period;
        let start = Position::closed_if(rng.random_bool(0.5));
        let mut contact = start;
        let mut holds = Vec::new();
        for _ in 0..rng.random_range(0..=most_changes) {
            contact = contact.opposite();
            let length = often_most(rng, 0, *e.bounce_ns.of(contact.reached_by()));
            // The change itself is the first edge, so the line reads the new position for an instant at least.
            let bounce = Pulse::draw(rng, 1, length);
            holds.push(Hold { bounce, extra: extra(rng, period, span) });
        }
        let most_disturbances = if widest == 0 { 0 } else { 2 * (holds.len() + 1) };
        let disturbances = (0..rng.random_range(0..=most_disturbances))
            .map(|_| {
                let begin = Begin::draw(rng, reach, span);
                let width = often_most(rng, 1, widest);
                Disturbance { begin, width, pulses: Pulse::draw(rng, 0, width) }
            })
            .collect();
        let tail = if rng.random_bool(0.75) { dwell + span } else { rng.random_range(1..=dwell.max(1)) };
        let clock = ClockPlan::draw(tick, holds.len(), rng);
        let lead = extra(rng, period, span);
        let course = Course { start, lead, holds, tail };
        Self { envelope: *e, tick: *tick, course, disturbances, clock }.pinned()
    }

    /// The same trace with every disturbance at its place, so that it stays there when something before it is taken
    /// away.
    fn pinned(mut self) -> Self {
        let (changes, end) = self.changes();
        let (_, begun) = self.disturbances(&changes, &self.bounces(&changes), end);
        self.disturbances = begun;
        self
    }

    /// The changes, and the end of the trace.
    fn changes(&self) -> (Vec<TruthChange>, u64) {
        let mut at = self.course.lead + 1;
        let mut contact = self.course.start;
        let mut changes = Vec::new();
        for hold in &self.course.holds {
            contact = contact.opposite();
            changes.push(TruthChange { change: contact.reached_by(), at_ns: at });
            // At least an instant, or two changes would be none.
            at += (self.envelope.dwell_ns.at(contact) + hold.extra).max(1);
        }
        let last = changes.last().map_or(self.course.lead + 1, |change| change.at_ns);
        (changes, last + self.course.tail.max(1))
    }

    /// When each change happens.
    fn instants(&self) -> Vec<u64> {
        self.changes().0.iter().map(|change| change.at_ns).collect()
    }

    fn bounces(&self, changes: &[TruthChange]) -> Vec<Strike> {
        let strikes = changes.iter().zip(&self.course.holds).map(|(change, hold)| {
            let most = self.envelope.bounce_ns.at(change.change);
            let pulses: Vec<Pulse> = hold.bounce.iter().filter_map(|pulse| pulse.cut(1, most)).collect();
            let last = pulses.last().map_or(0, |pulse| pulse.until);
            Strike { from: change.at_ns, until: change.at_ns + last, pulses }
        });
        strikes.collect()
    }

    fn disturbances(
        &self,
        changes: &[TruthChange],
        bounces: &[Strike],
        end: u64,
    ) -> (Vec<Strike>, Vec<Disturbance>) {
        let near: Vec<u64> = changes.iter().map(|change| change.at_ns).collect();
        let mut strikes: Vec<Strike> = Vec::new();
        let mut begun = Vec::new();
        for disturbance in &self.disturbances {
            let free_from = strikes.last().map_or(0, |last| last.until + self.envelope.quiet_ns);
            let wanted = disturbance.begin.place(free_from, &near);
            let Some((at, widest)) = self.allowed_from(wanted, changes, bounces, &strikes, end) else {
                continue;
            };
            let width = disturbance.width.min(widest);
            let pulses: Vec<Pulse> =
                disturbance.pulses.iter().filter_map(|pulse| pulse.cut(0, width)).collect();
            begun.push(Disturbance { begin: Begin::At(at), width, pulses: pulses.clone() });
            strikes.push(Strike { from: at, until: at + width, pulses });
        }
        (strikes, begun)
    }

    /// The first instant from `at` on at which a disturbance may begin, and how wide it may be.
    fn allowed_from(
        &self,
        mut at: u64,
        changes: &[TruthChange],
        bounces: &[Strike],
        strikes: &[Strike],
        end: u64,
    ) -> Option<(u64, u64)> {
        while at < end {
            let passed = changes.partition_point(|change| change.at_ns <= at);
            let contact = if passed == 0 { self.course.start } else { changes[passed - 1].change.to() };
            let widest = self.envelope.glitch_ns.at(contact);
            if widest == 0 {
                at = changes.get(passed)?.at_ns;
                continue;
            }
            let mut calm_from = 0;
            if let (true, Some(change)) =
                (self.envelope.calm_ns > 0, passed.checked_sub(1).map(|at| changes[at]))
            {
                let bounce_ends = bounces[..passed].iter().map(|bounce| bounce.until).max().unwrap_or(0);
                let straddling =
                    strikes.last().filter(|last| last.from < change.at_ns).map_or(0, |last| last.until);
                calm_from = bounce_ends.max(change.at_ns).max(straddling) + self.envelope.calm_ns;
            }
            if at >= calm_from {
                return Some((at, widest));
            }
            at = calm_from;
        }
        None
    }

    /// The edges of the line: the contact, turned over where a strike is contrary. A disturbance outdoes a bounce.
    fn edges(
        &self,
        changes: &[TruthChange],
        bounces: &[Strike],
        disturbances: &[Strike],
        end: u64,
    ) -> Vec<u64> {
        let mut instants: Vec<u64> = changes.iter().map(|change| change.at_ns).collect();
        for strike in bounces.iter().chain(disturbances) {
            instants.extend([strike.from, strike.until]);
            instants.extend(strike.pulses.iter().flat_map(|p| [strike.from + p.from, strike.from + p.until]));
        }
        instants.sort_unstable();
        instants.dedup();
        let contrary_in = |strike: &Strike, at: u64| {
            strike.pulses.iter().any(|p| (strike.from + p.from..strike.from + p.until).contains(&at))
        };
        let mut line = self.course.start;
        let mut edges = Vec::new();
        // An instant at the very start is no edge of a trace; nothing strikes there but from the next one on.
        for at in instants.into_iter().filter(|&at| at > 0 && at <= end) {
            let passed = changes.partition_point(|change| change.at_ns <= at);
            let contact = if passed == 0 { self.course.start } else { changes[passed - 1].change.to() };
            let disturbed = disturbances.iter().find(|strike| (strike.from..strike.until).contains(&at));
            let contrary = match disturbed {
                Some(strike) => contrary_in(strike, at),
                None => bounces.iter().any(|strike| contrary_in(strike, at)),
            };
            let reads = if contrary { contact.opposite() } else { contact };
            if reads != line {
                line = reads;
                edges.push(at);
            }
        }
        edges
    }

    fn sampled(&self, trace: &Trace, truth: &[TruthChange], events: &[u64]) -> Vec<WaveSample> {
        let units = units_per_ns(&self.tick);
        let in_units = |ns: u64| u128::from(ns) * units;
        let events: Vec<u128> = events.iter().map(|&ns| in_units(ns)).collect();
        let changes: Vec<u128> = truth.iter().map(|change| in_units(change.at_ns)).collect();
        let e = &self.envelope;
        let spacing = e.dwell_ns.open.max(e.dwell_ns.closed).max(e.quiet_ns).max(e.calm_ns);
        let ticks = self.clock.ticks(&self.tick, in_units(trace.end_ns()), &events, &changes, spacing);
        let taken = ticks.into_iter().map(|tick| {
            let passed = changes.partition_point(|&change| change <= tick.at);
            let contact = if passed == 0 { self.course.start } else { truth[passed - 1].change.to() };
            // An edge within the nanosecond of the sample is at its begin, so rounding down sees it.
            let at_ns = u64::try_from(tick.at / units).unwrap_or(u64::MAX);
            WaveSample { at_units: tick.at, contact, sample: trace.position_at(at_ns), lost: tick.lost }
        });
        taken.collect()
    }

    fn weight(&self) -> u64 {
        // Narrow pulses are not simpler: they only make it harder for a sample to meet them.
        let holds = self.course.holds.iter().map(|hold| 1 + hold.bounce.len() as u64 + hold.extra);
        let disturbances = self.disturbances.iter().map(|d| 1 + d.pulses.len() as u64 + d.begin.weight());
        let sum: u64 = holds.chain(disturbances).sum();
        (self.course.lead + self.course.tail + sum).saturating_add(self.clock.weight())
    }

    /// From the change at the begin of a hold that is not the last to the next change.
    fn length(&self, at: usize) -> u64 {
        let contact = self.course.after(at);
        (self.envelope.dwell_ns.at(contact) + self.course.holds[at].extra).max(1)
    }

    /// Moves what begins after a stretch that is taken out.
    fn take_out(&mut self, from: u64, length: u64) {
        for disturbance in &mut self.disturbances {
            disturbance.begin = disturbance.begin.without(from, length);
        }
    }

    /// Another course, and what begins after the stretch that it takes out moved with what follows.
    fn with_course(&self, (course, taken): (Course<Pulse>, Option<Taken>)) -> Self {
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

impl Plan for WavePlan {
    type Value = Wave;

    fn value(&self) -> Wave {
        let (truth, end) = self.changes();
        let bounces = self.bounces(&truth);
        let (disturbances, _) = self.disturbances(&truth, &bounces, end);
        let edges = self.edges(&truth, &bounces, &disturbances, end);
        let mut events: Vec<u64> = truth.iter().map(|change| change.at_ns).collect();
        events.extend(disturbances.iter().flat_map(|strike| [strike.from, strike.until]));
        events.extend(bounces.iter().map(|strike| strike.until));
        let trace = Trace::new(self.course.start, 0, end, edges, 0).expect("edges rise and lie inside");
        let samples = self.sampled(&trace, &truth, &events);
        let first = samples.first().map_or(0, |sample| sample.at_units);
        let units_per_ns = units_per_ns(&self.tick);
        let clock = SampleClock::new(self.tick).phase_ns(u64::try_from(first / units_per_ns).unwrap_or(0));
        Wave { trace, truth, clock, samples, units_per_ns }
    }

    fn measure(&self) -> (usize, u64, u64) {
        let wave = self.value();
        let last = wave.truth.last().map_or(self.course.start, |change| change.change.to());
        // A trace cut off within a disturbance has not saved the edge back.
        let cut_off = wave.trace.position_at(wave.trace.end_ns()) != last;
        let edges =
            wave.trace.edges().len() + usize::from(cut_off) + wave.truth.len() + self.clock.runs_lost();
        (edges, wave.trace.end_ns(), self.weight())
    }

    fn simpler(&self) -> Vec<Self> {
        let changes = self.instants();
        let length = |at| self.length(at);
        let fewer = self.course.with_fewer_changes(&changes, length).into_iter();
        let mut found: Vec<Self> = fewer.map(|course| self.with_course(course)).collect();
        let fewer = shorter(&self.disturbances).into_iter();
        found.extend(fewer.map(|disturbances| self.with(|plan| plan.disturbances = disturbances)));
        for (at, hold) in self.course.holds.iter().enumerate() {
            let calmer = shorter(&hold.bounce).into_iter();
            found.extend(calmer.map(|bounce| self.with(|plan| plan.course.holds[at].bounce = bounce)));
        }
        for (at, disturbance) in self.disturbances.iter().enumerate() {
            let calmer = shorter(&disturbance.pulses).into_iter();
            found.extend(calmer.map(|pulses| self.with(|plan| plan.disturbances[at].pulses = pulses)));
        }
        found.extend(self.clock.simpler().into_iter().map(|clock| self.with(|plan| plan.clock = clock)));
        let quicker = self.course.shortened(&changes, length).into_iter();
        found.extend(quicker.map(|course| self.with_course(course)));
        for (at, disturbance) in self.disturbances.iter().enumerate() {
            let sooner = disturbance.begin.simpler().into_iter();
            found.extend(sooner.map(|begin| self.with(|plan| plan.disturbances[at].begin = begin)));
        }
        // Last, so that what matters has moved to the front before the end is cut off right behind it.
        found.extend(less(self.course.tail, 1).map(|tail| self.with(|plan| plan.course.tail = tail)));
        found
    }
}
