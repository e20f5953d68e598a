//! The envelope a claim is made for, and the answer to it: [`Envelope`], [`Bounds`], [`Verdict`].

use crate::machine::{Change, Position};

/// One value for each change of the contact.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PerChange<T> {
    /// For the change from open to closed.
    pub make: T,
    /// For the change from closed to open.
    pub break_: T,
}

impl<T> PerChange<T> {
    /// The value for `change`, by reference.
    #[must_use]
    pub const fn of(&self, change: Change) -> &T {
        match change {
            Change::Make => &self.make,
            Change::Break => &self.break_,
        }
    }
}

impl<T: Copy> PerChange<T> {
    /// The value for `change`.
    #[must_use]
    pub const fn at(&self, change: Change) -> T {
        match change {
            Change::Make => self.make,
            Change::Break => self.break_,
        }
    }
}

/// One value for each position of the contact.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct PerPosition<T> {
    /// For the open contact.
    pub open: T,
    /// For the closed contact.
    pub closed: T,
}

impl<T> PerPosition<T> {
    /// The value for `position`, by reference.
    #[must_use]
    pub const fn of(&self, position: Position) -> &T {
        match position {
            Position::Open => &self.open,
            Position::Closed => &self.closed,
        }
    }
}

impl<T: Copy> PerPosition<T> {
    /// The value for `position`.
    #[must_use]
    pub const fn at(&self, position: Position) -> T {
        match position {
            Position::Open => self.open,
            Position::Closed => self.closed,
        }
    }
}

/// The set of waveforms a claim is made for. Every number is in ticks.
///
/// * `dwell`: the contact holds a position for at least this many ticks, at least 1; it changes just before a sample.
/// * `bounce`: that sample and the ones after it, any number from 0 to this, may read either way.
/// * `glitch`: a disturbance is a window of at most this many samples, each of which may read either way;
///   the position is the one in which the window began, and the window may straddle a change.
/// * `quiet`: a disturbance may begin only when at least this many samples have passed since the last one ended
///   (bounce samples count).
/// * `calm`: a disturbance may begin only outside bounce, when at least this many settled samples (neither bouncing
///   nor disturbed) have passed since the bounce ended; 0 means that disturbances know nothing of the contact.
///   With calm, whatever strikes during a bounce and outlasts it counts as bounce.
/// * `lost`: ticks that may be lost in a row; no stretch of the shortest dwell, quiet or calm holds more than one
///   such run. See [`Envelope::delivered`].
///
/// Every other sample is the contact's position.
///
/// # Examples
/// ```
/// use debounce_core::{Envelope, PerChange};
/// const BUTTON: Envelope = Envelope::clean(20, 20).bounce(5, 3).glitch(1, 1).quiet(10);
/// assert_eq!(BUTTON.limit(), Some(PerChange { make: 8, break_: 6 }));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub struct Envelope {
    /// Shortest time in each position.
    pub dwell: PerPosition<u32>,
    /// Longest bounce after each change.
    pub bounce: PerChange<u32>,
    /// Widest disturbance begun in each position.
    pub glitch: PerPosition<u32>,
    /// Fewest samples between two disturbances.
    pub quiet: u32,
    /// Fewest settled samples between the end of a bounce and a disturbance.
    pub calm: u32,
    /// Ticks that may be lost in a row.
    pub lost: u32,
}

impl Envelope {
    /// A contact that holds each position for at least the given ticks, without bounce or disturbance.
    #[must_use]
    pub const fn clean(dwell_open: u32, dwell_closed: u32) -> Self {
        Self {
            dwell: PerPosition { open: dwell_open, closed: dwell_closed },
            bounce: PerChange { make: 0, break_: 0 },
            glitch: PerPosition { open: 0, closed: 0 },
            quiet: 1,
            calm: 0,
            lost: 0,
        }
    }

    /// Sets the longest bounce after a make and after a break.
    #[must_use]
    pub const fn bounce(mut self, make: u32, break_: u32) -> Self {
        self.bounce = PerChange { make, break_ };
        self
    }

    /// Sets the widest disturbance begun while open and while closed.
    #[must_use]
    pub const fn glitch(mut self, open: u32, closed: u32) -> Self {
        self.glitch = PerPosition { open, closed };
        self
    }

    /// Sets the fewest samples between two disturbances.
    #[must_use]
    pub const fn quiet(mut self, quiet: u32) -> Self {
        self.quiet = quiet;
        self
    }

    /// Sets the fewest settled samples between a bounce and a disturbance.
    #[must_use]
    pub const fn calm(mut self, calm: u32) -> Self {
        self.calm = calm;
        self
    }

    /// Sets the number of ticks that may be lost in a row.
    #[must_use]
    pub const fn lost(mut self, lost: u32) -> Self {
        self.lost = lost;
        self
    }

