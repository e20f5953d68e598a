//! Segmentation against synthetic truth, over a grid of contacts and disturbances.
//!
//! Disturbances know nothing of the contact here: they strike at any time, also in a bounce, right before or right after
//! one. Of the operations that the segmentation does not call ambiguous at least 99.9 % must be found exactly, to the
//! sample: kind, first and last edge. `cargo test --test segmentation_grid -- --nocapture` lists every cell.

use debounce_core::{Change, Position};
use harness::characterise::{SegmentOptions, Segmentation, segment};
use harness::trace::Trace;

use world::{CONTACTS, DISTURBANCES, World};

const US: u64 = 1_000;
const MS: u64 = 1_000_000;

/// All that this test needs of the generator: bounces and disturbances by name, as edges from an instant on.
mod world {
    use debounce_core::{Change, PerChange};
    use harness::generate::{Between, Bounce, ContactModel, Dice, Disturbances, SecondBurst};

    use super::{MS, US};

    /// A tactile dome, a push-button with second bursts, a slow rocker (ranges of the plots by G. Sutherland,
    /// "switch_bouncing", public domain), a reed (bounce 0.1 ms typical: Coto RI-02 data sheet), a power relay (openings
    /// within 16 ms of the first closure: measured at blog.bogpeople.com, 2012), a contact that hardly bounces.
    pub(crate) const CONTACTS: [&str; 6] = ["dome", "push-button", "rocker", "reed", "relay", "clean"];

    /// Nothing; lone spikes; chatter of up to 80 us pulses; bursts of 75 pulses at 5 kHz and at 100 kHz (IEC 61000-4-4);
    /// a row of spikes at each half-cycle of 50 Hz mains; a wide dip.
    pub(crate) const DISTURBANCES: [&str; 7] =
        ["none", "spike", "chatter", "burst 5 kHz", "burst 100 kHz", "mains", "dip"];

    pub(crate) struct World {
        contact: ContactModel,
        disturbance: Option<Disturbances>,
        dice: Dice,
    }

    impl World {
        pub(crate) fn new(contact: &str, disturbance: &str, seed: u64) -> Self {
            let contact = contact_named(contact);
            Self { contact, disturbance: disturbance_named(disturbance), dice: Dice::new(seed, 1) }
        }

        /// A number between both ends.
        pub(crate) fn draw(&mut self, least: u64, greatest: u64) -> u64 {
            self.dice.draw(Between(least, greatest))
        }

        /// The edges of one change, the first at `at_ns`.
        pub(crate) fn bounce(&mut self, change: Change, at_ns: u64) -> Vec<u64> {
            self.contact.edges(change, at_ns, &mut self.dice)
        }

        /// The edges of one disturbance, the first at `at_ns`; none where there are no disturbances.
        pub(crate) fn disturbance(&mut self, at_ns: u64) -> Vec<u64> {
            self.disturbance.map_or_else(Vec::new, |kind| kind.edges(at_ns, &mut self.dice))
        }
    }

    fn bounce(
        first: (u64, u64),
        restitution: (u64, u64),
        touch: (u64, u64),
        second: Option<SecondBurst>,
    ) -> Bounce {
        let us = |(least, greatest): (u64, u64)| Between(least * US, greatest * US);
        Bounce {
            first_flight_ns: us(first),
            restitution_permille: Between(restitution.0, restitution.1),
            touch_ns: us(touch),
            shortest_flight_ns: 10 * US,
            second,
        }
    }

    fn contact_named(name: &str) -> ContactModel {
        let second = Some(SecondBurst {
            permille: 300,
            after_ns: Between(200 * US, 500 * US),
            first_flight_ns: Between(50 * US, 150 * US),
        });
        let (make, break_) = match name {
            "dome" => {
                (bounce((15, 30), (200, 300), (2, 5), None), bounce((300, 400), (500, 700), (5, 60), None))
            }
            "push-button" => (
                bounce((250, 350), (400, 600), (10, 50), second),
                bounce((150, 250), (300, 500), (10, 50), second),
            ),
            "rocker" => (
                bounce((2_000, 3_000), (400, 600), (50, 200), None),
                bounce((1_000, 2_000), (300, 500), (50, 200), None),
            ),
            "reed" => (bounce((40, 60), (300, 500), (5, 20), None), bounce((1, 5), (100, 200), (1, 2), None)),
            "relay" => (
                bounce((5_000, 6_000), (450, 550), (200, 900), None),
                bounce((20, 80), (300, 500), (20, 90), None),
            ),
            _ => (bounce((1, 5), (100, 200), (1, 2), None), bounce((1, 5), (100, 200), (1, 2), None)),
        };
        ContactModel { bounce: PerChange { make, break_ } }
    }

