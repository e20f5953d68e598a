//! Each lane against an obviously correct scalar model, every state and sample; lanes against each other.

extern crate std;

use super::*;
use crate::envelope::Envelope;
use crate::error::{Parameter, ParameterError};
use crate::law::Law;
use crate::machine::{Change, Position};
use proptest::prelude::*;
use std::collections::HashSet;
use std::vec::Vec;

/// One lane, written the slow way: confirm, patience and lock-out of each edge as plain counts.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
struct Scalar {
    output: Position,
    contrary: u16,
    agreeing: u16,
    locked: u16,
}

impl Scalar {
    fn rest(output: Position) -> Self {
        Self { output, contrary: 0, agreeing: 0, locked: 0 }
    }

    fn step(&mut self, make: EdgeRule, break_: EdgeRule, sample: Position) -> Option<Change> {
        if self.locked > 0 {
            self.locked -= 1;
            return None;
        }
        let rule = match self.output {
            Position::Open => make,
            Position::Closed => break_,
        };
        if sample == self.output {
            if self.contrary > 0 {
                self.agreeing += 1;
                if self.agreeing == rule.patience {
                    *self = Self::rest(self.output);
                }
            }
            return None;
        }
        self.agreeing = 0;
        self.contrary += 1;
        if self.contrary < rule.confirm {
            return None;
        }
        *self = Self { locked: rule.lockout, ..Self::rest(sample) };
        Some(sample.reached_by())
    }
}

/// Walks lane and model side by side through every state that can be reached, and returns how many there are.
#[track_caller]
fn lane_equals_scalar<B>(bank: B, make: EdgeRule, break_: EdgeRule) -> usize
where
    B: PortLaw<u8>,
    B::State: core::hash::Hash + core::fmt::Debug,
{
    let lane = Lane::new(bank);
    let mut seen: HashSet<(B::State, Scalar)> =
        Position::BOTH.iter().map(|&p| (lane.rest(p), Scalar::rest(p))).collect();
    let mut open: Vec<_> = seen.iter().copied().collect();
    while let Some((bits, scalar)) = open.pop() {
        for sample in Position::BOTH {
            let (mut bits_after, mut scalar_after) = (bits, scalar);
            let edge = lane.step(&mut bits_after, sample);
            assert_eq!(
                edge,
                scalar_after.step(make, break_, sample),
                "{scalar:?} {sample:?} {make:?} {break_:?}"
            );
            assert_eq!(lane.output(&bits_after), scalar_after.output);
            if seen.insert((bits_after, scalar_after)) {
                open.push((bits_after, scalar_after));
            }
        }
    }
    // Neither side holds more than the other: as many pairs as states of each.
    assert_eq!(seen.len(), seen.iter().map(|(bits, _)| *bits).collect::<HashSet<_>>().len());
    assert_eq!(seen.len(), seen.iter().map(|(_, scalar)| *scalar).collect::<HashSet<_>>().len());
    seen.len()
}

#[test]
fn bank_lane_every_state_and_sample_equals_scalar() {
    #[track_caller]
    fn check<const K: usize>(states: usize) {
        let rule = EdgeRule::new(1 << K);
        assert_eq!(lane_equals_scalar(Bank::<u8, K>::new(0), rule, rule), states);
        assert_eq!(lane_equals_scalar(Bank::<u8, K>::new(0xff), rule, rule), states);
    }
    // Two outputs and 2^K counts.
    check::<1>(4);
    check::<2>(8);
    check::<3>(16);
    check::<4>(32);
    check::<8>(512);
}

#[test]
fn patient_lane_every_state_and_sample_equals_scalar() {
    let rules = |confirms: &[u16], patiences: &[u16], lockouts: &[u16]| -> Vec<EdgeRule> {
        let mut all = Vec::new();
        for &c in confirms {
            for &p in patiences {
                all.extend(lockouts.iter().map(|&l| EdgeRule::new(c).patience(p).lockout(l)));
            }
        }
        all
    };
    let every = rules(&[1, 2, 3, 4], &[1, 2, 3, 4], &[0, 1, 2, 3]);
    for &make in &every {
        for &break_ in &every {
            lane_equals_scalar(PatientBank::<u8, 2, 2, 2>::new(0x0f, make, break_), make, break_);
        }
    }
    let wide = rules(&[1, 7, 8], &[1, 8], &[0, 6, 7]);
    for &make in &wide {
        for &break_ in &wide {
            lane_equals_scalar(PatientBank::<u8, 3, 3, 3>::new(0, make, break_), make, break_);
        }
    }
    // The widths of 0: no patience to speak of, no lock-out, and a confirm of one sample.
    let one = EdgeRule::new(1);
    assert_eq!(lane_equals_scalar(PatientBank::<u8, 0, 0, 0>::new(0, one, one), one, one), 2);
}

