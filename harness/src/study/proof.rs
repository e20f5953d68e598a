//! The recommended candidate, explored in full.

use debounce_core::{Envelope, PerPosition, Position, Verdict};

use crate::choose::{Candidate, ClockView, Judgement};
use crate::prove::{
    LawTable, Limits, Proof, ProveError, Recovery, immunity, prove_within, recovery_from_any_state,
    recovery_from_short_operations, shortest_operations, widest_lone_disturbance,
};

/// What exploration shows of a candidate, beyond its bounds.
#[derive(Clone, PartialEq, Debug)]
pub struct Guarantees {
    /// The envelope in samples.
    pub envelope: Envelope,
    /// The proof, with the slowest waveforms. Its own envelope may be wider than [`envelope`](Self::envelope), see
    /// [`explored_wider`](Self::explored_wider).
    pub proof: Proof,
    /// States of the law.
    pub law_states: usize,
    /// The widest lone disturbance from rest that is never reported, in samples.
    pub lone_disturbance: PerPosition<Option<u32>>,
    /// The widest disturbance that the proof still bears; `None` where the search would take too long.
    pub immunity: Option<PerPosition<Option<u32>>>,
    /// The shortest operations that are always served; empty where the search would take too long.
    pub shortest_operations: Vec<PerPosition<u32>>,
    /// After operations that were too short; `None` where the search would take too long.
    pub after_short_operations: Option<Recovery>,
    /// From any state; `None` where the search would take too long.
    pub from_any_state: Option<Recovery>,
}

/// Searches that repeat the proof many times are made only up to this size, so that a study stays quick.
const REPEATABLE: u64 = 30_000;

impl Guarantees {
    /// Explores a candidate that is known to be faithful.
    ///
    /// # Errors
    /// When the exploration does not fit its limits.
    pub(super) fn of(candidate: &Candidate, view: &ClockView) -> Result<Self, ProveError> {
        let limits = Limits::default();
        let envelope = view.envelope.expect("a candidate was judged in an envelope");
        let logic = candidate.logic.table()?;
        let explored = wider(candidate, envelope);
        let proof = prove_within(&logic, &explored, &limits)?;
        if let Judgement::Faithful { bounds, .. } = candidate.judgement {
            // The closed forms are themselves tested against exploration; this is the last line of defence.
            assert_eq!(
                proof.bounds(),
                Some(bounds),
                "closed form and exploration disagree: please report this"
            );
        }
        let lone = |position| widest_lone_disturbance(&logic, position);
        let mut guarantees = Self {
            envelope,
            law_states: logic.len(),
            lone_disturbance: PerPosition { open: lone(Position::Open), closed: lone(Position::Closed) },
            immunity: None,
            shortest_operations: Vec::new(),
            after_short_operations: None,
            from_any_state: None,
            proof,
        };
        if guarantees.proof.states <= REPEATABLE {
            guarantees.repeat(&logic, &explored, &limits)?;
        }
        Ok(guarantees)
    }

    /// The envelope that was explored, where it is not the one asked for but one that holds all its waveforms.
    #[must_use]
    pub fn explored_wider(&self) -> Option<Envelope> {
        Some(self.proof.envelope).filter(|explored| *explored != self.envelope)
    }

    fn repeat(&mut self, logic: &LawTable, envelope: &Envelope, limits: &Limits) -> Result<(), ProveError> {
        self.immunity = Some(immunity(logic, envelope, limits)?);
        self.shortest_operations = shortest_operations(logic, envelope, limits)?;
        self.after_short_operations = Some(recovery_from_short_operations(logic, envelope, limits)?);
        self.from_any_state = Some(recovery_from_any_state(logic, envelope, limits)?);
        Ok(())
    }
}

/// Environments smaller than about this many states are explored as they are.
const SMALL: u64 = 20_000;

/// An envelope with shorter dwell and quiet, for which the closed form gives the very same bounds.
///
/// It holds every waveform of the given one and more, so what is proved there holds here; and a contact that rests
/// for seconds need not be counted through tick by tick.
fn wider(candidate: &Candidate, envelope: Envelope) -> Envelope {
    let verdict = candidate.logic.verdict(&envelope);
    if !matches!(verdict, Verdict::Holds(_)) {
        return envelope;
    }
    let size = |e: &Envelope| u64::from(e.dwell.open.max(e.dwell.closed)) * u64::from(e.quiet.max(1));
    let mut explored = envelope.delivered();
    while size(&explored) > SMALL {
        let mut shorter = explored.quiet((explored.quiet / 2).max(1));
        if shorter.quiet == explored.quiet || candidate.logic.verdict(&shorter) != verdict {
            shorter = explored;
        }
        let halved = |ticks: u32| (ticks / 2).max(1);
        let mut both = shorter;
        both.dwell = PerPosition { open: halved(shorter.dwell.open), closed: halved(shorter.dwell.closed) };
        if candidate.logic.verdict(&both) == verdict {
            shorter = both;
        }
        if shorter == explored {
            break;
        }
        explored = shorter;
    }
    explored
}
