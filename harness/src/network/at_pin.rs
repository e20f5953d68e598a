//! From the waveforms of the contact to those of the pin, always toward the safe side.
//!
//! The flow of the network keeps its order: of two states, the one with both voltages higher stays higher as long as
//! the line is the same. So rest in the other position is the worst state there is, and after the line has been in one
//! position for the longest delay from rest without a break, the pin reads that position, whatever happened before.
//! From that alone:
//!
//! * a bounce that ends at `b` on the line ends at `b` plus the longest delay on the pin;
//! * a disturbance of width `g` shows for at most `g` plus the longest delay back;
//! * the quiet between two of them shrinks by that delay.
//!
//! Changes are counted from the instant of the contact, so the delay of the network lies inside the bounce of the pin, and
//! hardware and software share one latency.
//!
//! **Rejection.** Let `T` be the shortest time in a position, starting from rest in the other, after which a disturbance
//! of width `g` is not seen by any unit, and not shorter than the longest delay. If the quiet is at least `T`, then once
//! `T` has passed undisturbed no later disturbance is ever seen: after each, the state is no worse than rest in the other
//! position, and `T` passes before the next. Until then the reading may change; that counts as bounce. If disturbances
//! keep a calm of `T` after a bounce, `T` passes at once; else the first may come just too soon, and then the next
//! leaves `T`: twice `T` and one width.

use debounce_core::{PerChange, PerPosition, Position};

use super::model::Network;
use super::unit::Unit;
use crate::envelope::PhysicalEnvelope;
use crate::report::words;

/// What becomes of the disturbances that begin in a position.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Disturbed {
    /// There are none.
    Never,
    /// The pin shows none of them once it has settled.
    Rejected {
        /// So long undisturbed after a change until that is so, in nanoseconds.
        settles_ns: u64,
    },
    /// The pin may show them, longer by so much.
    Widened {
        /// In nanoseconds.
        by_ns: u64,
    },
}

/// An envelope at the pin.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct AtPin {
    /// The waveforms of the pin.
    pub physical: PhysicalEnvelope,
    /// Shortest and longest delay of the network at each change, from rest, in nanoseconds.
    pub delay_ns: PerChange<(u64, u64)>,
    /// What becomes of disturbances.
    pub disturbed: PerPosition<Disturbed>,
}

/// Why nothing can be promised at the pin.
#[derive(Clone, Copy, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum AtPinError {
    /// Some unit never reads a position.
    #[error(
        "some units of the network never read {}; see harness network, and give it levels that clear the thresholds",
        words::position(*.0)
    )]
    NeverReads(Position),
    /// Stretched bounce leaves nothing of an operation.
    #[error(
        "the network stretches what follows a change to {} to {}, which leaves nothing of the shortest {} time of {}; \
         give it less capacitance, or ask for longer operations",
        words::position(*.position),
        words::at_most(*.bounce_ns),
        words::position(*.position),
        words::at_least(*.dwell_ns)
    )]
    NoDwell {
        /// The position.
        position: Position,
        /// Bounce at the pin.
        bounce_ns: u64,
        /// Shortest time in the position.
        dwell_ns: u64,
    },
    /// Stretched disturbances run into one another.
    #[error(
        "the network stretches disturbances by up to {}, which leaves nothing of the quiet of {} between them; \
         give it less capacitance, or so much that it rejects them, or state a longer quiet",
        words::at_most(*.by_ns),
        words::at_least(*.quiet_ns)
    )]
    NoQuiet {
        /// Longest delay back.
        by_ns: u64,
        /// Quiet at the contact.
        quiet_ns: u64,
    },
}

