//! How often each thing outside the envelope happened: [`Tally`].

use super::{Outside, TickFault};

/// Counts what a [`Monitor`](crate::Monitor) and a [`Heartbeat`](crate::Heartbeat) report; every count stops at its end.
///
/// # Method
/// One saturating count for each kind, for both positions together: a figure to read out in the field or to send home.
///
/// # Units
/// In reports; [`lost_ticks`](Self::lost_ticks) in ticks.
///
/// # Bounds
/// Exact up to 65 535, which stands for that or more. Proof: `tally_counts_each_kind_up_to_its_end`.
///
/// # State
/// 20 bytes; checked by a `const` assertion below the type. Copy it to memory that outlives a power-down to go on.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never.
///
/// # Examples
/// ```
/// use debounce_core::{Change, Outside, Tally, TickFault};
/// let mut tally = Tally::NEW;
/// tally.count(Outside::BounceTooLong(Change::Make));
/// tally.count_tick_fault(TickFault::Lost(3));
/// assert_eq!((tally.long_bounces, tally.lost_ticks, tally.is_clean()), (1, 3, false));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub struct Tally {
    /// Bounces that were too long.
    pub long_bounces: u16,
    /// Disturbances that were too wide.
    pub wide_disturbances: u16,
    /// Disturbances that came too close behind another.
    pub close_disturbances: u16,
    /// Positions that were left too soon.
    pub short_dwells: u16,
    /// Stretches of 65 535 ticks without rest.
    pub restless: u16,
    /// Times that the contact was stuck.
    pub stuck: u16,
    /// Beats without a tick.
    pub stopped_ticks: u16,
    /// Beats with too few ticks.
    pub slow_beats: u16,
    /// Ticks that were lost, beats without any not counted.
    pub lost_ticks: u32,
}

const _: () = assert!(size_of::<Tally>() == 20);

impl Tally {
    /// Nothing counted.
    pub const NEW: Self = Self {
        long_bounces: 0,
        wide_disturbances: 0,
        close_disturbances: 0,
        short_dwells: 0,
        restless: 0,
        stuck: 0,
        stopped_ticks: 0,
        slow_beats: 0,
        lost_ticks: 0,
    };

    /// Counts a report of the monitor.
    pub const fn count(&mut self, outside: Outside) {
        let count = match outside {
            Outside::BounceTooLong(_) => &mut self.long_bounces,
            Outside::DisturbanceTooWide(_) => &mut self.wide_disturbances,
            Outside::DisturbancesTooClose(_) => &mut self.close_disturbances,
            Outside::DwellTooShort(_) => &mut self.short_dwells,
            Outside::NeverAtRest => &mut self.restless,
            Outside::Stuck(_) => &mut self.stuck,
        };
        *count = count.saturating_add(1);
    }

    /// Counts a report of the heartbeat.
    pub const fn count_tick_fault(&mut self, fault: TickFault) {
        match fault {
            TickFault::Stopped => self.stopped_ticks = self.stopped_ticks.saturating_add(1),
            TickFault::Lost(ticks) => {
                self.slow_beats = self.slow_beats.saturating_add(1);
                self.lost_ticks = self.lost_ticks.saturating_add(ticks);
            }
        }
    }

    /// Whether nothing was counted.
    #[must_use]
    pub fn is_clean(&self) -> bool {
        *self == Self::NEW
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Change, Position};

    #[test]
    fn tally_counts_each_kind_up_to_its_end() {
        type Kind = (Outside, fn(&Tally) -> u16);
        let kinds: [Kind; 6] = [
            (Outside::BounceTooLong(Change::Break), |tally| tally.long_bounces),
            (Outside::DisturbanceTooWide(Position::Open), |tally| tally.wide_disturbances),
            (Outside::DisturbancesTooClose(Position::Open), |tally| tally.close_disturbances),
            (Outside::DwellTooShort(Position::Closed), |tally| tally.short_dwells),
            (Outside::NeverAtRest, |tally| tally.restless),
            (Outside::Stuck(Position::Closed), |tally| tally.stuck),
        ];
        for (outside, of) in kinds {
            let mut tally = Tally::NEW;
            assert!(tally.is_clean());
            for times in 1..=65_537_u32 {
                tally.count(outside);
                assert_eq!(u32::from(of(&tally)), times.min(65_535));
            }
            assert_eq!(kinds.iter().filter(|(_, of)| of(&tally) > 0).count(), 1);
        }
        let mut tally = Tally::NEW;
        tally.count_tick_fault(TickFault::Stopped);
        tally.count_tick_fault(TickFault::Lost(u32::MAX));
        tally.count_tick_fault(TickFault::Lost(2));
        assert_eq!((tally.stopped_ticks, tally.slow_beats, tally.lost_ticks), (1, 2, u32::MAX));
    }
}
