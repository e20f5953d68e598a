//! Which laws are tried in an envelope: each law over the parameters that can make sense there.

use debounce_core::{Envelope, PerChange};

use crate::law_text::LawParameters;

/// All candidates for an envelope. `allowed` is the longest latency, in samples, that could still be accepted:
/// a law that needs more samples than that for a clean change is not tried.
pub(crate) fn laws(envelope: &Envelope, allowed: u32) -> Vec<LawParameters> {
    let allowed = allowed.min(u32::from(u16::MAX)) as u16;
    let mut laws = Vec::new();
    shift_registers(allowed, &mut laws);
    integrators(allowed, &mut laws);
    majority_registers(allowed, &mut laws);
    state_machines(envelope, allowed, &mut laws);
    laws
}

fn shift_registers(allowed: u16, laws: &mut Vec<LawParameters>) {
    // At most 64, the widest window there is.
    laws.extend((1..=allowed.min(64)).map(|window| LawParameters::ShiftRegister { window: window as u8 }));
}

fn integrators(allowed: u16, laws: &mut Vec<LawParameters>) {
    for full_scale in spread(allowed) {
        for (up, down) in [(1, 1), (1, 2), (2, 1), (1, 3), (3, 1)] {
            if up <= full_scale && down <= full_scale {
                laws.push(LawParameters::Integrator { full_scale, up, down });
            }
        }
    }
}

fn majority_registers(allowed: u16, laws: &mut Vec<LawParameters>) {
    for window in (2..=16_u8).filter(|&window| u16::from(window) / 2 < allowed) {
        let least = window / 2 + 1;
        // A unanimous window is the shift register. The tables of wide windows are large, so of these only the
        // majorities near to half, near to all and half-way between are tried.
        let mut majorities: Vec<u8> = if window <= 12 {
            (least..window).collect()
        } else {
            vec![least, (3 * window).div_ceil(4), window - 1]
        };
        majorities.retain(|&majority| majority >= least && majority < window);
        majorities.dedup();
        laws.extend(
            majorities.into_iter().map(|majority| LawParameters::MajorityRegister { majority, window }),
        );
    }
}

/// The textbook machine and the one that reaches the limit, each with the lock-outs and confirm counts around
/// what the envelope asks for.
fn state_machines(envelope: &Envelope, allowed: u16, laws: &mut Vec<LawParameters>) {
    let narrow = |ticks: u32| u16::try_from(ticks).unwrap_or(u16::MAX);
    let glitch = PerChange { make: narrow(envelope.glitch.open), break_: narrow(envelope.glitch.closed) };
    let bounce = PerChange { make: narrow(envelope.bounce.make), break_: narrow(envelope.bounce.break_) };
    let apart = |make: u16, break_: u16| PerChange { make, break_ };
    for more in 0..=7_u16 {
        let confirm = apart(glitch.make.saturating_add(1 + more), glitch.break_.saturating_add(1 + more));
        if confirm.make.min(confirm.break_) > allowed {
            continue;
        }
        let clears = apart(glitch.break_.saturating_add(1), glitch.make.saturating_add(1));
        let between = apart(clears.make.div_ceil(2), clears.break_.div_ceil(2));
        let mut patiences = vec![apart(1, 1), between, clears];
        patiences.dedup();
        for patience in patiences {
            let least = |b: u16, k: u16| b.saturating_sub(k - 1);
            let mut lockouts = vec![
                apart(0, 0),
                apart(least(bounce.make, confirm.make), least(bounce.break_, confirm.break_)),
                apart(bounce.make.saturating_sub(1), bounce.break_.saturating_sub(1)),
                bounce,
                apart(bounce.make.saturating_add(glitch.break_), bounce.break_.saturating_add(glitch.make)),
            ];
            lockouts.sort_unstable_by_key(|lockout| (lockout.make, lockout.break_));
            lockouts.dedup();
            laws.extend(lockouts.into_iter().map(|lockout| LawParameters::StateMachine {
                confirm,
                patience,
                lockout,
            }));
        }
    }
}

/// Every number up to 32, then about twelve to the doubling, up to `most`.
fn spread(most: u16) -> impl Iterator<Item = u16> {
    core::iter::successors(Some(1_u16), |&at| at.checked_add((at / 12).max(1)))
        .take_while(move |&at| at <= most)
}
