//! A machine as `no_std` Rust: its next-state table in flash and a `TableLaw` over it.

use std::fmt::Write as _;

use debounce_core::{Position, TableLaw};

use crate::machine::MachineTable;

/// The longest name of a constant; a longer one would be broken over lines in other ways.
const LONGEST_NAME: usize = 32;

/// Why a machine cannot be written as a `TableLaw`.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum EmitTableError {
    /// A state number is one byte.
    #[error(
        "the machine has {states} states even when minimised; a TableLaw holds at most {}",
        TableLaw::MOST_STATES
    )]
    TooManyStates {
        /// The states of the minimised machine.
        states: usize,
    },
    /// The name would not compile.
    #[error(
        "\"{name}\" is not a name for a constant; use up to {LONGEST_NAME} capital letters, digits and underscores, a letter first"
    )]
    BadName {
        /// The name given.
        name: String,
    },
}

/// The rows of the minimised machine as a [`TableLaw`] takes them.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct TableRows {
    /// The machine, minimised.
    pub machine: MachineTable,
    /// Which state of the machine each row is: those with the output open come first.
    pub states: Vec<usize>,
    /// Next state at an open and at a closed sample.
    pub rows: Vec<[u8; 2]>,
    /// The first row with the output closed.
    pub closed_from: u8,
    /// The rows of the rests, at open and at closed.
    pub rests: [u8; 2],
}

impl TableRows {
    /// Minimises a machine and numbers its states by their output.
    ///
    /// # Errors
    /// When there are more states than a byte can number.
    pub fn of(machine: &MachineTable) -> Result<Self, EmitTableError> {
        let machine = machine.minimised().machine;
        if machine.len() > TableLaw::MOST_STATES {
            return Err(EmitTableError::TooManyStates { states: machine.len() });
        }
        let mut states: Vec<usize> = (0..machine.len()).collect();
        states.sort_by_key(|&state| machine.output_of(state));
        let mut number = vec![0_u8; machine.len()];
        // There are at most 256 states.
        states.iter().enumerate().for_each(|(row, &state)| number[state] = row as u8);
        let open = states.iter().filter(|&&state| machine.output_of(state) == Position::Open).count();
        let rows = states
            .iter()
            .map(|&state| Position::BOTH.map(|sample| number[machine.next(state, sample)]))
            .collect();
        // Both rests exist, so neither group is empty.
        let closed_from = open as u8;
        let rests = Position::BOTH.map(|position| number[machine.resting(position)]);
        Ok(Self { machine, states, rows, closed_from, rests })
    }
}

/// A Rust file with the minimised machine as a `static` of the given name.
///
/// # Errors
/// When the machine has too many states, or the name is none for a constant.
pub fn table_law(machine: &MachineTable, name: &str) -> Result<String, EmitTableError> {
    let letters = |letter: char| letter.is_ascii_uppercase() || letter.is_ascii_digit() || letter == '_';
    let begins = name.starts_with(|first: char| first.is_ascii_uppercase());
    if !begins || !name.chars().all(letters) || name.len() > LONGEST_NAME {
        return Err(EmitTableError::BadName { name: name.to_owned() });
    }
    let TableRows { machine, states, rows, closed_from, rests: [open, closed] } = TableRows::of(machine)?;
    let counts = machine.counts();
    let mut text = format!(
        "//! A debouncing logic as a next-state table: {} states, {} bytes of flash, 1 byte of RAM for each input.\n\
         //!\n\
         //! Generated; change the table it was made from instead.\n\n\
         use debounce_core::TableLaw;\n\n\
         /// Next state at an open sample, next state at a closed sample.\n\
         static {name}_ROWS: [[u8; 2]; {}] = [\n",
        counts.states,
        2 * counts.states,
        rows.len(),
    );
    for (row, (&state, [at_open, at_closed])) in states.iter().zip(&rows).enumerate() {
        let output = if machine.output_of(state) == Position::Open { "open" } else { "closed" };
        let rests = match row {
            _ if row == usize::from(open) || row == usize::from(closed) => ", at rest",
            _ => "",
        };
        // Writing to a string does not fail.
        let _ = writeln!(
            text,
            "    // {row}: {}, {output}{rests}\n    [{at_open}, {at_closed}],",
            machine.name(state)
        );
    }
    let item = format!("pub static {name}: TableLaw<'static> =");
    let value = format!("TableLaw::new(&{name}_ROWS, {closed_from}, [{open}, {closed}]);");
    // As rustfmt breaks it.
    let between = if item.len() + 1 + value.len() <= 100 { " " } else { "\n    " };
    let _ = write!(
        text,
        "];\n\n/// The logic; checked by the compiler when the firmware is built.\n{item}{between}{value}\n"
    );
    Ok(text)
}
