//! What lies outside the limits in the field: [`Monitor`].

use super::bursts::{Burst, Bursts, BurstsState};
use crate::envelope::{PerChange, PerPosition};
use crate::machine::{Machine, Position};

/// What a [`Monitor`] takes for normal, in ticks.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct MonitorLimits {
    /// The widest burst at a make and at a break.
    pub bounce: PerChange<u16>,
    /// The widest disturbance that begins open and closed: samples of the other position and between them.
    pub glitch: PerPosition<u16>,
    /// The fewest samples at rest between two bursts; at least 1.
    pub quiet: u16,
    /// The longest time in one position, in steps of 256 ticks; `u16::MAX` is no limit.
    pub stuck_256_ticks: PerPosition<u16>,
}

/// Something outside the limits.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Outside {
    /// The contact changed, and took longer than its bounce may.
    Bounce(Burst),
    /// The line left its position and came back, and took longer than a disturbance may: too wide, or several of them
    /// with less than the quiet between.
    Disturbance(Burst),
    /// The line has stayed at rest at this position for too long.
    Stuck(Position),
}

/// Watches the samples of a line and reports what lies outside its limits: in the field, beside the law.
///
/// # Method
/// Derived here on [`Bursts`]: changes with less than `quiet` samples at rest between them are one burst. It is a
/// watchman, not a judge: each report is a fact about the line, but a disturbance that follows a bounce by less than
/// the quiet is counted in with it, so that a report may come though the envelope was kept. A tick that has stopped
/// cannot be seen from inside the tick: count ticks in the handler and compare in the main loop.
///
/// # Units
/// One call to [`step`](Machine::step) takes one raw sample and is one tick.
///
/// # Bounds
///
/// | Quantity                                        | Value                     | Proof                              |
/// |-------------------------------------------------|---------------------------|------------------------------------|
/// | reports of a burst                              | 1 if over its limit, else 0 | `monitor_every_history_reports_bursts_over_limit` |
/// | reports of a line that stays                    | at most 1                 | `monitor_stuck_line_is_reported_once`  |
/// | report of a stuck line                          | 0 to 255 ticks after the limit | same                          |
///
/// # State
/// 12 bytes; checked by a `const` assertion below the type.
///
/// # Panics
/// Never in `step`. A quiet of 0 panics in [`new`](Self::new), in a constant at compile time.
///
/// # Examples
/// ```
/// use debounce_core::{Machine, Monitor, MonitorLimits, Outside, PerChange, PerPosition, Position::{Closed, Open}};
/// const WATCH: Monitor = Monitor::new(MonitorLimits {
///     bounce: PerChange { make: 4, break_: 4 },
///     glitch: PerPosition { open: 1, closed: 1 },
///     quiet: 3,
///     stuck_256_ticks: PerPosition { open: u16::MAX, closed: u16::MAX },
/// });
/// let mut state = Monitor::POWER_UP;
/// let samples = [Open, Closed, Closed, Open, Open, Open];
/// let last = samples.into_iter().filter_map(|sample| WATCH.step(&mut state, sample)).last();
/// assert!(matches!(last, Some(Outside::Disturbance(burst)) if burst.ticks == 2));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Monitor {
    limits: MonitorLimits,
    bursts: Bursts,
}

/// What a [`Monitor`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct MonitorState {
    bursts: BurstsState,
    // Whole stretches of 256 ticks at rest, and ticks of the one that runs.
    stretches: u16,
    ticks: u8,
}

const _: () = assert!(size_of::<MonitorState>() == 12);

impl Monitor {
    /// The state at power-up.
    pub const POWER_UP: MonitorState = MonitorState { bursts: Bursts::POWER_UP, stretches: 0, ticks: 0 };

