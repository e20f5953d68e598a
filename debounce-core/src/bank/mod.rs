//! A whole port at once: one bit-sliced counter for each input, all stepped by the same few instructions.

mod lane;
#[cfg(test)]
mod minimal;
mod patient;
mod starting;
#[cfg(test)]
mod tests;
mod word;

pub use lane::{Lane, PortLaw};
pub use patient::{EdgeRule, PatientBank, PatientState};
pub use starting::{LanesStarted, StartingBank, StartingBankState};
pub use word::Word;

use crate::machine::Machine;

/// The lanes of a port that changed at one tick.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[must_use]
pub struct Changes<W> {
    /// Lanes whose contact made.
    pub make: W,
    /// Lanes whose contact broke.
    pub break_: W,
}

impl<W: Word> Changes<W> {
    /// No change on any lane.
    pub const NONE: Self = Self { make: W::NONE, break_: W::NONE };

    /// The lanes in `changed`, sorted by the position they changed to.
    #[inline]
    fn to(changed: W, closed: W) -> Self {
        Self { make: changed & closed, break_: changed & !closed }
    }

    /// The lanes that changed, either way.
    #[must_use]
    #[inline]
    pub fn any(self) -> W {
        self.make | self.break_
    }

    /// Whether no lane changed.
    #[must_use]
    #[inline]
    pub fn is_none(self) -> bool {
        self.any() == W::NONE
    }
}

/// Settles up to 64 inputs at once: a lane changes at its `2^K`-th contrary sample in a row.
///
/// # Method
/// Vertical counters: bit `i` of every lane's count lies in one word, the *plane* `i`, so that one logic
/// instruction advances all lanes. Source of the idea: "vertical counter", everything2, 2001 (`a ^= b&c&d;
/// b ^= c&d; c ^= d`). Differs from it in clearing a lane's count at every sample that agrees with its output, and
/// in two things derived here. The two low planes count 00, 10, 11, 01, in which each next bit is one AND or
/// AND-NOT of the other. And no carry is taken to the output: after a tick a lane is still contrary exactly where
/// its count goes on, which is where the count is not zero, and everywhere else its output is its sample.
///
/// ```text
/// d  = sample ^ output            lanes that disagree
/// b' = d & a,    a' = d & !b      00 10 11 01 00 while d, else 00
/// u  = a' | b'                    lanes that count on
/// c' = d & !(c ^ u),  u |= c'     every further plane: it turns where all below it came to 0
/// output = sample ^ u
/// ```
///
/// That is 3 operations with `K = 1` and `3 K - 1` with more: five with `K = 2`. No fewer than five will do for
/// two planes that are zero at rest, whatever the code of the count between, and with AND, AND-NOT and XOR alone
/// no fewer than six: a test tries every shorter program.
///
/// # Units
/// One call to [`step`](Machine::step) takes one sample of every lane and is one tick. `K` is in count bits.
///
/// # Bounds
/// For each lane alone, from rest, counting the first contrary sample as tick 1:
///
/// | Quantity                         | Value         | Proof                                              |
/// |----------------------------------|---------------|----------------------------------------------------|
/// | latency of a clean make or break | exactly `2^K` | `bank_lane_every_state_and_sample_equals_scalar`   |
/// | longest lone glitch rejected     | `2^K - 1`     | same                                               |
/// | lanes heard by another lane      | none          | `bank_lanes_mixed_input_stay_independent`          |
///
/// Not promised: a count that starts again at every agreeing sample pays for close disturbances with latency;
/// [`PatientBank`] reaches the limit there. A lost tick is a sample that was never taken: it delays, and hides a
/// dwell that falls into it, but never makes an edge.
///
/// # State
/// `K + 1` words, so `K + 1` bits an input, all planes zero at rest; checked by `const` assertions below the type.
/// The instructions of a tick of 32 inputs stand in the [table of costs](crate#cost), whatever the polarity.
/// `make` and `break_` of a tick are one more each, and only where the program looks at them.
///
/// # Panics
/// Never. `K` outside 1 to 16 does not compile.
///
/// # Examples
/// ```
/// use debounce_core::{Bank, Changes, Machine};
/// // Eight keys with pull-ups: a closed contact reads 0.
/// const KEYS: Bank<u8, 2> = Bank::new(0xff);
/// let mut state = KEYS.all_open();
/// for _ in 0..3 {
///     assert!(KEYS.step(&mut state, 0b1111_1110).is_none()); // three samples are still a glitch
/// }
/// assert_eq!(KEYS.step(&mut state, 0b1111_1110), Changes { make: 1, break_: 0 });
/// assert_eq!(KEYS.closed(&state), 1);
/// assert!(KEYS.is_settled(&state, 0b1111_1110));
/// ```
/// ```compile_fail,E0080
/// const NO_COUNT: debounce_core::Bank<u8, 0> = debounce_core::Bank::new(0);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Bank<W, const K: usize> {
    inverted: W,
}