#[test]
fn edge_rule_without_confirm_or_patience_is_refused() {
    assert_eq!(EdgeRule::try_new(3, 2, 1), Ok(EdgeRule::new(3).patience(2).lockout(1)));
    assert_eq!(EdgeRule::try_new(1, 1, 0), Ok(EdgeRule::new(1)));
    assert_eq!(EdgeRule::try_new(0, 1, 0), Err(ParameterError::Zero(Parameter::Confirm)));
    assert_eq!(EdgeRule::try_new(1, 0, 0), Err(ParameterError::Zero(Parameter::Patience)));
}

#[test]
fn patient_bank_rule_beyond_widths_is_refused() {
    let fits = EdgeRule::new(4).patience(2).lockout(7);
    let try_make = |rule| PatientBank::<u8, 2, 1, 3>::try_new(0, rule, EdgeRule::new(1)).is_ok();
    let try_break = |rule| PatientBank::<u8, 2, 1, 3>::try_new(0, EdgeRule::new(1), rule).is_ok();
    for (rule, expected) in [
        (fits, true),
        (EdgeRule::new(5), false),
        (EdgeRule::new(4).patience(3), false),
        (EdgeRule::new(4).lockout(8), false),
    ] {
        assert_eq!((try_make(rule), try_break(rule)), (expected, expected), "{rule:?}");
    }
    let refused = PatientBank::<u8, 2, 1, 3>::try_new(0, EdgeRule::new(1), EdgeRule::new(4).lockout(8));
    let parameter = Parameter::LockoutBreak;
    assert_eq!(refused, Err(ParameterError::CountTooNarrow { parameter, ticks: 8, most: 7 }));
}

/// Worst latencies of one lane over every waveform of an envelope with calm 0 and long dwells, by exploring the
/// product of lane and surroundings: the longest path from a change of the contact to its report.
fn worst_latency(bank: PatientBank<u8, 4, 3, 4>, e: Envelope, quiet: u32) -> (u32, u32) {
    #[derive(Clone, Copy, PartialEq, Eq, Hash)]
    struct Around {
        contact: Position,
        bounce: u32,
        // Samples left in the disturbance, else quiet samples still to serve before the next.
        glitch: u32,
        quiet: u32,
        pending: u32,
        settled: u32,
    }
    const DWELL: u32 = 40;
    let lane = Lane::new(bank);
    let (go, gc) = (e.glitch.open, e.glitch.closed);
    let mut worst = (0, 0);
    let mut seen = HashSet::new();
    let mut open: Vec<_> = Position::BOTH
        .iter()
        .map(|&contact| {
            (
                Around { contact, bounce: 0, glitch: 0, quiet: 0, pending: 0, settled: DWELL },
                lane.rest(contact),
            )
        })
        .collect();
    while let Some((around, state)) = open.pop() {
        if !seen.insert((around, state)) {
            continue;
        }
        for change in [false, true] {
            let mut a = around;
            if change {
                if a.settled < DWELL {
                    continue;
                }
                a.contact = !a.contact;
                a.bounce = e.bounce.at(a.contact.reached_by());
                a.settled = 0;
                a.pending = 1;
            } else if a.pending > 0 {
                a.pending += 1;
            }
            let width = if a.contact == Position::Open { go } else { gc };
            for begin in [false, true] {
                let mut a = a;
                if begin {
                    if a.glitch > 0 || a.quiet > 0 || width == 0 {
                        continue;
                    }
                    a.glitch = width;
                }
                for sample in Position::BOTH {
                    let mut a = a;
                    if sample != a.contact && a.bounce == 0 && a.glitch == 0 {
                        continue;
                    }
                    if a.glitch > 0 {
                        a.glitch -= 1;
                        if a.glitch == 0 {
                            a.quiet = quiet;
                        }
                    } else {
                        a.quiet = a.quiet.saturating_sub(1);
                    }
                    a.bounce = a.bounce.saturating_sub(1);
                    a.settled = (a.settled + 1).min(DWELL);
                    let mut next = state;
                    if let Some(edge) = lane.step(&mut next, sample) {
                        assert!(a.pending > 0 && edge.to() == a.contact, "false edge");
                        match edge {
                            Change::Make => worst.0 = worst.0.max(a.pending),
                            Change::Break => worst.1 = worst.1.max(a.pending),
                        }
                        a.pending = 0;
                    }
                    assert!(a.pending < DWELL, "missed");
                    open.push((a, next));
                }
            }
        }
    }
    worst
}

