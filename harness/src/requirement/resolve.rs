//! Fills in what was not given, from the recordings or from stated defaults, and says which.

use debounce_core::{PerChange, PerPosition, TickClock};

use super::check;
use super::{ContactKind, Core, Figures, InFront, Level, Origin, Requirement, Role, Sourced, TickChoice};
use crate::characterise::tolerance;
use crate::envelope::PhysicalEnvelope;
use crate::problem::{Problem, Problems};
use crate::quantity::{Bytes, Instructions, Share, TickPeriod, Ticks, Time};

/// What the recordings show, as far as they show it.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Measured {
    /// Longest bounce after each change.
    pub bounce: PerChange<Option<Time>>,
    /// Widest disturbance begun in each position.
    pub disturbance: PerPosition<Option<Seen>>,
    /// Shortest time between two disturbances.
    pub quiet: Option<Seen>,
    /// Shortest time in each position.
    pub shortest: PerPosition<Option<Seen>>,
}

/// The extreme of something that recordings show, and how often they show it.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Seen {
    /// The longest or the shortest, on the safe side and with those in doubt.
    pub time: Time,
    /// How many were recorded without doubt whether they are one.
    pub count: u64,
}

/// What is taken where recordings say nothing or too little.
struct Usual {
    time: Time,
    why: &'static str,
    /// The same, where too few were recorded to claim anything better.
    few: &'static str,
}

/// The usual time of a figure, with the same source for both cases.
macro_rules! usual {
    ($ms:literal, $why:literal) => {
        Usual {
            time: Time::from_ms($ms),
            why: $why,
            few: concat!($why, "; too few were recorded to claim anything better"),
        }
    };
}

/// A requirement in which every value is known, together with where it came from.
#[derive(Clone, PartialEq, Debug)]
pub struct Resolved {
    /// What the contact is called.
    pub name: Sourced<String>,
    /// What sort of contact it is.
    pub kind: Sourced<ContactKind>,
    /// What hangs on it.
    pub role: Sourced<Role>,
    /// The level of the line while the contact is closed.
    pub closed: Sourced<Level>,
    /// The times that are asked for.
    pub required: Figures<Sourced<Time>>,
    /// How sure a claim from recordings must be.
    pub confidence: Sourced<Share>,
    /// Which share of all operations such a claim must cover.
    pub coverage: Sourced<Share>,
    /// How much was added to what the recordings show.
    pub margin: Sourced<Share>,
    /// The tick periods that may be chosen from, shortest first.
    pub ticks: Sourced<Vec<TickPeriod>>,
    /// How far the period may be off, either way.
    pub tolerance: Sourced<Share>,
    /// Peak-to-peak jitter of a sample instant and the sampling aperture.
    pub jitter: Sourced<Time>,
    /// Ticks that may be lost in a row.
    pub lost: Sourced<Ticks>,
    /// RAM for each input, where it is limited.
    pub ram: Option<Sourced<Bytes>>,
    /// The fastest tick that the firmware can serve, where it is limited.
    pub fastest_tick: Option<Sourced<TickPeriod>>,
    /// Instructions of a tick for each input, where they are limited.
    pub instructions: Option<Sourced<Instructions>>,
    /// The core on which they are counted, where one is stated.
    pub core: Option<Sourced<Core>>,
    /// The network in front of the pin, and what it makes of the contact.
    pub network: Option<InFront>,
}

/// One value of a resolved requirement, for tables and for JSON.
#[derive(Clone, PartialEq, Debug)]
pub struct ResolvedRow {
    /// Its name, as in the requirement file: `required.latency.make`.
    pub key: &'static str,
    /// The value with its unit.
    pub text: String,
    /// Where it came from.
    pub origin: Origin,
}

const HAND: &str = "the longest delay that a person feels as immediate (from memory)";
const OPERATION: Usual = usual!(70, "a quick press of a button by hand (common practice)");
const BOUNCE: &str = "the bounce that data sheets of small tactile switches allow (5 to 10 ms)";
const DISTURBANCE: Usual =
    usual!(1, "one burst of fast transients at 100 kHz, 0.75 ms (IEC 61000-4-4), rounded up");
const QUIET: Usual = usual!(9, "a disturbance at each half-cycle of 50 Hz mains (our choice)");
const CALM: &str = "disturbances know nothing of the contact (the cautious case)";
const OURS: &str = "our choice";
const TOLERANCE: &str = "a calibrated on-chip oscillator (common practice)";
const TICKS: &str = "usual timer periods (our choice)";

