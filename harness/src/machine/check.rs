//! From the lines of a file to a machine: complete, deterministic, reachable, and at rest somewhere.

use debounce_core::{PerPosition, Position};
use rustc_hash::{FxHashMap, FxHashSet};

use super::arrange::found_from;
use super::fault::{Faults, Place};
use super::{MachineTable, Names, Reading, word};
use crate::raw_input::quoted;

/// A name in a file.
#[derive(Clone, Debug)]
pub(super) struct Named {
    pub(super) name: String,
    pub(super) place: Place,
}

/// A line of a file: from a state, at a sample, to a state, with an output bit.
#[derive(Clone, Debug)]
pub(super) struct Line {
    pub(super) state: Named,
    /// `None` where the line speaks of both samples.
    pub(super) sample: Option<Position>,
    pub(super) next: Named,
    pub(super) output: Position,
    pub(super) output_place: Place,
}

/// Where a line leads from one state at one sample.
#[derive(Clone, Copy)]
struct Cell {
    next: u32,
    output: Position,
    line: usize,
}

struct State {
    name: String,
    place: Place,
    cells: [Option<Cell>; 2],
    /// A line that leads to an unknown state fills no cell; it has been reported and is not missing.
    led_astray: [bool; 2],
}

/// Checks the lines and makes a machine of them; what is wrong goes to `faults`.
pub(super) fn machine(
    lines: &[Line],
    reset: &Named,
    reading: Reading,
    faults: &mut Faults,
) -> Option<MachineTable> {
    let states = states(lines, faults);
    let Some(reset_number) = states.iter().position(|state| state.name == reset.name) else {
        let message = format!("the reset state {} has no line of its own", quoted(&reset.name));
        faults.at_with_help(reset.place, message, "name a state that the table describes");
        return None;
    };
    let complete: Option<Vec<[Cell; 2]>> =
        states.iter().map(|state| Some([state.cells[0]?, state.cells[1]?])).collect();
    let cells = complete?;
    // States are numbered in 32 bits.
    let reset_number = reset_number as u32;
    unreachable_states(&states, &cells, reset_number, faults);
    let drawn = match reading {
        Reading::Moore => moore(lines, &states, &cells, reset_number, faults)?,
        Reading::Mealy => mealy(&states, &cells, reset_number),
    };
    if !faults.is_empty() {
        return None;
    }
    at_rest(drawn, reset, faults)
}

/// Checks what can be checked without a reset state.
pub(super) fn states_alone(lines: &[Line], faults: &mut Faults) {
    states(lines, faults);
}

/// Collects what the lines say of each state, in the order in which they first do.
fn states(lines: &[Line], faults: &mut Faults) -> Vec<State> {
    let mut numbers: FxHashMap<&str, u32> = FxHashMap::default();
    let mut states: Vec<State> = Vec::new();
    for line in lines {
        numbers.entry(&line.state.name).or_insert_with(|| {
            let Named { name, place } = line.state.clone();
            states.push(State { name, place, cells: [None, None], led_astray: [false, false] });
            (states.len() - 1) as u32
        });
    }
    let mut lost: FxHashSet<&str> = FxHashSet::default();
    for line in lines {
        let state = &mut states[numbers[line.state.name.as_str()] as usize];
        let samples = Position::BOTH.into_iter().filter(|&s| line.sample.is_none_or(|only| only == s));
        let Some(&next) = numbers.get(line.next.name.as_str()) else {
            samples.for_each(|sample| state.led_astray[sample as usize] = true);
            if lost.insert(&line.next.name) {
                let message = format!("state {} has no line of its own", quoted(&line.next.name));
                faults.at_with_help(line.next.place, message, "say where it goes at each sample");
            }
            continue;
        };
        for sample in samples {
            let cell = Cell { next, output: line.output, line: line.state.place.line };
            let slot = &mut state.cells[sample as usize];
            match slot {
                None => *slot = Some(cell),
                Some(known) if known.next == next && known.output == line.output => {}
                Some(known) => faults.at(
                    line.state.place,
                    format!(
                        "state {} with sample {} ({}) was already given in line {}, with another {}; \
                         keep one of the two",
                        quoted(&line.state.name),
                        sample as u8,
                        word(sample),
                        known.line,
                        if known.next == next { "output" } else { "next state" },
                    ),
                ),
            }
        }
    }
    for state in &states {
        for sample in Position::BOTH {
            if state.cells[sample as usize].is_none() && !state.led_astray[sample as usize] {
                faults.at_with_help(
                    state.place,
                    format!(
                        "state {} has no line for sample {} ({})",
                        quoted(&state.name),
                        sample as u8,
                        word(sample)
                    ),
                    "say where it goes then",
                );
            }
        }
    }
    states
}

fn unreachable_states(states: &[State], cells: &[[Cell; 2]], reset: u32, faults: &mut Faults) {
    let next: Vec<[u32; 2]> = cells.iter().map(|row| row.map(|cell| cell.next)).collect();
    let mut reached = vec![false; states.len()];
    found_from(&next, &[reset]).iter().for_each(|&state| reached[state as usize] = true);
    for (state, _) in states.iter().zip(reached).filter(|(_, reached)| !reached) {
        let reset = quoted(&states[reset as usize].name);
        faults.at_with_help(
            state.place,
            format!("state {} is never reached from the reset state {reset}", quoted(&state.name)),
            "remove its lines, or add the one that leads to it",
        );
    }
}

/// A machine whose rests are not known yet.
struct Drawn {
    outputs: Vec<Position>,
    next: Vec<[u32; 2]>,
    names: Vec<String>,
    reset: u32,
}

