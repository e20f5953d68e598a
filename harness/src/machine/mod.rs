//! The machine behind a logic: its next-state table, minimised, compared, written down and read back.
//!
//! A [`MachineTable`] comes from any law ([`MachineTable::of`]), from a table already explored
//! ([`MachineTable::of_table`]) or from a file ([`read_table`]). It is itself a law, so that what was drawn is
//! proved as drawn.
//!
//! ```
//! use debounce_core::Integrator;
//! use harness::machine::MachineTable;
//!
//! let machine = MachineTable::of(&Integrator::<u8>::new(3))?.minimised().machine;
//! assert_eq!(machine.counts().states, 6);
//! assert_eq!(machine.name(machine.reset()), "o0");
//! # Ok::<(), harness::prove::ProveError>(())
//! ```

#[cfg(test)]
mod any_bytes;
mod arrange;
mod check;
mod compare;
mod csv;
mod diagram;
mod dot;
mod fault;
mod kiss2;
mod lanes;
mod minimise;
pub mod partition;
mod text;

use core::hash::Hash;

use debounce_core::{Change, Law, Machine, PerPosition, Position};

use self::fault::Faults;
use crate::prove::{LawTable, ProveError};
use crate::raw_input::is_binary;

pub use compare::{Apart, compare};
pub use csv::{read_csv, write_csv};
pub use diagram::{LARGEST_DIAGRAM, terminal_diagram};
pub(crate) use dot::arrows;
pub use dot::dot;
pub use fault::{TableFault, TableFileError};
pub use kiss2::{read_kiss2, write_kiss2, write_kiss2_numbered};
pub use minimise::Minimised;
pub use text::table_text;

/// Where the output stands in a written table.
///
/// The output bit is the debounced position, 1 for closed. Either way a tick takes one sample, moves to the next
/// state and then shows the output, so both readings give the same latencies.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Reading {
    /// The output belongs to the *present* state of a line; all lines of a state must agree on it.
    Moore,
    /// The output belongs to the step: it is what shows once the sample of the line has been taken. A state that is
    /// entered with both outputs stands for two. Before the first sample the output is that at which the reset
    /// state rests.
    Mealy,
}

/// The next-state table of a logic, with a name for every state.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct MachineTable {
    outputs: Vec<Position>,
    /// The next state at an open and at a closed sample.
    next: Vec<[u32; 2]>,
    names: Names,
    reset: u32,
    rests: PerPosition<u32>,
}

#[derive(Clone, PartialEq, Eq, Debug)]
enum Names {
    /// The states with the output open come first: o0, o1 and so on; then c0, c1.
    Numbered { open: usize },
    /// As the file named them.
    Given(Vec<String>),
}

/// How large a machine is.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Counts {
    /// Number of states.
    pub states: usize,
    /// Fewest bits that can tell so many states apart.
    pub state_bits: u32,
    /// Arrows of the state diagram: pairs of states with a step from one to the other.
    pub arrows: usize,
}

impl MachineTable {
    /// The reachable next-state table of any law, from both rests; state 0 is the open rest.
    ///
    /// # Errors
    /// When the law breaks its obligations or has too many states.
    pub fn of<L: Law>(law: &L) -> Result<Self, ProveError>
    where
        L::State: Hash,
    {
        Ok(Self::of_table(&LawTable::of(law)?))
    }

    /// As [`of`](Self::of), for a law already explored.
    #[must_use]
    pub fn of_table(table: &LawTable) -> Self {
        let states = 0..table.len();
        // A law table numbers its states in 31 bits.
        let next = states
            .clone()
            .map(|state| [0, 1].map(|sample| table.entry(state, sample).next() as u32))
            .collect();
        let rest = |position| table.rest(position) as u32;
        let rests = PerPosition { open: rest(Position::Open), closed: rest(Position::Closed) };
        Self::numbered(states.map(|state| table.output(state)).collect(), next, rests)
    }

    /// A machine numbered by output and distance from the rests; what they do not reach is left out.
    fn numbered(outputs: Vec<Position>, next: Vec<[u32; 2]>, rests: PerPosition<u32>) -> Self {
        let (outputs, next, rests) = arrange::arrange(&outputs, &next, rests);
        let open = outputs.iter().filter(|&&output| output == Position::Open).count();
        Self { outputs, next, names: Names::Numbered { open }, reset: rests.open, rests }
    }