impl Requirement {
    /// Fills in every value that was not given: from `measured` with the margin added, else from a default.
    ///
    /// A width, a quiet or a shortest time of which too few were recorded for the coverage and the confidence asked for
    /// counts only where it is worse than the default: an extreme that nobody waited for is no claim.
    ///
    /// # Errors
    /// Where a value that was filled in contradicts another.
    pub fn resolve(&self, measured: &Measured) -> Result<Resolved, Problems> {
        let resolved = self.fill_in(measured)?;
        let known = resolved.required.clone().map(Some);
        match Problems::from_found(check::figures(&known, self.source())) {
            Some(problems) => Err(problems),
            None => {
                let network = InFront::of(self, resolved.at_contact())?;
                Ok(Resolved { network, ..resolved })
            }
        }
    }

    /// As [`resolve`](Self::resolve), but what the recordings show may contradict what is asked: for looking at
    /// recordings, when nothing is claimed of them.
    ///
    /// # Errors
    /// Where the jitter is not shorter than the tick period.
    pub fn fill_in(&self, measured: &Measured) -> Result<Resolved, Problems> {
        let margin = or_default(&self.margin, Share::from_percent(25), OURS);
        let longer = |time: Time| {
            Time::from_ns(scale(time.ns(), 1_000_000 + u64::from(margin.value.ppm()), 1_000_000))
        };
        // What must not be overestimated is divided, and rounded down.
        let shorter = |time: Time| {
            let parts = 1_000_000 + u128::from(margin.value.ppm());
            // The quotient is no larger than the time.
            Time::from_ns(u64::try_from(u128::from(time.ns()) * 1_000_000 / parts).unwrap_or(u64::MAX))
        };
        let figure = |given: Option<Sourced<Time>>, seen: Option<Time>, default: Time, why: &'static str| {
            given.unwrap_or_else(|| match seen {
                Some(time) => Sourced::new(time, Origin::Measured),
                None => Sourced::new(default, Origin::Default(why)),
            })
        };
        let confidence = or_default(&self.confidence, Share::from_percent(95), OURS);
        let coverage = or_default(&self.coverage, Share::from_percent(95), OURS);
        let needed = needed(coverage.value, confidence.value);
        let supported =
            |given: Option<Sourced<Time>>, seen: Option<(Time, u64)>, usual: &Usual, safer: Safer| {
                given.unwrap_or_else(|| match seen {
                    None => Sourced::new(usual.time, Origin::Default(usual.why)),
                    Some((time, count)) if count >= needed || safer(time, usual.time) == time => {
                        Sourced::new(time, Origin::Measured)
                    }
                    Some(_) => Sourced::new(usual.time, Origin::Default(usual.few)),
                })
            };
        let wide = |given, seen: Option<Seen>| {
            supported(given, seen.map(|seen| (longer(seen.time), seen.count)), &DISTURBANCE, Time::max)
        };
        let short = |given, seen: Option<Seen>, usual: &Usual| {
            supported(given, seen.map(|seen| (shorter(seen.time), seen.count)), usual, Time::min)
        };
        let (given, ms, up) = (&self.required, Time::from_ms, longer);
        let required = Figures {
            latency: PerChange {
                make: figure(given.latency.make, None, ms(100), HAND),
                break_: figure(given.latency.break_, None, ms(100), HAND),
            },
            shortest: PerPosition {
                open: short(given.shortest.open, measured.shortest.open, &OPERATION),
                closed: short(given.shortest.closed, measured.shortest.closed, &OPERATION),
            },
            bounce: PerChange {
                make: figure(given.bounce.make, measured.bounce.make.map(up), ms(10), BOUNCE),
                break_: figure(given.bounce.break_, measured.bounce.break_.map(up), ms(10), BOUNCE),
            },
            disturbance: PerPosition {
                open: wide(given.disturbance.open, measured.disturbance.open),
                closed: wide(given.disturbance.closed, measured.disturbance.closed),
            },
            quiet: short(given.quiet, measured.quiet, &QUIET),
            calm: figure(given.calm, None, Time::ZERO, CALM),
        };
        let ticks = self.tick_periods();
        let jitter = self.jitter(&ticks)?;
        Ok(Resolved {
            name: or_default(&self.contact.name, "contact".to_owned(), OURS),
            kind: or_default(&self.contact.kind, ContactKind::Other, "nobody said"),
            role: or_default(&self.contact.role, Role::Control, "nobody said that it guards or meters"),
            closed: or_default(
                &self.contact.closed,
                Level::Low,
                "a contact to ground with a pull-up (common practice)",
            ),
            required,
            confidence,
            coverage,
            margin,
            ticks,
            tolerance: or_default(&self.clock.tolerance, Share::from_percent(2), TOLERANCE),
            jitter,
            lost: or_default(&self.clock.lost, Ticks(0), "the timer never misses"),
            ram: self.budget.ram,
            fastest_tick: self.budget.fastest_tick,
            instructions: self.budget.instructions,
            core: self.budget.core,
            network: None,
        })
    }

    /// The jitter, which must be shorter than every tick period: else two samples could change places.
    fn jitter(&self, ticks: &Sourced<Vec<TickPeriod>>) -> Result<Sourced<Time>, Problems> {
        let tolerance = self.clock.tolerance.map_or(Share::from_percent(2), |tolerance| tolerance.value);
        // The list is never empty; without a shortest period there is nothing to compare with.
        let shortest = ticks.value.first().map_or(u64::MAX, |tick| tick.nearest_ns());
        let least =
            u128::from(shortest) * u128::from(1_000_000_u32.saturating_sub(tolerance.ppm())) / 1_000_000;
        match &self.clock.jitter {
            Some(jitter) if u128::from(jitter.value.ns()) >= least => {
                let message = format!(
                    "a jitter of {} is not shorter than the tick period of {}, less its tolerance",
                    jitter.value, ticks.value[0]
                );
                let problem =
                    check::point(Problem::new(message), self.source(), &jitter.origin, "the jitter");
                let problem = check::point(problem, self.source(), &ticks.origin, "the tick period");
                Err(problem
                    .help("two samples could change places; write a shorter jitter or a longer tick")
                    .into())
            }
            Some(jitter) => Ok(*jitter),
            None => Ok(default_jitter(shortest)),
        }
    }

    /// The tick periods to try, shortest first, none faster than the budget allows.
    #[must_use]
    pub fn tick_periods(&self) -> Sourced<Vec<TickPeriod>> {
        let usual = [200, 500, 1_000, 2_000, 4_000, 5_000, 8_000, 10_000];
        let period = |us: u64| TickPeriod::try_from_ns(us * 1_000);
        let mut ticks = match &self.clock.ticks {
            Some(ticks) => Sourced::new(ticks.value.periods(), ticks.origin),
            None => Sourced::new(usual.into_iter().filter_map(period).collect(), Origin::Default(TICKS)),
        };
        if let Some(fastest) = &self.budget.fastest_tick {
            ticks.value.retain(|&period| period >= fastest.value);
            if ticks.value.is_empty() {
                // Only the default list can come out empty: a given one was checked against the budget.
                ticks = Sourced::new(vec![fastest.value], fastest.origin);
            }
        }
        ticks.value.sort();
        ticks
    }
}

