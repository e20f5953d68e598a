//! A whole port with confirm, patience and lock-out, each edge its own: [`PatientBank`].

use super::{Changes, Word, any_plane};
use crate::error::{Parameter, ParameterError};
use crate::machine::Machine;

/// What a lane of a [`PatientBank`] does about one edge. All counts are in ticks.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct EdgeRule {
    pub(super) confirm: u16,
    pub(super) patience: u16,
    pub(super) lockout: u16,
}

impl EdgeRule {
    /// An edge that takes `confirm` contrary samples; each agreeing sample starts the count again; no lock-out.
    ///
    /// # Panics
    /// When `confirm` is 0; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(confirm: u16) -> Self {
        assert!(confirm >= 1, "an edge is confirmed by at least 1 sample: write a confirm of 1 or more");
        Self { confirm, patience: 1, lockout: 0 }
    }

    /// A whole rule from values known at run time; links no panic.
    ///
    /// # Errors
    /// [`ParameterError::Zero`] where confirm or patience is 0.
    pub const fn try_new(confirm: u16, patience: u16, lockout: u16) -> Result<Self, ParameterError> {
        if confirm == 0 {
            Err(ParameterError::Zero(Parameter::Confirm))
        } else if patience == 0 {
            Err(ParameterError::Zero(Parameter::Patience))
        } else {
            Ok(Self { confirm, patience, lockout })
        }
    }

    /// Sets how many agreeing samples in a row clear a count that has begun.
    ///
    /// # Panics
    /// When it is 0; in a constant that is an error at compile time.
    #[must_use]
    pub const fn patience(mut self, patience: u16) -> Self {
        assert!(
            patience >= 1,
            "a count is cleared by at least 1 agreeing sample: write a patience of 1 or more"
        );
        self.patience = patience;
        self
    }

    /// Sets how many ticks after this edge take no notice of their samples.
    #[must_use]
    pub const fn lockout(mut self, lockout: u16) -> Self {
        self.lockout = lockout;
        self
    }
}

/// Settles up to 64 inputs at once by confirm, patience and lock-out, each edge its own: the limit for a whole port.
///
/// # Method
/// The four-state machine (open, closing, closed, opening), bit-sliced. Sources: the four states, "Debouncing
/// alternative", Virginia Tech embedded course notes; the planes, "vertical counter", everything2, 2001. Patience,
/// and its proof to be optimal, are derived here. A lane counts contrary samples (`C` planes) up to the confirm of
/// the edge they lead to. While a count has begun, agreeing samples in a row are counted as well (`P` planes):
/// at the patience of that edge both counts are cleared; a contrary sample clears the second only. After an edge
/// its lock-out counts down (`L` planes), and the samples of those ticks are not looked at.
///
/// # Units
/// One call to [`step`](Machine::step) takes one sample of every lane and is one tick. `C`, `P` and `L` are widths
/// in bits: the largest confirm and patience are `2^C` and `2^P`, the longest lock-out `2^L - 1` ticks.
///
/// # Bounds
/// For each lane alone, in an envelope with quiet longer than either disturbance width `Go`, `Gc` (begun open,
/// begun closed), calm 0 and dwells long enough, with confirm toward closed `Go + 1`, patience toward closed
/// `Gc + 1`, lock-out after a make `max(0, B_make - 1)`, and mirrored for the break:
///
/// | Quantity                                | Value                                       | Proof                                              |
/// |-----------------------------------------|---------------------------------------------|----------------------------------------------------|
/// | worst make latency, the least possible  | `max(B_make + Gc, Go - 1) + Go + 1`         | `patient_bank_in_envelope_reaches_limit`           |
/// | worst break latency, the least possible | `max(B_break + Go, Gc - 1) + Gc + 1`        | same                                               |
/// | latency of a clean edge from rest       | its confirm                                 | `patient_lane_every_state_and_sample_equals_scalar`|
/// | lanes heard by another lane             | none                                        | `patient_lanes_mixed_input_stay_independent`       |
///
/// A lost tick is a sample that was never taken: it delays, and makes the lock-out longer in time, but never makes
/// an edge.
///
/// # State
/// `1 + C + P + L` words, so that many bits an input; checked by `const` assertions below the type. With
/// `P = 0` patience is 1, with `L = 0` there is no lock-out, and neither costs anything. The instructions of a tick of
/// 32 inputs stand in the [table of costs](crate#cost).
///
/// # Panics
/// Never in `step`. [`new`](Self::new) panics on a rule that the widths cannot hold, in a constant at compile time;
/// widths that cannot count do not compile.
///
/// # Examples
/// ```
/// use debounce_core::{EdgeRule, Machine, PatientBank};
/// // Bounce up to 5 samples at make, disturbances of 1 sample: the limit is 5 + 1 + 1 + 1 = 8 samples.
/// const RULE: EdgeRule = EdgeRule::new(2).patience(2).lockout(4);
/// const PORT: PatientBank<u16, 1, 1, 3> = PatientBank::new(0, RULE, RULE);
/// let mut state = PORT.all_open();
/// assert!(PORT.step(&mut state, 1).is_none());
/// assert!(PORT.step(&mut state, 0).is_none()); // one agreeing sample does not clear the count
/// assert_eq!(PORT.step(&mut state, 1).make, 1);
/// assert!(PORT.step(&mut state, 0).is_none()); // locked out
/// ```
/// ```compile_fail,E0080
/// use debounce_core::{EdgeRule, PatientBank};
/// // A confirm of 5 does not fit 2 bits.
/// const PORT: PatientBank<u8, 2, 0, 0> = PatientBank::new(0, EdgeRule::new(5), EdgeRule::new(1));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PatientBank<W, const C: usize, const P: usize, const L: usize> {
    inverted: W,
    make: EdgeRule,
    break_: EdgeRule,
}

