//! One line as it is recorded: contact and disturbances through its input network.

use debounce_core::{Change, Position};

use super::dice::{Between, Dice};
use super::panel::MadeLine;
use super::part::{Actuation, Contact, Touch};
use super::pickup::{Disturber, Timing};
use super::scenario::{Noise, record};
use super::stage::{Drive, InputStage, Running};
use crate::trace::{Trace, TraceError};
use crate::truth::TruthChange;

/// Something that happens on the line. Source 0 is the contact, the others are the disturbers.
#[derive(Clone, Copy, Debug)]
struct Event {
    at_ns: u64,
    source: usize,
    /// For the contact what [`Touch`] says, for a disturber its microvolts.
    value: i64,
}

/// A line that is being recorded. Events wait in a queue until everything before the next change is known.
pub(super) struct Line<'a> {
    contact: &'a Contact,
    disturbers: &'a [Disturber],
    supply_uv: i64,
    queue: Vec<Event>,
    /// What each source does at the moment.
    now: Vec<i64>,
    /// The line, and the same line without disturbances where there are any.
    full: Running,
    clean: Option<Running>,
    position: Position,
    truth: Vec<TruthChange>,
    /// When each disturber of its own clock comes next, and its dice.
    due: Vec<Option<(u64, Dice)>>,
    windows: Vec<Noise>,
}

/// Streams of disturbers with a clock of their own begin here; those of operations count from 1.
const DISTURBER_STREAM: u64 = 1 << 62;

impl<'a> Line<'a> {
    pub(super) fn new(
        contact: &'a Contact,
        disturbers: &'a [Disturber],
        stage: InputStage,
        (seed, number): (u64, u64),
        with_volts: bool,
    ) -> Self {
        let due = disturbers.iter().enumerate().map(|(index, disturber)| match disturber.timing {
            Timing::Every { period_ns } => {
                let mut dice = Dice::of(seed, number, DISTURBER_STREAM + index as u64);
                Some((dice.draw(Between(1, period_ns.1.max(1))), dice))
            }
            _ => None,
        });
        let mut now = vec![0; disturbers.len() + 1];
        now[0] = 1000;
        Self {
            contact,
            disturbers,
            supply_uv: stage.supply_uv,
            queue: Vec::new(),
            now,
            full: Running::at_rest(stage, with_volts),
            clean: (!disturbers.is_empty()).then(|| Running::at_rest(stage, false)),
            position: Position::Open,
            truth: Vec::new(),
            due: due.collect(),
            windows: Vec::new(),
        }
    }

    /// The contact changes at `at_ns` and is meant to stay until `until_ns`; gives the earliest instant at which
    /// it may change again.
    pub(super) fn change(
        &mut self,
        change: Change,
        (at_ns, until_ns): (u64, u64),
        (actuation, done): (Actuation, u64),
        dice: &mut Dice,
    ) -> u64 {
        self.run_to(at_ns);
        let touches = self.contact.touches(change, at_ns, actuation, done, dice);
        let mut clear_from = touches.last().map_or(at_ns, |touch| touch.at_ns);
        self.queue.extend(touches.iter().map(|&Touch { at_ns, apart_permille }| Event {
            at_ns,
            source: 0,
            value: i64::from(apart_permille),
        }));
        self.position = change.to();
        self.truth.push(TruthChange { change, at_ns });
        for index in 0..self.disturbers.len() {
            clear_from = clear_from.max(self.disturb(index, clear_from, until_ns, dice));
        }
        clear_from.max(at_ns) + 1
    }

    /// Places a disturbance in the dwell that has just begun, if there shall be one and it fits; gives the
    /// instant from which the line is clear again.
    fn disturb(&mut self, index: usize, clear_from: u64, until_ns: u64, dice: &mut Dice) -> u64 {
        let Disturber { pickup, timing } = self.disturbers[index];
        let (permille, clear_ns) = match timing {
            Timing::Every { .. } => return clear_from,
            Timing::Resting { permille, clear_ns } => (permille, clear_ns),
            Timing::AfterBounce { permille, .. } => (permille, 0),
        };
        if !dice.chance(permille) {
            return clear_from;
        }
        let pushes = pickup.pushes(0, self.position, self.supply_uv, dice);
        let Some(&(width, _)) = pushes.last() else { return clear_from };
        let from = match timing {
            Timing::AfterBounce { after_ns, .. } => clear_from + dice.draw(after_ns).max(1),
            _ => {
                let (least, latest) =
                    (clear_from + clear_ns, until_ns.saturating_sub(clear_ns.saturating_add(width)));
                if least >= latest {
                    return clear_from;
                }
                dice.draw(Between(least, latest))
            }
        };
        self.push(index, from, &pushes);
        from + width + clear_ns
    }

