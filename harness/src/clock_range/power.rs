//! What a tick costs in wake-ups, and what is saved where it stops while the law is settled.

use debounce_core::{Change, Envelope, PerChange, PerPosition, Position, TickClock};

use crate::prove::LawTable;

/// How often something happens to the contact.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Activity {
    /// Operations, each a make and a break, in an hour.
    pub operations_per_hour: u32,
    /// Disturbances in an hour.
    pub disturbances_per_hour: u32,
}

/// How a processor sleeps whose tick stops while the law is settled, and begins again when the line moves.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Asleep {
    /// The most ticks from a change until the law is settled again, for any bounce that the envelope allows.
    pub ticks_after: PerChange<u32>,
    /// The same from a disturbance of a settled contact.
    pub ticks_after_disturbance: PerPosition<u32>,
    /// Wake-ups a second where the tick never stops.
    pub ticking_per_second: f64,
    /// At most so many a second where it stops: the ticks, and the edge that begins them again.
    pub stopping_per_second: f64,
    /// At least this share of the time the tick is stopped.
    pub share: f64,
}

/// The most that `activity` can cost; `None` where the law never settles.
///
/// # Method
/// Derived here. From rest, as many samples as a bounce or a disturbance has may read either way; then the line is
/// steady until the law is settled, which it is when a sample like the line leaves its state as it is. The longest
/// such way is found through the next-state table. Where a disturbance falls into an operation it is counted as if it
/// came alone, later; the two together may take a few ticks more or fewer.
#[must_use]
pub fn asleep(
    logic: &LawTable,
    envelope: &Envelope,
    clock: &TickClock,
    activity: Activity,
) -> Option<Asleep> {
    let change = |change: Change| {
        settles_within(logic, change.to().opposite(), envelope.bounce.at(change).max(1), change.to())
    };
    let disturbed = |position: Position| match envelope.glitch.at(position) {
        0 => Some(0),
        width => settles_within(logic, position, width, position),
    };
    let ticks_after = PerChange { make: change(Change::Make)?, break_: change(Change::Break)? };
    let ticks_after_disturbance =
        PerPosition { open: disturbed(Position::Open)?, closed: disturbed(Position::Closed)? };
    let operation = f64::from(ticks_after.make) + f64::from(ticks_after.break_);
    let disturbance = f64::from(ticks_after_disturbance.open.max(ticks_after_disturbance.closed));
    let (operations, disturbances) =
        (f64::from(activity.operations_per_hour), f64::from(activity.disturbances_per_hour));
    let ticks_an_hour = operations * operation + disturbances * disturbance;
    let period = clock.period();
    // Both are far below 2^53 for any period that a timer has.
    let seconds = period.numerator_ns() as f64 / f64::from(period.denominator()) / 1e9;
    let longest = seconds * (1.0 + f64::from(clock.ppm()) / 1e6);
    let edges_an_hour = 2.0 * operations + disturbances;
    Some(Asleep {
        ticks_after,
        ticks_after_disturbance,
        ticking_per_second: 1.0 / seconds,
        stopping_per_second: ((ticks_an_hour + edges_an_hour) / 3600.0).min(1.0 / seconds),
        share: (1.0 - ticks_an_hour * longest / 3600.0).max(0.0),
    })
}

/// The most ticks from rest at `from`, the first `doubtful` of which may read either way, until the law is settled with
/// the line at `to`.
fn settles_within(logic: &LawTable, from: Position, doubtful: u32, to: Position) -> Option<u32> {
    let mut states = vec![logic.rest(from)];
    for _ in 0..doubtful {
        let mut next: Vec<usize> =
            states.iter().flat_map(|&state| [0, 1].map(|sample| logic.entry(state, sample).next())).collect();
        next.sort_unstable();
        next.dedup();
        states = next;
    }
    let steady = to as usize;
    let mut most = 0;
    for mut state in states {
        let mut ticks = 0;
        while logic.entry(state, steady).next() != state {
            state = logic.entry(state, steady).next();
            ticks += 1;
            if ticks as usize > logic.len() {
                return None;
            }
        }
        most = most.max(ticks);
    }
    Some(doubtful + most)
}