/// What a [`PatientBank`] remembers: the settled reading of the port, counts, runs of agreement, lock-outs.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PatientState<W, const C: usize, const P: usize, const L: usize> {
    settled: W,
    contrary: [W; C],
    agreeing: [W; P],
    locked: [W; L],
}

const _: () = assert!(size_of::<PatientState<u8, 2, 1, 3>>() == 7);
const _: () = assert!(size_of::<PatientState<u32, 2, 0, 0>>() == 12);

impl<W: Word, const C: usize, const P: usize, const L: usize> PatientState<W, C, P, L> {
    /// The lanes in which a count has begun or a lock-out runs.
    #[must_use]
    #[inline]
    pub fn counting(&self) -> W {
        any_plane(&self.contrary) | any_plane(&self.locked)
    }

    pub(super) fn seat(&mut self, lanes: W, reading: W) {
        self.settled = (self.settled & !lanes) | (reading & lanes);
        for plane in self.contrary.iter_mut().chain(&mut self.agreeing).chain(&mut self.locked) {
            *plane &= !lanes;
        }
    }
}

impl<W: Word, const C: usize, const P: usize, const L: usize> PatientBank<W, C, P, L> {
    /// A bank that makes by `make` and breaks by `break_`; `inverted` lanes read 0 while their contact is closed.
    ///
    /// # Panics
    /// When a rule does not fit the widths; in a constant that is an error at compile time.
    #[must_use]
    pub const fn new(inverted: W, make: EdgeRule, break_: EdgeRule) -> Self {
        match Self::try_new(inverted, make, break_) {
            Ok(bank) => bank,
            Err(_) => panic!(
                "a rule does not fit: confirm may be up to 2^C, patience up to 2^P, lock-out up to 2^L - 1 ticks"
            ),
        }
    }

    /// As [`new`](Self::new), for values known at run time; links no panic.
    ///
    /// # Errors
    /// [`ParameterError::CountTooNarrow`] where a rule does not fit the widths: the first number that does not.
    pub const fn try_new(inverted: W, make: EdgeRule, break_: EdgeRule) -> Result<Self, ParameterError> {
        const {
            assert!(
                C <= 15 && P <= 15 && L <= 15,
                "a count has up to 15 bits: write C, P and L of 15 or less"
            )
        };
        let most = EdgeRule { confirm: 1 << C, patience: 1 << P, lockout: (1 << L) - 1 };
        let checks = [
            (Parameter::ConfirmMake, make.confirm, most.confirm),
            (Parameter::PatienceMake, make.patience, most.patience),
            (Parameter::LockoutMake, make.lockout, most.lockout),
            (Parameter::ConfirmBreak, break_.confirm, most.confirm),
            (Parameter::PatienceBreak, break_.patience, most.patience),
            (Parameter::LockoutBreak, break_.lockout, most.lockout),
        ];
        let mut left: &[_] = &checks;
        while let [(parameter, ticks, most), rest @ ..] = left {
            if *ticks > *most {
                let (parameter, ticks, most) = (*parameter, *ticks as u32, *most);
                return Err(ParameterError::CountTooNarrow { parameter, ticks, most });
            }
            left = rest;
        }
        Ok(Self { inverted, make, break_ })
    }

