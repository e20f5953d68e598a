mod word;

use debounce_core::{Change, PerChange, PerPosition, Period, Position, TickClock};

use super::*;
use crate::characterise::{Allowance, Figures, SegmentOptions, segment};
use crate::generate::{Between, Dice};

/// Bounce 5 after a make and 4 after a break, disturbances of 1 while open and 2 while closed, quiet 10, no calm,
/// open for 40 and closed for 30; in units of 1000 ns.
fn envelope() -> PhysicalEnvelope {
    PhysicalEnvelope {
        bounce_ns: PerChange { make: 5_000, break_: 4_000 },
        glitch_ns: PerPosition { open: 1_000, closed: 2_000 },
        quiet_ns: 10_000,
        calm_ns: 0,
        dwell_ns: PerPosition { open: 40_000, closed: 30_000 },
    }
}

fn trace(edges: &[u64]) -> Trace {
    let end = edges.last().map_or(100_000, |last| last + 100_000);
    Trace::new(Position::Open, 0, end, edges.to_vec(), 1).unwrap()
}

#[track_caller]
fn check_conforms(envelope: &PhysicalEnvelope, edges: &[u64]) {
    let found = check(&trace(edges), envelope);
    assert!(found.conforms(), "{edges:?}: {:?}", found.violations);
    assert_eq!(found.search, Search::Complete);
}

#[track_caller]
fn check_violation(
    envelope: &PhysicalEnvelope,
    edges: &[u64],
    clause: BrokenClause,
    at: u64,
    found: u64,
    allowed: u64,
) {
    let answer = check(&trace(edges), envelope);
    let expected = Violation { clause, at_ns: at, found_ns: found, allowed_ns: allowed };
    assert_eq!(answer.violations, [expected], "{edges:?}");
}

#[test]
fn conformance_bounce_at_its_limit_conforms_and_beyond_does_not() {
    // Runs wider than any disturbance, so that nothing but bounce explains them.
    check_conforms(&envelope(), &[50_000, 52_500, 55_000]);
    let clause = BrokenClause::BounceTooLong(Change::Make);
    check_violation(&envelope(), &[50_000, 52_500, 55_001], clause, 50_000, 5_001, 5_000);
    check_conforms(&envelope(), &[50_000, 100_000, 102_500, 104_000]);
    let clause = BrokenClause::BounceTooLong(Change::Break);
    check_violation(&envelope(), &[50_000, 100_000, 102_500, 104_001], clause, 100_000, 4_001, 4_000);
}

#[test]
fn conformance_disturbance_at_its_width_conforms_and_beyond_does_not() {
    check_conforms(&envelope(), &[50_000, 51_000]);
    let clause = BrokenClause::DisturbanceTooWide(Position::Open);
    check_violation(&envelope(), &[50_000, 51_001], clause, 50_000, 1_001, 1_000);
    check_conforms(&envelope(), &[50_000, 100_000, 100_500, 101_500, 102_000]);
    let clause = BrokenClause::DisturbanceTooWide(Position::Closed);
    check_violation(
        &envelope(),
        &[50_000, 100_000, 100_500, 101_500, 102_001],
        clause,
        100_000,
        2_001,
        2_000,
    );
}

#[test]
fn conformance_quiet_at_its_limit_conforms_and_below_does_not() {
    check_conforms(&envelope(), &[50_000, 51_000, 61_000, 62_000]);
    let clause = BrokenClause::QuietTooShort;
    check_violation(&envelope(), &[50_000, 51_000, 60_999, 61_999], clause, 60_999, 9_999, 10_000);
}

#[test]
fn conformance_calm_at_its_limit_conforms_and_below_does_not() {
    let calm = PhysicalEnvelope { calm_ns: 7_000, ..envelope() };
    // Bounce to 54 000, then a pulse that no bounce reaches.
    check_conforms(&calm, &[50_000, 50_500, 54_000, 61_000, 62_000]);
    let clause = BrokenClause::CalmTooShort;
    check_violation(&calm, &[50_000, 50_500, 54_000, 60_999, 61_999], clause, 60_999, 6_999, 7_000);
    check_conforms(&envelope(), &[50_000, 50_500, 54_000, 60_999, 61_999]);
}

