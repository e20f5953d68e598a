//! The network without a diode, exactly: two capacitances, so two exponentials.
//!
//! With the contact resting, the deviation from the steady voltages obeys `d' = -A d` with
//! `A = [[a/Ck, -m/Ck], [-m/Cp, d/Cp]]`, where `m` is the conductance between the two capacitances after the line
//! between them is eliminated (it has no capacitance of its own) and `a`, `d` are the sums of conductances at each. Both
//! eigenvalues are real and positive, the off-diagonal terms are not negative, so the flow keeps its order: a state that
//! lies above another in both voltages stays above it. All sums below are of positive terms, so nothing cancels even
//! where milliohms meet megohms. (Any textbook on linear networks; the single-capacitance case is
//! `t = RC ln((V - v0)/(V - v))`.)

use debounce_core::Position;

use super::unit::{State, Unit};

/// The network while the contact rests in one position.
pub(super) struct Linear {
    pub(super) steady: State,
    /// Conductances over capacitances: own and cross terms at the pin.
    pin_own: f64,
    pin_cross: f64,
    contact_own: f64,
    contact_cross: f64,
    slow: f64,
    fast: f64,
}

impl Linear {
    pub(super) fn new(unit: &Unit, position: Position) -> Self {
        let (near, far) = (1.0 / unit.discharge, 1.0 / unit.series);
        let sum = near + far + unit.pull;
        let cross = near * far / sum;
        // What leads from each end to a fixed voltage.
        let contact_ground = unit.ground_conductance(position);
        let contact_supply = near * unit.pull / sum;
        let pin_supply = far * unit.pull / sum + unit.load;
        let (x, y) = (contact_supply + contact_ground, pin_supply);
        let determinant = cross * (x + y) + x * y;
        let (drive_contact, drive_pin) =
            (contact_supply * unit.supply, pin_supply * unit.supply - unit.leakage);
        let steady = State {
            contact: ((cross + y) * drive_contact + cross * drive_pin) / determinant,
            pin: (cross * drive_contact + (cross + x) * drive_pin) / determinant,
        };
        let (ck, cp) = (unit.cable, unit.capacitance);
        let (contact_own, pin_own) = ((cross + x) / ck, (cross + y) / cp);
        let spread = ((contact_own - pin_own).powi(2) + 4.0 * cross * cross / (ck * cp)).sqrt();
        let fast = (contact_own + pin_own + spread) / 2.0;
        let slow = determinant / (ck * cp) / fast;
        Self { steady, pin_own, pin_cross: cross / cp, contact_own, contact_cross: cross / ck, slow, fast }
    }

    /// Slow and fast part of a voltage that is `off` from its steady value and moves at `rate`.
    fn parts(&self, off: f64, rate: f64) -> (f64, f64) {
        // Where both exponents are the same to the last digit, one exponential is all there is to see.
        let gap = (self.fast - self.slow).max(self.fast * 1e-12);
        let fast = -(rate + self.slow * off) / gap;
        (off - fast, fast)
    }

    fn pin_parts(&self, from: State) -> (f64, f64) {
        let (k, p) = (from.contact - self.steady.contact, from.pin - self.steady.pin);
        self.parts(p, self.pin_cross * k - self.pin_own * p)
    }

    pub(super) fn after(&self, from: State, seconds: f64) -> State {
        let (k, p) = (from.contact - self.steady.contact, from.pin - self.steady.pin);
        let (slow, fast) = ((-self.slow * seconds).exp(), (-self.fast * seconds).exp());
        let pin = self.pin_parts(from);
        let contact = self.parts(k, self.contact_cross * p - self.contact_own * k);
        State {
            contact: self.steady.contact + contact.0 * slow + contact.1 * fast,
            pin: self.steady.pin + pin.0 * slow + pin.1 * fast,
        }
    }

    /// The first time at which the pin is at `level`; it is not there now.
    pub(super) fn time_to(&self, from: State, level: f64) -> Option<f64> {
        let (slow, fast) = self.pin_parts(from);
        let off =
            |t: f64| self.steady.pin - level + slow * (-self.slow * t).exp() + fast * (-self.fast * t).exp();
        let starts_above = off(0.0) > 0.0;
        // Two exponentials turn at most once. Before that, as after it, they run one way.
        let turn = (-fast * self.fast / (slow * self.slow)).ln() / (self.fast - self.slow);
        if turn.is_finite() && turn > 0.0 && (off(turn) > 0.0) != starts_above {
            return Some(bisect(0.0, turn, |t| (off(t) > 0.0) == starts_above));
        }
        let distance = (self.steady.pin - level).abs();
        if distance == 0.0 || (self.steady.pin > level) == starts_above {
            return None;
        }
        let from = if turn.is_finite() { turn.max(0.0) } else { 0.0 };
        let until = ((slow.abs() + fast.abs()) / distance).ln().max(0.0) / self.slow;
        Some(bisect(from, until.max(from), |t| (off(t) > 0.0) == starts_above))
    }
}

/// Where `is_before` turns false, to 1e-18 of the interval.
pub(super) fn bisect(mut low: f64, mut high: f64, is_before: impl Fn(f64) -> bool) -> f64 {
    for _ in 0..60 {
        let middle = low + (high - low) / 2.0;
        if is_before(middle) { low = middle } else { high = middle }
    }
    high
}
