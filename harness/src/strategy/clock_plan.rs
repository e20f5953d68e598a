//! One pass of a clock, from its figures: phase, period within the tolerance, jitter, lost ticks.

use debounce_core::TickClock;
use rand::rngs::ChaCha8Rng;
use rand::{Rng, RngExt, SeedableRng};

use super::draw::{Begin, often_most};
use super::shrink::{less, shorter};

const MILLION: u128 = 1_000_000;

/// A pass of a clock as a list of intentions.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct ClockPlan {
    phase: Phase,
    drift: Drift,
    jitter: Jitter,
    losses: Vec<Loss>,
    seed: u64,
}

/// Where the first tick falls.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Phase {
    Zero,
    /// This share of the longest period, in 2^-32.
    Share(u32),
    /// So that, at a steady period, some tick falls so many units after this event of the trace.
    After {
        event: u32,
        units: i64,
    },
}

/// How the period leaves its nominal value.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Drift {
    Nominal,
    Shortest,
    Longest,
    /// Every tick anew: shortest, longest or between.
    Wandering,
}

/// How late each sample is taken.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Jitter {
    None,
    Full,
    /// Every tick anew: none, full or between.
    Each,
}

#[derive(Clone, Copy, PartialEq, Eq, Debug)]
struct Loss {
    begin: Begin,
    ticks: u64,
}

/// The instant of a tick, in units after the start of the trace, and whether it is lost.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Tick {
    pub(super) at: u128,
    pub(super) lost: bool,
}

pub(super) fn units_per_ns(clock: &TickClock) -> u128 {
    u128::from(clock.period().denominator()) * MILLION
}

/// Shortest, nominal and longest period in units.
fn periods(clock: &TickClock) -> [u128; 3] {
    let ppm = u128::from(clock.ppm());
    [MILLION - ppm, MILLION, MILLION + ppm].map(|share| u128::from(clock.period().numerator_ns()) * share)
}

impl ClockPlan {
    pub(super) fn draw<R: Rng>(clock: &TickClock, changes: usize, rng: &mut R) -> Self {
        let phase = match rng.random_range(0..4) {
            0 => Phase::Zero,
            1 => Phase::Share(rng.random_range(0..=u32::MAX)),
            _ => Phase::After { event: rng.random_range(0..64), units: rng.random_range(-1..=1) },
        };
        let drift = [Drift::Nominal, Drift::Shortest, Drift::Longest, Drift::Wandering];
        let jitter = [Jitter::None, Jitter::Full, Jitter::Each, Jitter::Each];
        let most_losses = if clock.lost_ticks() == 0 { 0 } else { changes + 1 };
        let losses = (0..rng.random_range(0..=most_losses))
            .map(|_| Loss {
                begin: Begin::draw(rng, 8 + u64::from(clock.lost_ticks()), 64),
                ticks: often_most(rng, 1, clock.lost_ticks().into()),
            })
            .collect();
        Self {
            phase,
            drift: drift[rng.random_range(0..4)],
            jitter: jitter[rng.random_range(0..4)],
            losses,
            seed: rng.random(),
        }
    }

