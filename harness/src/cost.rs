//! What a tick costs: instructions as they were counted for the kinds of law, on the cores that were looked at.
//!
//! The numbers are those of `COST.md` in `debounce-core`, which an emulator counts again before every release. They
//! are of one law of each kind with constants for parameters, called as a function of its own, at the worst of the
//! inputs given to it. Other parameters of the same kind take other constants through the same code, which is why the
//! count stands for them as well; a law whose state is wider than the one counted was not counted, and none is made up.

use crate::law_text::LawParameters;
use crate::logic::Logic;
use crate::requirement::{Core, Word};

/// The most instructions that a tick may take, and where.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct InstructionBudget {
    /// The most instructions.
    pub most: u32,
    /// The core that they are counted on; every one that was looked at where it is not stated.
    pub core: Option<Core>,
}

/// One kind of law as it was counted.
struct Counted {
    /// Its name in the table.
    name: &'static str,
    /// Bytes of its state.
    state_bytes: u32,
    /// Instructions of the worst tick, in the order of [`Core::ALL`](Word::ALL).
    worst: [u32; 3],
}

const INTEGRATOR: Counted = Counted { name: "integrator", state_bytes: 2, worst: [22, 26, 21] };
const SHIFT_REGISTER: Counted = Counted { name: "shift register", state_bytes: 2, worst: [22, 24, 19] };
const MAJORITY_REGISTER: Counted = Counted { name: "majority register", state_bytes: 2, worst: [38, 45, 35] };
const STATE_MACHINE: Counted = Counted { name: "state machine", state_bytes: 3, worst: [29, 34, 26] };
const PATIENT: Counted = Counted { name: "patient state machine", state_bytes: 3, worst: [30, 36, 28] };

impl Counted {
    const fn of(parameters: &LawParameters) -> &'static Self {
        match parameters {
            LawParameters::Integrator { .. } => &INTEGRATOR,
            LawParameters::ShiftRegister { .. } => &SHIFT_REGISTER,
            LawParameters::MajorityRegister { .. } => &MAJORITY_REGISTER,
            LawParameters::StateMachine { patience, lockout, .. } => {
                let is_plain =
                    patience.make <= 1 && patience.break_ <= 1 && lockout.make == 0 && lockout.break_ == 0;
                if is_plain { &STATE_MACHINE } else { &PATIENT }
            }
        }
    }
}

/// Instructions of the worst tick of the kind of law that this is, on `core` or on the core where it takes the most;
/// `None` where its state is wider than the one that was counted.
#[must_use]
pub fn instructions(parameters: &LawParameters, core: Option<Core>) -> Option<u32> {
    let counted = Counted::of(parameters);
    let logic = Logic::try_new(parameters).ok()?;
    if logic.state_bytes() > counted.state_bytes {
        return None;
    }
    let on = |which: &Core| core.is_none_or(|core| core == *which);
    let counts = Core::ALL.iter().zip(counted.worst);
    counts.filter(|(which, _)| on(which)).map(|(_, count)| count).max()
}

/// What the count of a law is a count of.
#[must_use]
pub fn counted_as(parameters: &LawParameters) -> &'static str {
    Counted::of(parameters).name
}

#[cfg(test)]
mod tests {
    use std::fs;

    use super::*;

    const ALL: [&Counted; 5] = [&INTEGRATOR, &SHIFT_REGISTER, &MAJORITY_REGISTER, &STATE_MACHINE, &PATIENT];

    /// The last number of a cell: the worst of "20.45, 22", the only one of "13.00" rounded.
    fn last(cell: &str) -> u32 {
        cell.rsplit(',').next().and_then(|number| number.trim().parse::<f64>().ok()).expect("a number") as u32
    }

    #[test]
    fn cost_is_what_the_table_of_the_core_crate_says() {
        let path = concat!(env!("CARGO_MANIFEST_DIR"), "/../debounce-core/COST.md");
        let text = fs::read_to_string(path).expect("the table lies beside this crate");
        let mut compared = 0;
        for (index, core) in Core::ALL.iter().enumerate() {
            let section = text.split(&format!("## On {core}\n")).nth(1).expect("a section for every core");
            for counted in ALL {
                let start = format!("| {}, Rust, called |", counted.name);
                let row = section.lines().find(|line| line.starts_with(&start)).expect("a row");
                let cells: Vec<&str> = row.split('|').map(str::trim).collect();
                let worst = cells[2..5].iter().map(|cell| last(cell)).max().expect("three inputs");
                assert_eq!(counted.worst[index], worst, "{} on {core}", counted.name);
                let bytes = cells[5].split(',').next().and_then(|bytes| bytes.parse().ok());
                assert_eq!(Some(counted.state_bytes), bytes, "{} on {core}", counted.name);
                compared += 1;
            }
        }
        assert_eq!(compared, 15);
    }

    #[test]
    fn cost_without_a_core_is_the_most_of_all() {
        let law = "integrator 3".parse().expect("a law");
        assert_eq!(instructions(&law, Some(Core::CortexM3)), Some(22));
        assert_eq!(instructions(&law, None), Some(26));
        let plain = "state-machine confirm=3".parse().expect("a law");
        let patient = "state-machine confirm=3 lockout=2".parse().expect("a law");
        assert_eq!((counted_as(&plain), counted_as(&patient)), ("state machine", "patient state machine"));
    }

    #[test]
    fn cost_of_a_state_wider_than_counted_is_not_known() {
        let law = "state-machine confirm=300 lockout=2".parse().expect("a law");
        assert_eq!(instructions(&law, None), None);
    }
}
