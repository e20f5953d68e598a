//! Power-up of a whole port: [`StartingBank`].

use super::{Changes, PortLaw, Word, any_plane};
use crate::machine::Machine;

/// Starts a bank without inventing operations: a lane has no position until it has read alike `2^K` times in a row.
///
/// # Method
/// Derived here. A lane without a position counts like samples in a row in `K` planes; a sample unlike the last one
/// counts as the first of a new row. At the `2^K`-th the lane is put to rest at that position, which is reported as
/// *initial* and not as a change. From then on it belongs to the inner bank. Lanes wait for themselves only.
///
/// # Units
/// One call to [`step`](Machine::step) takes one sample of every lane and is one tick. `K` is in count bits.
///
/// # Bounds
///
/// | Quantity                                      | Value              | Proof                                          |
/// |-----------------------------------------------|--------------------|------------------------------------------------|
/// | ticks until a quiet lane has its position     | exactly `2^K`      | `starting_bank_every_history_reports_initial_once` |
/// | changes of a lane before its initial position | none               | same                                           |
/// | initial positions of a lane                   | exactly 1          | same                                           |
///
/// A lane that never reads alike `2^K` times in a row never gets a position; [`StartingBankState::waiting`] shows it.
///
/// # State
/// That of the inner bank and `K + 1` words; checked by a `const` assertion below the type. Once nothing waits,
/// [`StartingBankState::into_inner`] gives the inner state back, and the rest may go.
/// What a tick costs stands in the [table of costs](crate#cost).
///
/// # Panics
/// Never. `K` outside 1 to 16 does not compile.
///
/// # Examples
/// ```
/// use debounce_core::{Bank, Machine, StartingBank};
/// const PORT: StartingBank<Bank<u8, 1>, 1> = StartingBank::new(Bank::new(0));
/// let mut state = PORT.power_up::<u8>();
/// assert!(PORT.step(&mut state, 0b10).initial == 0);
/// let second = PORT.step(&mut state, 0b10);
/// assert_eq!((second.initial, second.changes.any()), (0xff, 0)); // a switch closed at boot is no operation
/// assert_eq!(state.into_inner().map(|inner| inner.counting()), Some(0));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct StartingBank<B, const K: usize> {
    bank: B,
}

/// What a [`StartingBank`] remembers.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct StartingBankState<W, S, const K: usize> {
    inner: S,
    waiting: W,
    alike: [W; K],
}

const _: () = assert!(size_of::<StartingBankState<u8, super::BankState<u8, 2>, 2>>() == 6);

impl<W: Word, S: Copy, const K: usize> StartingBankState<W, S, K> {
    /// The lanes that have no position yet.
    #[must_use]
    pub const fn waiting(&self) -> W {
        self.waiting
    }

    /// The state of the inner bank; what it says about lanes that wait has no meaning.
    #[must_use]
    pub const fn inner(&self) -> &S {
        &self.inner
    }

    /// The state of the inner bank once every lane has a position.
    #[must_use]
    pub fn into_inner(&self) -> Option<S> {
        if self.waiting == W::NONE { Some(self.inner) } else { None }
    }
}

/// What one tick of a [`StartingBank`] brought.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[must_use]
pub struct LanesStarted<W> {
    /// Lanes that have got their first position; it is no operation.
    pub initial: W,
    /// Lanes that changed from a position they had.
    pub changes: Changes<W>,
}

impl<B, const K: usize> StartingBank<B, K> {
    /// Starts the lanes of `bank`.
    #[must_use]
    pub const fn new(bank: B) -> Self {
        const { assert!(K >= 1 && K <= 16, "a start counts in 1 to 16 bits: write K between 1 and 16") };
        Self { bank }
    }

    /// The state at power-up: every lane waits.
    #[must_use]
    pub fn power_up<W: Word>(&self) -> StartingBankState<W, B::State, K>
    where
        B: PortLaw<W>,
    {
        StartingBankState { inner: self.bank.at_rest(W::NONE), waiting: W::ALL, alike: [W::NONE; K] }
    }
}

impl<W: Word, B, const K: usize> Machine for StartingBank<B, K>
where
    B: PortLaw<W> + Machine<Input = W>,
{
    type Input = W;
    type Output = LanesStarted<W>;
    type State = StartingBankState<W, B::State, K>;

    #[inline]
    fn step(&self, state: &mut Self::State, port: W) -> LanesStarted<W> {
        if state.waiting == W::NONE {
            return LanesStarted { initial: W::NONE, changes: self.bank.step(&mut state.inner, port) };
        }
        let waiting = state.waiting;
        let closed = self.bank.looks_closed(port);
        // While a lane waits, the output it rests at is its last sample. Before the first sample that is open and
        // the row is empty, so either sample comes out as the first of its row.
        let alike = !(closed ^ self.bank.outputs(&state.inner)) & waiting;
        let begun = waiting & !alike;
        let mut carry = alike;
        for plane in &mut state.alike {
            let old = *plane;
            *plane = (old ^ carry) & alike;
            carry &= old;
        }
        if let [lowest, ..] = state.alike.as_mut_slice() {
            *lowest |= begun;
        }
        self.bank.seat(&mut state.inner, waiting, closed);
        state.waiting &= !carry;
        LanesStarted { initial: carry, changes: self.bank.step(&mut state.inner, port) }
    }
}

impl<B, const K: usize> StartingBank<B, K> {
    /// Whether a tick that reads `port` would change nothing: the tick may be stopped while the port reads so.
    #[must_use]
    pub fn is_settled<W: Word>(&self, state: &StartingBankState<W, B::State, K>, port: W) -> bool
    where
        B: PortLaw<W>,
    {
        let mut next = *state;
        let started = self.step(&mut next, port);
        started.initial == W::NONE
            && started.changes.is_none()
            && next == *state
            && any_plane(&next.alike) == W::NONE
    }
}