/// The envelope that the pin shows, of a contact inside `contact`.
///
/// # Errors
/// Where the network makes the envelope empty.
pub fn at_pin(network: &Network, contact: &PhysicalEnvelope) -> Result<AtPin, AtPinError> {
    let delay_ns =
        PerChange { make: delay_ns(network, Position::Closed)?, break_: delay_ns(network, Position::Open)? };
    let reach = PerPosition { open: delay_ns.break_.1, closed: delay_ns.make.1 };
    let disturbed = |position: Position| disturbed(network, contact, position, reach.at(position));
    let disturbed = PerPosition { open: disturbed(Position::Open), closed: disturbed(Position::Closed) };
    let bounce =
        |position: Position| bounce_ns(contact, position, reach.at(position), disturbed.at(position));
    let bounce_ns = PerChange { make: bounce(Position::Closed), break_: bounce(Position::Open) };
    for (position, bounce_ns) in [(Position::Closed, bounce_ns.make), (Position::Open, bounce_ns.break_)] {
        let dwell_ns = contact.dwell_ns.at(position);
        if dwell_ns <= bounce_ns {
            return Err(AtPinError::NoDwell { position, bounce_ns, dwell_ns });
        }
    }
    let widened = |position: Position| match disturbed.at(position) {
        Disturbed::Widened { by_ns } => Some(by_ns),
        _ => None,
    };
    let glitch = |position: Position| widened(position).map_or(0, |by| contact.glitch_ns.at(position) + by);
    let by_ns = widened(Position::Open).max(widened(Position::Closed)).unwrap_or(0);
    if by_ns > 0 && contact.quiet_ns <= by_ns {
        return Err(AtPinError::NoQuiet { by_ns, quiet_ns: contact.quiet_ns });
    }
    let longer = (bounce_ns.make - contact.bounce_ns.make).max(bounce_ns.break_ - contact.bounce_ns.break_);
    let physical = PhysicalEnvelope {
        bounce_ns,
        glitch_ns: PerPosition { open: glitch(Position::Open), closed: glitch(Position::Closed) },
        quiet_ns: contact.quiet_ns - by_ns,
        calm_ns: contact.calm_ns.saturating_sub(longer),
        dwell_ns: contact.dwell_ns,
    };
    Ok(AtPin { physical, delay_ns, disturbed })
}

/// Shortest and longest delay into `position`, rounded outwards.
fn delay_ns(network: &Network, position: Position) -> Result<(u64, u64), AtPinError> {
    let first = network.least(|unit| network.time_to_read(unit, position, |levels| levels.first)).value;
    let surely = network.greatest(|unit| network.time_to_read(unit, position, |levels| levels.surely)).value;
    // A network that takes longer than a year is none.
    if !surely.is_finite() || surely > 3e7 {
        return Err(AtPinError::NeverReads(position));
    }
    Ok(((first * 1e9).floor() as u64, up(surely)))
}

/// Nanoseconds, rounded up.
fn up(seconds: f64) -> u64 {
    (seconds * 1e9).ceil() as u64
}

fn bounce_ns(contact: &PhysicalEnvelope, position: Position, reach: u64, disturbed: Disturbed) -> u64 {
    let own = match position {
        Position::Closed => contact.bounce_ns.make,
        Position::Open => contact.bounce_ns.break_,
    };
    // A disturbance of the other position may begin just before the change and go on after it.
    let line = own.max(contact.glitch_ns.at(!position));
    let settling = match disturbed {
        Disturbed::Rejected { settles_ns } if contact.calm_ns < settles_ns + (line - own) => {
            2 * settles_ns + contact.glitch_ns.at(position)
        }
        _ => reach,
    };
    line.saturating_add(settling)
}

fn disturbed(network: &Network, contact: &PhysicalEnvelope, position: Position, reach: u64) -> Disturbed {
    let width = contact.glitch_ns.at(position);
    if width == 0 {
        return Disturbed::Never;
    }
    let longest = contact.quiet_ns as f64 / 1e9;
    let needed =
        network.greatest(|unit| time_to_forget(network, unit, position, width as f64 / 1e9, longest));
    let settles_ns = if needed.value.is_finite() { up(needed.value).max(reach) } else { u64::MAX };
    if settles_ns <= contact.quiet_ns {
        Disturbed::Rejected { settles_ns }
    } else {
        Disturbed::Widened { by_ns: reach }
    }
}

