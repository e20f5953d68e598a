//! Words in text: a witness kept in a regression test is replayed from here.

use debounce_core::{Change, Clause, Law, PerChange, Position};

use super::follow::{Followed, Follower};
use crate::prove::{Witness, WitnessTick};
use crate::report::timing::TimingDiagram;
use crate::report::words;
use crate::strategy::row;

/// Steady ticks after a word in which a logic that never settles must have reported everything.
const STEADY_TICKS: usize = 4_096;

/// Rounds of a repeated part after which a logic that never comes into the same state again must have reported.
const ROUNDS: usize = 4_096;

/// Samples from a row of `0` (open) and `1` (closed).
///
/// ```
/// use debounce_core::Position::{Closed, Open};
/// assert_eq!(harness::check::samples("011"), [Open, Closed, Closed]);
/// ```
///
/// # Panics
/// On any other character.
#[must_use]
#[track_caller]
pub fn samples(text: &str) -> Vec<Position> {
    parse(text)
}

#[track_caller]
fn parse(text: &str) -> Vec<Position> {
    let mut found = Vec::with_capacity(text.len());
    for (at, letter) in text.chars().enumerate() {
        match letter {
            '0' => found.push(Position::Open),
            '1' => found.push(Position::Closed),
            _ => panic!(
                "letter {} of the row \"{text}\" is '{letter}'; use 0 for open and 1 for closed",
                at + 1
            ),
        }
    }
    found
}

/// Every edge that `law`, at rest at `start`, reports for a row of samples; ticks are counted from 1.
///
/// ```
/// use debounce_core::{Change, Position, ShiftRegister};
/// let law = ShiftRegister::new(2);
/// assert_eq!(harness::check::edges(&law, Position::Open, "01011"), [(5, Change::Make)]);
/// ```
///
/// # Panics
/// When the row holds anything but `0` and `1`.
#[must_use]
#[track_caller]
pub fn edges<L: Law>(law: &L, start: Position, row: &str) -> Vec<(usize, Change)> {
    let mut state = law.rest(start);
    let samples = parse(row);
    samples
        .iter()
        .zip(1..)
        .filter_map(|(&sample, at)| law.step(&mut state, sample).map(|edge| (at, edge)))
        .collect()
}

/// A law along one word, with the contact behind it.
#[derive(Clone, PartialEq, Debug)]
#[must_use = "a replay says nothing until something is asserted of it"]
pub struct Replay {
    start: Position,
    followed: Followed,
    loop_from: Option<usize>,
}

/// Gives `law`, at rest at `start`, the samples `reads`; `contact` is where the contact is at each of them.
///
/// After the word the contact stays where it is and is read right until the law is settled. In both rows a part in
/// parentheses at the end repeats for ever instead.
///
/// ```
/// use debounce_core::{Position, ShiftRegister};
/// let law = ShiftRegister::new(2);
/// harness::check::replay(&law, Position::Open, "0111", "0101").assert_latency_at_most(4, 4);
/// ```
///
/// # Panics
/// When the rows hold anything else, or are not of one length.
#[track_caller]
pub fn replay<L: Law>(law: &L, start: Position, contact: &str, reads: &str) -> Replay {
    let ((contact, from), (reads, same_from)) = (repeated(contact), repeated(reads));
    assert!(
        contact.len() == reads.len() && from == same_from,
        "the rows of a replay must be of one length and repeat from the same tick on"
    );
    let tick = |at: usize| WitnessTick {
        contact: contact[at],
        sample: reads[at],
        output: start,
        bouncing: false,
        disturbed: false,
    };
    let mut follower = Follower::at_rest(law, start);
    let mut goes_on = true;
    for at in 0..contact.len() {
        goes_on = goes_on && follower.take(tick(at));
    }
    let followed = match from {
        None => follower.settle(STEADY_TICKS),
        Some(from) => {
            // The part has been walked once; the same state again at its end means that it always will be.
            let mut seen = vec![follower.state()];
            for _ in 0..ROUNDS {
                if !goes_on || follower.unreported() == 0 {
                    break;
                }
                goes_on = (from..contact.len()).all(|at| follower.take(tick(at)));
                if seen.contains(&follower.state()) {
                    break;
                }
                seen.push(follower.state());
            }
            if follower.unreported() > 0 {
                follower.miss();
            }
            follower.end()
        }
    };
    Replay { start, followed, loop_from: from }
}

/// A row, and where the part in parentheses begins.
#[track_caller]
fn repeated(row: &str) -> (Vec<Position>, Option<usize>) {
    match row.strip_suffix(')').and_then(|row| row.split_once('(')) {
        None => (parse(row), None),
        Some((stem, part)) => {
            assert!(!part.is_empty(), "the row \"{row}\" repeats nothing");
            (parse(&format!("{stem}{part}")), Some(stem.len()))
        }
    }
}

impl Replay {
    /// The promise that was broken first.
    #[must_use]
    pub fn fault(&self) -> Option<Clause> {
        self.followed.fault
    }

    /// The longest latency at each change that was reported.
    #[must_use]
    pub fn slowest(&self) -> PerChange<Option<u32>> {
        self.followed.slowest
    }

    /// Asserts that every change was reported once and in order, and nothing else.
    ///
    /// # Panics
    /// When it was not, with a timing diagram.
    #[track_caller]
    pub fn assert_faithful(&self) {
        if let Some(clause) = self.followed.fault {
            panic!("not faithful: {}\n\n{}", words::clause(clause), self.diagram());
        }
    }

    /// Asserts that every change was reported once, within so many samples.
    ///
    /// # Panics
    /// When it was not, with a timing diagram.
    #[track_caller]
    pub fn assert_latency_at_most(&self, make: u32, break_: u32) {
        self.assert_faithful();
        let allowed = PerChange { make, break_ };
        for change in [Change::Make, Change::Break] {
            if let Some(latency) = self.followed.slowest.at(change)
                && latency > allowed.at(change)
            {
                panic!("{}\n\n{}", super::too_slow(change, latency, allowed.at(change)), self.diagram());
            }
        }
    }

    fn diagram(&self) -> String {
        let ticks = self.followed.ticks.clone();
        TimingDiagram(&Witness { start: self.start, ticks, loop_from: None }).to_string()
    }
}

/// The call that replays a witness.
pub(super) fn line(witness: &Witness, then: &str) -> String {
    let shown = |of: fn(&WitnessTick) -> Position| {
        let whole = row(witness.ticks.iter().map(of));
        match witness.loop_from {
            None => whole,
            Some(from) => format!("{}({})", &whole[..from], &whole[from..]),
        }
    };
    let (contact, reads) = (shown(|tick| tick.contact), shown(|tick| tick.sample));
    format!("replay(&law, Position::{:?}, \"{contact}\", \"{reads}\").{then};", witness.start)
}