impl TickChoice {
    /// The periods of the list; of a range both ends and 1, 2 and 5 times each power of ten between them.
    #[must_use]
    pub fn periods(&self) -> Vec<TickPeriod> {
        match self {
            Self::OneOf(periods) => periods.clone(),
            Self::Range(from, to) => {
                let mut periods = vec![*from];
                let decades = (0..19).map(|power| 10_u64.pow(power));
                let steps = decades.flat_map(|decade| [1, 2, 5].map(|step| decade.saturating_mul(step)));
                let between =
                    steps.filter_map(TickPeriod::try_from_ns).filter(|period| from < period && period < to);
                periods.extend(between);
                periods.extend((from < to).then_some(*to));
                periods
            }
        }
    }
}

/// Of two times the one that promises less.
type Safer = fn(Time, Time) -> Time;

/// How many must be recorded before their extreme may be claimed to cover `coverage` with `confidence`; what is no
/// share cannot be claimed by any number.
fn needed(coverage: Share, confidence: Share) -> u64 {
    let share = |share: Share| tolerance::Share::try_new(share.fraction());
    let (Ok(coverage), Ok(confidence)) = (share(coverage), share(confidence)) else { return u64::MAX };
    tolerance::operations_needed(1, coverage, confidence).unwrap_or(u64::MAX)
}

fn or_default<T: Clone>(given: &Option<Sourced<T>>, default: T, why: &'static str) -> Sourced<T> {
    given.clone().unwrap_or_else(|| Sourced::new(default, Origin::Default(why)))
}

/// `ns * numerator / denominator`, rounded up.
fn scale(ns: u64, numerator: u64, denominator: u64) -> u64 {
    let product = u128::from(ns) * u128::from(numerator);
    u64::try_from(product.div_ceil(u128::from(denominator))).unwrap_or(u64::MAX)
}

/// The most samples of latency whose delay by `clock` is no longer than `latency`; 0 where none is.
#[must_use]
pub fn allowed_samples(clock: &TickClock, latency: Time) -> u32 {
    // The delay grows with the samples: find the last that fits.
    let (mut fits, mut too_many) = (0_u32, u32::MAX);
    while too_many - fits > 1 {
        let middle = fits + (too_many - fits) / 2;
        if clock.delay_ns(middle).1 <= latency.ns() { fits = middle } else { too_many = middle }
    }
    fits
}

