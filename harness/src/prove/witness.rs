//! A waveform that shows something: the contact, what the logic was given, what it said.

use debounce_core::{PerPosition, Position};

use super::product::{Node, Product};

/// One tick of a witness.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct WitnessTick {
    /// Where the contact is.
    pub contact: Position,
    /// What the logic was given.
    pub sample: Position,
    /// What the logic says after this tick.
    pub output: Position,
    /// Whether the sample lies in a bounce.
    pub bouncing: bool,
    /// Whether the sample lies in a disturbance.
    pub disturbed: bool,
}

/// A finite waveform inside an envelope, or one that goes on for ever in a loop.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Witness {
    /// Where the contact and the logic were settled before the first tick.
    pub start: Position,
    /// The ticks.
    pub ticks: Vec<WitnessTick>,
    /// The tick to go back to after the last one, where the waveform repeats for ever.
    pub loop_from: Option<usize>,
}

impl Witness {
    /// A witness from a path through a product.
    pub(super) fn of(product: &Product<'_>, path: &[(Node, usize)], loop_from: Option<usize>) -> Self {
        let start = path
            .first()
            .map_or(Position::Open, |&(node, _)| product.environment.state(node.environment()).contact);
        let ticks = path
            .iter()
            .map(|&(node, at)| {
                let branch = product.branches(node)[at];
                let next = product.logic.entry(node.logic(), branch.sample_index()).next();
                WitnessTick {
                    contact: product.environment.state(branch.target()).contact,
                    sample: branch.sample(),
                    output: product.logic.output(next),
                    bouncing: branch.bouncing(),
                    disturbed: branch.disturbed(),
                }
            })
            .collect();
        Self { start, ticks, loop_from }
    }

    /// An operation that falls between two samples: no tick ever sees the contact in `unseen`.
    pub(super) fn between_samples(unseen: Position) -> Self {
        let at = unseen.opposite();
        let tick = WitnessTick { contact: at, sample: at, output: at, bouncing: false, disturbed: false };
        Self { start: at, ticks: vec![tick; 2], loop_from: None }
    }

    /// The samples alone, as the logic was given them.
    #[must_use]
    pub fn samples(&self) -> Vec<Position> {
        self.ticks.iter().map(|tick| tick.sample).collect()
    }

    /// How often the contact held each position for how few ticks; positions not left again do not count.
    #[must_use]
    pub fn shortest_dwells(&self) -> PerPosition<Option<u32>> {
        let mut shortest = PerPosition::<Option<u32>>::default();
        let mut since: Option<(Position, u32)> = None;
        let mut previous = self.start;
        for tick in &self.ticks {
            if tick.contact != previous {
                if let Some((position, held)) = since {
                    let slot = match position {
                        Position::Open => &mut shortest.open,
                        Position::Closed => &mut shortest.closed,
                    };
                    *slot = Some(slot.map_or(held, |so_far| so_far.min(held)));
                }
                since = Some((tick.contact, 0));
                previous = tick.contact;
            }
            if let Some((_, held)) = &mut since {
                *held += 1;
            }
        }
        shortest
    }
}
