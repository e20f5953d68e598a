use super::*;
use crate::characterise::{SegmentOptions, segment};
use crate::trace::Trace;

const US: u64 = 1_000;
const MS: u64 = 1_000_000;

fn figures(edges_us: &[u64], resolution_ns: u64) -> Figures {
    let edges: Vec<u64> = edges_us.iter().map(|us| us * US).collect();
    let end = edges.last().unwrap() + 500 * MS;
    let trace = Trace::new(Position::Open, 0, end, edges, resolution_ns).unwrap();
    Figures::of(&segment(&trace, &SegmentOptions { gap_ns: Some(10 * MS) }).unwrap())
}

/// Three operations with bounces of 300, 0 and 100 us at make, 50, 0 and 0 us at break; disturbances of 40 us
/// while open and 70 us while closed.
const PLAIN: [u64; 16] = [
    100_000, 100_200, 100_300, 300_000, 300_020, 300_050, 400_000, 400_040, // make, break, disturbance
    500_000, 650_000, 800_000, 800_090, 800_100, 900_000, 900_070,
    1_000_000, // make, break, make, disturbance, break
];

#[test]
fn figures_of_plain_operations_are_exact() {
    let found = figures(&PLAIN, 0);
    assert_eq!((found.changes.make.count, found.changes.break_.count), (3, 3));
    assert_eq!(found.changes.make.sorted_bounces_ns, [0, 100 * US, 300 * US]);
    let spread = Spread { min: 0, median: 100 * US, p95: 280 * US, p99: 296 * US, max: 300 * US };
    assert_eq!(found.changes.make.bounce_ns, Some(spread));
    assert_eq!(found.changes.break_.edges, Some(Spread { min: 1, median: 1, p95: 3, p99: 3, max: 3 }));
    assert_eq!(found.disturbances.open.width_ns.map(|w| w.max), Some(40 * US));
    assert_eq!(found.disturbances.closed.width_ns.map(|w| w.max), Some(70 * US));
    assert_eq!(found.quiet_ns, Some(900_000 * US - 400_040 * US));
    assert_eq!(found.calm_ns, Some(900_000 * US - 800_100 * US));
    assert_eq!((found.rests, found.dwell.open.count, found.dwell.closed.count), (1, 2, 3));
    assert_eq!(found.dwell.open.shortest_ns, Some(150 * MS));
    assert_eq!(found.dwell.closed.shortest_ns, Some(150 * MS));
    assert_eq!(found.dwell.closed.shortest_settled_ns, Some(150 * MS));
}

/// However long the recording goes on before and after it, one disturbance says nothing of how near the next comes.
#[test]
fn figures_of_a_single_disturbance_show_no_quiet() {
    let found = figures(&PLAIN[..10], 0);
    assert_eq!((found.disturbances.open.count, found.disturbances.closed.count), (1, 0));
    assert_eq!((found.quiet_ns, found.rests, found.spacing_ns), (None, 0, None));
    assert_eq!(found.envelope(&Allowance::NONE).unwrap().quiet_ns, 0);
}

#[test]
fn figures_envelope_adds_the_recorders_period_and_the_stated_allowance_on_the_safe_side() {
    let allowance = Allowance { above_percent: 50, below_percent: 20, calm: Calm::AsRecorded };
    let found = figures(&PLAIN, 10 * US).envelope(&allowance).unwrap();
    assert_eq!(found.bounce_ns, PerChange { make: 465 * US, break_: 90 * US });
    assert_eq!(found.glitch_ns, PerPosition { open: 75 * US, closed: 120 * US });
    assert_eq!(found.quiet_ns, (900_000 - 400_040 - 10) * US * 4 / 5);
    assert_eq!(found.calm_ns, (900_000 - 800_100 - 10) * US * 4 / 5);
    assert_eq!(found.dwell_ns, PerPosition { open: 119_992 * US, closed: 119_992 * US });
    let without = figures(&PLAIN, 10 * US).envelope(&Allowance::NONE).unwrap();
    assert_eq!(without.calm_ns, 0, "a calm is claimed only when asked for");
}

#[test]
fn figures_of_a_doubtful_tail_take_the_safe_side_of_each() {
    // 2 ms after a clean make a pulse of 60 us: bounce of 2.06 ms, or a disturbance.
    let mut edges = PLAIN.to_vec();
    edges.extend([1_200_000, 1_202_000, 1_202_060, 1_400_000]);
    let found = figures(&edges, 0);
    assert_eq!(found.changes.make.ambiguous, 1);
    assert_eq!(found.longest_bounce_ns(Change::Make), Some(2_060 * US));
    assert_eq!(found.widest_glitch_ns(Position::Closed), 70 * US);
    assert_eq!(found.disturbances.closed.widest_in_doubt_ns, 60 * US);
    assert_eq!(found.quiet_ns, Some(1_202_000 * US - 900_070 * US));
    assert_eq!(found.calm_ns, Some(2 * MS));
}

#[test]
fn figures_of_a_late_doubtful_disturbance_lengthen_the_bounce() {
    // 15 ms after a make, a run that just ended the burst: a disturbance, or a second burst of the bounce.
    let mut edges = PLAIN.to_vec();
    edges.extend([1_200_000, 1_215_000, 1_215_060, 1_400_000]);
    let found = figures(&edges, 0);
    assert_eq!(found.disturbances.closed.ambiguous, 1);
    assert_eq!(found.changes.make.bounce_ns.map(|b| b.max), Some(300 * US));
    assert_eq!(found.longest_bounce_ns(Change::Make), Some(15_060 * US));
}

#[test]
fn figures_without_a_break_name_what_is_missing() {
    let make_only = figures(&[100_000], 0);
    let error = make_only.envelope(&Allowance::NONE).unwrap_err();
    assert_eq!(error, MissingFigure::Bounce { change: Change::Break });
    assert_eq!(
        error.to_string(),
        "the recording holds no whole break; record at least one, or state the bounce at break"
    );
    let never_reopened = figures(&[100_000, 200_000], 0).envelope(&Allowance::NONE);
    assert_eq!(never_reopened, Err(MissingFigure::Dwell { position: Position::Open }));
}
