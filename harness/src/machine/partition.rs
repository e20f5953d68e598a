//! Partition refinement: which states of a table no input can tell apart.

/// The classes of the coarsest partition that is finer than `initial` and in which the states of one class go, at
/// either input, to states of one class. Classes are numbered in the order of their first states.
///
/// With the outputs as `initial` these are the states that behave alike (E. F. Moore, "Gedanken-experiments on
/// sequential machines", 1956). The work grows as n log n, because every split is paid for by its smaller half
/// (J. E. Hopcroft, "An n log n algorithm for minimizing states in a finite automaton", 1971).
#[must_use]
pub fn coarsest(initial: &[u32], next: &[[u32; 2]]) -> Vec<u32> {
    let mut partition = Partition::of(initial);
    let sources = [0, 1].map(|input| Sources::of(next, input));
    let mut waiting: Vec<u32> = (0..partition.blocks.len() as u32).collect();
    let mut is_waiting = vec![true; waiting.len()];
    while let Some(splitter) = waiting.pop() {
        is_waiting[splitter as usize] = false;
        // The splitter may itself be split on the way; what is asked is where its states *now* come from.
        let splitter = partition.members(splitter).to_vec();
        for sources in &sources {
            let mut touched = Vec::new();
            for &state in &splitter {
                for &source in sources.of_state(state) {
                    partition.mark(source, &mut touched);
                }
            }
            for block in touched {
                let Some(new) = partition.split(block) else { continue };
                is_waiting.push(false);
                // A block that still waits needs both halves; for one that was done, the smaller half is enough.
                let smaller =
                    if partition.members(new).len() <= partition.members(block).len() { new } else { block };
                let add = if is_waiting[block as usize] { new } else { smaller };
                is_waiting[add as usize] = true;
                waiting.push(add);
            }
        }
    }
    partition.classes()
}

/// Which states lead to each state at one input.
struct Sources {
    first: Vec<u32>,
    states: Vec<u32>,
}

impl Sources {
    fn of(next: &[[u32; 2]], input: usize) -> Self {
        let mut first = vec![0_u32; next.len() + 1];
        next.iter().for_each(|row| first[row[input] as usize + 1] += 1);
        (1..first.len()).for_each(|at| first[at] += first[at - 1]);
        let mut at = first.clone();
        let mut states = vec![0; next.len()];
        for (state, row) in next.iter().enumerate() {
            let slot = &mut at[row[input] as usize];
            // States are numbered in 32 bits.
            states[*slot as usize] = state as u32;
            *slot += 1;
        }
        Self { first, states }
    }

    fn of_state(&self, state: u32) -> &[u32] {
        &self.states[self.first[state as usize] as usize..self.first[state as usize + 1] as usize]
    }
}

/// A stretch of the states; the marked ones stand first.
struct Block {
    from: u32,
    until: u32,
    marked: u32,
}

/// The states, so ordered that every block is one stretch.
struct Partition {
    states: Vec<u32>,
    /// Where each state stands.
    place: Vec<u32>,
    block_of: Vec<u32>,
    blocks: Vec<Block>,
}

impl Partition {
    fn of(initial: &[u32]) -> Self {
        let mut states: Vec<u32> = (0..initial.len() as u32).collect();
        states.sort_by_key(|&state| initial[state as usize]);
        let mut partition = Self {
            place: vec![0; states.len()],
            block_of: vec![0; states.len()],
            states,
            blocks: Vec::new(),
        };
        for at in 0..partition.states.len() {
            let state = partition.states[at] as usize;
            let begins = at == 0 || initial[partition.states[at - 1] as usize] != initial[state];
            if begins {
                partition.blocks.push(Block { from: at as u32, until: at as u32, marked: 0 });
            }
            let block = partition.blocks.len() - 1;
            partition.blocks[block].until += 1;
            partition.block_of[state] = block as u32;
            partition.place[state] = at as u32;
        }
        partition
    }

    fn members(&self, block: u32) -> &[u32] {
        let block = &self.blocks[block as usize];
        &self.states[block.from as usize..block.until as usize]
    }