    /// A monitor with these limits.
    ///
    /// # Panics
    /// When quiet is 0; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(limits: MonitorLimits) -> Self {
        match Self::try_new(limits) {
            Some(monitor) => monitor,
            None => panic!("quiet is at least 1 sample"),
        }
    }

    /// [`new`](Self::new) for values known at run time, `None` for a quiet of 0; links no panic.
    #[must_use]
    pub const fn try_new(limits: MonitorLimits) -> Option<Self> {
        match Bursts::try_new(limits.quiet) {
            Some(bursts) => Some(Self { limits, bursts }),
            None => None,
        }
    }

    fn judge(&self, burst: Burst) -> Option<Outside> {
        match burst.operation() {
            Some(change) if burst.ticks > self.limits.bounce.at(change) => Some(Outside::Bounce(burst)),
            None if burst.ticks > self.limits.glitch.at(burst.from) => Some(Outside::Disturbance(burst)),
            _ => None,
        }
    }
}

impl Machine for Monitor {
    type Input = Position;
    type Output = Option<Outside>;
    type State = MonitorState;

    #[inline]
    fn step(&self, state: &mut MonitorState, sample: Position) -> Option<Outside> {
        let burst = self.bursts.step(&mut state.bursts, sample);
        if burst.is_some() || !state.bursts.at_rest() {
            (state.stretches, state.ticks) = (0, 0);
            return burst.and_then(|burst| self.judge(burst));
        }
        // The count stops one past the limit: reported once, and at rest from then on.
        let limit = self.limits.stuck_256_ticks.at(sample);
        if limit == u16::MAX || state.stretches > limit {
            return None;
        }
        state.ticks = state.ticks.wrapping_add(1);
        if state.ticks != 0 {
            return None;
        }
        state.stretches = state.stretches.saturating_add(1);
        if state.stretches > limit { Some(Outside::Stuck(sample)) } else { None }
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use std::vec::Vec;

    const LIMITS: MonitorLimits = MonitorLimits {
        bounce: PerChange { make: 3, break_: 1 },
        glitch: PerPosition { open: 2, closed: 1 },
        quiet: 3,
        stuck_256_ticks: PerPosition { open: u16::MAX, closed: 2 },
    };

    #[test]
    fn monitor_every_history_reports_bursts_over_limit() {
        let (monitor, bursts) = (Monitor::new(LIMITS), Bursts::new(3));
        let mut reports = 0;
        for bits in 0..1u32 << 14 {
            let (mut state, mut burst_state) = (Monitor::POWER_UP, Bursts::POWER_UP);
            for i in 0..14 {
                let sample = Position::closed_if(bits >> i & 1 == 1);
                let expected = bursts.step(&mut burst_state, sample).and_then(|b| match (b.from, b.to) {
                    (Position::Open, Position::Closed) => (b.ticks > 3).then_some(Outside::Bounce(b)),
                    (Position::Closed, Position::Open) => (b.ticks > 1).then_some(Outside::Bounce(b)),
                    (Position::Open, Position::Open) => (b.ticks > 2).then_some(Outside::Disturbance(b)),
                    (Position::Closed, Position::Closed) => (b.ticks > 1).then_some(Outside::Disturbance(b)),
                });
                assert_eq!(monitor.step(&mut state, sample), expected);
                reports += u32::from(expected.is_some());
            }
        }
        assert!(reports > 1000);
    }

    #[test]
    fn monitor_stuck_line_is_reported_once() {
        let monitor = Monitor::new(LIMITS);
        let mut state = Monitor::POWER_UP;
        for _ in 0..100_000 {
            assert_eq!(monitor.step(&mut state, Position::Open), None); // no limit while open
        }
        let reports: Vec<_> = (1..=100_000u32)
            .filter_map(|tick| Some((tick, monitor.step(&mut state, Position::Closed)?)))
            .collect();
        // Counted from coming to rest, at the third sample: more than two stretches, so three.
        assert_eq!(reports, [(3 + 3 * 256, Outside::Stuck(Position::Closed))]);
        let before = state;
        assert_eq!(monitor.step(&mut state, Position::Closed), None);
        assert_eq!(state, before);
    }

    #[test]
    fn monitor_without_quiet_is_refused() {
        assert!(Monitor::try_new(MonitorLimits { quiet: 0, ..LIMITS }).is_none());
        assert!(Monitor::try_new(MonitorLimits { quiet: 1, ..LIMITS }).is_some());
    }
}
