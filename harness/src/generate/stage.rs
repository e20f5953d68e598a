//! The input network in front of the pin, in time: one pole, then two thresholds.

use debounce_core::Position;

use super::arithmetic::{decayed, time_to_fall};

/// A line to one input: a pull-up to the supply, a contact to ground, one time constant for each position of
/// the contact, and an input that keeps its level between two thresholds.
///
/// # Method
/// `v(t) = V1 + (V0 - V1) e^(-t/T)`: first order, exact between two instants at which the source changes. With a
/// pull-up resistor P, a series resistor S and a capacitor C the time constants are `(P + S) C` while the contact
/// is apart and `S C` while it touches. Clamping diodes hold the input within `clamp_uv` of the supply rails. A
/// full analysis of such a network, with tolerances, is another job; its time constants and thresholds fit here.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct InputStage {
    /// The supply in microvolts: the line's voltage while the contact is apart, above 0.
    pub supply_uv: i64,
    /// Time constant while the contact is apart, in nanoseconds; 0 is no network at all.
    pub apart_ns: u64,
    /// Time constant while the contact touches, in nanoseconds.
    pub touching_ns: u64,
    /// At or below it the input reads low, which is closed.
    pub low_uv: i64,
    /// At or above it the input reads high, which is open.
    pub high_uv: i64,
    /// How far the clamps let the input go beyond the supply rails, in microvolts.
    pub clamp_uv: i64,
}

impl Default for InputStage {
    /// 3.3 V, no network, thresholds of 0.8 V and 2.0 V (TTL levels), clamped half a volt beyond the rails.
    fn default() -> Self {
        Self {
            supply_uv: 3_300_000,
            apart_ns: 0,
            touching_ns: 0,
            low_uv: 800_000,
            high_uv: 2_000_000,
            clamp_uv: 500_000,
        }
    }
}

/// What drives the line from an instant on.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Drive {
    /// Share of the supply that the contact leaves on the line, in thousandths: 0 touches well, 1000 is apart.
    pub(super) apart: u16,
    /// What disturbances add, in microvolts.
    pub(super) push_uv: i64,
}

/// An input as it runs along a drive.
#[derive(Clone, Debug)]
pub(super) struct Running {
    stage: InputStage,
    drive: Drive,
    since_ns: u64,
    volts_uv: i64,
    position: Position,
    /// Every change of the input's level, in order; instants may come in equal pairs.
    pub(super) edges: Vec<u64>,
    /// The voltage at the input, where it is wanted.
    pub(super) volts: Option<Vec<(u64, i64)>>,
}

/// Points that show one time constant of a curve.
const POINTS: u64 = 8;

impl Running {
    /// At rest with the contact apart.
    pub(super) fn at_rest(stage: InputStage, with_volts: bool) -> Self {
        let drive = Drive { apart: 1000, push_uv: 0 };
        Self {
            stage,
            drive,
            since_ns: 0,
            volts_uv: stage.supply_uv,
            position: Position::Open,
            edges: Vec::new(),
            volts: with_volts.then(|| vec![(0, stage.supply_uv)]),
        }
    }

    /// From `at_ns` on, which never falls, the line is driven like this.
    pub(super) fn drive(&mut self, at_ns: u64, drive: Drive) {
        self.advance(at_ns);
        self.drive = drive;
        if self.constant() == 0 {
            // No network: the input follows at once.
            self.volts_uv = self.target();
            self.note(at_ns, self.volts_uv);
            self.compare(at_ns);
        }
    }

    /// Runs on to `at_ns` without any change.
    pub(super) fn advance(&mut self, at_ns: u64) {
        let (constant, target) = (self.constant(), self.target());
        let elapsed = at_ns - self.since_ns;
        if constant == 0 || elapsed == 0 || self.volts_uv == target {
            self.since_ns = at_ns;
            return;
        }
        let crossing = self.crossing(target, constant).filter(|&after| after <= elapsed);
        self.curve(target, constant, elapsed, crossing);
        self.volts_uv = self.clamped(target + decayed(self.volts_uv - target, elapsed, constant));
        if let Some(after) = crossing {
            self.edges.push(self.since_ns + after);
            self.position = self.position.opposite();
        }
        self.since_ns = at_ns;
    }

    /// How long until the input's level changes, if it heads that way.
    fn crossing(&self, target: i64, constant: u64) -> Option<u64> {
        let threshold = match self.position {
            Position::Open if target < self.stage.low_uv => self.stage.low_uv,
            Position::Closed if target > self.stage.high_uv => self.stage.high_uv,
            _ => return None,
        };
        // A curve that only just reaches it takes for ever, which is never.
        let (from, to) = (self.volts_uv.abs_diff(target), threshold.abs_diff(target));
        Some(time_to_fall(constant, from, to)).filter(|&after| after < u64::MAX).map(|after| after.max(1))
    }

    fn compare(&mut self, at_ns: u64) {
        let to = match self.position {
            Position::Open => self.volts_uv <= self.stage.low_uv,
            Position::Closed => self.volts_uv >= self.stage.high_uv,
        };
        if to {
            self.position = self.position.opposite();
            self.edges.push(at_ns);
        }
    }