    fn push(&mut self, index: usize, from_ns: u64, pushes: &[(u64, i64)]) -> u64 {
        let source = index + 1;
        self.queue.extend(pushes.iter().map(|&(after, value)| Event {
            at_ns: from_ns + after,
            source,
            value,
        }));
        let until_ns = from_ns + pushes.last().map_or(0, |push| push.0);
        self.windows.push(Noise { position: self.position, from_ns, until_ns });
        until_ns
    }

    /// Lets everything happen that comes before `at_ns`.
    fn run_to(&mut self, at_ns: u64) {
        for index in 0..self.due.len() {
            let Some((mut next, mut dice)) = self.due[index].take() else { continue };
            while next < at_ns {
                let Disturber { pickup, timing } = self.disturbers[index];
                let pushes = pickup.pushes(0, self.position, self.supply_uv, &mut dice);
                let until = if pushes.is_empty() { next } else { self.push(index, next, &pushes) };
                let Timing::Every { period_ns } = timing else { break };
                // One ends before the next of the same sort begins.
                next = (next + dice.draw(period_ns).max(1)).max(until + 1);
            }
            self.due[index] = Some((next, dice));
        }
        self.queue.sort_by_key(|event| event.at_ns);
        let count = self.queue.partition_point(|event| event.at_ns < at_ns);
        for index in 0..count {
            self.happen(self.queue[index]);
        }
        self.queue.drain(..count);
    }

    fn happen(&mut self, event: Event) {
        self.now[event.source] = event.value;
        // The contact's own share is at most 1000.
        let apart = self.now[0] as u16;
        let push_uv = self.now[1..].iter().sum();
        self.full.drive(event.at_ns, Drive { apart, push_uv });
        if let Some(clean) = self.clean.as_mut().filter(|_| event.source == 0) {
            clean.drive(event.at_ns, Drive { apart, push_uv: 0 });
        }
    }

    /// Ends the recording at `end_ns`, as a recorder of this sample period shows it.
    pub(super) fn finish(
        mut self,
        name: String,
        end_ns: u64,
        resolution: u64,
    ) -> Result<MadeLine, TraceError> {
        self.run_to(end_ns);
        self.full.advance(end_ns);
        let seen = |edges: Vec<u64>| -> Vec<u64> {
            record(edges, resolution).into_iter().filter(|&edge| edge <= end_ns).collect()
        };
        let edges = seen(self.full.edges);
        let clean = self.clean.map(|mut clean| {
            clean.advance(end_ns);
            seen(clean.edges)
        });
        let at_sample = |ns: u64| ns.next_multiple_of(resolution);
        let truth: Vec<TruthChange> =
            self.truth.iter().map(|t| TruthChange { at_ns: at_sample(t.at_ns), ..*t }).collect();
        self.windows.sort_by_key(|window| window.from_ns);
        let alone = clean.as_deref().unwrap_or(&edges);
        let noise = visible(&self.windows, &edges, alone, resolution);
        let bounce_ends_ns = bounce_ends(&truth, alone);
        Ok(MadeLine {
            name,
            trace: Trace::new(Position::Open, 0, end_ns, edges, resolution)?,
            truth,
            bounce_ends_ns,
            noise,
            volts: self.full.volts,
        })
    }
}

/// The last edge that the contact alone causes after each change and before the next.
fn bounce_ends(truth: &[TruthChange], edges: &[u64]) -> Vec<u64> {
    let mut next = 0;
    let mut ends = Vec::with_capacity(truth.len());
    for (index, change) in truth.iter().enumerate() {
        let until = truth.get(index + 1).map_or(u64::MAX, |after| after.at_ns);
        let mut end = change.at_ns;
        while let Some(&edge) = edges.get(next).filter(|&&edge| edge < until) {
            end = end.max(edge);
            next += 1;
        }
        ends.push(end);
    }
    ends
}

/// What of each disturbance shows: where the line differs from the same line without any.
fn visible(windows: &[Noise], full: &[u64], clean: &[u64], resolution: u64) -> Vec<Noise> {
    let mut shown: Vec<Option<(u64, u64)>> = vec![None; windows.len()];
    let (mut with, mut without, mut from) = (0, 0, None);
    let mut window = 0;
    while let Some(at) = full.get(with).into_iter().chain(clean.get(without)).min().copied() {
        with += usize::from(full.get(with) == Some(&at));
        without += usize::from(clean.get(without) == Some(&at));
        let differs = with % 2 != without % 2;
        match (differs, from) {
            (true, None) => from = Some(at),
            (false, Some(begin)) => {
                from = None;
                let started = |index: usize| {
                    windows.get(index).is_some_and(|w| w.from_ns.next_multiple_of(resolution) <= begin)
                };
                while started(window + 1) {
                    window += 1;
                }
                if let Some(stretch) = shown.get_mut(window) {
                    *stretch = Some((stretch.map_or(begin, |(first, _)| first), at));
                }
            }
            _ => {}
        }
    }
    let noise = windows.iter().zip(shown).filter_map(|(window, stretch)| {
        stretch.map(|(from_ns, until_ns)| Noise { position: window.position, from_ns, until_ns })
    });
    noise.collect()
}