    fn disturbance_named(name: &str) -> Option<Disturbances> {
        let kind = |pulses: (u64, u64), pulse_us: (u64, u64), rest_us: (u64, u64)| {
            Some(Disturbances {
                pulses: Between(pulses.0, pulses.1),
                pulse_ns: Between(pulse_us.0 * US, pulse_us.1 * US),
                rest_ns: Between(rest_us.0 * US, rest_us.1 * US),
            })
        };
        match name {
            "spike" => kind((1, 1), (1, 20), (1, 1)),
            "chatter" => kind((1, 6), (5, 80), (20, 90)),
            "burst 5 kHz" => kind((75, 75), (1, 2), (198, 199)),
            "burst 100 kHz" => kind((75, 75), (1, 2), (8, 9)),
            "mains" => kind((2, 12), (20, 400), (9_600, 9_980)),
            "dip" => kind((1, 1), (100, 3 * MS / US), (1, 1)),
            _ => None,
        }
    }
}

/// A recording with what the contact did: kind, first and last edge of each change.
struct Made {
    trace: Trace,
    truth: Vec<(Change, u64, u64)>,
}

/// The recorder's sample period.
const PERIOD_NS: u64 = US;

/// One recording: 40 operations, and a disturbance every 3 s on average, at any time.
fn record(contact: &str, disturbance: &str, seed: u64) -> Made {
    let mut world = World::new(contact, disturbance, seed);
    let (mut now, mut truth, mut edges) = (world.draw(100 * MS, 900 * MS), Vec::new(), Vec::new());
    for _ in 0..40 {
        for (change, dwell) in [(Change::Make, (60, 400)), (Change::Break, (100, 2_000))] {
            let burst = world.bounce(change, now);
            truth.push((change, seen(now), seen(*burst.last().expect("an edge"))));
            edges.extend(burst.into_iter().map(seen));
            now += world.draw(dwell.0 * MS, dwell.1 * MS);
        }
    }
    let mut at = world.draw(0, 3_000 * MS);
    while at < now {
        edges.extend(world.disturbance(at).into_iter().map(seen));
        at += world.draw(200 * MS, 5_800 * MS);
    }
    // The line is the contact, turned over while disturbed: two edges in one sample leave none.
    edges.sort_unstable();
    let line: Vec<u64> =
        edges.chunk_by(|a, b| a == b).filter(|same| same.len() % 2 == 1).map(|same| same[0]).collect();
    let end = now.max(line.last().copied().unwrap_or(0)) + 500 * MS;
    Made { trace: Trace::new(Position::Open, 0, end, line, PERIOD_NS).expect("in order"), truth }
}

fn seen(ns: u64) -> u64 {
    ns.next_multiple_of(PERIOD_NS)
}

/// What came of the operations of some recordings.
#[derive(Clone, Copy, PartialEq, Eq, Debug, Default)]
struct Tally {
    operations: usize,
    ambiguous: usize,
    exact: usize,
    /// True changes that were not found exactly and about which nothing was said to be in doubt.
    missed: usize,
    /// Operations found without doubt where the contact did nothing.
    invented: usize,
}

impl Tally {
    fn of(made: &Made) -> Self {
        let found = segment(&made.trace, &SegmentOptions::default()).expect("operations");
        let mut tally = Self { operations: made.truth.len(), ..Self::default() };
        for &(change, first, last) in &made.truth {
            if in_doubt(&found, first, last) {
                tally.ambiguous += 1;
            } else if found
                .operations
                .iter()
                .any(|o| (o.change, o.burst.first_ns, o.burst.last_ns) == (change, first, last))
            {
                tally.exact += 1;
            } else {
                tally.missed += 1;
            }
        }
        let touches =
            |first: u64, last: u64| made.truth.iter().any(|&(_, from, until)| first <= until && last >= from);
        tally.invented = found
            .operations
            .iter()
            .filter(|o| o.ambiguity.is_none() && !touches(o.burst.first_ns, o.burst.last_ns))
            .count();
        tally
    }

    fn and(self, other: Self) -> Self {
        Self {
            operations: self.operations + other.operations,
            ambiguous: self.ambiguous + other.ambiguous,
            exact: self.exact + other.exact,
            missed: self.missed + other.missed,
            invented: self.invented + other.invented,
        }
    }

