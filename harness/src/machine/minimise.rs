//! The smallest machine that does the same.

use debounce_core::PerPosition;

use super::{MachineTable, Names, partition};

/// A machine without two states that behave alike.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Minimised {
    /// The machine. A state with a given name keeps that of the first state it stands for.
    pub machine: MachineTable,
    /// For every state of the machine it was made from, the state that stands for it now.
    pub stands_for: Vec<usize>,
}

impl MachineTable {
    /// The smallest machine with the same output after every word of samples, and so with the same edges.
    ///
    /// States that behave alike become one; see [`partition::coarsest`]. Both rests stay, since their outputs
    /// differ.
    #[must_use]
    pub fn minimised(&self) -> Minimised {
        let initial: Vec<u32> = self.outputs.iter().map(|&output| output as u32).collect();
        let classes = partition::coarsest(&initial, &self.next);
        let mut first: Vec<usize> = Vec::new();
        for (state, &class) in classes.iter().enumerate() {
            if class as usize == first.len() {
                first.push(state);
            }
        }
        let class = |state: u32| classes[state as usize];
        let outputs = first.iter().map(|&state| self.outputs[state]).collect();
        let next = first.iter().map(|&state| self.next[state].map(class)).collect();
        let rests = PerPosition { open: class(self.rests.open), closed: class(self.rests.closed) };
        let stands_for = classes.iter().map(|&class| class as usize).collect();
        let names = match &self.names {
            // Already in order: a class is found as soon as its nearest state.
            Names::Numbered { .. } => {
                let open = first.iter().filter(|&&state| !self.outputs[state].is_closed()).count();
                Names::Numbered { open }
            }
            Names::Given(names) => Names::Given(first.iter().map(|&state| names[state].clone()).collect()),
        };
        let machine = Self { outputs, next, names, reset: class(self.reset), rests };
        Minimised { machine, stands_for }
    }
}