#[test]
fn conformance_calm_is_counted_from_the_end_of_the_whole_bounce() {
    // The pulse at 51 500 keeps the calm after the make, but then the bounce is over; the run to 55 000 is too wide
    // for a disturbance, so it is bounce, the first pulse is too, and the last one comes 500 after it.
    let calm = PhysicalEnvelope { calm_ns: 1_000, quiet_ns: 1_000, ..envelope() };
    let clause = BrokenClause::CalmTooShort;
    let edges = [50_000, 51_500, 52_000, 52_400, 55_000, 55_500, 56_000];
    check_violation(&calm, &edges, clause, 55_500, 500, 1_000);
    check_conforms(&calm, &[50_000, 51_500, 52_000, 52_400, 55_000, 56_000, 56_500]);
}

#[test]
fn conformance_dwell_at_its_limit_conforms_and_below_does_not() {
    check_conforms(&envelope(), &[50_000, 80_000, 120_000]);
    let clause = BrokenClause::DwellTooShort(Position::Closed);
    check_violation(&envelope(), &[50_000, 79_999, 119_999], clause, 50_000, 29_999, 30_000);
    let clause = BrokenClause::DwellTooShort(Position::Open);
    check_violation(&envelope(), &[50_000, 80_000, 119_999], clause, 80_000, 39_999, 40_000);
}

#[test]
fn conformance_first_and_last_dwell_are_not_judged() {
    check_conforms(&envelope(), &[1]);
    let cut = Trace::new(Position::Closed, 0, 60_000, vec![1, 59_999], 1).unwrap();
    assert!(check(&cut, &envelope()).conforms());
}

#[test]
fn conformance_disturbance_after_bounce_is_read_as_such_and_listed() {
    // As bounce, the pulse at 8 000 after the make would last 9 000; it fits only as a disturbance.
    let answer = check(&trace(&[50_000, 51_000, 54_000, 58_000, 59_000]), &envelope());
    assert!(answer.conforms());
    assert_eq!(answer.changes, [(Change::Make, 50_000)]);
    assert_eq!(answer.disturbances, [(58_000, 59_000)]);
    let doubtful =
        DoubtfulDisturbance { change: Change::Make, change_ns: 50_000, from_ns: 58_000, until_ns: 59_000 };
    assert_eq!(answer.doubtful, [doubtful]);
    // Further from the bounce than a bounce can last, it is no second burst.
    let apart = check(&trace(&[50_000, 51_000, 54_000, 59_001, 60_000]), &envelope());
    assert!(apart.conforms() && apart.doubtful.is_empty());
}

#[test]
fn conformance_needs_some_reading_only() {
    // The last pulse does not fit as bounce, but the middle one can be bounce and leave the quiet to the last.
    check_conforms(&envelope(), &[50_000, 50_500, 51_000, 54_000, 55_000, 65_000, 66_000]);
    // A pulse before a make may be a disturbance or already the make; here only the former fits.
    check_conforms(&envelope(), &[45_000, 46_000, 50_500, 51_000, 55_500]);
}

#[test]
fn conformance_disturbance_may_straddle_a_change_within_the_narrower_width() {
    let no_bounce = PhysicalEnvelope { bounce_ns: PerChange { make: 0, break_: 0 }, ..envelope() };
    // The make at 80 200 lies inside a disturbance: the dwells on both sides leave no other instant for it.
    check_conforms(&no_bounce, &[5_000, 40_000, 79_800, 80_000, 80_200, 80_500, 80_800, 110_300]);
    let wide = [5_000, 40_000, 79_799, 80_000, 80_200, 80_500, 80_800, 110_300];
    let clause = BrokenClause::DisturbanceTooWide(Position::Open);
    check_violation(&no_bounce, &wide, clause, 79_799, 1_001, 1_000);
}

#[test]
fn conformance_violations_far_apart_are_all_listed() {
    let edges = [50_000, 51_001, 200_000, 400_000, 402_500, 404_001, 600_000, 629_999];
    let answer = check(&trace(&edges), &envelope());
    let clauses: Vec<BrokenClause> = answer.violations.iter().map(|v| v.clause).collect();
    assert_eq!(
        clauses,
        [
            BrokenClause::DisturbanceTooWide(Position::Open),
            BrokenClause::BounceTooLong(Change::Break),
            BrokenClause::DwellTooShort(Position::Closed),
        ]
    );
}