    /// Marks a state, once; notes its block when it is the first there.
    fn mark(&mut self, state: u32, touched: &mut Vec<u32>) {
        let number = self.block_of[state as usize];
        let block = &mut self.blocks[number as usize];
        let (place, border) = (self.place[state as usize], block.from + block.marked);
        if place < border {
            return;
        }
        if block.marked == 0 {
            touched.push(number);
        }
        block.marked += 1;
        self.states.swap(place as usize, border as usize);
        self.place[self.states[place as usize] as usize] = place;
        self.place[state as usize] = border;
    }

    /// Makes the marked states of a block a block of their own, unless all are; takes the marks off.
    fn split(&mut self, number: u32) -> Option<u32> {
        let new = self.blocks.len() as u32;
        let block = &mut self.blocks[number as usize];
        let (from, border) = (block.from, block.from + core::mem::take(&mut block.marked));
        if border == block.until {
            return None;
        }
        block.from = border;
        self.blocks.push(Block { from, until: border, marked: 0 });
        for &state in &self.states[from as usize..border as usize] {
            self.block_of[state as usize] = new;
        }
        Some(new)
    }

    fn classes(&self) -> Vec<u32> {
        let mut class = vec![u32::MAX; self.blocks.len()];
        let mut classes = 0;
        let numbered = self.block_of.iter().map(|&block| {
            let class = &mut class[block as usize];
            if *class == u32::MAX {
                *class = classes;
                classes += 1;
            }
            *class
        });
        numbered.collect()
    }
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;

    /// Moore's own way: split by where the states lead until nothing splits any more.
    fn slow(initial: &[u32], next: &[[u32; 2]]) -> Vec<u32> {
        let mut classes = initial.to_vec();
        loop {
            let keys: Vec<_> =
                (0..next.len()).map(|s| (classes[s], next[s].map(|t| classes[t as usize]))).collect();
            let mut known = Vec::new();
            let finer: Vec<u32> = keys
                .iter()
                .map(|key| {
                    let at = known.iter().position(|k| k == key).unwrap_or_else(|| {
                        known.push(*key);
                        known.len() - 1
                    });
                    at as u32
                })
                .collect();
            if finer == classes {
                return classes;
            }
            classes = finer;
        }
    }

    proptest! {
        #[test]
        fn partition_of_any_table_is_that_of_the_slow_model(
            (initial, next) in (1..24_usize).prop_flat_map(|n| (
                prop::collection::vec(0..3_u32, n),
                prop::collection::vec([0..n as u32, 0..n as u32], n),
            ))
        ) {
            prop_assert_eq!(coarsest(&initial, &next), slow(&initial, &next));
        }
    }

    /// Classes as groups of letters, from rows `(next at 0, next at 1, output at 0, output at 1)`.
    #[track_caller]
    fn groups(rows: &[(char, char, u32, u32)], expected: &[&str]) {
        let number = |name: char| name as u32 - 'a' as u32;
        let initial: Vec<u32> = rows.iter().map(|row| row.2 * 2 + row.3).collect();
        let next: Vec<[u32; 2]> = rows.iter().map(|row| [number(row.0), number(row.1)]).collect();
        let classes = coarsest(&initial, &next);
        let mut groups = vec![String::new(); expected.len()];
        for (name, &class) in ('a'..).zip(&classes) {
            groups[class as usize].push(name);
        }
        assert_eq!(groups, expected);
    }

    /// M. Morris Mano, "Digital Design", the worked example of the section "State Reduction and Assignment":
    /// seven states, of which g joins e, and f then joins d. From memory.
    #[test]
    fn partition_of_manos_example_leaves_five_states() {
        let rows = [
            ('a', 'b', 0, 0),
            ('c', 'd', 0, 0),
            ('a', 'd', 0, 0),
            ('e', 'f', 0, 1),
            ('a', 'f', 0, 1),
            ('g', 'f', 0, 1),
            ('a', 'f', 0, 1),
        ];
        groups(&rows, &["a", "b", "c", "df", "eg"]);
    }

    /// Z. Kohavi, "Switching and Finite Automata Theory", chapter 10, machine M1: its equivalence partition is
    /// (AC)(BD)(E)(F). From memory.
    #[test]
    fn partition_of_kohavis_machine_m1_leaves_four_states() {
        let rows = [
            ('e', 'd', 0, 1),
            ('f', 'd', 0, 0),
            ('e', 'b', 0, 1),
            ('f', 'b', 0, 0),
            ('c', 'f', 0, 1),
            ('b', 'c', 0, 0),
        ];
        groups(&rows, &["ac", "bd", "e", "f"]);
    }
}