    fn line(&self, contact: &str, disturbance: &str) -> String {
        let Self { operations, ambiguous, exact, missed, invented } = self;
        let share = *ambiguous as f64 * 100.0 / *operations as f64;
        format!(
            "{contact:<12} {disturbance:<14} {operations:>6} {exact:>6} {ambiguous:>5} ({share:>5.2} %) {missed:>4} {invented:>4}"
        )
    }
}

/// Whether something about a change is said to be in doubt: the operation over it, or a disturbance beside it whose
/// doubt is whether it belongs to the change.
fn in_doubt(found: &Segmentation, first: u64, last: u64) -> bool {
    let over = |from: u64, until: u64| from <= last && until >= first;
    let operations = found.operations.iter().filter(|o| o.ambiguity.is_some());
    let disturbances = found.disturbances.iter().filter_map(|d| Some((d, d.ambiguity?)));
    operations.into_iter().any(|o| over(o.burst.first_ns, o.burst.last_ns))
        || disturbances.into_iter().any(|(d, doubt)| {
            let rest = (doubt.at_ns, doubt.at_ns + doubt.run_ns);
            over(d.burst.first_ns.min(rest.0), d.burst.last_ns.max(rest.1))
        })
}

/// Seeds from here on were not used while the segmentation was written.
const SEEDS: std::ops::Range<u64> = 7_300_000..7_300_012;

#[test]
fn segmentation_over_the_grid_finds_unambiguous_operations_exactly() {
    use rayon::prelude::*;
    let seeds = match std::env::var("GRID_SEEDS").ok().and_then(|from| from.parse::<u64>().ok()) {
        Some(from) => from..from + 12,
        None => SEEDS,
    };
    let mut listing = String::from("contact      disturbance    changes  exact ambiguous  missed invented\n");
    let mut all = Tally::default();
    for contact in CONTACTS {
        for disturbance in DISTURBANCES {
            let cell = seeds
                .clone()
                .into_par_iter()
                .map(|seed| Tally::of(&record(contact, disturbance, seed)))
                .reduce(Tally::default, Tally::and);
            listing.push_str(&cell.line(contact, disturbance));
            listing.push('\n');
            all = all.and(cell);
        }
    }
    listing.push_str(&all.line("all", ""));
    println!("{listing}");
    assert_eq!(all.operations, CONTACTS.len() * DISTURBANCES.len() * 12 * 80);
    assert_eq!(all.exact + all.ambiguous + all.missed, all.operations);
    let wrong = all.missed + all.invented;
    assert!(wrong * 1_000 <= all.exact + wrong, "{wrong} of {} wrong:\n{listing}", all.exact + wrong);
    // Calling everything ambiguous would be no answer.
    assert!(all.ambiguous * 100 <= all.operations * 5, "too much in doubt:\n{listing}");
}

/// Without disturbances nothing is missed, nothing invented, and hardly anything in doubt.
#[test]
fn segmentation_of_an_undisturbed_line_is_exact() {
    for contact in CONTACTS {
        let cell =
            SEEDS.map(|seed| Tally::of(&record(contact, "none", seed))).fold(Tally::default(), Tally::and);
        assert_eq!((cell.missed, cell.invented), (0, 0), "{}", cell.line(contact, "none"));
        assert!(cell.ambiguous * 100 <= cell.operations, "{}", cell.line(contact, "none"));
    }
}

/// A recording that is cut at both ends, wherever that falls: what is left of it whole is found as before.
#[test]
fn segmentation_of_a_cut_recording_keeps_what_is_whole() {
    let mut whole_ones = 0;
    for contact in CONTACTS {
        let made = record(contact, "spike", SEEDS.start);
        let full = segment(&made.trace, &SegmentOptions::default()).expect("operations");
        for part in 0..20 {
            let from = made.truth[10].1 + part * 50 * US;
            let until = made.truth[60].1 + part * 70 * US;
            let edges: Vec<u64> =
                made.trace.edges().iter().copied().filter(|&edge| edge > from && edge <= until).collect();
            let cut =
                Trace::new(made.trace.position_at(from), from, until, edges, PERIOD_NS).expect("a part");
            let options = SegmentOptions { gap_ns: Some(full.gap.ns) };
            let found = segment(&cut, &options).expect("operations");
            for operation in &found.operations {
                let same = full.operations.iter().find(|o| o.burst.first_ns == operation.burst.first_ns);
                let same = same.unwrap_or_else(|| panic!("{contact}: {operation:?} is not in the whole"));
                assert_eq!((same.change, same.burst), (operation.change, operation.burst), "{contact}");
                whole_ones += 1;
            }
        }
    }
    assert!(whole_ones > 120 * 45, "{whole_ones}");
}