fn moore(
    lines: &[Line],
    states: &[State],
    cells: &[[Cell; 2]],
    reset: u32,
    faults: &mut Faults,
) -> Option<Drawn> {
    let before = faults.count();
    let mut first: FxHashMap<&str, &Line> = FxHashMap::default();
    for line in lines {
        let known = *first.entry(&line.state.name).or_insert(line);
        if known.output != line.output {
            faults.at_with_help(
                line.output_place,
                format!(
                    "state {} has output {} here and {} in line {}, but in the Moore reading the output belongs \
                     to the state",
                    quoted(&line.state.name),
                    line.output as u8,
                    known.output as u8,
                    known.state.place.line
                ),
                "use the Mealy reading if the output belongs to the step",
            );
        }
    }
    (before == faults.count()).then(|| Drawn {
        outputs: cells.iter().map(|row| row[0].output).collect(),
        next: cells.iter().map(|row| row.map(|cell| cell.next)).collect(),
        names: states.iter().map(|state| state.name.clone()).collect(),
        reset,
    })
}

/// Turns outputs of steps into outputs of states: a state that is entered with both becomes two.
fn mealy(states: &[State], cells: &[[Cell; 2]], reset: u32) -> Drawn {
    let rests_at = |position: Position| {
        let cell = cells[reset as usize][position as usize];
        cell.next == reset && cell.output == position
    };
    let at_first = if !rests_at(Position::Open) && rests_at(Position::Closed) {
        Position::Closed
    } else {
        Position::Open
    };
    // Every (state, output) that can be, in the order of the file.
    let mut entered = vec![[false; 2]; states.len()];
    let mut open = vec![(reset, at_first)];
    while let Some((state, output)) = open.pop() {
        if !core::mem::replace(&mut entered[state as usize][output as usize], true) {
            open.extend(cells[state as usize].iter().map(|cell| (cell.next, cell.output)));
        }
    }
    let mut number = vec![[u32::MAX; 2]; states.len()];
    let mut kept: Vec<(usize, Position)> = Vec::new();
    for state in 0..states.len() {
        for output in Position::BOTH {
            if entered[state][output as usize] {
                number[state][output as usize] = kept.len() as u32;
                kept.push((state, output));
            }
        }
    }
    let target = |cell: Cell| number[cell.next as usize][cell.output as usize];
    Drawn {
        outputs: kept.iter().map(|&(_, output)| output).collect(),
        next: kept.iter().map(|&(state, _)| cells[state].map(target)).collect(),
        names: split_names(states, &entered, &kept),
        reset: number[reset as usize][at_first as usize],
    }
}

/// A state that became two shows its output behind its name; dashes keep such a name from meeting a given one.
fn split_names(states: &[State], entered: &[[bool; 2]], kept: &[(usize, Position)]) -> Vec<String> {
    let given: FxHashSet<&str> = states.iter().map(|state| state.name.as_str()).collect();
    let name = |&(state, output): &(usize, Position)| {
        let plain = &states[state].name;
        if entered[state] != [true, true] {
            return plain.clone();
        }
        let mut name = format!("{plain}-{}", output as u8);
        while given.contains(name.as_str()) {
            name = name.replacen('-', "--", 1);
        }
        name
    };
    kept.iter().map(name).collect()
}

/// Finds the rests: where samples of one position, from the reset state, lead and stay.
fn at_rest(drawn: Drawn, reset: &Named, faults: &mut Faults) -> Option<MachineTable> {
    let Drawn { outputs, next, names, reset: number } = drawn;
    let waits_at = outputs[number as usize];
    if next[number as usize][waits_at as usize] != number {
        faults.at_with_help(
            reset.place,
            format!(
                "the reset state {} has output {} but does not stay there: {} samples lead to {}",
                quoted(&reset.name),
                waits_at as u8,
                word(waits_at),
                quoted(&names[next[number as usize][waits_at as usize] as usize]),
            ),
            "name the state in which the machine waits for the contact as the reset state",
        );
    }
    let mut settled = |position: Position| {
        let mut state = number;
        let mut seen = vec![false; next.len()];
        while !core::mem::replace(&mut seen[state as usize], true) {
            state = next[state as usize][position as usize];
        }
        let turns = next[state as usize][position as usize] != state;
        if turns || outputs[state as usize] != position {
            let name = quoted(&names[state as usize]);
            let what = if turns {
                format!("they lead round and round through state {name}")
            } else {
                format!("they end in state {name}, whose output is {}", outputs[state as usize] as u8)
            };
            faults.at_with_help(
                reset.place,
                format!("{} samples never settle the machine: {what}", word(position)),
                format!(
                    "from the reset state they must end in one state with output {}, and stay there",
                    position as u8
                ),
            );
        }
        state
    };
    let rests = PerPosition { open: settled(Position::Open), closed: settled(Position::Closed) };
    faults.is_empty().then_some(MachineTable {
        outputs,
        next,
        names: Names::Given(names),
        reset: number,
        rests,
    })
}

/// Why a text cannot be the name of a state, in every format; `None` when it can.
pub(super) fn refused_name(name: &str) -> Option<String> {
    let why = if name.is_empty() {
        "a state needs a name"
    } else if matches!(name, "-" | "*") {
        "it stands for any state"
    } else if name.starts_with('.') {
        "a name of a state does not begin with a point"
    } else if name.contains('#') {
        "# begins a comment and belongs in no name"
    } else if name.contains(|letter: char| letter.is_whitespace() || letter.is_control()) {
        "a name of a state has no spaces"
    } else {
        return None;
    };
    Some(format!("{} is no name: {why}", quoted(name)))
}
