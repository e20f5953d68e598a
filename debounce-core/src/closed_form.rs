//! The closed forms behind `verdict`, in one place. Their proofs are the text of [`proofs::verdict`](crate::proofs::verdict),
//! which names the conditions in the order in which they stand here.

use crate::envelope::{Bounds, Clause, Envelope, Latency, PerChange, Verdict};
use crate::machine::Change;

/// One change of the contact as a closed form sees it: names are those of a make, a break is the mirror image.
#[derive(Clone, Copy)]
struct Way {
    /// Longest bounce after the change.
    bounce: u64,
    /// Widest disturbance begun before the change, and after it.
    before: u64,
    after: u64,
    quiet: u64,
    calm: u64,
    /// Shortest hold of the position that the change leads to.
    dwell: u64,
}

impl Way {
    const fn of(e: &Envelope, change: Change) -> Self {
        let from = change.to().opposite();
        Self {
            bounce: e.bounce.at(change) as u64,
            before: e.glitch.at(from) as u64,
            after: e.glitch.at(change.to()) as u64,
            // Quiet 0 occurs only without disturbances, where nothing depends on it; so no division by it can fail.
            quiet: if e.quiet == 0 { 1 } else { e.quiet as u64 },
            calm: e.calm as u64,
            dwell: e.dwell.at(change.to()) as u64,
        }
    }
}

/// A count of contrary samples with confirm, patience and lock-out: the state machine, and the unanimous window.
#[derive(Clone, Copy)]
pub(crate) struct Counting {
    pub(crate) confirm: PerChange<u32>,
    pub(crate) patience: PerChange<u32>,
    pub(crate) lockout: PerChange<u32>,
}

impl Counting {
    pub(crate) const fn verdict(&self, envelope: &Envelope) -> Verdict {
        match sound(envelope) {
            Ok(e) => both(self.one_way(&e, Change::Make), self.one_way(&e, Change::Break)),
            Err(clause) => Verdict::Fails(clause),
        }
    }

    const fn one_way(&self, e: &Envelope, change: Change) -> Result<Latency, Verdict> {
        let way = Way::of(e, change);
        let back = change.to().opposite().reached_by();
        let confirm = self.confirm.at(change) as u64;
        let patience = self.patience.at(change) as u64;
        let lockout = self.lockout.at(change) as u64;
        let back_confirm = self.confirm.at(back) as u64;
        let back_patience = self.patience.at(back) as u64;
        if way.before > 0 && (confirm <= way.before || patience > way.quiet) {
            return Err(Verdict::Fails(Clause::FalseEdge));
        }
        // Contrary samples that the bounce still has for a report back, after a report as early as can be.
        let unaided = way.bounce.saturating_sub(confirm + lockout);
        let aided = way.bounce.saturating_sub(confirm - way.before + lockout);
        let in_reach = way.after > 0 && (way.calm == 0 || way.calm < back_patience);
        let again = patience - 1 + way.bounce + back_patience > way.quiet;
        let most_unaided = unaided + if unaided > 0 && in_reach { way.after } else { 0 };
        let most_aided = aided + if aided > 0 && in_reach && again { way.after } else { 0 };
        if most_unaided >= back_confirm || most_aided >= back_confirm {
            return Err(Verdict::Fails(Clause::FalseEdge));
        }
        let disturbed = way.after > 0 && way.calm < confirm;
        let clears = disturbed && patience <= way.after;
        if clears && way.quiet < confirm {
            return Err(Verdict::Fails(Clause::Missed));
        }
        let straddle = way.before.saturating_sub(1);
        let from_bounce = if clears {
            way.bounce + confirm - 1 + way.after
        } else if disturbed {
            way.bounce + way.after * (1 + quotient(confirm - 1 - way.calm, way.quiet))
        } else {
            way.bounce
        };
        let first = if way.calm > way.quiet { way.calm } else { way.quiet };
        let from_straddle = if way.after > 0 && confirm > first {
            straddle + way.after * (1 + quotient(confirm - 1 - first, way.quiet))
        } else {
            straddle
        };
        let worst = confirm + if from_bounce > from_straddle { from_bounce } else { from_straddle };
        let settled = worst + lockout;
        let cleared = way.bounce + way.after + 2 * back_patience;
        if way.dwell < settled || way.dwell < cleared || worst > u32::MAX as u64 {
            return Err(Verdict::Unknown);
        }
        Ok(Latency { best: (confirm - way.before) as u32, worst: worst as u32 })
    }
}

/// A majority of a window: one disturbance as wide as the majority is reported; more is not known in closed form.
pub(crate) const fn majority(majority: u32, envelope: &Envelope) -> Verdict {
    match sound(envelope) {
        Ok(e) if e.glitch.open >= majority || e.glitch.closed >= majority => {
            Verdict::Fails(Clause::FalseEdge)
        }
        Ok(_) => Verdict::Unknown,
        Err(clause) => Verdict::Fails(clause),
    }
}

/// The verdict on a law from what is known of its two changes.
const fn both(make: Result<Latency, Verdict>, break_: Result<Latency, Verdict>) -> Verdict {
    match (make, break_) {
        (Ok(make), Ok(break_)) => Verdict::Holds(Bounds { latency: PerChange { make, break_ } }),
        (Err(verdict), _) | (Ok(_), Err(verdict)) => verdict,
    }
}

