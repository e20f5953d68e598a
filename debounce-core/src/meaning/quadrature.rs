//! Two contacts a quarter cycle apart: [`Quadrature`].

use crate::machine::{Machine, Position};

/// One sample of both phases of an encoder.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Phases {
    /// The phase that closes first when turning forward from both open.
    pub a: Position,
    /// The phase that follows.
    pub b: Position,
}

impl Phases {
    /// The four phases of a cycle in the order of turning forward, from both open.
    pub const CYCLE: [Self; 4] = [
        Self { a: Position::Open, b: Position::Open },
        Self { a: Position::Closed, b: Position::Open },
        Self { a: Position::Closed, b: Position::Closed },
        Self { a: Position::Open, b: Position::Closed },
    ];

    /// The place in [`CYCLE`](Self::CYCLE), 0 to 3.
    #[must_use]
    #[inline]
    pub const fn quarter(self) -> u8 {
        // The Gray code of the cycle turned into a number: the second bit is b, the first a exclusive-or b.
        let (a, b) = (self.a as u8, self.b as u8);
        b << 1 | (a ^ b)
    }
}

/// A direction of turning.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Turn {
    /// Phase a leads.
    Forward,
    /// Phase b leads.
    Backward,
}

impl Turn {
    /// 1 forward, -1 backward.
    #[must_use]
    #[inline]
    pub const fn sign(self) -> i8 {
        match self {
            Self::Forward => 1,
            Self::Backward => -1,
        }
    }
}

/// What one tick of an encoder brought.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum QuadratureEvent {
    /// One step.
    Step(Turn),
    /// Both phases changed between two samples: two quarters were passed, and nobody knows which way.
    Lost,
}

impl QuadratureEvent {
    /// What to add to a count of steps.
    #[must_use]
    #[inline]
    pub const fn steps(self) -> i8 {
        match self {
            Self::Step(turn) => turn.sign(),
            Self::Lost => 0,
        }
    }
}

/// Steps in one cycle of the two phases.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Resolution {
    /// One step a cycle, where phase b changes while phase a is open and the cycle begins anew.
    X1,
    /// Two steps a cycle, where phase b changes.
    X2,
    /// Four steps a cycle, at every change.
    X4,
}

/// Counts an encoder from raw samples of its two phases: one event a tick, bounce of one phase adds up to nothing.
///
/// # Method
/// The cycle 00 01 11 10, one bit a step, two bits a lost step. Source: B. Millier, Circuit Cellar 152, 2003,
/// table 1. No debouncing law is needed before it: while one phase bounces the other is at rest, so the count goes to
/// and fro over one edge and ends where the contact ends. The lower resolutions count at some of the edges only, and
/// the same holds for each edge.
///
/// # Units
/// One call to [`step`](Machine::step) takes one sample of both phases and is one tick. Events are steps of the
/// resolution.
///
/// # Bounds
/// With bounce of at most `B` samples after each edge of either phase, and edges at least `B + 1` samples apart:
///
/// | Quantity                                       | Value     | Proof                                          |
/// |------------------------------------------------|-----------|------------------------------------------------|
/// | count less true position, outside bounce       | exactly 0 | `quadrature_bounce_at_rated_distance_loses_nothing` |
/// | lost steps reported                            | none      | same                                           |
/// | latency of a clean step                        | 1         | `quadrature_every_pair_of_samples_equals_table`    |
/// | events of the first sample after power-up      | none      | same                                           |
///
/// So bounce of 2 ms at a tick of 1 ms (at most 2 samples) is survived up to one edge every 3 ticks: 3 ms, which for
/// 24 cycles a turn and exact quarters is 208 rpm; at 60 rpm edges are 10.4 ms apart, and nothing is lost up to 83
/// cycles a turn. The shortest quarter counts, so take the phase tolerance of the part off. Where edges come closer,
/// at `B` samples lost steps are reported; closer still, a step may be counted the wrong way without a report
/// (`quadrature_edges_closer_than_bounce_are_reported_or_worse`).
///
/// Both phases changing at once is [`QuadratureEvent::Lost`] and moves nothing: add it up beside the count. A lost
/// tick is harmless while no more than one edge falls into the gap; two are reported as lost, three count as one step
/// the other way, four as none.
///
/// # State
/// 1 byte; checked by a `const` assertion below the type.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never.
///
/// # Examples
/// ```
/// use debounce_core::{Machine, Phases, Quadrature, QuadratureEvent, Resolution, Turn};
/// const KNOB: Quadrature = Quadrature::new(Resolution::X4);
/// let mut state = Quadrature::POWER_UP;
/// let mut count = 0;
/// for quarter in [2, 3, 2, 3, 0, 1] {
///     if let Some(event) = KNOB.step(&mut state, Phases::CYCLE[quarter]) {
///         assert_ne!(event, QuadratureEvent::Lost);
///         count += i32::from(event.steps());
///     }
/// }
/// assert_eq!(count, 3); // the first sample is no step, the bounce between quarters 2 and 3 adds up to one
/// assert_eq!(KNOB.step(&mut state, Phases::CYCLE[3]), Some(QuadratureEvent::Lost));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Quadrature {
    resolution: Resolution,
}

/// What a [`Quadrature`] remembers: the quarter of the last sample.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct QuadratureState {
    quarter: u8,
}

const _: () = assert!(size_of::<QuadratureState>() == 1);

// No quarter; not an `Option`, which would take a second byte.
const NEVER_SAMPLED: u8 = 4;

impl Quadrature {
    /// The state at power-up: no sample was taken.
    pub const POWER_UP: QuadratureState = QuadratureState { quarter: NEVER_SAMPLED };

    /// An encoder that counts with `resolution`.
    #[must_use]
    pub const fn new(resolution: Resolution) -> Self {
        Self { resolution }
    }

    /// The fewest samples from edge to edge at which bounce of `bounce_ticks` samples loses nothing.
    #[must_use]
    pub const fn fewest_ticks_between_edges(bounce_ticks: u32) -> u32 {
        bounce_ticks.saturating_add(1)
    }
}

impl Machine for Quadrature {
    type Input = Phases;
    type Output = Option<QuadratureEvent>;
    type State = QuadratureState;

    #[inline]
    fn step(&self, state: &mut QuadratureState, phases: Phases) -> Option<QuadratureEvent> {
        let (from, to) = (state.quarter, phases.quarter());
        state.quarter = to;
        if from == NEVER_SAMPLED {
            return None;
        }
        let turn = match to.wrapping_sub(from) & 3 {
            0 => return None,
            1 => Turn::Forward,
            2 => return Some(QuadratureEvent::Lost),
            _ => Turn::Backward,
        };
        // An edge lies between the quarter it leaves and the one it reaches; it is named by the one further on.
        let edge = match turn {
            Turn::Forward => to,
            Turn::Backward => from,
        };
        let counts = match self.resolution {
            Resolution::X1 => edge == 0,
            Resolution::X2 => edge & 1 == 0,
            Resolution::X4 => true,
        };
        if counts { Some(QuadratureEvent::Step(turn)) } else { None }
    }
}

#[cfg(test)]
mod tests;
