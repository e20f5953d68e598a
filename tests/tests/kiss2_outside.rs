//! KISS2 against two independent programs, whose output lies in `data/machine` (see the README there): one wrote a
//! table that we read, the other read a table that we wrote.

use debounce_core::{Change, Law, Machine, Position, StateMachine, StateMachineParameters};
use harness::machine::{MachineTable, Reading, compare, read_kiss2, write_kiss2_numbered};
use integration_tests::toggle::TOGGLE;

/// Yosys 0.23 extracted this table from `confirm.v`: three closed samples make, one open sample breaks.
#[test]
fn table_written_by_yosys_is_the_machine_of_its_verilog_source() {
    let read = read_kiss2("confirm.kiss2", include_bytes!("../data/machine/confirm.kiss2"), Reading::Moore)
        .expect("a sound table");
    let law = StateMachine::<u8>::new(StateMachineParameters::confirm(3, 1));
    assert_eq!(compare(&read, &MachineTable::of(&law).expect("a sound law")), None);
}

/// A sequential circuit in BLIF, as far as the fixtures need it: one input, one output, latches that begin at 0, and
/// tables of 0, 1 and -.
struct Circuit<'a> {
    input: &'a str,
    output: &'a str,
    /// Next value, present value.
    latches: Vec<(&'a str, &'a str)>,
    tables: Vec<Table<'a>>,
}

struct Table<'a> {
    inputs: Vec<&'a str>,
    output: &'a str,
    /// Patterns, and what the output is where one matches.
    rows: Vec<(&'a str, bool)>,
}

impl<'a> Circuit<'a> {
    fn read(text: &'a str) -> Self {
        let mut circuit = Self { input: "", output: "", latches: Vec::new(), tables: Vec::new() };
        for line in text.lines() {
            let words: Vec<&str> = line.split_whitespace().collect();
            match words[..] {
                [".inputs", name] => circuit.input = name,
                [".outputs", name] => circuit.output = name,
                [".latch", next, present, "0"] => circuit.latches.push((next, present)),
                [".names", ref inputs @ .., output] => {
                    circuit.tables.push(Table { inputs: inputs.to_vec(), output, rows: Vec::new() });
                }
                [".model", _] | [".end"] | [] | ["#", ..] => {}
                [pattern, value] => {
                    circuit.tables.last_mut().expect("a table").rows.push((pattern, value == "1"));
                }
                _ => panic!("not expected in a fixture: {line}"),
            }
        }
        circuit
    }

    /// The output at each sample.
    fn run(&self, samples: &[Position]) -> Vec<Position> {
        let mut values: std::collections::HashMap<&str, bool> =
            self.latches.iter().map(|&(_, present)| (present, false)).collect();
        let mut outputs = Vec::new();
        for &sample in samples {
            values.insert(self.input, sample.is_closed());
            // The tables stand in the order in which they depend on each other.
            for table in &self.tables {
                let fits = |pattern: &str| {
                    table
                        .inputs
                        .iter()
                        .zip(pattern.chars())
                        .all(|(name, bit)| bit == '-' || values[name] == (bit == '1'))
                };
                let found = table.rows.iter().find(|(pattern, _)| fits(pattern));
                let otherwise = !table.rows.first().is_none_or(|row| row.1);
                values.insert(table.output, found.map_or(otherwise, |row| row.1));
            }
            outputs.push(Position::closed_if(values[self.output]));
            let next: Vec<bool> = self.latches.iter().map(|(next, _)| values[next]).collect();
            self.latches.iter().zip(next).for_each(|(&(_, present), value)| {
                values.insert(present, value);
            });
        }
        outputs
    }
}

/// `berkeley-abc` 1.01 made `circuit` from `table`; the table is what we write of the machine, and the circuit does
/// what the machine does at every word of up to 14 samples.
#[track_caller]
fn read_by_abc(machine: &MachineTable, table: &str, circuit: &str) {
    assert_eq!(write_kiss2_numbered(machine, Reading::Mealy), table);
    let circuit = Circuit::read(circuit);
    let mut edges = 0;
    for word in 0..1_u32 << 14 {
        let samples: Vec<Position> = (0..14).map(|at| Position::closed_if(word >> at & 1 != 0)).collect();
        let mut state = machine.rest(Position::Open);
        let ours: Vec<Position> = samples
            .iter()
            .map(|&sample| {
                edges += u32::from(machine.step(&mut state, sample) == Some(Change::Make));
                machine.output(&state)
            })
            .collect();
        assert_eq!(circuit.run(&samples), ours, "{samples:?}");
    }
    assert!(edges > 0);
}

#[test]
fn tables_read_by_abc_become_circuits_that_do_what_the_machines_do() {
    let toggle = read_kiss2("lamp", TOGGLE.as_bytes(), Reading::Moore).expect("a sound table");
    read_by_abc(
        &toggle,
        include_str!("../data/machine/lamp.kiss2"),
        include_str!("../data/machine/lamp.blif"),
    );
    let parameters = StateMachineParameters::confirm(2, 3).patience(2, 1).lockout(1, 2);
    let locked = MachineTable::of(&StateMachine::<u8>::new(parameters)).expect("a sound law");
    read_by_abc(
        &locked.minimised().machine,
        include_str!("../data/machine/locked.kiss2"),
        include_str!("../data/machine/locked.blif"),
    );
}
