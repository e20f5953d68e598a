//! Several contacts at once, on one clock: what is done to them and what their lines pick up.

use debounce_core::{Change, Turn};

use super::dice::{Between, Dice};
use super::line::Line;
use super::part::{Actuation, Contact};
use super::pickup::Disturber;
use super::routine::Routine;
use super::scenario::Noise;
use super::stage::InputStage;
use crate::trace::{Trace, TraceError};
use crate::truth::TruthChange;

/// A recording to be invented, of any number of contacts.
///
/// # Examples
/// ```
/// use harness::generate::{Actuation, Habit, InputStage, Panel, PanelContact, Preset};
/// let preset = Preset::find("tactile").unwrap();
/// let habit = Habit::find("taps").unwrap();
/// let contact = PanelContact {
///     routines: vec![habit.routine(20, Actuation::Usual)],
///     ..PanelContact::new("start", preset.specimen(7))
/// };
/// let panel = Panel { seed: 7, resolution_ns: 1_000, contacts: vec![contact] };
/// let made = panel.generate(false).unwrap();
/// assert_eq!(made.lines[0].truth.len(), 40);
/// ```
#[derive(Clone, PartialEq, Debug)]
pub struct Panel {
    /// The seed of everything random.
    pub seed: u64,
    /// The recorder's own sample period, in nanoseconds; every edge is seen at its next sample.
    pub resolution_ns: u64,
    /// The contacts.
    pub contacts: Vec<PanelContact>,
}

/// One contact, its line and what is done to it.
#[derive(Clone, PartialEq, Debug)]
pub struct PanelContact {
    /// What its channel is called; an encoder has two, `NAME.a` and `NAME.b`.
    pub name: String,
    /// The contact.
    pub part: Contact,
    /// For an encoder: how long one detent takes, in nanoseconds. An operation is one detent.
    pub detent_ns: Option<Between>,
    /// Operations that it had done before.
    pub done: u64,
    /// What is done to it, one after the other.
    pub routines: Vec<Routine>,
    /// What its line picks up.
    pub disturbers: Vec<Disturber>,
    /// Its input.
    pub stage: InputStage,
}

impl PanelContact {
    /// A new contact with a plain input that nobody touches and nothing disturbs.
    #[must_use]
    pub fn new(name: impl Into<String>, part: impl Into<Contact>) -> Self {
        Self {
            name: name.into(),
            part: part.into(),
            detent_ns: None,
            done: 0,
            routines: Vec::new(),
            disturbers: Vec::new(),
            stage: InputStage::default(),
        }
    }
}

/// One line of an invented recording, with its truth.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct MadeLine {
    /// What the channel is called.
    pub name: String,
    /// What a recorder would have shown.
    pub trace: Trace,
    /// What the contact did: the instants at which its surfaces first touched or first parted.
    pub truth: Vec<TruthChange>,
    /// Last edge of the line that each change of `truth` causes by itself.
    pub bounce_ends_ns: Vec<u64>,
    /// What of the disturbances shows, in order: from first to last difference from an undisturbed line.
    pub noise: Vec<Noise>,
    /// The voltage at the input in microvolts, from each instant on, where it was wanted; times are not those of
    /// the recorder's samples but exact.
    pub volts: Option<Vec<(u64, i64)>>,
}

/// A detent that an encoder was turned by.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct MadeTurn {
    /// Which encoder.
    pub name: String,
    /// The last of the four changes of its phases.
    pub at_ns: u64,
    /// Which way.
    pub turn: Turn,
}

/// An invented recording.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Made {
    /// Every channel, all of the same length.
    pub lines: Vec<MadeLine>,
    /// What encoders were turned by, encoder by encoder, in order.
    pub turns: Vec<MadeTurn>,
}

/// Rest at the start and the end, in nanoseconds.
const MARGIN_NS: u64 = 100_000_000;

