//! How a contact ages: [`Wear`].

use super::bursts::Burst;
use crate::envelope::PerChange;
use crate::machine::Change;

/// Keeps the wear figures of one contact from its bursts: operations, longest bounce, most changes, and a trend.
///
/// # Method
/// Derived here. The bounce of the first 64 operations of each kind is added up as the contact's own measure; from then
/// on each further 64 are added up and compared with it. The contact is *ageing* when the last whole 64 of either kind
/// bounced for more than twice as long as the first, and by more than 64 ticks: one tick an operation, below which the
/// grain of the clock shows and not the contact. A published figure for scale: a tactile switch specified for up to 5
/// to 10 ms when new (Omron B3F, Panasonic EVPBF) is specified for up to 20 ms after 100 000 operations (Namae JTP-1136C).
///
/// # Units
/// [`record`](Self::record) takes one burst. Bounce is in ticks. Every number stops at its maximum.
///
/// # Bounds
///
/// | Quantity                                     | Value                        | Proof                              |
/// |----------------------------------------------|------------------------------|------------------------------------|
/// | operations, longest bounce, most changes     | exact up to their maximum    | `wear_figures_equal_those_of_the_whole_list` |
/// | first operations after which ageing can show | 128 of one kind              | `wear_ageing_shows_after_a_whole_row_over_twice_the_first` |
/// | disturbances among the figures               | none                         | `wear_figures_equal_those_of_the_whole_list` |
///
/// # State
/// 32 bytes; checked by a `const` assertion below the type. Copy it to memory that outlives a power-down to go on.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never.
///
/// # Examples
/// ```
/// use debounce_core::{Burst, Position::{Closed, Open}, Wear};
/// let mut wear = Wear::NEW;
/// wear.record(&Burst { from: Open, to: Closed, ticks: 3, changes: 5 });
/// wear.record(&Burst { from: Closed, to: Closed, ticks: 9, changes: 2 }); // a disturbance wears nothing
/// assert_eq!((wear.operations(), wear.longest_bounce().make, wear.most_changes()), (1, 3, 5));
/// assert!(!wear.is_ageing());
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Wear {
    operations: u32,
    most_changes: u16,
    kinds: PerChange<Kind>,
}

/// The figures of the makes, or of the breaks. The sums hold 64 widths of up to 65535 ticks.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
struct Kind {
    first: u32,
    running: u32,
    longest: u16,
    in_row: u8,
    trend: Trend,
}

#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
enum Trend {
    /// The first row is not complete.
    Learning,
    Steady,
    Ageing,
}

const _: () = assert!(size_of::<Wear>() == 32);

const ROW: u8 = 64;

impl Kind {
    const NEW: Self = Self { first: 0, running: 0, longest: 0, in_row: 0, trend: Trend::Learning };

    fn record(&mut self, ticks: u16) {
        self.longest = self.longest.max(ticks);
        self.running = self.running.saturating_add(u32::from(ticks));
        self.in_row = self.in_row.saturating_add(1);
        if self.in_row < ROW {
            return;
        }
        self.trend = if self.trend == Trend::Learning {
            self.first = self.running;
            Trend::Steady
        } else if self.running > self.first.saturating_mul(2)
            && self.running.saturating_sub(self.first) > u32::from(ROW)
        {
            Trend::Ageing
        } else {
            Trend::Steady
        };
        (self.running, self.in_row) = (0, 0);
    }
}

impl Wear {
    /// A contact without operations.
    pub const NEW: Self =
        Self { operations: 0, most_changes: 0, kinds: PerChange { make: Kind::NEW, break_: Kind::NEW } };

    /// Takes a burst of the contact's line; disturbances are left out.
    pub fn record(&mut self, burst: &Burst) {
        let kind = match burst.operation() {
            Some(Change::Make) => &mut self.kinds.make,
            Some(Change::Break) => &mut self.kinds.break_,
            None => return,
        };
        kind.record(burst.ticks);
        self.operations = self.operations.saturating_add(1);
        self.most_changes = self.most_changes.max(burst.changes);
    }

    /// Makes and breaks so far.
    #[must_use]
    pub const fn operations(&self) -> u32 {
        self.operations
    }

    /// The longest bounce of a make and of a break.
    #[must_use]
    pub const fn longest_bounce(&self) -> PerChange<u16> {
        PerChange { make: self.kinds.make.longest, break_: self.kinds.break_.longest }
    }

    /// The most changes of the line in one operation.
    #[must_use]
    pub const fn most_changes(&self) -> u16 {
        self.most_changes
    }

    /// Whether the last whole row of 64 makes or of 64 breaks bounced far longer than the first.
    #[must_use]
    pub const fn is_ageing(&self) -> bool {
        matches!(self.kinds.make.trend, Trend::Ageing) || matches!(self.kinds.break_.trend, Trend::Ageing)
    }
}

impl Default for Wear {
    fn default() -> Self {
        Self::NEW
    }
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use crate::machine::Position::{self, Closed, Open};
    use std::vec::Vec;

    fn burst(from: Position, to: Position, ticks: u16) -> Burst {
        Burst { from, to, ticks, changes: ticks.saturating_add(1) }
    }

    #[test]
    fn wear_figures_equal_those_of_the_whole_list() {
        let bursts: Vec<_> = (0..5000u32)
            .map(|i| {
                let noise = i.wrapping_mul(2_654_435_761);
                let position = |bit: u32| Position::closed_if(noise >> bit & 1 == 1);
                burst(position(31), position(30), u16::try_from(noise >> 8 & 0xff).unwrap())
            })
            .collect();
        let mut wear = Wear::NEW;
        bursts.iter().for_each(|b| wear.record(b));
        let longest =
            |change| bursts.iter().filter(|b| b.operation() == Some(change)).map(|b| b.ticks).max().unwrap();
        let operations: Vec<_> = bursts.iter().filter(|b| b.from != b.to).collect();
        assert_eq!(usize::try_from(wear.operations()), Ok(operations.len()));
        assert_eq!(wear.longest_bounce().make, longest(Change::Make));
        assert_eq!(wear.longest_bounce().break_, longest(Change::Break));
        assert_eq!(Some(wear.most_changes()), operations.iter().map(|b| b.changes).max());
    }

    #[test]
    fn wear_ageing_shows_after_a_whole_row_over_twice_the_first() {
        #[track_caller]
        fn check(new: u16, old: u16, ageing: bool) {
            for (from, to) in [(Open, Closed), (Closed, Open)] {
                let mut wear = Wear::NEW;
                (0..64).for_each(|_| wear.record(&burst(from, to, new)));
                (0..63).for_each(|_| wear.record(&burst(from, to, old)));
                assert!(!wear.is_ageing());
                wear.record(&burst(from, to, old));
                assert_eq!(wear.is_ageing(), ageing, "{new} to {old}");
                // A row like the first takes it back.
                (0..64).for_each(|_| wear.record(&burst(from, to, new)));
                assert!(!wear.is_ageing());
            }
        }
        check(5, 10, false);
        check(5, 11, true);
        check(0, 1, false); // over twice, but within one tick an operation
        check(0, 2, true);
        check(40_000, u16::MAX, false);
    }

    #[test]
    fn wear_operations_at_count_maximum_stay() {
        let mut wear = Wear { operations: u32::MAX - 1, ..Wear::NEW };
        for _ in 0..3 {
            wear.record(&burst(Open, Closed, 1));
        }
        assert_eq!(wear.operations(), u32::MAX);
    }
}
