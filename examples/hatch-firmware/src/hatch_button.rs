//! Debouncing of the contact "hatch button".
//!
//! Made by harness. Change the requirement and make it anew rather than edit it.
//!
//! recording recordings/hatch_button.vcd, channel dryer.hatch_button
//!
//! # What is proved
//!
//! For every waveform inside `ENVELOPE` every operation is reported exactly once, within `BOUNDS`.
//! The closed form of the law says so, and the compiler checks it again at every build.
//!
//! At the clock below a make is reported after less than 12.3 ms, a break after less than 12.3 ms,
//! as this was written.
//!
//! # Use
//!
//! ```ignore
//! let mut contact = hatch_button::starting();
//! // At every tick; the line is high while the contact is closed.
//! let sample = Position::closed_if(line_is_high());
//! if let Some(event) = contact.tick(sample) { /* ... */ }
//! ```

#![allow(dead_code, reason = "a program uses what it needs of this module")]

use debounce_core::{
    Bounds, Config, ConstLaw, Envelope, Period, Position, Running, Starting, StateMachine,
    StateMachineParameters, TickClock, Verdict,
};

/// The tick period, 2 ms.
pub const PERIOD: Period = Period::from_ns(2_000_000);

/// The sample clock: period, tolerance, jitter of a sample instant, ticks lost in a row.
pub const CLOCK: TickClock = TickClock::new(PERIOD)
    .tolerance_ppm(20_000)
    .jitter_ns(20_000)
    .lost(0);

/// Longest allowed delay of the report of a make, in nanoseconds: 15 ms.
pub const LATENCY_MAKE_NS: u64 = 15_000_000;

/// Longest allowed delay of the report of a break, in nanoseconds: 20 ms.
pub const LATENCY_BREAK_NS: u64 = 20_000_000;

/// Shortest time open, in nanoseconds: 60 ms.
pub const SHORTEST_OPEN_NS: u64 = 60_000_000;

/// Shortest time closed, in nanoseconds: 60 ms.
pub const SHORTEST_CLOSED_NS: u64 = 60_000_000;

/// Longest bounce after a make, in nanoseconds: 5 ms.
pub const BOUNCE_MAKE_NS: u64 = 5_000_000;

/// Longest bounce after a break, in nanoseconds: 5 ms.
pub const BOUNCE_BREAK_NS: u64 = 5_000_000;

/// Widest disturbance that begins while open, in nanoseconds: 300 us.
pub const DISTURBANCE_OPEN_NS: u64 = 300_000;

/// Widest disturbance that begins while closed, in nanoseconds: 300 us.
pub const DISTURBANCE_CLOSED_NS: u64 = 300_000;

/// Shortest time between two disturbances, in nanoseconds: 9 ms.
pub const QUIET_NS: u64 = 9_000_000;

/// Shortest settled time between a bounce and a disturbance, in nanoseconds: 0 ns.
pub const CALM_NS: u64 = 0;

/// The waveforms that the claim is made for, in samples; lost ticks are taken off already.
///
/// Shortest open, closed; bounce at make, break; disturbance while open, closed; quiet; calm.
pub const ENVELOPE: Envelope = Envelope::clean(29, 29)
    .bounce(3, 3)
    .glitch(1, 1)
    .quiet(4)
    .calm(0);

/// In ticks, each for a make and for a break.
pub const PARAMETERS: StateMachineParameters<u8> = StateMachineParameters::confirm(2, 2)
    .patience(2, 2)
    .lockout(2, 2);

/// The law with its parameters.
pub const LAW: StateMachine<u8> = StateMachine::<u8>::new(PARAMETERS);

/// The proved latencies, in samples: reporting on the first sample that could see it is 1.
pub const BOUNDS: Bounds = match LAW.verdict(&ENVELOPE) {
    Verdict::Holds(bounds) => bounds,
    _ => panic!("the parameters of LAW do not hold inside ENVELOPE; choose them anew"),
};

/// The contact as a configuration: its law takes no room.
pub struct HatchButton;

impl Config for HatchButton {
    type Law = StateMachine<u8>;
    const LAW: Self::Law = LAW;
}

/// The debouncer of this contact from a known position.
pub type Debouncer = Running<ConstLaw<HatchButton>>;

/// The debouncer of this contact from power-up, when its position is not known yet.
pub type StartingDebouncer = Running<Starting<ConstLaw<HatchButton>>>;

/// Runs the law, settled at `position`.
#[must_use]
pub fn debouncer(position: Position) -> Debouncer {
    Running::new(ConstLaw::new(), position)
}

/// Runs the law from power-up: the first settled position is no edge.
#[must_use]
pub fn starting() -> StartingDebouncer {
    Running::starting(ConstLaw::new())
}

// The build stops when an edit leaves what was required or proved.
const _: () = assert!(
    CLOCK.samples_touched(BOUNCE_MAKE_NS) <= ENVELOPE.bounce.make
        && CLOCK.samples_touched(BOUNCE_BREAK_NS) <= ENVELOPE.bounce.break_
        && CLOCK.samples_touched(DISTURBANCE_OPEN_NS) <= ENVELOPE.glitch.open
        && CLOCK.samples_touched(DISTURBANCE_CLOSED_NS) <= ENVELOPE.glitch.closed,
    "the clock or a time of the requirement leaves ENVELOPE; make this module anew"
);

const _: () = assert!(
    CLOCK.samples_seen(SHORTEST_OPEN_NS) >= ENVELOPE.dwell.open
        && CLOCK.samples_seen(SHORTEST_CLOSED_NS) >= ENVELOPE.dwell.closed
        && CLOCK.samples_seen(QUIET_NS) >= ENVELOPE.quiet
        && CLOCK.samples_seen(CALM_NS) >= ENVELOPE.calm,
    "the clock or a time of the requirement leaves ENVELOPE; make this module anew"
);

/// Most samples of latency that the requirement allows at a make.
pub const ALLOWED_MAKE: u32 = 7;

/// Most samples of latency that the requirement allows at a break.
pub const ALLOWED_BREAK: u32 = 9;

const _: () = assert!(
    LAW.verdict(&ENVELOPE)
        .holds_within(ALLOWED_MAKE, ALLOWED_BREAK),
    "the parameters of LAW no longer keep the requirement; choose them anew"
);

const _: () = assert!(
    CLOCK.delay_ns(BOUNDS.latency.make.worst).1 <= LATENCY_MAKE_NS
        && CLOCK.delay_ns(BOUNDS.latency.break_.worst).1 <= LATENCY_BREAK_NS,
    "a proved latency takes longer than the requirement allows; choose anew"
);