impl Panel {
    /// Invents the recording, with the volts where they are wanted.
    ///
    /// A dwell is lengthened where its bounce or a disturbance would not fit. Pulses that the recorder's sample
    /// period swallows leave no edge.
    ///
    /// # Errors
    /// Only when it would last for more than about 500 years.
    pub fn generate(&self, with_volts: bool) -> Result<Made, TraceError> {
        let resolution = self.resolution_ns.max(1);
        let (mut running, mut turns, mut end) = (Vec::new(), Vec::new(), 0);
        for (number, contact) in self.contacts.iter().enumerate() {
            let number = number as u64;
            let line = |phase: u64| {
                let own = (self.seed, number | phase << 32);
                Line::new(&contact.part, &contact.disturbers, contact.stage, own, with_volts)
            };
            let mut worked =
                Worked { contact, seed: self.seed, number, resolution, now: MARGIN_NS, operation: 0 };
            if contact.detent_ns.is_some() {
                let mut phases = [line(0), line(1)];
                turns.extend(worked.turn(&mut phases));
                let names = ["a", "b"].map(|phase| format!("{}.{phase}", contact.name));
                running.extend(names.into_iter().zip(phases));
            } else {
                let mut line = line(0);
                worked.work(&mut line);
                running.push((contact.name.clone(), line));
            }
            end = end.max(worked.now.saturating_add(MARGIN_NS));
        }
        let end = end.next_multiple_of(resolution);
        let lines = running.into_iter().map(|(name, line)| line.finish(name, end, resolution));
        Ok(Made { lines: lines.collect::<Result<_, _>>()?, turns })
    }
}

/// A contact while it is worked; `now` is where its next change falls.
struct Worked<'a> {
    contact: &'a PanelContact,
    seed: u64,
    number: u64,
    resolution: u64,
    now: u64,
    operation: u64,
}