/// The shortest time in `position`, from rest in the other, after which a disturbance of `width` is not seen; infinite
/// where it is longer than `longest`. Up to a fiftieth too long.
fn time_to_forget(network: &Network, unit: &Unit, position: Position, width: f64, longest: f64) -> f64 {
    let level = network.levels_to_read(unit, !position).first;
    let hidden_after = |state| {
        let pin = unit.after(!position, state, width).pin;
        if position == Position::Open { pin > level } else { pin < level }
    };
    let mut state = unit.steady(!position);
    if !hidden_after(unit.after(position, state, longest)) {
        return f64::INFINITY;
    }
    // Steps of a sixth each, then the one that counts in eight.
    let (ratio, mut time) = (1.16, longest * 1e-4);
    state = unit.after(position, state, time);
    if hidden_after(state) {
        return time;
    }
    loop {
        let next = unit.after(position, state, time * (ratio - 1.0));
        if time * ratio >= longest || hidden_after(next) {
            let part = |step: u32| time * (1.0 + (ratio - 1.0) * f64::from(step) / 8.0);
            let hides = |step: &u32| hidden_after(unit.after(position, state, part(*step) - time));
            return (1..8).find(hides).map_or(time * ratio, part);
        }
        (state, time) = (next, time * ratio);
    }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::button;
    use super::*;
    use crate::quantity::Spread;

    const US: u64 = 1_000;
    const MS: u64 = 1_000_000;

    fn contact() -> PhysicalEnvelope {
        PhysicalEnvelope {
            bounce_ns: PerChange { make: 5 * MS, break_: 3 * MS },
            glitch_ns: PerPosition { open: 20 * US, closed: 100 * US },
            quiet_ns: 9 * MS,
            calm_ns: 0,
            dwell_ns: PerPosition { open: 60 * MS, closed: 60 * MS },
        }
    }

    #[test]
    fn network_that_rejects_disturbances_leaves_none_at_the_pin() {
        let found = at_pin(&button(100e-9), &contact()).expect("fits");
        assert_eq!(found.physical.glitch_ns, PerPosition { open: 0, closed: 0 });
        let Disturbed::Rejected { settles_ns } = found.disturbed.open else { panic!("{found:?}") };
        assert!(settles_ns >= found.delay_ns.break_.1);
        // 3 ms of bounce, 100 us of a disturbance while closed are less; then twice the settling and one width.
        assert_eq!(found.physical.bounce_ns.break_, 3 * MS + 2 * settles_ns + 20 * US);
        let calm = PhysicalEnvelope { calm_ns: 5 * MS, ..contact() };
        let found = at_pin(&button(100e-9), &calm).expect("fits");
        assert_eq!(found.physical.bounce_ns.break_, 3 * MS + found.delay_ns.break_.1);
    }

    #[test]
    fn network_too_quick_to_reject_widens_and_eats_quiet() {
        let found = at_pin(&button(1e-9), &contact()).expect("fits");
        let back = found.delay_ns.break_.1;
        assert_eq!(found.disturbed.open, Disturbed::Widened { by_ns: back });
        assert_eq!(found.physical.glitch_ns.open, 20 * US + back);
        assert_eq!(found.physical.quiet_ns, 9 * MS - back);
        assert_eq!(found.physical.bounce_ns.break_, 3 * MS + back);
        assert_eq!(found.physical.dwell_ns, contact().dwell_ns);
    }

    #[test]
    fn network_too_slow_for_the_operations_is_refused() {
        let slow = button(10e-6);
        let error = at_pin(&slow, &contact()).expect_err("too slow");
        assert!(matches!(error, AtPinError::NoDwell { .. }), "{error}");
        let deaf = Network { pull: Some(Spread::fixed(1e7)), ..button(1e-9) };
        assert_eq!(at_pin(&deaf, &contact()), Err(AtPinError::NeverReads(Position::Open)));
    }
}