    /// The state in which every contact is settled open.
    #[must_use]
    #[inline]
    pub const fn all_open(&self) -> PatientState<W, C, P, L> {
        self.rest_reading(self.inverted)
    }

    /// The state in which the lanes in `closed` are settled closed and all others open.
    #[must_use]
    #[inline]
    pub fn rest(&self, closed: W) -> PatientState<W, C, P, L> {
        self.rest_reading(closed ^ self.inverted)
    }

    const fn rest_reading(&self, settled: W) -> PatientState<W, C, P, L> {
        PatientState { settled, contrary: [W::NONE; C], agreeing: [W::NONE; P], locked: [W::NONE; L] }
    }

    /// The lanes whose contact is settled closed.
    #[must_use]
    #[inline]
    pub fn closed(&self, state: &PatientState<W, C, P, L>) -> W {
        self.looks_closed(state.settled)
    }

    /// The lanes that look closed in a reading of the port.
    #[inline]
    pub(super) fn looks_closed(&self, port: W) -> W {
        port ^ self.inverted
    }

    /// Whether a tick that reads `port` would change nothing: the tick may be stopped while the port reads so.
    #[must_use]
    #[inline]
    pub fn is_settled(&self, state: &PatientState<W, C, P, L>, port: W) -> bool {
        (port ^ state.settled) | state.counting() == W::NONE
    }
}

impl<W: Word, const C: usize, const P: usize, const L: usize> Machine for PatientBank<W, C, P, L> {
    type Input = W;
    type Output = Changes<W>;
    type State = PatientState<W, C, P, L>;

    #[inline]
    fn step(&self, state: &mut Self::State, port: W) -> Changes<W> {
        let was = self.closed(state);
        let free = !any_plane(&state.locked);
        let differs = port ^ state.settled;
        let contrary = differs & free;
        // A lane that is locked out has no count, so agreement needs no look at the lock-out.
        let agreeing = any_plane(&state.contrary) & !differs;

        let confirmed = contrary & stands_at(&state.contrary, self.make.confirm, self.break_.confirm, was);
        let forgiven = agreeing & stands_at(&state.agreeing, self.make.patience, self.break_.patience, was);

        add_one(&mut state.agreeing, agreeing, agreeing & !forgiven);
        add_one(&mut state.contrary, contrary, !(confirmed | forgiven));
        count_down(&mut state.locked);
        for (bit, plane) in (0u32..).zip(&mut state.locked) {
            let (make, break_) =
                (W::spread(rule_bit(self.make.lockout, bit)), W::spread(rule_bit(self.break_.lockout, bit)));
            *plane |= confirmed & ((make & !was) | (break_ & was));
        }
        state.settled ^= confirmed;
        Changes::to(confirmed, was ^ confirmed)
    }
}

#[inline]
const fn rule_bit(value: u16, bit: u32) -> u32 {
    (value as u32) >> bit
}

/// The lanes whose count stands one short of the end: that of the make where the lane is open, else of the break.
#[inline]
fn stands_at<W: Word, const N: usize>(planes: &[W; N], make: u16, break_: u16, closed: W) -> W {
    let (make, break_) = (make.saturating_sub(1), break_.saturating_sub(1));
    let mut here = W::ALL;
    for (bit, plane) in (0u32..).zip(planes) {
        let wanted = (W::spread(rule_bit(make, bit)) & !closed) | (W::spread(rule_bit(break_, bit)) & closed);
        here &= !(*plane ^ wanted);
    }
    here
}

/// Counts the lanes in `up` by one, then clears every lane that is not in `keep`.
#[inline]
pub(super) fn add_one<W: Word, const N: usize>(planes: &mut [W; N], up: W, keep: W) {
    let mut carry = up;
    for plane in planes {
        let old = *plane;
        *plane = (old ^ carry) & keep;
        carry &= old;
    }
}

/// Counts every lane that is not at zero down by one.
#[inline]
fn count_down<W: Word, const N: usize>(planes: &mut [W; N]) {
    let mut borrow = any_plane(planes);
    for plane in planes {
        let old = *plane;
        *plane = old ^ borrow;
        borrow &= !old;
    }
}