impl Worked<'_> {
    fn dice(&mut self) -> Dice {
        self.operation += 1;
        Dice::of(self.seed, self.number, self.operation)
    }

    fn done(&self) -> u64 {
        self.contact.done.saturating_add(self.operation)
    }

    fn work(&mut self, line: &mut Line<'_>) {
        for routine in &self.contact.routines {
            for index in 1..=routine.operations {
                let mut dice = self.dice();
                self.dwell(line, Change::Make, routine.closed_ns, routine.actuation, &mut dice);
                let is_last = index.is_multiple_of(routine.group.max(1)) || index == routine.operations;
                let open = if is_last { routine.pause_ns } else { routine.open_ns };
                self.dwell(line, Change::Break, open, routine.actuation, &mut dice);
            }
        }
    }

    fn dwell(
        &mut self,
        line: &mut Line<'_>,
        change: Change,
        range: Between,
        actuation: Actuation,
        dice: &mut Dice,
    ) {
        let until = self.now.saturating_add(dice.draw(range).max(self.resolution));
        let earliest = line.change(change, (self.now, until), (actuation, self.done()), dice);
        self.now = until.max(earliest);
    }

    /// Turns an encoder: runs of up to eight detents one way, then a pause.
    fn turn(&mut self, phases: &mut [Line<'_>; 2]) -> Vec<MadeTurn> {
        let mut turns = Vec::new();
        let detent_ns = self.contact.detent_ns.unwrap_or(Between(0, 0));
        let mut earliest = [0; 2];
        for routine in &self.contact.routines {
            let (mut left, mut way) = (0, Turn::Forward);
            for _ in 0..routine.operations {
                let mut dice = self.dice();
                if left == 0 {
                    left = dice.draw(Between(1, 8));
                    way = if dice.chance(500) { Turn::Forward } else { Turn::Backward };
                    self.now = self.now.saturating_add(dice.draw(routine.pause_ns));
                }
                left -= 1;
                self.detent(phases, &mut earliest, way, (dice.draw(detent_ns), routine.actuation), &mut dice);
                let at_ns = turns_at(self.now, self.resolution);
                turns.push(MadeTurn { name: self.contact.name.clone(), at_ns, turn: way });
                self.now = self.now.saturating_add(dice.draw(detent_ns) / 4).max(self.now + self.resolution);
            }
        }
        turns
    }

    /// One cycle of the two phases; ends with `now` at the last of its four changes.
    fn detent(
        &mut self,
        phases: &mut [Line<'_>; 2],
        earliest: &mut [u64; 2],
        way: Turn,
        (detent_ns, actuation): (u64, Actuation),
        dice: &mut Dice,
    ) {
        let leading = usize::from(way == Turn::Backward);
        for quarter in 0..4 {
            let lasts = (detent_ns / 4000 * dice.draw(Between(800, 1200))).max(self.resolution);
            if quarter > 0 {
                self.now = self.now.saturating_add(lasts);
            }
            let (phase, change) = match quarter {
                0 => (leading, Change::Make),
                1 => (1 - leading, Change::Make),
                2 => (leading, Change::Break),
                _ => (1 - leading, Change::Break),
            };
            self.now = self.now.max(earliest[phase]);
            let until = self.now.saturating_add(2 * lasts);
            earliest[phase] = phases[phase].change(change, (self.now, until), (actuation, self.done()), dice);
        }
    }
}

fn turns_at(now: u64, resolution: u64) -> u64 {
    now.next_multiple_of(resolution)
}

#[cfg(test)]
mod tests {
    use debounce_core::{Machine, PerChange, Phases, Position, Quadrature, QuadratureEvent, Resolution};

    use super::*;
    use crate::generate::{BurstRate, Disturbances, Habit, Pickup, Preset, Timing};
    use crate::truth::check_truth;

    const MS: u64 = 1_000_000;

    fn pressed(preset: &Preset, seed: u64, disturbers: Vec<Disturber>, stage: InputStage) -> Panel {
        let routine = Habit::find("presses").unwrap().routine(60, Actuation::Usual);
        let contact = PanelContact {
            routines: vec![routine],
            detent_ns: preset.detent_ns,
            disturbers,
            stage,
            ..PanelContact::new(preset.name, preset.specimen(seed))
        };
        Panel { seed, resolution_ns: 1_000, contacts: vec![contact] }
    }

    fn pulses(timing: Timing) -> Disturber {
        let kind = Disturbances {
            pulses: Between(1, 3),
            pulse_ns: Between(20_000, 900_000),
            rest_ns: Between(5_000, 90_000),
        };
        Disturber { pickup: Pickup::Pulses(kind), timing }
    }

    fn disturbers() -> Vec<Disturber> {
        vec![
            pulses(Timing::Resting { permille: 400, clear_ns: 10 * MS }),
            pulses(Timing::AfterBounce { permille: 100, after_ns: Between(MS, 4 * MS) }),
            Disturber {
                pickup: Pickup::FastTransients { rate: BurstRate::Khz100, peak_uv: 4_000_000 },
                timing: Timing::Every { period_ns: Between(300 * MS, 300 * MS) },
            },
        ]
    }

    /// Where the contact is, by a rule of its own: the last change at or before the instant.
    fn contact_at(line: &MadeLine, at_ns: u64) -> Position {
        line.truth
            .iter()
            .rfind(|change| change.at_ns <= at_ns)
            .map_or(Position::Open, |change| change.change.to())
    }

    /// Whether the truth says that the line may differ from the contact at this instant.
    fn excused(line: &MadeLine, at_ns: u64) -> bool {
        let bounces =
            line.truth.iter().zip(&line.bounce_ends_ns).any(|(t, &end)| t.at_ns <= at_ns && at_ns < end);
        bounces || line.noise.iter().any(|noise| noise.from_ns <= at_ns && at_ns < noise.until_ns)
    }

    #[test]
    fn truth_explains_every_instant_of_every_line() {
        let network = InputStage { apart_ns: 200_000, touching_ns: 100_000, ..InputStage::default() };
        let (mut noises, mut instants) = (0, 0);
        for preset in Preset::all() {
            for stage in [InputStage::default(), network] {
                let made = pressed(preset, 11, disturbers(), stage).generate(false).unwrap();
                for line in &made.lines {
                    check_truth(&line.trace, &line.truth).unwrap();
                    noises += line.noise.len();
                    // Both sides of every edge, and an even grid besides.
                    let edges = line.trace.edges().iter().flat_map(|&edge| [edge - 1, edge]);
                    for at in edges.chain((0..line.trace.end_ns()).step_by(7_919_000)) {
                        instants += 1;
                        assert!(
                            line.trace.position_at(at) == contact_at(line, at) || excused(line, at),
                            "{} at {at}",
                            line.name
                        );
                    }
                }
            }
        }
        assert!(noises > 1_000 && instants > 50_000, "{noises} {instants}");
    }

    #[test]
    fn disturbance_that_the_network_swallows_is_none() {
        let burst = disturbers().split_off(2);
        let tactile = Preset::find("tactile").unwrap();
        let noise = |stage| {
            let panel = Panel { resolution_ns: 1, ..pressed(tactile, 3, burst.clone(), stage) };
            panel.generate(false).unwrap().lines.remove(0).noise
        };
        let bare = noise(InputStage::default());
        assert!(bare.len() > 20, "{}", bare.len());
        // From the first pulse to the last, in the time of the standard, less the rest after the last.
        let clear = bare.iter().filter(|burst| burst.until_ns - burst.from_ns == 74 * 10_000 + 50).count();
        assert!(clear > 15, "{clear}");
        let network = InputStage { apart_ns: 20_000, touching_ns: 20_000, ..InputStage::default() };
        assert_eq!(noise(network), []);
    }

    #[test]
    fn bounces_of_every_preset_lie_inside_its_range() {
        for preset in Preset::all() {
            let mut worst = PerChange { make: 0, break_: 0 };
            for seed in 0..20 {
                let made = pressed(preset, seed, vec![], InputStage::default()).generate(false).unwrap();
                for (change, end) in
                    made.lines.iter().flat_map(|line| line.truth.iter().zip(&line.bounce_ends_ns))
                {
                    let lasts = end - change.at_ns;
                    // Each end is seen at its next sample.
                    assert!(lasts <= preset.longest_ns.at(change.change) + 1_000, "{} {lasts}", preset.name);
                    let worst = match change.change {
                        Change::Make => &mut worst.make,
                        Change::Break => &mut worst.break_,
                    };
                    *worst = lasts.max(*worst);
                }
            }
            for change in [Change::Make, Change::Break] {
                assert!(
                    worst.at(change) * 5 > preset.longest_ns.at(change),
                    "{} {change:?} {worst:?}",
                    preset.name
                );
            }
        }
    }

    #[test]
    fn panel_of_one_seed_gives_the_same_and_of_another_something_else() {
        let relay = Preset::find("relay").unwrap();
        let made = |seed| pressed(relay, seed, disturbers(), InputStage::default()).generate(true).unwrap();
        assert_eq!(made(5), made(5));
        assert_ne!(made(5).lines[0].trace, made(6).lines[0].trace);
    }

    #[test]
    fn panel_contact_added_leaves_the_others_as_they_were() {
        let mut panel = pressed(Preset::find("reed").unwrap(), 4, disturbers(), InputStage::default());
        let alone = panel.generate(false).unwrap();
        panel.contacts.push(PanelContact { name: "second".into(), ..panel.contacts[0].clone() });
        let both = panel.generate(false).unwrap();
        assert_eq!(alone.lines[0].truth, both.lines[0].truth);
        assert_ne!(both.lines[0].truth, both.lines[1].truth, "each contact has dice of its own");
    }

    /// Volts read with the thresholds of the input give the levels, where the recorder misses nothing.
    #[test]
    fn volts_at_the_thresholds_are_the_levels() {
        let network = InputStage { apart_ns: 150_000, touching_ns: 90_000, ..InputStage::default() };
        for stage in [InputStage::default(), network] {
            let mut panel = pressed(Preset::find("membrane").unwrap(), 9, disturbers(), stage);
            panel.resolution_ns = 1;
            let made = panel.generate(true).unwrap();
            let (mut position, mut edges) = (Position::Open, Vec::new());
            for &(at, volts) in made.lines[0].volts.as_ref().unwrap() {
                let to = match position {
                    Position::Open => volts <= stage.low_uv,
                    Position::Closed => volts >= stage.high_uv,
                };
                if to {
                    position = position.opposite();
                    edges.push(at);
                }
            }
            assert!(edges == made.lines[0].trace.edges());
        }
    }

    #[test]
    fn encoder_feeds_quadrature_the_detents_it_was_turned_by() {
        let encoder = Preset::find("encoder").unwrap();
        let made = pressed(encoder, 21, vec![], InputStage::default()).generate(false).unwrap();
        assert_eq!((made.lines[0].name.as_str(), made.lines[1].name.as_str()), ("encoder.a", "encoder.b"));
        let decoder = Quadrature::new(Resolution::X4);
        let (mut state, mut count, mut turned) = (Quadrature::POWER_UP, 0, 0);
        let mut turns = made.turns.iter().peekable();
        let tick = 100_000;
        for at in (0..made.lines[0].trace.end_ns()).step_by(tick) {
            let phases =
                Phases { a: made.lines[0].trace.position_at(at), b: made.lines[1].trace.position_at(at) };
            if let Some(event) = decoder.step(&mut state, phases) {
                assert_ne!(event, QuadratureEvent::Lost, "at {at}");
                count += i64::from(event.steps());
            }
            while let Some(turn) = turns.next_if(|turn| turn.at_ns + 2_100_000 <= at) {
                turned += i64::from(turn.turn.sign());
                assert_eq!(count, turned * 4, "after the detent at {}", turn.at_ns);
            }
        }
        assert_eq!((made.turns.len(), turns.next()), (60, None));
        assert!(made.turns.iter().any(|turn| turn.turn == Turn::Backward));
    }
}