    /// Points of the curve for whoever draws it; one stands where the input's level changes.
    fn curve(&mut self, target: i64, constant: u64, elapsed: u64, crossing: Option<u64>) {
        if self.volts.is_none() {
            return;
        }
        let step = (constant / POINTS).max(1);
        let mut instants: Vec<u64> =
            (1..=POINTS * 9).map(|k| k * step).take_while(|&after| after < elapsed).collect();
        instants.extend(crossing);
        instants.push(elapsed);
        instants.sort_unstable();
        instants.dedup();
        let mut level = self.position;
        for after in instants {
            let mut volts = self.clamped(target + decayed(self.volts_uv - target, after, constant));
            if Some(after) == crossing {
                level = level.opposite();
            }
            // Rounding must not put a point on the wrong side of a threshold.
            match level {
                Position::Open => volts = volts.max(self.stage.low_uv + 1),
                Position::Closed => volts = volts.min(self.stage.high_uv - 1),
            }
            if Some(after) == crossing {
                volts = match level {
                    Position::Open => volts.max(self.stage.high_uv),
                    Position::Closed => volts.min(self.stage.low_uv),
                };
            }
            self.note(self.since_ns + after, volts);
        }
    }

    fn note(&mut self, at_ns: u64, volts_uv: i64) {
        let Some(points) = &mut self.volts else { return };
        // Of several voltages at one instant the last counts.
        if points.last().is_some_and(|&(last, _)| last == at_ns) {
            points.pop();
        }
        if points.last().is_none_or(|&(_, before)| before != volts_uv) {
            points.push((at_ns, volts_uv));
        }
    }

    fn constant(&self) -> u64 {
        if self.drive.apart >= 1000 { self.stage.apart_ns } else { self.stage.touching_ns }
    }

    fn target(&self) -> i64 {
        let contact = self.stage.supply_uv / 1000 * i64::from(self.drive.apart);
        let target = contact.saturating_add(self.drive.push_uv);
        // Without a network the source is the input; with one the clamps act behind it.
        if self.constant() == 0 { self.clamped(target) } else { target }
    }

    fn clamped(&self, volts_uv: i64) -> i64 {
        volts_uv.clamp(-self.stage.clamp_uv, self.stage.supply_uv + self.stage.clamp_uv)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const CLOSED: Drive = Drive { apart: 0, push_uv: 0 };
    const OPEN: Drive = Drive { apart: 1000, push_uv: 0 };

    /// The network of a published encoder data sheet (Bourns PEC11H, suggested filter: 10 kOhm pull-up, 10 kOhm
    /// series, 0.01 uF) in front of a 74HC1G14 at 4.5 V (NXP, typical thresholds 1.53 V and 2.36 V): 107.881 us
    /// to the lower threshold at a make, 148.654 us to the upper at a break (computed from the formula).
    #[test]
    fn stage_of_a_data_sheet_crosses_its_thresholds_when_the_formula_says() {
        let stage = InputStage {
            supply_uv: 4_500_000,
            apart_ns: 200_000,
            touching_ns: 100_000,
            low_uv: 1_530_000,
            high_uv: 2_360_000,
            clamp_uv: 500_000,
        };
        let mut input = Running::at_rest(stage, true);
        input.drive(1_000_000, CLOSED);
        input.drive(11_000_000, OPEN);
        input.advance(21_000_000);
        assert_eq!(input.edges, [1_107_881, 11_148_655]);
        let volts = input.volts.unwrap();
        assert!(volts.is_sorted_by(|a, b| a.0 < b.0));
        assert_eq!(volts.iter().find(|point| point.1 <= 1_530_000).unwrap().0, 1_107_881);
    }

    #[test]
    fn stage_without_a_network_follows_at_once_and_keeps_its_level_between_the_thresholds() {
        let mut input = Running::at_rest(InputStage::default(), false);
        for (at, apart) in [(10, 300), (20, 200), (30, 600), (40, 1000)] {
            input.drive(at, Drive { apart, push_uv: 0 });
        }
        assert_eq!(input.edges, [20, 40]);
    }

    #[test]
    fn stage_swallows_a_short_transient_and_passes_a_long_one() {
        let stage = InputStage { apart_ns: 100_000, touching_ns: 100_000, ..InputStage::default() };
        for (width, edges) in [(50, 0), (300_000, 2)] {
            let mut input = Running::at_rest(stage, false);
            input.drive(1_000, Drive { apart: 1000, push_uv: -4_000_000 });
            input.drive(1_000 + width, OPEN);
            input.advance(10_000_000);
            assert_eq!(input.edges.len(), edges, "{width} ns");
        }
    }

    #[test]
    fn stage_is_clamped_so_that_a_kilovolt_does_not_last() {
        let stage = InputStage { apart_ns: 1_000, touching_ns: 1_000, ..InputStage::default() };
        let mut input = Running::at_rest(stage, false);
        input.drive(10, Drive { apart: 1000, push_uv: -1_000_000_000 });
        input.drive(60, OPEN);
        input.advance(1_000_000);
        // 50 ns of 1 kV empty the capacitor; from -0.5 V to 2.0 V of 3.3 V takes 1.073 time constants.
        assert_eq!(input.edges.len(), 2);
        assert!((1_070..1_080).contains(&(input.edges[1] - 60)), "{:?}", input.edges);
    }
}
