//! What a debouncing law is: [`Law`], and when it is settled: [`is_settled`].

use crate::machine::{Change, Machine, Position};

/// A debouncing law: a machine from samples to edges that settles at either position.
///
/// # Obligations
/// Checked by the harness for every law before any proof:
///
/// 1. `output(&rest(p)) == p`;
/// 2. a step with `p` leaves `rest(p)` unchanged and reports nothing;
/// 3. an edge is returned exactly when the output changes, and it is the change to the new output.
pub trait Law: Machine<Input = Position, Output = Option<Change>> {
    /// The state in which the law is settled at `position`.
    fn rest(&self, position: Position) -> Self::State;

    /// The debounced position in `state`.
    fn output(&self, state: &Self::State) -> Position;
}

impl<L: Law + ?Sized> Law for &L {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        (**self).rest(position)
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        (**self).output(state)
    }
}

impl<L: Law + ?Sized> Law for &mut L {
    #[inline]
    fn rest(&self, position: Position) -> Self::State {
        (**self).rest(position)
    }

    #[inline]
    fn output(&self, state: &Self::State) -> Position {
        (**self).output(state)
    }
}

/// Whether a step with `position` would leave `state` as it is: the law is settled there.
///
/// While it is, and the line stays at `position`, the tick may be stopped without loss.
#[must_use]
#[inline]
pub fn is_settled<L: Law>(law: &L, state: &L::State, position: Position) -> bool {
    let mut next = *state;
    law.step(&mut next, position).is_none() && next == *state
}