impl<V> Figures<V> {
    /// Every figure through `f`.
    #[must_use]
    pub fn map<U>(self, f: impl Fn(V) -> U) -> Figures<U> {
        Figures {
            latency: PerChange { make: f(self.latency.make), break_: f(self.latency.break_) },
            shortest: PerPosition { open: f(self.shortest.open), closed: f(self.shortest.closed) },
            bounce: PerChange { make: f(self.bounce.make), break_: f(self.bounce.break_) },
            disturbance: PerPosition { open: f(self.disturbance.open), closed: f(self.disturbance.closed) },
            quiet: f(self.quiet),
            calm: f(self.calm),
        }
    }
}

/// The jitter where none is stated, by the shortest of the tick periods in nanoseconds.
pub(super) fn default_jitter(shortest: u64) -> Sourced<Time> {
    let why = "a short interrupt latency: 20 us, or 2 % of the shortest tick period (our choice)";
    Sourced::new(Time::from_ns((shortest / 50).min(20_000)), Origin::Default(why))
}

impl Resolved {
    /// The sample clock at one tick period.
    #[must_use]
    pub fn clock(&self, tick: TickPeriod) -> TickClock {
        TickClock::new(tick.period())
            .tolerance_ppm(self.tolerance.value.ppm())
            .jitter_ns(self.jitter.value.ns())
            .lost(self.lost.value.0)
    }

    /// The waveforms that must be served, in time: those of the pin, which are those of the contact where no network
    /// stands between them.
    #[must_use]
    pub fn physical(&self) -> PhysicalEnvelope {
        self.network.as_ref().map_or_else(|| self.at_contact(), |network| network.at_pin.physical)
    }

    /// The waveforms of the contact, in time.
    #[must_use]
    pub fn at_contact(&self) -> PhysicalEnvelope {
        let required = &self.required;
        let ns = |time: Sourced<Time>| time.value.ns();
        PhysicalEnvelope {
            bounce_ns: PerChange { make: ns(required.bounce.make), break_: ns(required.bounce.break_) },
            glitch_ns: PerPosition {
                open: ns(required.disturbance.open),
                closed: ns(required.disturbance.closed),
            },
            quiet_ns: ns(required.quiet),
            calm_ns: ns(required.calm),
            dwell_ns: PerPosition { open: ns(required.shortest.open), closed: ns(required.shortest.closed) },
        }
    }

    /// The most samples of latency whose delay stays within the required latency; 0 where none does.
    #[must_use]
    pub fn allowed_samples(&self, tick: TickPeriod) -> PerChange<u32> {
        let (clock, latency) = (self.clock(tick), &self.required.latency);
        PerChange {
            make: allowed_samples(&clock, latency.make.value),
            break_: allowed_samples(&clock, latency.break_.value),
        }
    }

    /// The caution for the role, which cannot be switched off.
    #[must_use]
    pub fn caution(&self) -> Option<&'static str> {
        self.role.value.caution()
    }

    /// Every value with where it came from, in the order of the requirement file.
    #[must_use]
    pub fn rows(&self) -> Vec<ResolvedRow> {
        fn row<T: ToString>(key: &'static str, sourced: &Sourced<T>) -> ResolvedRow {
            ResolvedRow { key, text: sourced.value.to_string(), origin: sourced.origin }
        }
        let required = &self.required;
        let ticks: Vec<String> = self.ticks.value.iter().map(TickPeriod::to_string).collect();
        let mut rows = vec![
            row("contact.name", &self.name),
            row("contact.kind", &self.kind),
            row("contact.role", &self.role),
            row("contact.closed", &self.closed),
            row("required.latency.make", &required.latency.make),
            row("required.latency.break", &required.latency.break_),
            row("required.shortest_closed", &required.shortest.closed),
            row("required.shortest_open", &required.shortest.open),
            row("required.bounce.make", &required.bounce.make),
            row("required.bounce.break", &required.bounce.break_),
            row("required.disturbance.open", &required.disturbance.open),
            row("required.disturbance.closed", &required.disturbance.closed),
            row("required.quiet", &required.quiet),
            row("required.calm", &required.calm),
            row("required.confidence", &self.confidence),
            row("required.coverage", &self.coverage),
            row("required.margin", &self.margin),
            ResolvedRow { key: "clock.tick", text: ticks.join(", "), origin: self.ticks.origin },
            row("clock.tolerance", &self.tolerance),
            row("clock.jitter", &self.jitter),
            row("clock.lost", &self.lost),
        ];
        rows.extend(self.ram.as_ref().map(|ram| row("budget.ram", ram)));
        rows.extend(self.fastest_tick.as_ref().map(|tick| row("budget.fastest_tick", tick)));
        rows.extend(self.instructions.as_ref().map(|most| row("budget.instructions", most)));
        rows.extend(self.core.as_ref().map(|core| row("budget.core", core)));
        rows.extend(self.network.iter().flat_map(InFront::rows));
        rows
    }
}
