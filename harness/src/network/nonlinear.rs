//! The network with a diode, in small implicit steps.
//!
//! The diode follows Shockley's equation `I = Is (exp(V / n Vt) - 1)`. Each step is the L-stable singly diagonally
//! implicit Runge-Kutta method of second order (Alexander, SIAM J. Numer. Anal. 14 (1977) 1006-1021), taken once whole
//! and once in two halves; their difference estimates the error, and the better value is extrapolated from both
//! (Richardson). A step whose error is above a millionth of the supply is taken again, shorter. Implicit steps are
//! needed because a closed contact empties the cable a million times faster than the capacitor empties.
//! Without a diode the same steps must give what the exact solution gives; a test compares the two.

use debounce_core::Position;

use super::linear::bisect;
use super::unit::{State, Unit};

/// Error of one step, as a share of the supply.
const STEP_ERROR: f64 = 1e-6;
/// Enough for any network that changes within a day of its shortest time constant.
const MOST_STEPS: usize = 200_000;
/// `1 - 1/sqrt(2)`.
const GAMMA: f64 = 1.0 - std::f64::consts::FRAC_1_SQRT_2;

/// Current from the line into the pin's node through series resistor and diode, and the voltage of the line, where
/// the line sees `ground` siemens to a voltage `end`, the pull resistor, and the pin at `pin`.
pub(super) fn branch(unit: &Unit, ground: f64, end: f64, pin: f64) -> (f64, f64) {
    let source = ground + unit.pull;
    let open = (ground * end + unit.pull * unit.supply) / source;
    let (current, _) = through(unit, 1.0 / source, open - pin);
    (current, open - current / source)
}

/// Current through `ohms` and then series resistor and diode in parallel, across `volts`; and its slope.
fn through(unit: &Unit, ohms: f64, volts: f64) -> (f64, f64) {
    let far = 1.0 / unit.series;
    let Some(diode) = unit.diode else {
        let total = far / (1.0 + ohms * far);
        return (volts * total, total);
    };
    // Seen from the diode its forward direction is the positive one.
    let sign = if diode.charges { 1.0 } else { -1.0 };
    let drop = junction_drop(far, diode.saturation, diode.slope, ohms, sign * volts);
    let grows = (drop / diode.slope).exp();
    let current = far * drop + diode.saturation * (grows - 1.0);
    let parallel = far + diode.saturation / diode.slope * grows;
    (sign * current, 1.0 / (ohms + 1.0 / parallel))
}

/// The voltage across resistor and diode. Newton's method from a bound above the root of an increasing convex
/// function: every step stays above the root, so it converges.
fn junction_drop(far: f64, saturation: f64, slope: f64, ohms: f64, volts: f64) -> f64 {
    let mut drop = if volts <= 0.0 {
        0.0
    } else {
        (volts / (1.0 + ohms * far)).min(slope * (1.0 + volts / (ohms * saturation)).ln())
    };
    for _ in 0..100 {
        let grows = (drop / slope).exp();
        let excess = ohms * (far * drop + saturation * (grows - 1.0)) + drop - volts;
        let next = drop - excess / (ohms * (far + saturation / slope * grows) + 1.0);
        if (next - drop).abs() <= 1e-15 * (1.0 + drop.abs()) {
            return next;
        }
        drop = next;
    }
    drop
}

/// The network while the contact rests in one position.
pub(super) struct Flow<'a> {
    unit: &'a Unit,
    ground: f64,
}

impl<'a> Flow<'a> {
    pub(super) fn new(unit: &'a Unit, position: Position) -> Self {
        Self { unit, ground: unit.ground_conductance(position) }
    }

    /// How fast both voltages move, in volts a second.
    pub(super) fn rates(&self, at: State) -> (f64, f64) {
        let (contact, pin, _) = self.rates_and_slopes(at);
        (contact, pin)
    }