/// What a [`Bank`] remembers: the settled reading of the port and the count planes.
// The reading and not the position: then polarity costs nothing as long as no lane changes. In this order, the two low
// planes last, fewer loads and stores are needed than in any other, as the table of costs was measured.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[repr(C)]
pub struct BankState<W, const K: usize> {
    settled: W,
    planes: [W; K],
}

const _: () = assert!(size_of::<BankState<u8, 2>>() == 3 && size_of::<BankState<u16, 2>>() == 6);
const _: () = assert!(size_of::<BankState<u32, 2>>() == 12 && size_of::<BankState<u32, 3>>() == 16);
const _: () = assert!(size_of::<BankState<u64, 3>>() == 32);

impl<W: Word, const K: usize> BankState<W, K> {
    /// The lanes in which a count has begun.
    #[must_use]
    #[inline]
    pub fn counting(&self) -> W {
        any_plane(&self.planes)
    }
}

impl<W: Word, const K: usize> Bank<W, K> {
    /// A bank whose `inverted` lanes read 0 while their contact is closed (a pull-up and a contact to ground).
    #[must_use]
    pub const fn new(inverted: W) -> Self {
        const { assert!(K >= 1 && K <= 16, "a bank counts in 1 to 16 bits: write K between 1 and 16") };
        Self { inverted }
    }

    /// The contrary samples in a row that change a lane: `2^K`.
    pub const CONFIRM: u32 = 1 << K;

    /// The state in which every contact is settled open.
    #[must_use]
    #[inline]
    pub const fn all_open(&self) -> BankState<W, K> {
        BankState { settled: self.inverted, planes: [W::NONE; K] }
    }

    /// The state in which the lanes in `closed` are settled closed and all others open.
    #[must_use]
    #[inline]
    pub fn rest(&self, closed: W) -> BankState<W, K> {
        BankState { settled: closed ^ self.inverted, planes: [W::NONE; K] }
    }

    /// The lanes whose contact is settled closed.
    #[must_use]
    #[inline]
    pub fn closed(&self, state: &BankState<W, K>) -> W {
        state.settled ^ self.inverted
    }

    /// Whether a tick that reads `port` would change nothing: the tick may be stopped while the port reads so.
    #[must_use]
    #[inline]
    pub fn is_settled(&self, state: &BankState<W, K>, port: W) -> bool {
        (port ^ state.settled) | state.counting() == W::NONE
    }
}

impl<W: Word, const K: usize> Machine for Bank<W, K> {
    type Input = W;
    type Output = Changes<W>;
    type State = BankState<W, K>;

    #[inline]
    fn step(&self, state: &mut Self::State, port: W) -> Changes<W> {
        let was = state.settled;
        let contrary = port ^ was;
        let (mut counting, further) = match state.planes.as_mut_slice() {
            [further @ .., a, b] => {
                let (low, high) = (*a, *b);
                *b = contrary & low;
                *a = contrary & !high;
                (*a | *b, further)
            }
            [only] => {
                *only = contrary & !*only;
                (*only, &mut [][..])
            }
            [] => (W::NONE, &mut [][..]),
        };
        for plane in further {
            *plane = contrary & !(*plane ^ counting);
            counting |= *plane;
        }
        state.settled = port ^ counting;
        Changes::to(was ^ state.settled, state.settled ^ self.inverted)
    }
}

/// The lanes set in any of the planes.
#[inline]
fn any_plane<W: Word, const N: usize>(planes: &[W; N]) -> W {
    let mut any = W::NONE;
    for plane in planes {
        any |= *plane;
    }
    any
}