#[test]
fn patient_bank_in_envelope_reaches_limit() {
    for (bounce_make, bounce_break, go, gc) in
        [(0, 0, 0, 0), (4, 2, 0, 0), (3, 1, 1, 1), (2, 4, 1, 0), (3, 2, 0, 2), (0, 1, 2, 1)]
    {
        let quiet = u32::max(go, gc) + 1;
        let e = Envelope::clean(40, 40).bounce(bounce_make, bounce_break).glitch(go, gc).quiet(quiet);
        let rule = |confirm: u32, patience: u32, bounce: u32| {
            let [c, p, l] = [confirm, patience, bounce.saturating_sub(1)].map(|n| u16::try_from(n).unwrap());
            EdgeRule::new(c).patience(p).lockout(l)
        };
        let bank = PatientBank::new(0, rule(go + 1, gc + 1, bounce_make), rule(gc + 1, go + 1, bounce_break));
        let limit = e.limit().unwrap();
        assert_eq!(worst_latency(bank, e, quiet), (limit.make, limit.break_), "{e:?}");
    }
}

/// Feeds the same samples to a wide bank and, lane by lane, to the lowest lane of a narrow one.
fn lanes_are_independent<W: Word, B: PortLaw<W>, N: PortLaw<u8>>(
    bank: B,
    narrow: N,
    start: u64,
    samples: &[u64],
    word: impl Fn(u64) -> W,
) -> Result<(), TestCaseError> {
    let lane = Lane::new(narrow);
    let mut state = bank.at_rest(word(start));
    let mut lanes: Vec<_> =
        (0..W::LANES).map(|i| lane.rest(Position::closed_if(start >> i & 1 == 1))).collect();
    for &sample in samples {
        let changes = bank.step(&mut state, bank.looks_closed(word(sample)));
        for (i, own) in (0u32..).zip(&mut lanes) {
            let edge = lane.step(own, Position::closed_if(sample >> i & 1 == 1));
            let bit = W::lane(i);
            prop_assert_eq!(edge == Some(Change::Make), changes.make & bit != W::NONE);
            prop_assert_eq!(edge == Some(Change::Break), changes.break_ & bit != W::NONE);
            prop_assert_eq!(lane.output(own).is_closed(), bank.outputs(&state) & bit != W::NONE);
        }
    }
    Ok(())
}

/// Port readings in which each lane holds for a while: random words, of which few bits change from tick to tick.
fn readings() -> impl Strategy<Value = Vec<u64>> {
    prop::collection::vec((any::<u64>(), any::<u64>(), any::<bool>()), 1..60).prop_map(|steps| {
        let mut word = 0;
        steps
            .into_iter()
            .map(|(a, b, busy)| {
                word ^= if busy { a & b } else { a & b & a.rotate_left(7) & b.rotate_left(13) };
                word
            })
            .collect()
    })
}

proptest! {
    #[test]
    fn bank_lanes_mixed_input_stay_independent(start in any::<u64>(), inverted in any::<u64>(), s in readings()) {
        let narrow = Bank::<u8, 2>::new(0);
        lanes_are_independent(Bank::<u8, 2>::new(inverted as u8), narrow, start, &s, |w| w as u8)?;
        lanes_are_independent(Bank::<u16, 2>::new(inverted as u16), narrow, start, &s, |w| w as u16)?;
        lanes_are_independent(Bank::<u32, 2>::new(inverted as u32), narrow, start, &s, |w| w as u32)?;
        lanes_are_independent(Bank::<u64, 2>::new(inverted), narrow, start, &s, |w| w)?;
        lanes_are_independent(Bank::<u64, 3>::new(inverted), Bank::<u8, 3>::new(0), start, &s, |w| w)?;
    }

    #[test]
    fn patient_lanes_mixed_input_stay_independent(start in any::<u64>(), inverted in any::<u64>(), s in readings()) {
        let (make, break_) = (EdgeRule::new(2).patience(2).lockout(3), EdgeRule::new(3).lockout(1));
        let narrow = PatientBank::<u8, 2, 1, 2>::new(0, make, break_);
        let wide = PatientBank::<u64, 2, 1, 2>::new(inverted, make, break_);
        lanes_are_independent(wide, narrow, start, &s, |w| w)?;
        let wide = PatientBank::<u16, 2, 1, 2>::new(inverted as u16, make, break_);
        lanes_are_independent(wide, narrow, start, &s, |w| w as u16)?;
    }
}

