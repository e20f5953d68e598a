//! Whether any machine has come to rest: [`is_still`].

use crate::machine::Machine;

/// Whether a step with `input` would leave `state` as it is: the machine has settled there.
///
/// While it has, and the input stays, every further tick would be the same again: the tick may be stopped without loss.
/// It must go on as soon as the input is another one; wait for the *level* and not for an edge, so that a change before
/// the wait is armed is not lost.
///
/// A machine that counts ticks all the time, such as [`Speed`](crate::Speed), never comes to rest; one that measures
/// times, such as [`PulseCounter`](crate::PulseCounter), does so when its counts are at their end.
///
/// # Examples
/// ```
/// use debounce_core::{Machine, Phases, Quadrature, Resolution, is_still};
/// const KNOB: Quadrature = Quadrature::new(Resolution::X4);
/// let mut state = Quadrature::POWER_UP;
/// assert!(!is_still(&KNOB, &state, Phases::CYCLE[2]));
/// let _ = KNOB.step(&mut state, Phases::CYCLE[2]);
/// assert!(is_still(&KNOB, &state, Phases::CYCLE[2]));
/// assert!(!is_still(&KNOB, &state, Phases::CYCLE[3]));
/// ```
#[must_use]
#[inline]
pub fn is_still<M: Machine>(machine: &M, state: &M::State, input: M::Input) -> bool {
    let mut next = *state;
    let _ = machine.step(&mut next, input);
    next == *state
}

#[cfg(test)]
mod tests {
    extern crate std;

    use super::*;
    use crate::{
        Bank, Bursts, Changeover, ContactPair, Detents, EdgeRule, Envelope, Gesture, GestureTicks, KeyDiodes,
        LanesStarted, Matrix, MatrixReport, Monitor, PairKind, PairPositions, PatientBank, Phases, Position,
        PulseCounter, PulseLimits, Quadrature, Resolution, RestPhases, StartingBank, Throws,
    };
    use std::vec::Vec;

    /// Every row of inputs up to `length`, once ticked throughout and once with the tick stopped whenever the machine
    /// is still and the input stays: what comes out while not still must be the same, and no change of state is missed.
    #[track_caller]
    fn sleeps_without_loss<M>(
        machine: M,
        power_up: M::State,
        inputs: &[M::Input],
        length: u32,
        nothing: M::Output,
    ) where
        M: Machine,
        M::Input: PartialEq,
        M::Output: PartialEq + core::fmt::Debug,
        M::State: core::fmt::Debug,
    {
        let mut slept = 0u32;
        for code in 0..inputs.len().pow(length) {
            let row: Vec<_> =
                (0..length).map(|i| inputs[code / inputs.len().pow(i) % inputs.len()]).collect();
            let (mut awake, mut sleeper) = (power_up, power_up);
            for &input in &row {
                let still = is_still(&machine, &sleeper, input);
                let output = machine.step(&mut awake, input);
                if still {
                    // The sleeper takes no tick here, and would have had nothing to report.
                    assert_eq!(output, nothing);
                    slept += 1;
                } else {
                    assert_eq!(machine.step(&mut sleeper, input), output);
                }
                assert_eq!(awake, sleeper);
            }
        }
        assert!(slept > 0, "never slept");
    }

    #[test]
    fn every_machine_asleep_while_still_loses_nothing() {
        let ports: Vec<u8> = (0..4).collect();
        let bank = Bank::<u8, 1>::new(0b10);
        sleeps_without_loss(bank, bank.all_open(), &ports, 8, crate::Changes::NONE);
        let patient = PatientBank::<u8, 1, 1, 2>::new(
            0b01,
            EdgeRule::new(2).patience(2).lockout(1),
            EdgeRule::new(1).lockout(2),
        );
        sleeps_without_loss(patient, patient.all_open(), &ports, 8, crate::Changes::NONE);
        let starting = StartingBank::<_, 1>::new(bank);
        let nothing = LanesStarted { initial: 0, changes: crate::Changes::NONE };
        sleeps_without_loss(starting, starting.power_up(), &ports, 8, nothing);
        let pad = Matrix::<u8, 2, 1>::new(KeyDiodes::None);
        let scans: Vec<[u8; 2]> = ports.iter().map(|&row| [row, 0b11]).collect();
        let nothing = MatrixReport { rows: [nothing; 2], doubtful: [0; 2] };
        for scan in &scans {
            // Ghosts are told at every scan, so a pad with some in it has something to report.
            assert_eq!(pad.step(&mut pad.power_up(), *scan).doubtful[0] != 0, scan[0] == 0b11);
        }
        sleeps_without_loss(pad, pad.power_up(), &scans[..3], 8, nothing);
        let monitor = Monitor::new(&Envelope::clean(3, 3).bounce(1, 1));
        sleeps_without_loss(monitor, monitor.power_up(), &Position::BOTH, 14, None);
        let report = crate::ChangeoverReport::default();
        sleeps_without_loss(Changeover::new(1, 0), Changeover::POWER_UP, &Throws::ALL, 8, report);
        let times = GestureTicks { gap: 2, hold: 3, repeat: 0, most_taps: 2 };
        sleeps_without_loss(Gesture::new(times), Gesture::POWER_UP, &Position::BOTH, 14, None);
        for resolution in [Resolution::X1, Resolution::X2, Resolution::X4] {
            sleeps_without_loss(Quadrature::new(resolution), Quadrature::POWER_UP, &Phases::CYCLE, 7, None);
        }
        sleeps_without_loss(Detents::new(RestPhases::BothAlike), Detents::POWER_UP, &Phases::CYCLE, 8, None);
        sleeps_without_loss(Bursts::new(2), Bursts::POWER_UP, &Position::BOTH, 14, None);
        let pairs =
            Position::BOTH.map(|first| Position::BOTH.map(|second| PairPositions { first, second })).concat();
        let pair = ContactPair::new(PairKind::Antivalent, 1);
        sleeps_without_loss(pair, ContactPair::POWER_UP, &pairs, 8, crate::PairReport::default());
    }

    #[test]
    fn pulse_counter_comes_to_rest_when_its_counts_are_at_their_end() {
        let counter =
            PulseCounter::new(PulseLimits { shortest_closed: 1, longest_closed: 5, shortest_open: 1 });
        let mut state = PulseCounter::POWER_UP;
        for position in [Position::Open, Position::Closed, Position::Open] {
            let _ = counter.step(&mut state, position);
        }
        let ticks = (0..70_000).take_while(|_| {
            let still = is_still(&counter, &state, Position::Open);
            let _ = counter.step(&mut state, Position::Open);
            !still
        });
        assert_eq!(ticks.count(), 65_534);
    }
}
