//! The recommended candidate, explored in full.

use debounce_core::{Envelope, PerPosition, Verdict};

use crate::choose::{Candidate, ClockView, Judgement};
use crate::prove::{Beyond, Effort, Limits, Proof, ProveError, prove_within};

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
    /// Immunity, the shortest operations, and how it comes back.
    pub beyond: Beyond,
}

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
        let beyond = Beyond::of(&logic, &proof, Effort::Quick, &limits);
        Ok(Self { envelope, law_states: logic.len(), proof, beyond })
    }

    /// The envelope that was explored, where it is not the one asked for but one that holds all its waveforms.
    #[must_use]
    pub fn explored_wider(&self) -> Option<Envelope> {
        Some(self.proof.envelope).filter(|explored| *explored != self.envelope)
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
