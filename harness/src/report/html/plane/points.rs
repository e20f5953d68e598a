//! Where each candidate stands in the plane of latency and immunity.

use debounce_core::{Bounds, PerPosition, TickClock, Verdict};
use rustc_hash::FxHashMap;

use crate::choose::{known_limit, physical_limit};
use crate::envelope::PhysicalEnvelope;
use crate::logic::Logic;
use crate::prove::{Limits, ProveError, prove_within};
use crate::study::Study;

/// Candidates that stand in the same place.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Point {
    /// The first of them by rank, with its tick.
    pub(super) name: String,
    /// The widest disturbance borne, in both positions.
    pub(super) bears_ns: u64,
    /// Every delay is less than this while such disturbances happen.
    pub(super) below_ns: u64,
    /// How many stand here.
    pub(super) candidates: usize,
    /// Whether one of them holds what is asked.
    pub(super) holds: bool,
    /// Whether one of them is the recommended one.
    pub(super) recommended: bool,
    /// Whether one of them runs at the recommended tick.
    pub(super) at_first_tick: bool,
    /// Whether no other bears at least as much and is no later.
    pub(super) on_front: bool,
}

/// Everything in the plane.
#[derive(Clone, PartialEq, Debug, Default)]
pub(super) struct Points {
    /// The candidates, by what they bear.
    pub(super) all: Vec<Point>,
    /// Those that none beats in both, from the narrowest on.
    pub(super) front: Vec<(u64, u64)>,
    /// What no logic can beat, at any tick.
    pub(super) limit: Vec<(u64, u64)>,
    /// What no logic can beat at the recommended tick.
    pub(super) limit_at_tick: Vec<(u64, u64)>,
    /// Candidates whose immunity has no closed form.
    pub(super) left_out: usize,
}

/// Widths tried, in samples; wider ones are not told apart.
const MOST_SAMPLES: u32 = 400;

/// Steps of the curve of the limit.
const STEPS: u64 = 64;

impl Points {
    pub(super) fn of(study: &Study) -> Self {
        let ladders: Vec<Ladder> =
            study.ranking.clocks.iter().map(|view| Ladder::new(study.physical, view.clock)).collect();
        let mut points = Self::default();
        let mut places: FxHashMap<(u64, u64), usize> = FxHashMap::default();
        let first_clock = study.ranking.candidates.first().map(|candidate| candidate.clock);
        for (rank, candidate) in study.ranking.candidates.iter().enumerate() {
            // Exploring takes time, so it is kept for the tick that matters most.
            let explored = Some(candidate.clock) == first_clock;
            let (bears_ns, below_ns) = match ladders[candidate.clock].place(&candidate.logic, explored) {
                Place::At(bears_ns, below_ns) => (bears_ns, below_ns),
                Place::Unknown => {
                    points.left_out += 1;
                    continue;
                }
                Place::Nowhere => continue,
            };
            let index = *places.entry((bears_ns, below_ns)).or_insert_with(|| {
                let name = format!("{}, {}", candidate.parameters, study.tick(candidate));
                points.all.push(Point {
                    name,
                    bears_ns,
                    below_ns,
                    candidates: 0,
                    holds: false,
                    recommended: false,
                    at_first_tick: false,
                    on_front: false,
                });
                points.all.len() - 1
            });
            let point = &mut points.all[index];
            point.candidates += 1;
            point.holds |= candidate.holds();
            point.recommended |= rank == 0 && candidate.holds();
            point.at_first_tick |= Some(candidate.clock) == first_clock;
        }
        points.mark_front();
        points.add_limits(study, first_clock.map(|clock| &ladders[clock]));
        points
    }

    fn mark_front(&mut self) {
        self.all.sort_by_key(|point| (point.bears_ns, u64::MAX - point.below_ns));
        // From the widest on, whoever is quicker than all before it is beaten by none.
        let mut quickest = u64::MAX;
        for point in self.all.iter_mut().rev() {
            if point.below_ns < quickest {
                quickest = point.below_ns;
                point.on_front = true;
            }
        }
        self.front =
            self.all.iter().filter(|p| p.on_front).map(|point| (point.bears_ns, point.below_ns)).collect();
    }

    fn add_limits(&mut self, study: &Study, ladder: Option<&Ladder>) {
        let widest = self.all.iter().map(|point| point.bears_ns).max().unwrap_or(0);
        let later = |pair: debounce_core::PerChange<u64>| pair.make.max(pair.break_);
        self.limit = (0..=STEPS)
            .map(|step| {
                let bears_ns = (u128::from(widest) * u128::from(step) / u128::from(STEPS)) as u64;
                (bears_ns, later(physical_limit(&disturbed(study.physical, bears_ns))))
            })
            .collect();
        if let Some(ladder) = ladder {
            self.limit_at_tick = ladder.limit(widest);
        }
    }
}

