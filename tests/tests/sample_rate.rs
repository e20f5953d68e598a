//! Common practice of the trade: a hand-operated button read once a tick, without any filter.
//!
//! The rule of thumb: 30 Hz catches every press of 70 ms and more with bounce up to 33 ms; 10 Hz and 5 Hz cannot
//! guarantee even a press of 150 ms. The tool is not told so; it must come out of envelope, clock and proof.

use debounce_core::{Clause, PerChange, Period, ShiftRegister, TickClock};
use harness::envelope::PhysicalEnvelope;
use harness::prove::{Outcome, prove};

/// A window of one sample: every sample is believed.
const UNFILTERED: ShiftRegister = ShiftRegister::new(1);
const MS: u64 = 1_000_000;

#[track_caller]
fn press_is_served(rate_hz: u32, press_ms: u64, bounce_ms: u64) -> Result<PerChange<u32>, Clause> {
    let mut physical = PhysicalEnvelope::clean(press_ms * MS, press_ms * MS);
    physical.bounce_ns = PerChange { make: bounce_ms * MS, break_: bounce_ms * MS };
    let ticks = physical.in_ticks(&TickClock::new(Period::from_hz(rate_hz))).expect("no disturbances");
    match prove(&UNFILTERED, &ticks).expect("a sound law and envelope").outcome {
        Outcome::Faithful { bounds, .. } => {
            Ok(PerChange { make: bounds.latency.make.worst, break_: bounds.latency.break_.worst })
        }
        Outcome::Refuted { clause, .. } => Err(clause),
    }
}

#[test]
fn sample_rate_30_hz_serves_every_press_of_70_ms() {
    let two = Ok(PerChange { make: 2, break_: 2 });
    assert_eq!(press_is_served(30, 70, 33), two);
    // Two whole periods are 66.7 ms: what is shorter may be seen by one sample only, and that one may bounce.
    assert_eq!(press_is_served(30, 67, 33), two);
    assert_eq!(press_is_served(30, 66, 33), Err(Clause::Missed));
    // A bounce longer than the period can be read as an operation more.
    assert_eq!(press_is_served(30, 70, 34), Err(Clause::FalseEdge));
}

#[test]
fn sample_rate_10_and_5_hz_do_not_serve_a_press_of_150_ms() {
    assert_eq!(press_is_served(10, 150, 33), Err(Clause::Missed));
    assert_eq!(press_is_served(5, 150, 33), Err(Clause::DwellUnseen));
}
