//! A word of samples with the contact behind it.

use std::fmt;

use debounce_core::Position;

/// One tick of a [`Word`].
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct WordTick {
    /// Where the contact is.
    pub contact: Position,
    /// What is read.
    pub sample: Position,
    /// Whether the sample lies in a bounce.
    pub bouncing: bool,
    /// Whether the sample lies in a disturbance.
    pub disturbed: bool,
    /// Whether the tick is lost, so that the logic never sees the sample.
    pub lost: bool,
}

/// What a contact does, tick by tick, and what is read of it.
#[derive(Clone, PartialEq, Eq)]
pub struct Word {
    /// Where contact and logic were settled before the first tick.
    pub start: Position,
    /// The ticks, lost ones among them.
    pub ticks: Vec<WordTick>,
}

impl Word {
    /// The ticks that are not lost.
    pub fn delivered(&self) -> impl Iterator<Item = &WordTick> {
        self.ticks.iter().filter(|tick| !tick.lost)
    }

    /// What the logic is given.
    #[must_use]
    pub fn samples(&self) -> Vec<Position> {
        self.delivered().map(|tick| tick.sample).collect()
    }

    /// Where the contact is at each sample that the logic is given.
    #[must_use]
    pub fn contacts(&self) -> Vec<Position> {
        self.delivered().map(|tick| tick.contact).collect()
    }

    /// The indices of the ticks that are lost.
    #[must_use]
    pub fn lost_ticks(&self) -> Vec<usize> {
        (0..self.ticks.len()).filter(|&at| self.ticks[at].lost).collect()
    }

    /// The ticks just before which the contact changed.
    #[must_use]
    pub fn changes(&self) -> Vec<usize> {
        self.turns(|tick| tick.contact).collect()
    }

    /// How often the readings turn over, lost ones among them.
    #[must_use]
    pub fn edges(&self) -> usize {
        self.turns(|tick| tick.sample).count()
    }

    fn turns(&self, of: impl Fn(&WordTick) -> Position) -> impl Iterator<Item = usize> {
        (0..self.ticks.len()).filter(move |&at| {
            let before = if at == 0 { self.start } else { of(&self.ticks[at - 1]) };
            of(&self.ticks[at]) != before
        })
    }
}

/// Positions as a row of 0 (open) and 1 (closed).
pub(crate) fn row(positions: impl IntoIterator<Item = Position>) -> String {
    positions.into_iter().map(|position| if position.is_closed() { '1' } else { '0' }).collect()
}

/// As rows of 0 and 1, the way a failing property test shows it.
impl fmt::Debug for Word {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut shown = f.debug_struct("Word");
        shown.field("start", &self.start);
        shown.field("contact", &row(self.ticks.iter().map(|tick| tick.contact)));
        shown.field("reads", &row(self.ticks.iter().map(|tick| tick.sample)));
        let lost = self.lost_ticks();
        if !lost.is_empty() {
            shown.field("lost_ticks", &lost);
        }
        shown.finish()
    }
}
