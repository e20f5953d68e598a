//! What a person or a mechanism does with a contact.

use super::dice::Between;
use super::part::Actuation;
use super::preset::Standing;

/// Operations of one sort, one after the other.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Routine {
    /// How many operations.
    pub operations: u64,
    /// How many of them come in quick succession before a pause, at least 1.
    pub group: u64,
    /// How long the contact stays closed, from first touch to first parting, in nanoseconds.
    pub closed_ns: Between,
    /// How long it stays open within a group, in nanoseconds.
    pub open_ns: Between,
    /// How long it stays open between two groups, in nanoseconds.
    pub pause_ns: Between,
    /// How fast the contact is moved.
    pub actuation: Actuation,
}

/// A published or usual way to work a contact.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Habit {
    /// What it is called: one word, as it is typed.
    pub name: &'static str,
    /// The operations that one pause parts from the next.
    pub group: u64,
    /// See [`Routine`].
    pub closed_ns: Between,
    /// See [`Routine`].
    pub open_ns: Between,
    /// See [`Routine`].
    pub pause_ns: Between,
    /// Where the times come from.
    pub says: &'static str,
    /// How much they can be leaned on.
    pub standing: Standing,
}

const fn ms(least: u64, most: u64) -> Between {
    Between(least * 1_000_000, most * 1_000_000)
}

impl Habit {
    /// Every habit.
    pub const ALL: &'static [Self] = &[
        Self {
            name: "presses",
            group: 1,
            closed_ns: ms(80, 350),
            open_ns: ms(150, 1_200),
            pause_ns: ms(150, 1_200),
            says: "single presses by hand",
            standing: Standing::Practice,
        },
        Self {
            name: "taps",
            group: u64::MAX,
            closed_ns: ms(77, 110),
            open_ns: ms(66, 90),
            pause_ns: ms(66, 90),
            says: "50 to 70 taps in 10 s, 143 to 200 ms apart (encyclopaedia, Tapping rate); keys are held 77 to 167 ms on average (data set Keystroke_Processed)",
            standing: Standing::Read,
        },
        Self {
            name: "fastest-taps",
            group: u64::MAX,
            closed_ns: ms(25, 31),
            open_ns: ms(32, 37),
            pause_ns: ms(32, 37),
            says: "16 presses a second, 62.5 ms each (T. Takahashi, as the press reported); that half of it is spent closed is our choice",
            standing: Standing::SecondHand,
        },
        Self {
            name: "double-taps",
            group: 2,
            closed_ns: ms(77, 110),
            open_ns: ms(66, 90),
            pause_ns: ms(600, 1_500),
            says: "two taps at the rate of finger tapping, 143 to 200 ms apart (encyclopaedia, Tapping rate); the pause is common practice",
            standing: Standing::Read,
        },
        Self {
            name: "holds",
            group: 1,
            closed_ns: ms(600, 2_500),
            open_ns: ms(500, 1_500),
            pause_ns: ms(500, 1_500),
            says: "held for longer than the half second that usually counts as a hold",
            standing: Standing::Practice,
        },
        Self {
            name: "typing",
            group: u64::MAX,
            closed_ns: ms(80, 150),
            open_ns: ms(60, 190),
            pause_ns: ms(60, 190),
            says: "keys held for about 116 ms, 239 ms from key to key on average (V. Dhakal and others, CHI 2018)",
            standing: Standing::Memory,
        },
    ];

    /// The habit of this name.
    #[must_use]
    pub fn find(name: &str) -> Option<&'static Self> {
        Self::ALL.iter().find(|habit| habit.name == name)
    }

    /// This many operations of it.
    #[must_use]
    pub fn routine(&self, operations: u64, actuation: Actuation) -> Routine {
        Routine {
            operations,
            group: self.group,
            closed_ns: self.closed_ns,
            open_ns: self.open_ns,
            pause_ns: self.pause_ns,
            actuation,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The published rates: 16 presses a second at most; 143 to 200 ms from tap to tap; 239 ms from key to key and
    /// 116 ms of hold on average (from memory).
    #[test]
    fn habits_keep_the_published_rates() {
        let period = |name| {
            let habit = Habit::find(name).unwrap();
            let sum = |pick: fn(Between) -> u64| pick(habit.closed_ns) + pick(habit.open_ns);
            (sum(|range| range.0) / 1_000_000, sum(|range| range.1) / 1_000_000)
        };
        for name in ["taps", "double-taps"] {
            assert_eq!(period(name), (143, 200), "{name}");
        }
        // 62.5 ms lies in the middle.
        assert_eq!(period("fastest-taps"), (57, 68));
        let typing = Habit::find("typing").unwrap();
        let middle = |range: Between| (range.0 + range.1) / 2_000_000;
        assert_eq!((middle(typing.closed_ns), middle(typing.closed_ns) + middle(typing.open_ns)), (115, 240));
    }
}
