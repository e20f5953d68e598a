//! The waveforms that the prover found: those that refute a law, and the slowest where it holds.

use core::hash::{Hash, Hasher};
use core::str::Lines;

use debounce_core::{Law, Position};

use crate::digest::Digest;

/// A test of the workbench keeps it up to date, and says how it is written anew.
const TEXT: &str = include_str!("witnesses.txt");

/// One waveform, as a line of the file has it.
struct Witness {
    law: &'static str,
    start: Position,
    samples: &'static str,
    /// What the prover says that the law says after each sample.
    outputs: &'static str,
}

impl Witness {
    /// The next one that `lines` hold.
    fn of(lines: &mut Lines<'static>) -> Option<Self> {
        let line = lines.find(|line| !line.starts_with('#'))?;
        let mut parts = line.split("; ");
        let mut part = || parts.next().expect("a waveform has six parts");
        let (law, _envelope, _shows) = (part(), part(), part());
        let start = position(part().as_bytes()[0]);
        Some(Self { law, start, samples: part(), outputs: part() })
    }
}

fn position(digit: u8) -> Position {
    Position::closed_if(digit == b'1')
}

/// Every waveform there is.
fn all() -> impl Iterator<Item = Witness> {
    let mut lines = TEXT.lines();
    core::iter::from_fn(move || Witness::of(&mut lines))
}

/// The samples of all of them.
pub(crate) fn samples() -> u64 {
    all().map(|witness| witness.samples.len() as u64).sum()
}

/// Every waveform found for `law`, replayed: how many samples, and the digest of states and edges.
///
/// # Panics
/// Where the law says anything else than in the proof; then the image ends with an error.
pub(crate) fn replayed<L: Law<State: Hash>>(name: &str, law: &L) -> (u64, u64) {
    let (mut samples, mut digest) = (0, Digest::new());
    for witness in all().filter(|witness| witness.law == name) {
        let mut state = law.rest(witness.start);
        for (sample, output) in witness.samples.bytes().zip(witness.outputs.bytes()) {
            law.step(&mut state, position(sample)).hash(&mut digest);
            state.hash(&mut digest);
            assert_eq!(law.output(&state), position(output), "{name} parts from its proof");
            samples += 1;
        }
    }
    (samples, digest.finish())
}

/// All of them in a row, over and over.
#[derive(Clone)]
pub(crate) struct Row {
    lines: Lines<'static>,
    samples: &'static [u8],
}

impl Row {
    pub(crate) fn new() -> Self {
        Self { lines: TEXT.lines(), samples: &[] }
    }

    pub(crate) fn sample(&mut self) -> Position {
        loop {
            if let Some((&first, rest)) = self.samples.split_first() {
                self.samples = rest;
                return position(first);
            }
            match Witness::of(&mut self.lines) {
                Some(witness) => self.samples = witness.samples.as_bytes(),
                None => self.lines = TEXT.lines(),
            }
        }
    }
}
