//! The best majority register at a tick period. No closed form says that one holds, so each is explored.
//!
//! Many tick periods ask the same: a register forgets what is older than its window, so longer dwells and quiets than
//! [`shortened`] leaves change nothing. What is proved with shorter ones holds with the longer in any case, since they
//! allow more waveforms. And few registers need to be explored: those that a [word](refuted) of the envelope refutes,
//! and those that cannot be quicker than one that holds, are passed over.

use std::sync::Mutex;

use debounce_core::{Change, Envelope, PerChange, Position, Verdict};
use rayon::prelude::*;
use rustc_hash::FxHashMap;

use crate::choose::{Tables, laws_to_try};
use crate::law_text::LawParameters;
use crate::logic::Logic;
use crate::prove::{Contract, Environment, Limits, Outcome, ProveError, prove_in};

/// A law with its worst latency in samples.
pub(super) type Best = Option<(LawParameters, PerChange<u32>)>;

/// The name of the kind.
pub(super) const FAMILY: &str = "majority-register";

/// The widest window that is tried.
const WIDEST: u32 = 16;

/// Less than [`choose`](crate::choose) allows a candidate, since there are hundreds of envelopes and each is shorter.
const LIMITS: Limits = Limits { memory_bytes: 1 << 17, threads: 1 };

/// After so many registers that did not fit into an envelope the others, which are larger, are not tried.
const MOST_UNFINISHED: u32 = 2;

/// What has been explored already.
#[derive(Default)]
pub(super) struct Explored {
    best: Mutex<FxHashMap<Envelope, Best>>,
    tables: Tables,
}

impl Explored {
    /// The best register in each envelope.
    pub(super) fn best(&self, envelopes: &[Option<Envelope>]) -> Vec<Best> {
        let asked: Vec<Option<Envelope>> =
            envelopes.iter().map(|envelope| envelope.map(|envelope| shortened(&envelope))).collect();
        let mut new: Vec<Envelope> = Vec::new();
        {
            let known = self.known();
            new.extend(asked.iter().flatten().filter(|envelope| !known.contains_key(envelope)));
        }
        new.sort_unstable_by_key(|e| {
            (e.bounce.make, e.bounce.break_, e.glitch.open, e.glitch.closed, e.quiet)
        });
        new.dedup();
        let found: Vec<(Envelope, Best)> =
            new.into_par_iter().map(|envelope| (envelope, best(&envelope, &self.tables))).collect();
        let mut known = self.known();
        known.extend(found);
        asked.iter().map(|envelope| known.get(envelope.as_ref()?).copied().flatten()).collect()
    }

    fn known(&self) -> std::sync::MutexGuard<'_, FxHashMap<Envelope, Best>> {
        self.best.lock().expect("no thread panics")
    }
}

/// The same envelope with no more dwell and quiet than a register can tell from more.
fn shortened(envelope: &Envelope) -> Envelope {
    let mut short = envelope.delivered();
    let bounce = short.bounce.make.max(short.bounce.break_);
    let glitch = short.glitch.open.max(short.glitch.closed);
    // One operation with its bounce, a disturbance at each end, and windows between them that hold neither.
    let (dwell, quiet) = (bounce + 2 * glitch + 3 * WIDEST, bounce + glitch + 2 * WIDEST);
    short.dwell.open = short.dwell.open.min(dwell);
    short.dwell.closed = short.dwell.closed.min(dwell);
    // Where nothing disturbs, quiet and calm mean nothing.
    short.quiet = if glitch == 0 { 1 } else { short.quiet.min(quiet) };
    short.calm = if glitch == 0 { 0 } else { short.calm.min(quiet) };
    short
}

/// Longer and shorter of the two worst latencies: the order in which registers are better.
fn merit(worst: PerChange<u32>) -> (u32, u32) {
    (worst.make.max(worst.break_), worst.make.min(worst.break_))
}

