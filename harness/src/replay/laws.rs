//! Small laws for the tests of replay, each simple enough to be checked by eye.

use debounce_core::{Change, Law, Machine, Position};

/// Reports whatever it sees.
pub(crate) struct Follower;

impl Machine for Follower {
    type Input = Position;
    type Output = Option<Change>;
    type State = Position;

    fn step(&self, state: &mut Position, sample: Position) -> Option<Change> {
        let changed = *state != sample;
        *state = sample;
        changed.then(|| sample.reached_by())
    }
}

impl Law for Follower {
    fn rest(&self, position: Position) -> Position {
        position
    }

    fn output(&self, state: &Position) -> Position {
        *state
    }
}

/// Reports after this many samples in a row that differ from its output.
pub(crate) struct Unanimous(pub(crate) u32);

impl Machine for Unanimous {
    type Input = Position;
    type Output = Option<Change>;
    type State = (Position, u32);

    fn step(&self, (output, count): &mut Self::State, sample: Position) -> Option<Change> {
        *count = if sample == *output { 0 } else { *count + 1 };
        (*count == self.0).then(|| {
            (*output, *count) = (sample, 0);
            sample.reached_by()
        })
    }
}

impl Law for Unanimous {
    fn rest(&self, position: Position) -> Self::State {
        (position, 0)
    }

    fn output(&self, state: &Self::State) -> Position {
        state.0
    }
}

/// Reports at once, then is blind for this many samples.
pub(crate) struct LockOut(pub(crate) u32);

impl Machine for LockOut {
    type Input = Position;
    type Output = Option<Change>;
    type State = (Position, u32);

    fn step(&self, (output, blind): &mut Self::State, sample: Position) -> Option<Change> {
        if *blind > 0 {
            *blind -= 1;
            return None;
        }
        (sample != *output).then(|| {
            (*output, *blind) = (sample, self.0);
            sample.reached_by()
        })
    }
}

impl Law for LockOut {
    fn rest(&self, position: Position) -> Self::State {
        (position, 0)
    }

    fn output(&self, state: &Self::State) -> Position {
        state.0
    }
}

/// Looks at one sample in `every` only, and so never settles. Breaks the obligation that rest is left unchanged,
/// which replay does not rely on.
pub(crate) struct Divided {
    pub(crate) every: u32,
    pub(crate) confirm: u32,
}

impl Machine for Divided {
    type Input = Position;
    type Output = Option<Change>;
    type State = (u32, (Position, u32));

    fn step(&self, (phase, inner): &mut Self::State, sample: Position) -> Option<Change> {
        *phase = (*phase + 1) % self.every;
        if *phase == 0 { Unanimous(self.confirm).step(inner, sample) } else { None }
    }
}

impl Law for Divided {
    fn rest(&self, position: Position) -> Self::State {
        (0, (position, 0))
    }

    fn output(&self, state: &Self::State) -> Position {
        state.1.0
    }
}

/// Turns its output over whenever the line opens again, as a latching push-button does: it settles with the line at
/// either position, whatever its output, and may report later.
pub(crate) struct Latching;

impl Machine for Latching {
    type Input = Position;
    type Output = Option<Change>;
    type State = (Position, Position);

    fn step(&self, (output, line): &mut Self::State, sample: Position) -> Option<Change> {
        let opens = line.is_closed() && !sample.is_closed();
        *line = sample;
        opens.then(|| {
            *output = output.opposite();
            output.reached_by()
        })
    }
}

impl Law for Latching {
    fn rest(&self, position: Position) -> Self::State {
        (position, position)
    }

    fn output(&self, state: &Self::State) -> Position {
        state.0
    }
}