    fn rates_and_slopes(&self, at: State) -> (f64, f64, [f64; 4]) {
        let unit = self.unit;
        let near = 1.0 / unit.discharge;
        let source = near + unit.pull;
        // The line without the pin's branch, written so that two large numbers do not cancel.
        let open = at.contact + unit.pull * (unit.supply - at.contact) / source;
        let (current, slope) = through(unit, 1.0 / source, open - at.pin);
        let share = near / source;
        let into_contact = share * unit.pull * (unit.supply - at.contact) - share * current;
        let contact = (into_contact - self.ground * at.contact) / unit.cable;
        let pin = (current - unit.leakage + unit.load * (unit.supply - at.pin)) / unit.capacitance;
        let slopes = [
            (-share * unit.pull - share * share * slope - self.ground) / unit.cable,
            share * slope / unit.cable,
            share * slope / unit.capacitance,
            (-slope - unit.load) / unit.capacitance,
        ];
        (contact, pin, slopes)
    }

    /// Solves `y = base + step f(y)` by Newton's method from `guess`.
    fn implicit(&self, base: State, step: f64, guess: State) -> Option<State> {
        let mut y = guess;
        for _ in 0..30 {
            let (fk, fp, [a, b, c, d]) = self.rates_and_slopes(y);
            let (rk, rp) = (y.contact - base.contact - step * fk, y.pin - base.pin - step * fp);
            let (a, b, c, d) = (1.0 - step * a, -step * b, -step * c, 1.0 - step * d);
            let determinant = a * d - b * c;
            let dk = (d * rk - b * rp) / determinant;
            let dp = (a * rp - c * rk) / determinant;
            y = State { contact: y.contact - dk, pin: y.pin - dp };
            if dk.abs().max(dp.abs()) <= 1e-12 * self.unit.supply {
                return Some(y);
            }
        }
        None
    }

    /// One step of the method.
    fn step(&self, from: State, step: f64) -> Option<State> {
        let inner = GAMMA * step;
        let first = self.implicit(from, inner, from)?;
        let rate = ((first.contact - from.contact) / inner, (first.pin - from.pin) / inner);
        let rest = (1.0 - GAMMA) * step;
        let base = State { contact: from.contact + rest * rate.0, pin: from.pin + rest * rate.1 };
        self.implicit(base, inner, first)
    }

    /// One step with its error, extrapolated from a whole step and two halves.
    fn checked(&self, from: State, step: f64) -> Option<(State, f64)> {
        let whole = self.step(from, step)?;
        let half = self.step(self.step(from, step / 2.0)?, step / 2.0)?;
        let (k, p) = ((half.contact - whole.contact) / 3.0, (half.pin - whole.pin) / 3.0);
        Some((State { contact: half.contact + k, pin: half.pin + p }, k.abs().max(p.abs())))
    }

    /// Steps on until `stop` says so or `until` is reached; the last step begins at the returned time and state.
    fn walk(
        &self,
        from: State,
        until: f64,
        stop: impl Fn(State) -> bool,
    ) -> (f64, State, Option<(f64, State)>) {
        let allowed = STEP_ERROR * self.unit.supply;
        let (mut t, mut at, mut step) = (0.0, from, (until / 10.0).min(1e-12));
        for _ in 0..MOST_STEPS {
            if t >= until {
                break;
            }
            step = step.min(until - t);
            match self.checked(at, step) {
                Some((next, error)) if error <= allowed => {
                    if stop(next) {
                        return (t, at, Some((step, next)));
                    }
                    // The last step ends exactly there, so that rounding leaves no remainder.
                    t = if step >= until - t { until } else { t + step };
                    at = next;
                    step *= (0.9 * (allowed / error.max(allowed * 1e-9)).cbrt()).clamp(0.3, 4.0);
                }
                Some((_, error)) => step *= (0.9 * (allowed / error).cbrt()).clamp(0.1, 0.7),
                None => step /= 8.0,
            }
        }
        (t, at, None)
    }
}

pub(super) fn after(unit: &Unit, position: Position, from: State, seconds: f64) -> State {
    Flow::new(unit, position).walk(from, seconds, |_| false).1
}