fn best(envelope: &Envelope, tables: &Tables) -> Best {
    let allowed = envelope.dwell.open.max(envelope.dwell.closed);
    let mut tried: Vec<(PerChange<u32>, LawParameters, Logic)> = laws_to_try(envelope, allowed)
        .into_iter()
        .filter_map(|law| match law {
            LawParameters::MajorityRegister { majority, .. } => {
                Some((least(envelope, majority.into()), law, Logic::try_new(&law).ok()?))
            }
            _ => None,
        })
        .collect();
    // Stable, so that of equals the narrower window comes first.
    tried.sort_by_key(|(least, ..)| merit(*least));
    let environment = std::cell::OnceCell::new();
    let (mut best, mut unfinished): (Best, u32) = (None, 0);
    for (least, law, logic) in tried {
        if best.is_some_and(|(_, worst)| merit(worst) <= merit(least)) {
            break;
        }
        if matches!(logic.verdict(envelope), Verdict::Fails(_)) || refuted(&logic, law, envelope) {
            continue;
        }
        let environment = environment.get_or_init(|| Environment::within(envelope, &LIMITS).ok());
        let Some(environment) = environment else { return None };
        match explored(&logic, tables, environment, envelope) {
            Ok(Some(worst)) if best.is_none_or(|(_, known)| merit(worst) < merit(known)) => {
                best = Some((law, worst));
            }
            Ok(_) => {}
            Err(_) => unfinished += 1,
        }
        if unfinished == MOST_UNFINISHED {
            break;
        }
    }
    best
}

/// The worst latency of a register at one tick period, where exploring it shows that it holds.
pub(super) fn worst_of(logic: &Logic, envelope: &Envelope) -> Option<PerChange<u32>> {
    let envelope = shortened(envelope);
    let environment = Environment::within(&envelope, &LIMITS).ok()?;
    explored(logic, &Tables::default(), &environment, &envelope).ok()?
}

/// The worst latency of a register that holds; `None` of one that does not.
fn explored(
    logic: &Logic,
    tables: &Tables,
    environment: &Environment,
    envelope: &Envelope,
) -> Result<Option<PerChange<u32>>, ProveError> {
    let table = tables.of(logic);
    let table = table.get().expect("made when it was looked up").as_ref().map_err(Clone::clone)?;
    let proof = prove_in(table, environment, envelope, Contract::Follow, &LIMITS)?;
    Ok(match proof.outcome {
        Outcome::Faithful { bounds, .. } => {
            Some(PerChange { make: bounds.latency.make.worst, break_: bounds.latency.break_.worst })
        }
        Outcome::Refuted { .. } => None,
    })
}

/// No register of that majority has a shorter worst latency: the old position is read while the bounce lasts, then
/// while a disturbance does that follows it at once, or one that straddles the change; then come the majority.
fn least(envelope: &Envelope, majority: u32) -> PerChange<u32> {
    let way = |change: Change| {
        let after = if envelope.calm == 0 { envelope.glitch.at(change.to()) } else { 0 };
        let straddle = envelope.glitch.at(!change.to()).saturating_sub(1);
        (envelope.bounce.at(change) + after).max(straddle) + majority
    };
    PerChange { make: way(Change::Make), break_: way(Change::Break) }
}

/// Whether some waveform of a simple shape makes a register report a change back that never was: perhaps a disturbance,
/// a rest, the change, the new position for as many samples of the bounce as a report needs and the old one for the
/// others, perhaps a disturbance.
fn refuted(logic: &Logic, law: LawParameters, envelope: &Envelope) -> bool {
    let LawParameters::MajorityRegister { majority, window } = law else { return false };
    let majority = u32::from(majority);
    [Change::Make, Change::Break].into_iter().any(|change| {
        let (to, from) = (change.to(), !change.to());
        let (bounce, before) = (envelope.bounce.at(change), envelope.glitch.at(from));
        let after = if envelope.calm == 0 { envelope.glitch.at(to) } else { 0 };
        let with = if before > 0 { vec![0, before] } else { vec![0] };
        with.into_iter().any(|before| {
            (0..=if before > 0 { u32::from(window) } else { 0 }).any(|rest| {
                [majority.saturating_sub(before), majority].into_iter().any(|early| {
                    if early > bounce {
                        return false;
                    }
                    let again = before == 0 || rest + bounce >= envelope.quiet;
                    let back = bounce - early + if again { after } else { 0 };
                    // A word must not outlast the position that it is in.
                    if early + back > envelope.dwell.at(to) {
                        return false;
                    }
                    let runs = [(to, before), (from, rest), (to, early), (from, back)];
                    reports_back(logic, from, &runs)
                })
            })
        })
    })
}

/// Whether the output leaves `from` and comes back to it.
fn reports_back(logic: &Logic, from: Position, runs: &[(Position, u32)]) -> bool {
    let samples: Vec<Position> = runs
        .iter()
        .flat_map(|&(position, samples)| std::iter::repeat_n(position, samples as usize))
        .collect();
    let outputs = logic.outputs(from, &samples);
    outputs.iter().skip_while(|output| **output == from).any(|output| *output == from)
}
