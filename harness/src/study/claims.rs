//! What the recordings allow to claim, and which claim the design stands on.

use debounce_core::{Change, PerChange};

use super::{Extreme, Observed, measured, pooled};
use crate::characterise::tolerance::{self, ToleranceError};
use crate::characterise::{Claim, Figures};
use crate::quantity::{Share, Time};
use crate::requirement::{Origin, Resolved, Sourced};

/// What all recordings together allow to claim.
#[derive(Clone, PartialEq, Debug)]
pub struct Claims {
    /// All recordings as one.
    pub pooled: Figures,
    /// How sure a claim is.
    pub confidence: Share,
    /// Which share of all operations a claim is to cover.
    pub coverage: Share,
    /// The claim about the bounce after each change; `None` where none was recorded whole.
    pub bounce: PerChange<Option<Claim>>,
    /// What is taken for the bounce in the envelope.
    pub design: PerChange<DesignBounce>,
    /// What stands behind the other figures: shortest times, widest disturbances, quiet.
    pub extremes: Vec<Extreme>,
}

/// The bounce that the choice is made for, and what is claimed of it.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct DesignBounce {
    /// The bounce in the envelope.
    pub ns: u64,
    /// Where it comes from: the longest recorded with the margin added, a stated one, or a default.
    pub origin: Origin,
    /// The bounce of the contact that it was worked out from, where a network stands in front of the pin at which it
    /// was recorded.
    pub of_contact: Option<Sourced<Time>>,
    /// The margin that was added to the longest recorded; `None` where the figure was not measured.
    pub margin: Option<Share>,
    /// Bounces recorded, and how many of them may be longer than the design.
    pub recorded: u64,
    /// See [`recorded`](Self::recorded).
    pub longer: u64,
    /// With the confidence asked for, at least this share of all operations bounces no longer than the design, by the
    /// operations recorded and without counting on the margin; `None` where there is none.
    pub covered: Option<f64>,
}

impl Claims {
    /// The claims of `observed`, at the confidence and coverage of `resolved`.
    ///
    /// # Errors
    /// When confidence or coverage is not strictly between 0 and 1.
    pub fn of(observed: &[Observed], resolved: &Resolved) -> Result<Self, ToleranceError> {
        let pooled = pooled(observed);
        let behind = !observed.is_empty() && observed.iter().all(Observed::is_behind_network);
        let confidence = tolerance::Share::try_new(resolved.confidence.value.fraction())?;
        let coverage = tolerance::Share::try_new(resolved.coverage.value.fraction())?;
        let safe = |change| &pooled.changes.of(change).sorted_safe_bounces_ns;
        let claim = |change| Claim::of_sorted(safe(change), coverage, confidence);
        let design = |change| DesignBounce::of(safe(change), resolved, change, behind, confidence);
        let bounce = PerChange { make: claim(Change::Make)?, break_: claim(Change::Break)? };
        let design = PerChange { make: design(Change::Make)?, break_: design(Change::Break)? };
        Ok(Self {
            confidence: resolved.confidence.value,
            coverage: resolved.coverage.value,
            bounce,
            design,
            extremes: Extreme::all(&measured(observed), resolved, coverage, confidence)?,
            pooled,
        })
    }

    /// Whether every kind of change that was recorded reaches the wanted coverage.
    #[must_use]
    pub fn are_reached(&self) -> bool {
        [self.bounce.make, self.bounce.break_].iter().flatten().all(|claim| claim.limit.is_some())
    }
}

impl DesignBounce {
    fn of(
        safe_bounces_ns: &[u64],
        resolved: &Resolved,
        change: Change,
        behind: bool,
        confidence: tolerance::Share,
    ) -> Result<Self, ToleranceError> {
        let taken = resolved.required.bounce.at(change);
        // What was recorded behind the network is to be held against what the network makes of the contact.
        let (ns, origin, of_contact) = match &resolved.network {
            Some(front) if behind => {
                (front.at_pin.physical.bounce_ns.at(change), Origin::Network, Some(taken))
            }
            _ => (taken.value.ns(), taken.origin, None),
        };
        let recorded = safe_bounces_ns.len() as u64;
        let longer = recorded - safe_bounces_ns.partition_point(|&bounce| bounce <= ns) as u64;
        let covered = match longer < recorded {
            true => Some(tolerance::coverage(recorded, longer + 1, confidence)?),
            false => None,
        };
        let margin = (origin == Origin::Measured).then_some(resolved.margin.value);
        Ok(Self { ns, origin, of_contact, margin, recorded, longer, covered })
    }
}