    /// The ticks before `end`; `events` are the instants at which something happens, `changes` those of the
    /// contact, `spacing_ns` the stretch that holds no two runs of lost ticks. Everything but that in units.
    pub(super) fn ticks(
        &self,
        clock: &TickClock,
        end: u128,
        events: &[u128],
        changes: &[u128],
        spacing_ns: u64,
    ) -> Vec<Tick> {
        let [shortest, nominal, longest] = periods(clock);
        let jitter = u128::from(clock.jitter()) * units_per_ns(clock);
        let steady = match self.drift {
            Drift::Nominal | Drift::Wandering => nominal,
            Drift::Shortest => shortest,
            Drift::Longest => longest,
        };
        let mut rng = ChaCha8Rng::seed_from_u64(self.seed);
        let mut at = match self.phase {
            Phase::Zero => 0,
            Phase::Share(share) => ((longest - 1) * u128::from(share)) >> 32,
            Phase::After { event, units } => {
                let event = events.get(event as usize % events.len().max(1)).copied().unwrap_or(0);
                // A whole number of periods more keeps it above zero whatever is taken off.
                let shifted = event + units.unsigned_abs() as u128 * steady + jitter * steady;
                let late = if self.jitter == Jitter::Full { jitter } else { 0 };
                shifted.checked_add_signed(units.into()).unwrap_or(shifted).wrapping_sub(late) % steady
            }
        };
        let mut ticks = Vec::new();
        while at < end {
            let late = match self.jitter {
                Jitter::None => 0,
                Jitter::Full => jitter,
                Jitter::Each => one_of(&mut rng, 0, jitter),
            };
            ticks.push(Tick { at: at + late, lost: false });
            at += match self.drift {
                Drift::Wandering => one_of(&mut rng, shortest, longest),
                _ => steady,
            };
        }
        let stretch = u128::from(spacing_ns) * units_per_ns(clock) + jitter;
        let spacing = u64::try_from(stretch.div_ceil(shortest)).unwrap_or(u64::MAX).max(1);
        let near = |change: &u128| ticks.partition_point(|tick| tick.at < *change) as u64;
        let near: Vec<u64> = changes.iter().map(near).collect();
        self.lose(&mut ticks, &near, spacing, clock.lost_ticks().into());
        ticks
    }

    fn lose(&self, ticks: &mut [Tick], changes: &[u64], spacing: u64, most: u64) {
        let mut from = 0;
        for loss in &self.losses {
            let first = loss.begin.place(from, changes);
            let length = loss.ticks.min(most);
            if length == 0 || first >= ticks.len() as u64 {
                continue;
            }
            ticks.iter_mut().skip(first as usize).take(length as usize).for_each(|tick| tick.lost = true);
            from = first + length + spacing;
        }
    }

    pub(super) fn weight(&self) -> u64 {
        let phase = match self.phase {
            Phase::Zero => 0,
            Phase::Share(share) => 1 + u64::from(share),
            Phase::After { .. } => 1,
        };
        let losses = self.losses.iter().map(|loss| 1 + loss.ticks + loss.begin.weight());
        let odd = [self.drift != Drift::Nominal, self.drift == Drift::Wandering, self.jitter != Jitter::None];
        let odd =
            odd.iter().filter(|&&is_odd| is_odd).count() as u64 + u64::from(self.jitter == Jitter::Each);
        phase + losses.sum::<u64>() + odd
    }

    pub(super) fn runs_lost(&self) -> usize {
        self.losses.len()
    }

    pub(super) fn simpler(&self) -> Vec<Self> {
        let mut found = Vec::new();
        let fewer = shorter(&self.losses).into_iter();
        found.extend(fewer.map(|losses| Self { losses, ..self.clone() }));
        for drift in [Drift::Nominal, Drift::Shortest, Drift::Longest] {
            found.push(Self { drift, ..self.clone() });
        }
        for jitter in [Jitter::None, Jitter::Full] {
            found.push(Self { jitter, ..self.clone() });
        }
        found.push(Self { phase: Phase::Zero, ..self.clone() });
        if let Phase::Share(share) = self.phase {
            // The quotient of a number of 32 bits has no more.
            let less = less(share.into(), 1).map(|share| Phase::Share(share as u32));
            found.extend(less.map(|phase| Self { phase, ..self.clone() }));
        }
        for (at, loss) in self.losses.iter().enumerate() {
            let shorter = less(loss.ticks, 1).map(|ticks| Loss { ticks, ..*loss });
            found.extend(shorter.map(|loss| {
                let mut plan = self.clone();
                plan.losses[at] = loss;
                plan
            }));
        }
        found
    }
}

/// One end, the other, or between.
fn one_of<R: Rng>(rng: &mut R, least: u128, most: u128) -> u128 {
    match rng.random_range(0..3) {
        0 => least,
        1 => most,
        _ => rng.random_range(least..=most),
    }
}