/// The envelope in delivered samples, if any logic could serve it.
const fn sound(envelope: &Envelope) -> Result<Envelope, Clause> {
    let e = envelope.delivered();
    if e.dwell.open == 0 || e.dwell.closed == 0 {
        return Err(Clause::DwellUnseen);
    }
    if e.quiet == 0 && (e.glitch.open > 0 || e.glitch.closed > 0) {
        return Err(Clause::NoQuiet);
    }
    Ok(e)
}

/// A saturating up/down count with both ends as thresholds.
#[derive(Clone, Copy)]
pub(crate) struct UpDown {
    pub(crate) full_scale: u32,
    /// What a sample that agrees with the position reached adds, and what a contrary one takes.
    pub(crate) step: PerChange<u32>,
}

impl UpDown {
    pub(crate) const fn verdict(&self, envelope: &Envelope) -> Verdict {
        match sound(envelope) {
            Ok(e) => both(self.one_way(&e, Change::Make), self.one_way(&e, Change::Break)),
            Err(clause) => Verdict::Fails(clause),
        }
    }

    const fn one_way(&self, e: &Envelope, change: Change) -> Result<Latency, Verdict> {
        let way = Way::of(e, change);
        let full = self.full_scale as u64;
        let toward = self.step.at(change) as u64;
        let back = self.step.at(change.to().opposite().reached_by()) as u64;
        let climb = rounded_up(full, toward);
        if way.before > 0 && (way.before * toward >= full || way.quiet * back < way.before * toward) {
            return Err(Verdict::Fails(Clause::FalseEdge));
        }
        if self.can_fall_back(&way, toward, back) {
            return Err(Verdict::Fails(Clause::FalseEdge));
        }
        let disturbed = way.after > 0 && way.calm < climb;
        let lost = way.after * back;
        if disturbed && way.quiet * toward < full {
            // Between two disturbances the count does not get through; it may still gain a little each time.
            return Err(if way.quiet * toward <= lost {
                Verdict::Fails(Clause::Missed)
            } else {
                Verdict::Unknown
            });
        }
        if way.after > 0 && way.quiet * toward < lost {
            // The mirror image of the first failure: disturbances add up to a report back.
            return Err(Verdict::Fails(Clause::FalseEdge));
        }
        let straddle = way.before.saturating_sub(1);
        let from_bounce = if disturbed {
            let reached = (climb - 1) * toward;
            let left = reached.saturating_sub(lost);
            way.bounce + climb - 1 + way.after + rounded_up(full - left, toward)
        } else {
            way.bounce + climb
        };
        let from_straddle = straddle + climb;
        let worst = if from_bounce > from_straddle { from_bounce } else { from_straddle };
        if way.after > 0 && way.quiet * toward == lost {
            return Err(Verdict::Unknown);
        }
        // What the bounce left of a count must be gone before the next change.
        let melts = if way.after == 0 {
            climb
        } else {
            (rounded_up(full, way.quiet * toward - lost) + 1) * (way.quiet + way.after)
        };
        let cleared = way.bounce + way.after + melts;
        if way.dwell < worst || way.dwell < cleared || worst > u32::MAX as u64 {
            return Err(Verdict::Unknown);
        }
        Ok(Latency { best: (climb - way.before) as u32, worst: worst as u32 })
    }

    /// Whether what the bounce still has after the earliest report, with a disturbance behind it, counts all
    /// the way back.
    const fn can_fall_back(&self, way: &Way, toward: u64, back: u64) -> bool {
        let full = self.full_scale as u64;
        let climb = rounded_up(full, toward);
        let unaided = way.bounce.saturating_sub(climb) * back;
        if unaided >= full || with_disturbance(unaided, way.calm * toward, way.after * back) >= full {
            return true;
        }
        // A disturbance before the change gives the count a start; the next must wait for quiet, part of which
        // may pass before the change (the start melts) or after the bounce (the count back melts).
        let mut ahead = 0;
        while ahead * back <= way.before * toward {
            let start = way.before * toward - ahead * back;
            let rest = way.bounce.saturating_sub(rounded_up(full - start, toward)) * back;
            let wait = way.quiet.saturating_sub(ahead + way.bounce);
            let wait = if wait > way.calm { wait } else { way.calm };
            if rest >= full || with_disturbance(rest, wait * toward, way.after * back) >= full {
                return true;
            }
            ahead += 1;
        }
        false
    }
}

/// A count that melts and is then added to; a count that has melted away entirely adds nothing.
const fn with_disturbance(count: u64, melts: u64, adds: u64) -> u64 {
    count.saturating_sub(melts) + adds
}

// No divisor is ever 0: quiet, steps and what is left of a stretch of quiet were looked at before. The compiler does
// not see that everywhere; asking it this way links no panic, in firmware that judges an envelope at run time.

const fn quotient(a: u64, b: u64) -> u64 {
    match a.checked_div(b) {
        Some(quotient) => quotient,
        None => u64::MAX,
    }
}

const fn rounded_up(a: u64, b: u64) -> u64 {
    match a.checked_rem(b) {
        Some(0) | None => quotient(a, b),
        Some(_) => quotient(a, b) + 1,
    }
}