    /// The same envelope counted in the samples that are delivered, with no more losses in it.
    ///
    /// A run of lost ticks can only take samples away, so bounce and disturbances keep their width, while
    /// dwell, quiet and calm are seen by `lost` samples fewer. A dwell of 0 then means that an operation may
    /// fall between two samples.
    ///
    /// A disturbance may also begin in a lost tick just before a change: what is left of it then begins with the
    /// change, where the old position's width or the lack of calm would forbid it. It counts as bounce.
    #[must_use]
    pub const fn delivered(mut self) -> Self {
        if self.lost > 0 {
            let calm = self.calm.saturating_sub(self.lost);
            let (open, closed) = (self.glitch.open, self.glitch.closed);
            self.bounce.make = with_straddling(self.bounce.make, open.saturating_sub(1), closed, calm);
            self.bounce.break_ = with_straddling(self.bounce.break_, closed.saturating_sub(1), open, calm);
        }
        self.dwell.open = self.dwell.open.saturating_sub(self.lost);
        self.dwell.closed = self.dwell.closed.saturating_sub(self.lost);
        self.quiet = self.quiet.saturating_sub(self.lost);
        self.calm = self.calm.saturating_sub(self.lost);
        self.lost = 0;
        self
    }

    /// The least worst-case latency, in samples, that any logic whatever can have at make and at break.
    ///
    /// [`StateMachine::for_envelope`](crate::StateMachine::<u8>::for_envelope) reaches it; [`proofs`](crate::proofs) shows
    /// both for numbers of any size.
    ///
    /// `None` where the closed form is not proved:
    ///
    /// * calm between 1 and the widest disturbance;
    /// * calm 0, disturbances at both positions, and quiet at or below the wider of them;
    /// * no quiet at all between disturbances;
    /// * a dwell shorter than the limit and the lock-out behind it (the bounce less 1) together: the limit may then
    ///   be greater, or no logic may exist.
    #[must_use]
    pub const fn limit(&self) -> Option<PerChange<u32>> {
        let e = self.delivered();
        let (open, closed) = (e.glitch.open, e.glitch.closed);
        if !e.disturbances_apart() {
            return None;
        }
        // With enough calm no disturbance can follow the bounce closely.
        let (after_make, after_break) = match e.calm {
            0 => (closed, open),
            calm if calm > e.widest_glitch() => (0, 0),
            _ => return None,
        };
        let make = least_latency(e.bounce.make, after_make, open);
        let break_ = least_latency(e.bounce.break_, after_break, closed);
        if make + lockout(e.bounce.make) > e.dwell.closed as u64
            || break_ + lockout(e.bounce.break_) > e.dwell.open as u64
        {
            return None;
        }
        // Neither is longer than a dwell, which is 32 bits wide.
        Some(PerChange { make: make as u32, break_: break_ as u32 })
    }

    pub(crate) const fn widest_glitch(&self) -> u32 {
        if self.glitch.open > self.glitch.closed { self.glitch.open } else { self.glitch.closed }
    }

    /// Whether disturbances, in delivered samples, keep far enough apart for the closed form of the limit.
    pub(crate) const fn disturbances_apart(&self) -> bool {
        let widest = self.widest_glitch();
        if widest == 0 {
            return true;
        }
        let one_sided = self.glitch.open == 0 || self.glitch.closed == 0;
        self.quiet > widest || (self.quiet > 0 && (one_sided || self.calm > widest))
    }
}

/// The bounce after a change, where the last `straddling` samples of a disturbance may begin with the change although
/// the first of it were never seen. Without calm, a disturbance of the new position explains up to its own width.
const fn with_straddling(bounce: u32, straddling: u32, of_new_position: u32, calm: u32) -> u32 {
    let is_explained = calm == 0 && straddling <= of_new_position;
    if is_explained || straddling <= bounce { bounce } else { straddling }
}

/// The limit for one change: the bounce with a disturbance behind it, or one that straddles the change, then
/// one sample more than the widest disturbance of the old position.
const fn least_latency(bounce: u32, following: u32, before: u32) -> u64 {
    let silent = bounce as u64 + following as u64;
    let straddling = before.saturating_sub(1) as u64;
    let hidden = if silent > straddling { silent } else { straddling };
    hidden + before as u64 + 1
}

/// The lock-out that covers a bounce behind the earliest report.
const fn lockout(bounce: u32) -> u64 {
    bounce.saturating_sub(1) as u64
}

/// Best and worst latency, in samples: reporting on the first sample that could see the new position is 1.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Latency {
    /// The shortest that occurs.
    pub best: u32,
    /// The longest that occurs.
    pub worst: u32,
}

/// What a law guarantees inside an envelope: every operation is reported once, within these latencies.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug, Default)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub struct Bounds {
    /// Latency of each change, in samples.
    pub latency: PerChange<Latency>,
}

/// The promise that a law breaks inside an envelope.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum Clause {
    /// An edge is reported that no change of the contact stands behind.
    FalseEdge,
    /// A change of the contact is never reported.
    Missed,
    /// A dwell may fall between two samples, so that no logic can see it.
    DwellUnseen,
    /// Disturbances come faster than the clock can tell apart.
    NoQuiet,
}

/// The answer of a closed form to an envelope.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
pub enum Verdict {
    /// Proved: the law is faithful, with these exact bounds.
    Holds(Bounds),
    /// Refuted: there is a waveform in the envelope that breaks this promise.
    Fails(Clause),
    /// Outside the range in which the closed form is proved; the harness can explore it.
    Unknown,
}

impl Verdict {
    /// Whether the law is proved faithful with worst latencies of at most `make` and `break_` samples.
    #[must_use]
    pub const fn holds_within(&self, make: u32, break_: u32) -> bool {
        match self {
            Self::Holds(bounds) => bounds.latency.make.worst <= make && bounds.latency.break_.worst <= break_,
            _ => false,
        }
    }
}
