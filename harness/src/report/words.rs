//! Times, shares and bounds in words, the same everywhere.

use debounce_core::{Change, Clause, PerPosition, Position, TickClock};

use crate::choose::Shortfall;
use crate::envelope::PhysicalEnvelope;
use crate::quantity::{Rounding, Time, counted};
use crate::requirement::Resolved;

/// A time that must not be understated.
#[must_use]
pub fn at_most(ns: u64) -> String {
    Time::from_ns(ns).shown(Rounding::Up).to_string()
}

/// A time that must not be overstated.
#[must_use]
pub fn at_least(ns: u64) -> String {
    Time::from_ns(ns).shown(Rounding::Down).to_string()
}

/// What so many samples come to in time.
#[must_use]
pub fn delay_below(clock: &TickClock, samples: u32) -> String {
    let below = at_most(clock.delay_ns(samples).1);
    // A clock that nothing is said of but its tick.
    let nominal = if *clock == TickClock::new(clock.period()) { " at the nominal tick" } else { "" };
    format!("less than {below}{nominal}")
}

/// A bound beside the latency that is required: whether it is kept, and by how much.
#[must_use]
pub fn against(below_ns: u64, allowed: Time) -> String {
    match below_ns.checked_sub(allowed.ns()) {
        Some(over) if over > 0 => format!("{} more than the {allowed} required", at_most(over)),
        _ => format!("as required, {allowed}"),
    }
}

/// A time as it was measured.
#[must_use]
pub fn about(ns: u64) -> String {
    Time::from_ns(ns).to_string()
}

/// A time as it was recorded with a sample period: what is shorter than the period was not told from nothing.
#[must_use]
pub fn seen(ns: u64, resolution_ns: u64) -> String {
    if ns < resolution_ns { format!("<{}", at_most(resolution_ns)) } else { about(ns) }
}

/// A place in a recording, to the microsecond, so that it can be found there.
#[must_use]
pub fn instant(ns: u64) -> String {
    let us = ns / 1_000;
    format!("{}.{:06} s", us / 1_000_000, us % 1_000_000)
}

/// "make" or "break".
#[must_use]
pub fn change(change: Change) -> &'static str {
    match change {
        Change::Make => "make",
        Change::Break => "break",
    }
}

/// "open" or "closed".
#[must_use]
pub fn position(position: Position) -> &'static str {
    match position {
        Position::Open => "open",
        Position::Closed => "closed",
    }
}

/// A promise, as the clause of a sentence.
#[must_use]
pub fn clause(clause: Clause) -> &'static str {
    match clause {
        Clause::FalseEdge => "an edge is reported that the contact did not make",
        Clause::Missed => "a change of the contact is never reported",
        Clause::DwellUnseen => "an operation may fall between two samples",
        Clause::NoQuiet => "disturbances come faster than the clock can tell apart",
        _ => "a promise is broken",
    }
}

/// What is asked and not given, with by how much.
#[must_use]
pub fn shortfall(shortfall: &Shortfall) -> String {
    match shortfall {
        Shortfall::Unfaithful(broken) => clause(*broken).to_owned(),
        Shortfall::Unproven => "not proved within the limits".to_owned(),
        Shortfall::TooSlow { change: which, below_ns, allowed_ns } => format!(
            "{} can take {}, {} more than the {} allowed",
            change(*which),
            at_most(*below_ns),
            at_most(below_ns - allowed_ns),
            about(*allowed_ns)
        ),
        Shortfall::TooBig { bytes, allowed } => {
            format!(
                "needs {} an input, {} more than the {allowed} allowed",
                counted(u64::from(*bytes), "byte"),
                bytes - allowed
            )
        }
        Shortfall::TooManyInstructions { instructions: Some(count), allowed } => format!(
            "the worst tick takes {count} instructions, {} more than the {allowed} allowed",
            count - allowed
        ),
        Shortfall::TooManyInstructions { instructions: None, allowed } => format!(
            "the instructions of a tick were not counted for so wide a state, and {allowed} are allowed"
        ),
        Shortfall::FailsOnRecording { recording } => format!("fails on recording {}", recording + 1),
    }
}

/// The envelope that must be served, in one sentence: of the contact, or of the pin where a network stands before it.
#[must_use]
pub fn envelope_at_pin(resolved: &Resolved) -> String {
    let subject = match &resolved.network {
        None => "the contact",
        Some(_) => "at the pin, behind the network: the line",
    };
    format!("{subject} {}", envelope(&resolved.physical()).join("; "))
}

/// The envelope in words, one clause a line, so that all readers can agree on it.
#[must_use]
pub fn envelope(physical: &PhysicalEnvelope) -> Vec<String> {
    let PhysicalEnvelope { bounce_ns, glitch_ns, quiet_ns, calm_ns, dwell_ns } = physical;
    let mut lines = vec![
        format!(
            "stays closed for at least {} and open for at least {}",
            at_least(dwell_ns.closed),
            at_least(dwell_ns.open)
        ),
        format!(
            "bounces for at most {} after a make and {} after a break",
            at_most(bounce_ns.make),
            at_most(bounce_ns.break_)
        ),
    ];
    if physical.has_disturbances() {
        let PerPosition { open, closed } = glitch_ns;
        lines.push(format!(
            "is disturbed for at most {} while open and {} while closed, with at least {} between two disturbances",
            at_most(*open),
            at_most(*closed),
            at_least(*quiet_ns)
        ));
        lines.push(if *calm_ns == 0 {
            "may be disturbed at any time, also just after a bounce".to_owned()
        } else {
            format!("is not disturbed within {} after a bounce", at_least(*calm_ns))
        });
    } else {
        lines.push("is never disturbed".to_owned());
    }
    lines
}

/// A small chance, such as that of an odd order by accident; never understated.
#[must_use]
pub fn chance(chance: f64) -> String {
    if chance < 0.001 {
        "under 0.1 %".to_owned()
    } else {
        format!("{:.1} %", (chance * 1000.0).ceil() / 10.0)
    }
}

/// A share that is claimed, rounded down to a tenth of a percent, which understates what is covered; to a ten-thousandth
/// of a percent near 1, where a tenth would tell nothing.
#[must_use]
pub fn covered(share: f64) -> String {
    let digits = if share > 0.999 { 1e6 } else { 1e3 };
    format!("{} %", (share * digits).floor() * 100.0 / digits)
}

/// A rate that is bounded, rounded up.
#[must_use]
pub fn rate_at_most(rate: f64) -> String {
    let digits = if rate < 0.001 { 1e6 } else { 1e3 };
    format!("{} %", (rate * digits).ceil() * 100.0 / digits)
}

/// A count with its noun: "1 make", "2 makes".
#[must_use]
pub fn count(number: usize, noun: &str) -> String {
    counted(number as u64, noun)
}