pub(super) fn time_to(unit: &Unit, position: Position, from: State, level: f64) -> Option<f64> {
    let flow = Flow::new(unit, position);
    let is_past = |state: State| match position {
        Position::Open => state.pin >= level,
        Position::Closed => state.pin <= level,
    };
    // What it does not reach in the end it may pass on the way only from a state far from rest.
    let rest = steady(unit, position);
    let until = 60.0 * unit.scale();
    if !is_past(rest) && (from.pin - rest.pin).abs() < 1e-12 {
        return None;
    }
    let (t, at, crossing) = flow.walk(from, until, is_past);
    let (step, _) = crossing?;
    // Shorter steps from the same state are more exact still.
    Some(t + bisect(0.0, step, |part| !flow.checked(at, part).is_some_and(|(next, _)| is_past(next))))
}

/// Where nothing moves any more: the current into the pin falls as the pin rises, so halving finds it.
pub(super) fn steady(unit: &Unit, position: Position) -> State {
    let (near, ground) = (1.0 / unit.discharge, unit.ground_conductance(position));
    let path = near * ground / (near + ground);
    let gains =
        |pin: f64| branch(unit, path, 0.0, pin).0 - unit.leakage + unit.load * (unit.supply - pin) > 0.0;
    let pin = bisect(-unit.supply, 2.0 * unit.supply, gains);
    let (_, line) = branch(unit, path, 0.0, pin);
    State { contact: line * near / (near + ground), pin }
}

#[cfg(test)]
mod tests {
    use super::super::unit::Junction;
    use super::*;

    fn unit() -> Unit {
        Unit {
            supply: 5.0,
            pull: 1e-4,
            discharge: 47.0,
            series: 4.7e3,
            capacitance: 100e-9,
            cable: 470e-12,
            dirt: 1e-7,
            contact: 0.1,
            leakage: 1e-6,
            load: 0.0,
            diode: None,
        }
    }

    /// A diode that carries nothing is no diode: the steps must agree with the exact solution.
    #[test]
    fn steps_without_a_diode_agree_with_the_exact_solution() {
        let exact = unit();
        let diode = Some(Junction { charges: true, saturation: 1e-30, slope: 0.05 });
        let stepped = Unit { diode, ..exact };
        for (position, levels) in [(Position::Open, [1.0, 2.0, 4.0]), (Position::Closed, [4.0, 2.0, 0.5])] {
            let from = exact.steady(!position);
            let other = stepped.steady(!position);
            assert!((from.pin - other.pin).abs() < 1e-9, "{from:?} {other:?}");
            for level in levels {
                let a = exact.time_to(position, from, level).expect("reached");
                let b = stepped.time_to(position, other, level).expect("reached");
                assert!((a / b - 1.0).abs() < 1e-5, "{position:?} {level}: {a} {b}");
            }
            let (a, b) = (exact.after(position, from, 1e-4), stepped.after(position, other, 1e-4));
            assert!((a.pin - b.pin).abs() < 1e-5 && (a.contact - b.contact).abs() < 1e-5, "{a:?} {b:?}");
        }
    }

    #[test]
    fn diode_shortens_the_edge_it_carries_and_no_other() {
        let plain = unit();
        let with =
            |charges| Unit { diode: Some(Junction { charges, saturation: 2.52e-9, slope: 0.0453 }), ..plain };
        let time = |unit: &Unit, position, level| {
            unit.time_to(position, unit.steady(!position), level).expect("reached")
        };
        let (open, closed) = (Position::Open, Position::Closed);
        assert!(time(&with(true), open, 3.0) < 0.95 * time(&plain, open, 3.0));
        assert!((time(&with(true), closed, 1.0) / time(&plain, closed, 1.0) - 1.0).abs() < 1e-3);
        assert!(time(&with(false), closed, 1.0) < 0.5 * time(&plain, closed, 1.0));
        assert!((time(&with(false), open, 3.0) / time(&plain, open, 3.0) - 1.0).abs() < 1e-3);
    }

    #[test]
    fn level_beyond_the_steady_voltage_is_never_reached() {
        let unit = unit();
        assert_eq!(unit.time_to(Position::Open, unit.steady(Position::Closed), 5.1), None);
        let diode = Some(Junction { charges: false, saturation: 2.52e-9, slope: 0.0453 });
        let with = Unit { diode, ..unit };
        assert_eq!(with.time_to(Position::Open, with.steady(Position::Closed), 5.1), None);
        assert_eq!(with.time_to(Position::Open, with.steady(Position::Open), 1.0), Some(0.0));
    }
}