/// A random envelope in which dwell outlasts everything else.
fn random_envelope(dice: &mut Dice) -> PhysicalEnvelope {
    let mut pick = |least, greatest| dice.draw(Between(least, greatest));
    PhysicalEnvelope {
        bounce_ns: PerChange { make: pick(0, 60), break_: pick(0, 60) },
        glitch_ns: PerPosition { open: pick(0, 20), closed: pick(0, 20) },
        quiet_ns: pick(25, 80),
        calm_ns: if pick(0, 1) == 0 { 0 } else { pick(1, 60) },
        dwell_ns: PerPosition { open: pick(90, 200), closed: pick(90, 200) },
    }
}

/// A random trace inside `e`: changes, bounce that ends in time, disturbances that keep quiet and calm.
fn random_trace_inside(e: &PhysicalEnvelope, dice: &mut Dice) -> Trace {
    let mut edges: Vec<u64> = Vec::new();
    let mut contact = Position::Open;
    let mut now = 120 + dice.draw(Between(0, 100));
    let mut quiet_from = 0;
    for _ in 0..dice.draw(Between(1, 8)) {
        contact = !contact;
        let allowed = e.bounce_ns.at(contact.reached_by());
        let mut bounce: Vec<u64> =
            (0..dice.draw(Between(0, 3)) * 2).map(|_| now + dice.draw(Between(1, allowed.max(1)))).collect();
        bounce.sort_unstable();
        bounce.dedup();
        if allowed == 0 || !bounce.len().is_multiple_of(2) {
            bounce.clear();
        }
        edges.push(now);
        edges.extend(&bounce);
        let bounce_end = bounce.last().copied().unwrap_or(now);
        let next = now + e.dwell_ns.at(contact) + dice.draw(Between(0, 150));
        let mut from = quiet_from.max(bounce_end + e.calm_ns.max(1)) + dice.draw(Between(0, 40));
        let glitch = e.glitch_ns.at(contact);
        while glitch > 0 && from + glitch < next {
            let width = dice.draw(Between(1, glitch));
            edges.push(from);
            if width >= 3 && dice.chance(500) {
                edges.extend([from + 1, from + 2]);
            }
            edges.push(from + width);
            quiet_from = from + width + e.quiet_ns;
            from = quiet_from + dice.draw(Between(0, 100));
        }
        now = next;
    }
    let end = now + dice.draw(Between(0, 50));
    edges.retain(|&edge| edge <= end);
    Trace::new(Position::Open, 0, end, edges, 1).unwrap()
}

#[test]
fn conformance_traces_made_inside_an_envelope_conform() {
    for case in 0..20_000 {
        let mut dice = Dice::new(31, case);
        let envelope = random_envelope(&mut dice);
        let trace = random_trace_inside(&envelope, &mut dice);
        let answer = check(&trace, &envelope);
        assert!(answer.conforms(), "case {case}: {envelope:?} {trace:?} {:?}", answer.violations);
        assert_eq!(answer.search, Search::Complete);
    }
}

/// Edges from 1000 on that break exactly one clause of `e`; none where the numbers of `e` leave no room for it.
fn random_edges_breaking(clause: u64, e: &PhysicalEnvelope, dice: &mut Dice) -> Option<Vec<u64>> {
    let widest = e.glitch_ns.open.max(e.glitch_ns.closed);
    let mut between =
        |least: u64, greatest: u64| (least <= greatest).then(|| dice.draw(Between(least, greatest)));
    let runs = match clause {
        // Bounce: two runs too wide for any disturbance, together longer than the bounce, too short for dwells.
        0 => {
            let (first, second) = (between(widest + 1, 80)?, between(widest + 1, 80)?);
            (first + second > e.bounce_ns.make).then_some(vec![first, second])?
        }
        // Width: too wide for a disturbance, too short for an operation.
        1 => vec![between(e.glitch_ns.open + 1, e.dwell_ns.closed - 1)?],
        // Quiet: two disturbances too far apart to be one.
        2 => {
            let width = between(1, e.glitch_ns.open)?;
            vec![width, between(e.glitch_ns.open, e.quiet_ns - 1)?, between(1, e.glitch_ns.open)?]
        }
        // Calm: a disturbance too late to be bounce and too soon after it; closed too long before it for the make
        // to be a disturbance itself.
        3 => {
            let least = e.bounce_ns.make.max(e.glitch_ns.open) + 1;
            vec![between(least, e.calm_ns.checked_sub(1)?)?, between(1, e.glitch_ns.closed)?]
        }
        // Dwell: as for the width, from the far end.
        _ => vec![e.dwell_ns.closed - 1],
    };
    let mut now = 1_000;
    let mut edges = vec![now];
    edges.extend(runs.iter().map(|run| {
        now += run;
        now
    }));
    Some(edges)
}