/// An outside check on the idea of planes: the published step and its worked example.
/// Source: "vertical counter", everything2, 2001.
#[test]
fn vertical_counter_published_step_gives_published_counts() {
    let (mut a, mut b, mut c) = (0b0110_0011u8, 0b0001_0111u8, 0b1010_1001u8);
    let count = |a: u8, b: u8, c: u8, lane: u32| (a >> lane & 1) * 4 + (b >> lane & 1) * 2 + (c >> lane & 1);
    let counts = |a, b, c| core::array::from_fn(|i| count(a, b, c, u32::try_from(i).unwrap()));
    let before: [u8; 8] = counts(a, b, c);
    // The published lanes are written from the lowest bit up.
    assert_eq!(before, [7, 6, 2, 1, 2, 5, 4, 1]);
    let d = 0b1001_1000u8;
    a ^= b & c & d;
    b ^= c & d;
    c ^= d;
    assert_eq!((a, b, c), (0b0110_0011, 0b1001_1111, 0b0011_0001));
    let after: [u8; 8] = counts(a, b, c);
    assert_eq!(after, [7, 6, 2, 2, 3, 5, 4, 2]);
    // And our own increment, in the mode that neither wraps nor clears, agrees with it on the same planes.
    let mut planes = [0b1010_1001u8, 0b0001_0111, 0b0110_0011];
    patient::add_one(&mut planes, d, u8::ALL);
    assert_eq!(planes, [c, b, a]);
}

/// Every history of one lane up to `ticks` samples through a start.
#[test]
fn starting_bank_every_history_reports_initial_once() {
    let bank = StartingBank::<Bank<u8, 1>, 2>::new(Bank::new(1));
    for ticks in 1..=10u32 {
        for history in 0..1u32 << ticks {
            let mut state = bank.power_up::<u8>();
            let (mut row, mut last, mut known, mut initials) = (0, None, false, 0);
            for tick in 0..ticks {
                let closed = history >> tick & 1;
                let started = bank.step(&mut state, u8::try_from(closed ^ 1).unwrap());
                row = if last == Some(closed) { row + 1 } else { 1 };
                last = Some(closed);
                let due = !known && row == 4;
                assert_eq!(started.initial & 1 == 1, due, "{history:b} at {tick}");
                if !known {
                    assert_eq!(started.changes.any() & 1, 0, "an operation was invented: {history:b}");
                }
                if due {
                    known = true;
                    initials += 1;
                    assert_eq!(u32::from(Bank::<u8, 1>::new(1).closed(state.inner()) & 1), closed);
                }
                assert_eq!(state.waiting() & 1 == 0, known);
            }
            assert!(initials <= 1);
        }
    }
}

#[test]
fn bank_settled_means_a_tick_changes_nothing() {
    let bank = Bank::<u8, 2>::new(0b11);
    let patient = PatientBank::<u8, 1, 1, 2>::new(
        0b11,
        EdgeRule::new(2).patience(2).lockout(2),
        EdgeRule::new(1).lockout(3),
    );
    let mut state = bank.all_open();
    let mut patient_state = patient.all_open();
    let mut settled = 0;
    for tick in 0..4096u32 {
        // A walk that rests now and then.
        let port = (tick.wrapping_mul(2_654_435_761) >> 28 & if tick & 64 == 0 { 3 } else { 0 }) as u8;
        let mut next = state;
        let still = bank.step(&mut next, port).is_none() && next == state;
        assert_eq!(bank.is_settled(&state, port), still);
        settled += u32::from(still);
        state = next;
        let mut next = patient_state;
        let still = patient.step(&mut next, port).is_none() && next == patient_state;
        assert_eq!(patient.is_settled(&patient_state, port), still);
        patient_state = next;
    }
    assert!(settled > 1000 && settled < 4000);
}

#[test]
fn bank_lost_ticks_delay_but_never_make_an_edge() {
    let bank = Bank::<u8, 2>::new(0);
    // A glitch of 3 samples stays one with any of its ticks lost; a make is late by as many ticks as it loses.
    for lost in 0u32..64 {
        let mut state = bank.all_open();
        let mut made_at = Vec::new();
        for tick in 0..40u32 {
            if (tick < 6 && lost >> tick & 1 == 1) || (tick >= 20 && lost >> (tick - 20).min(31) & 1 == 1) {
                continue;
            }
            let closed = (1..4).contains(&tick) || tick >= 20;
            if bank.step(&mut state, u8::from(closed)).make & 1 == 1 {
                made_at.push(tick);
            }
        }
        let fourth = (20..).filter(|t| lost >> (t - 20).min(31) & 1 == 0).nth(3).unwrap();
        assert_eq!(made_at, [fourth], "{lost:b}");
    }
}