    /// Number of states.
    #[must_use]
    pub fn len(&self) -> usize {
        self.outputs.len()
    }

    /// Whether there is no state; there always are two.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.outputs.is_empty()
    }

    /// The state in which the machine is found at first: a rest.
    #[must_use]
    pub fn reset(&self) -> usize {
        self.reset as usize
    }

    /// The state settled at a position.
    #[must_use]
    pub fn resting(&self, position: Position) -> usize {
        self.rests.at(position) as usize
    }

    /// The state after a sample.
    #[must_use]
    #[inline]
    pub fn next(&self, state: usize, sample: Position) -> usize {
        self.next[state][sample as usize] as usize
    }

    /// The debounced position in a state.
    #[must_use]
    #[inline]
    pub fn output_of(&self, state: usize) -> Position {
        self.outputs[state]
    }

    /// The edge that a sample reports.
    #[must_use]
    pub fn edge(&self, state: usize, sample: Position) -> Option<Change> {
        let after = self.outputs[self.next(state, sample)];
        (after != self.outputs[state]).then(|| after.reached_by())
    }

    /// The name of a state: the one it was given, or o0, o1.. with the output open and c0, c1.. with it closed, in
    /// the order of their distance from the rests.
    #[must_use]
    pub fn name(&self, state: usize) -> String {
        match &self.names {
            Names::Numbered { open } if state < *open => format!("o{state}"),
            Names::Numbered { open } => format!("c{}", state - open),
            Names::Given(names) => names[state].clone(),
        }
    }

    /// States, state bits, arrows.
    #[must_use]
    pub fn counts(&self) -> Counts {
        let states = self.len();
        Counts {
            states,
            state_bits: usize::BITS - (states - 1).leading_zeros(),
            arrows: self.next.iter().map(|[open, closed]| if open == closed { 1 } else { 2 }).sum(),
        }
    }

    /// What is special about a state, in words; empty for most.
    fn remark(&self, state: usize) -> &'static str {
        let resting = Position::BOTH.iter().any(|&position| self.resting(position) == state);
        match (resting, self.reset() == state) {
            (_, true) => "rest, reset",
            (true, false) => "rest",
            (false, false) => "",
        }
    }
}

/// A machine as drawn is a law: the state is its number.
impl Machine for MachineTable {
    type Input = Position;
    type Output = Option<Change>;
    type State = u32;

    fn step(&self, state: &mut u32, sample: Position) -> Option<Change> {
        let edge = self.edge(*state as usize, sample);
        *state = self.next[*state as usize][sample as usize];
        edge
    }
}

impl Law for MachineTable {
    fn rest(&self, position: Position) -> u32 {
        self.rests.at(position)
    }

    fn output(&self, state: &u32) -> Position {
        self.outputs[*state as usize]
    }
}

/// Reads a table in either format: one whose first line, after comments, has a comma is CSV, any other KISS2.
///
/// # Errors
/// Everything that is wrong with it, each with its place.
pub fn read_table(name: &str, bytes: &[u8], reading: Reading) -> Result<MachineTable, TableFileError> {
    let bytes = without_mark(bytes);
    let mut lines = bytes.split(|&byte| byte == b'\n').map(<[u8]>::trim_ascii);
    let first = lines.find(|line| !line.is_empty() && line[0] != b'#');
    let wrong = match first {
        None => Some("the table is empty"),
        Some(_) if is_binary(bytes) => Some("the table is no text"),
        Some(_) => None,
    };
    if let Some(message) = wrong {
        let mut faults = Faults::default();
        faults.whole_file(message, "write it as KISS2, or as CSV with the columns state,sample,next,output");
        return faults.or(name, None);
    }
    let is_csv = first.is_some_and(|line| line.contains(&b','));
    if is_csv { read_csv(name, bytes, reading) } else { read_kiss2(name, bytes, reading) }
}

/// Some editors put a byte order mark first.
fn without_mark(bytes: &[u8]) -> &[u8] {
    bytes.strip_prefix(b"\xef\xbb\xbf").unwrap_or(bytes)
}

fn word(position: Position) -> &'static str {
    match position {
        Position::Open => "open",
        Position::Closed => "closed",
    }
}

fn edge_word(edge: Change) -> &'static str {
    match edge {
        Change::Make => "make",
        Change::Break => "break",
    }
}