/// What is known of a candidate's place.
enum Place {
    /// What it bears, and how late it is while it does.
    At(u64, u64),
    /// It does not hold even without disturbances.
    Nowhere,
    /// It has no closed form that says.
    Unknown,
}

/// An envelope with disturbances of another width, the same in both positions.
fn disturbed(physical: PhysicalEnvelope, width_ns: u64) -> PhysicalEnvelope {
    PhysicalEnvelope { glitch_ns: PerPosition { open: width_ns, closed: width_ns }, ..physical }
}

/// The envelopes of one clock, with ever wider disturbances.
struct Ladder {
    clock: TickClock,
    /// For each number of samples the widest disturbance that touches no more, with the envelope that allows it.
    rungs: Vec<(u64, debounce_core::Envelope)>,
}

impl Ladder {
    fn new(physical: PhysicalEnvelope, clock: TickClock) -> Self {
        let longest = physical.dwell_ns.open.min(physical.dwell_ns.closed);
        let rungs = (0..MOST_SAMPLES)
            .map(|samples| widest_touching(&clock, samples, longest))
            .take_while(|&width_ns| width_ns < longest)
            .filter_map(|width_ns| Some((width_ns, disturbed(physical, width_ns).in_ticks(&clock).ok()?)))
            .collect();
        Self { clock, rungs }
    }

    /// What a logic bears at most, and how late it is while it does.
    ///
    /// Where the closed form gives up before it refuses, more may be borne than it knows, so there is no place.
    fn place(&self, logic: &Logic, explored: bool) -> Place {
        let mut held = None;
        for &(width_ns, envelope) in &self.rungs {
            let bounds = match logic.verdict(&envelope) {
                Verdict::Holds(bounds) => Some(bounds),
                Verdict::Fails(_) => None,
                Verdict::Unknown if explored => match explore(logic, &envelope) {
                    Ok(bounds) => bounds,
                    Err(_) => return Place::Unknown,
                },
                Verdict::Unknown => return Place::Unknown,
            };
            let Some(bounds) = bounds else { break };
            held = Some((width_ns, self.latest(bounds)));
        }
        held.map_or(Place::Nowhere, |(bears_ns, below_ns)| Place::At(bears_ns, below_ns))
    }

    fn latest(&self, Bounds { latency, .. }: Bounds) -> u64 {
        self.clock.delay_ns(latency.make.worst.max(latency.break_.worst)).1
    }

    /// What no logic can beat at this clock, a stair.
    fn limit(&self, widest_ns: u64) -> Vec<(u64, u64)> {
        const MOST_STEPS: usize = 60;
        let mut stair: Vec<(u64, u64)> = Vec::new();
        for &(width_ns, envelope) in self.rungs.iter().take(MOST_STEPS) {
            let Some(limit) = known_limit(&envelope) else { break };
            let below_ns = self.clock.delay_ns(limit.make.max(limit.break_)).1;
            // From just above the rung before, as many samples may be touched.
            if let Some(&(before, _)) = stair.last() {
                stair.push((before, below_ns));
            }
            stair.push((width_ns, below_ns));
            if width_ns > widest_ns {
                break;
            }
        }
        stair
    }
}

/// The bounds of a logic by exploration; `None` where it does not hold.
fn explore(logic: &Logic, envelope: &debounce_core::Envelope) -> Result<Option<Bounds>, ProveError> {
    let few = Limits { memory_bytes: 1 << 18, threads: 1 };
    Ok(prove_within(&logic.table()?, envelope, &few)?.bounds())
}

/// The widest disturbance that touches at most so many samples; no more than `most_ns`.
fn widest_touching(clock: &TickClock, samples: u32, most_ns: u64) -> u64 {
    let (mut fits, mut too_wide) = (0, most_ns.saturating_add(1));
    while too_wide - fits > 1 {
        let middle = fits + (too_wide - fits) / 2;
        if clock.samples_touched(middle) <= samples { fits = middle } else { too_wide = middle }
    }
    fits
}

#[cfg(test)]
mod tests {
    use debounce_core::Period;

    use super::*;

    #[test]
    fn widest_disturbance_touches_just_so_many_samples() {
        let clock = TickClock::new(Period::from_ms(1)).jitter_ns(10_000).tolerance_ppm(20_000);
        for samples in 1..6 {
            let widest = widest_touching(&clock, samples, 1_000_000_000);
            assert_eq!(clock.samples_touched(widest), samples);
            assert_eq!(clock.samples_touched(widest + 1), samples + 1);
        }
        assert_eq!(widest_touching(&clock, 0, 1_000_000_000), 0);
    }
}
