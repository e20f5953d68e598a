//! The push-on, push-off machines that several tests share.

use debounce_core::{Change, Law, Machine, Position};

/// A hardware engineer's four-state machine, as drawn: the lamp turns over when the contact closes.
pub const TOGGLE: &str = "\
# an invented bench lamp: push on, push off
.i 1
.o 1
.p 8
.s 4
.r off
0 off      off      0
1 off      on_held  0
0 on_held  on       1
1 on_held  on_held  1
0 on       on       1
1 on       off_held 1
0 off_held off      0
1 off_held off_held 0
.e
";

/// A lamp behind a debouncing law: it turns over at every make that the law reports.
#[derive(Clone, Copy, Debug)]
pub struct Lamp<L>(pub L);

impl<L: Law> Machine for Lamp<L> {
    type Input = Position;
    type Output = Option<Change>;
    type State = (L::State, Position);

    fn step(&self, state: &mut Self::State, sample: Position) -> Option<Change> {
        let make = self.0.step(&mut state.0, sample) == Some(Change::Make);
        make.then(|| {
            state.1 = state.1.opposite();
            state.1.reached_by()
        })
    }
}

impl<L: Law> Law for Lamp<L> {
    fn rest(&self, position: Position) -> Self::State {
        (self.0.rest(position), position)
    }

    fn output(&self, state: &Self::State) -> Position {
        state.1
    }
}