#[test]
fn conformance_traces_with_one_clause_broken_do_not_conform() {
    let mut broken = [0; 5];
    for case in 0..5_000 {
        let mut dice = Dice::new(34, case);
        let envelope = random_envelope(&mut dice);
        let clause = case % 5;
        let Some(edges) = random_edges_breaking(clause, &envelope, &mut dice) else { continue };
        broken[clause as usize] += 1;
        let trace = Trace::new(Position::Open, 0, edges[edges.len() - 1] + 1_000, edges, 1).unwrap();
        let answer = check(&trace, &envelope);
        assert!(!answer.conforms(), "clause {clause}: {envelope:?} {trace:?}");
        assert_eq!(answer.search, Search::Complete);
    }
    assert!(broken.iter().all(|&count| count > 100), "{broken:?}");
}

/// Whatever conforms, sampled at any phase, lies in the envelope in ticks; the predicate on words is written apart.
#[test]
fn conformance_of_a_trace_means_that_its_samples_lie_in_the_tick_envelope() {
    let (mut conforming, mut straying) = (0, 0);
    for case in 0..1_500 {
        let mut dice = Dice::new(32, case);
        let mut envelope = random_envelope(&mut dice);
        // Half of the traces are made inside the envelope, then an edge moves; the other half have random runs.
        let mut edges = random_trace_inside(&envelope, &mut dice).edges().to_vec();
        if dice.chance(500) {
            let mut now = 0;
            edges = (0..dice.draw(Between(1, 14)))
                .map(|_| {
                    let longest = [8, 30, 90, 300][dice.draw(Between(0, 3)) as usize];
                    now += dice.draw(Between(1, longest));
                    now
                })
                .collect();
            envelope.dwell_ns = PerPosition { open: 40, closed: 40 };
        } else if let Some(last) = edges.len().checked_sub(1) {
            let index = dice.draw(Between(0, last as u64)) as usize;
            edges[index] += dice.draw(Between(0, 12));
            edges.sort_unstable();
            edges.dedup();
        }
        let end = edges.last().unwrap() + dice.draw(Between(0, 200));
        let trace = Trace::new(Position::Open, 0, end, edges, 1).unwrap();
        if !check(&trace, &envelope).conforms() {
            straying += 1;
            continue;
        }
        let period = dice.draw(Between(3, 25));
        let Ok(ticks) = envelope.in_ticks(&TickClock::new(Period::from_ns(period))) else { continue };
        if ticks.dwell.open == 0 || ticks.dwell.closed == 0 {
            continue;
        }
        conforming += 1;
        for phase in (0..period).step_by(period.div_ceil(3) as usize) {
            let word: Vec<Position> = (0..)
                .map(|k| phase + k * period)
                .take_while(|&at| at < end)
                .map(|at| trace.position_at(at))
                .collect();
            assert!(word::fits(&word, &ticks), "case {case} phase {phase}: {envelope:?} {ticks:?} {trace:?}");
        }
    }
    // Neither side may be empty, or the test would say nothing.
    assert!(conforming > 250 && straying > 250, "{conforming} conform, {straying} do not");
}

#[test]
fn conformance_recording_keeps_the_envelope_of_its_own_figures() {
    let mut compared = 0;
    for case in 0..3_000 {
        let mut dice = Dice::new(33, case);
        let mut made_in = random_envelope(&mut dice);
        made_in.dwell_ns = PerPosition { open: 2_000, closed: 1_500 };
        let trace = random_trace_inside(&made_in, &mut dice);
        let Ok(segmentation) = segment(&trace, &SegmentOptions { gap_ns: Some(100) }) else { continue };
        let Ok(envelope) = Figures::of(&segmentation).envelope(&Allowance::NONE) else { continue };
        if !segmentation.fragments.is_empty() {
            continue;
        }
        compared += 1;
        let answer = check(&trace, &envelope);
        assert!(answer.conforms(), "case {case}: {envelope:?} {trace:?} {:?}", answer.violations);
    }
    assert!(compared > 600, "only {compared} compared");
}
