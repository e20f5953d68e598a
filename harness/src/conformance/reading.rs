//! One reading of a recording: what each edge is taken for, and what that costs.

use debounce_core::{Change, Position};

use super::{BrokenClause, Conformance, DoubtfulDisturbance, Search, Violation};
use crate::envelope::PhysicalEnvelope;
use crate::trace::Trace;

/// What an edge, and the run after it, is taken for.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Role {
    /// The line comes back to where the contact is.
    Return,
    /// The contact changes.
    Change,
    /// The line leaves the contact in its bounce.
    Bounce,
    /// The line leaves the contact in the disturbance that is still going on.
    Disturbed,
    /// The line leaves the contact in a new disturbance.
    NewDisturbance,
}

/// Every role that an edge away from the contact can have.
pub(super) const AWAY: [Role; 4] = [Role::Change, Role::Bounce, Role::Disturbed, Role::NewDisturbance];

/// The run that follows an edge.
#[derive(Clone, Copy, Debug)]
pub(super) struct Stretch {
    /// The edge.
    pub(super) from: u64,
    /// The next edge, or the end of the recording.
    pub(super) until: u64,
    /// Where the line is between them.
    pub(super) line: Position,
}

/// The last disturbance of a reading.
#[derive(Clone, Copy, Debug)]
pub(super) struct Window {
    pub(super) from: u64,
    pub(super) until: u64,
    position: Position,
    /// How far it is over its width already.
    over: u64,
}

/// What of a reading's past matters for its future.
#[derive(Clone, Copy, Debug)]
pub(super) struct Clocks {
    pub(super) contact: Position,
    /// The last change; none where it is so long ago that it binds nothing.
    change_at: Option<u64>,
    /// End of the last run that was taken as bounce, or the change.
    bounce_end: u64,
    /// Where calm is claimed, the bounce is over once a disturbance has begun.
    bounce_open: bool,
    /// A disturbance has kept the calm since the change, so the next need not.
    calm_served: bool,
    /// The last disturbance; none where it is so long ago that it binds nothing.
    window: Option<Window>,
}

/// A step of a reading: the clocks after it, the violations in it, and the time it adds outside the envelope.
pub(super) struct Step {
    pub(super) clocks: Clocks,
    pub(super) violations: [Option<Violation>; 3],
    pub(super) outside_ns: u64,
}

/// The time each thing may still take, clipped where it no longer matters: what decides which of two readings
/// has the better future. Smaller is better.
pub(super) type Burden = [u64; 6];

/// The rules of an envelope, ready for use.
pub(super) struct Rules<'a> {
    envelope: &'a PhysicalEnvelope,
    /// A run longer than this is longer than every clause: it binds everything before it off.
    reach_ns: u64,
    narrower_glitch: u64,
}

impl<'a> Rules<'a> {
    pub(super) fn new(envelope: &'a PhysicalEnvelope) -> Self {
        let e = envelope;
        let clauses = [
            e.bounce_ns.make,
            e.bounce_ns.break_,
            e.glitch_ns.open,
            e.glitch_ns.closed,
            e.quiet_ns,
            e.calm_ns,
            e.dwell_ns.open,
            e.dwell_ns.closed,
        ];
        Self {
            envelope,
            reach_ns: clauses.into_iter().max().unwrap_or(0),
            narrower_glitch: e.glitch_ns.open.min(e.glitch_ns.closed),
        }
    }

    /// Whether the run is longer than every clause, so that nothing before it matters after it.
    pub(super) fn is_long(&self, stretch: &Stretch) -> bool {
        stretch.until - stretch.from > self.reach_ns
    }

    /// The clocks of a contact that has been settled for long.
    pub(super) fn start(position: Position) -> Clocks {
        Clocks {
            contact: position,
            change_at: None,
            bounce_end: 0,
            bounce_open: false,
            calm_served: true,
            window: None,
        }
    }

    /// The clocks after `stretch` is taken for `role`; none where that role is impossible.
    pub(super) fn step(&self, mut clocks: Clocks, role: Role, stretch: &Stretch) -> Option<Step> {
        let away = clocks.contact != stretch.line;
        if away == (role == Role::Return) {
            return None;
        }
        let long = self.is_long(stretch);
        let mut violations = [None; 3];
        let mut outside_ns = 0;
        match role {
            Role::Return => {}
            Role::Change => {
                if let Some(changed) = clocks.change_at {
                    let allowed = self.envelope.dwell_ns.at(clocks.contact);
                    let clause = BrokenClause::DwellTooShort(clocks.contact);
                    violations[0] =
                        too_short(clause, changed, stretch.from - changed, allowed, &mut outside_ns);
                }
                clocks.contact = stretch.line;
                clocks.change_at = Some(stretch.from);
                clocks.bounce_end = stretch.from;
                clocks.bounce_open = true;
                clocks.calm_served = false;
            }
            Role::Bounce => {
                let changed = clocks.change_at.filter(|_| clocks.bounce_open && !long)?;
                let change = clocks.contact.reached_by();
                let allowed = self.envelope.bounce_ns.at(change);
                let over = |end: u64| (end - changed).saturating_sub(allowed);
                outside_ns += over(stretch.until) - over(clocks.bounce_end);
                violations[0] =
                    too_long(BrokenClause::BounceTooLong(change), changed, stretch.until - changed, allowed);
                clocks.bounce_end = stretch.until;
            }
            Role::Disturbed => {
                let mut window = clocks.window.filter(|_| !long)?;
                violations[0] = self.widen(&clocks, &mut window, stretch.until, &mut outside_ns);
                clocks.window = Some(window);
            }
            Role::NewDisturbance => {
                if long {
                    return None;
                }
                let at = stretch.from;
                if let Some(last) = clocks.window {
                    let (clause, allowed) = (BrokenClause::QuietTooShort, self.envelope.quiet_ns);
                    violations[1] = too_short(clause, at, at - last.until, allowed, &mut outside_ns);
                }
                if self.envelope.calm_ns > 0 {
                    if let Some(since) = self.calm_since(&clocks) {
                        let (clause, allowed) = (BrokenClause::CalmTooShort, self.envelope.calm_ns);
                        violations[2] = too_short(clause, at, at - since, allowed, &mut outside_ns);
                    }
                    clocks.bounce_open = false;
                    clocks.calm_served = true;
                }
                let mut window = Window { from: at, until: at, position: clocks.contact, over: 0 };
                violations[0] = self.widen(&clocks, &mut window, stretch.until, &mut outside_ns);
                clocks.window = Some(window);
            }
        }
        if long {
            clocks.change_at = None;
            clocks.bounce_open = false;
            clocks.calm_served = true;
            clocks.window = None;
        }
        Some(Step { clocks, violations, outside_ns })
    }

    fn widen(
        &self,
        clocks: &Clocks,
        window: &mut Window,
        until: u64,
        outside_ns: &mut u64,
    ) -> Option<Violation> {
        let allowed = self.width_allowed(clocks, window);
        window.until = until;
        let width = until - window.from;
        let over = width.saturating_sub(allowed);
        *outside_ns += over.saturating_sub(window.over);
        window.over = window.over.max(over);
        too_long(BrokenClause::DisturbanceTooWide(window.position), window.from, width, allowed)
    }

    fn width_allowed(&self, clocks: &Clocks, window: &Window) -> u64 {
        let straddles = clocks.change_at.is_some_and(|changed| changed >= window.from)
            && (window.from < window.until || clocks.contact != window.position);
        if straddles { self.narrower_glitch } else { self.envelope.glitch_ns.at(window.position) }
    }

    /// From when calm is counted; none where it has been served.
    fn calm_since(&self, clocks: &Clocks) -> Option<u64> {
        clocks.change_at.filter(|_| !clocks.calm_served)?;
        Some(clocks.bounce_end.max(clocks.window.map_or(0, |window| window.until)))
    }

    pub(super) fn burden(&self, clocks: &Clocks, now: u64) -> Burden {
        let e = self.envelope;
        let left = |from: u64, allowed: u64| from.saturating_add(allowed).saturating_sub(now);
        let dwell = clocks.change_at.map_or(0, |at| left(at, e.dwell_ns.at(clocks.contact)));
        let bounce = match clocks.change_at {
            Some(at) if clocks.bounce_open => left(at, e.bounce_ns.at(clocks.contact.reached_by())),
            _ => 0,
        };
        let calm = if e.calm_ns == 0 { None } else { self.calm_since(clocks) };
        let window = clocks.window;
        [
            dwell,
            u64::MAX - bounce,
            calm.map_or(0, |since| left(since, e.calm_ns)),
            window.map_or(0, |w| left(w.until, e.quiet_ns)),
            u64::MAX - window.map_or(0, |w| left(w.from, self.width_allowed(clocks, &w))),
            u64::MAX - window.map_or(0, |w| left(w.from, self.narrower_glitch)),
        ]
    }
}

/// A violation where `found` is less than `allowed`; what is missing counts as outside.
fn too_short(
    clause: BrokenClause,
    at_ns: u64,
    found_ns: u64,
    allowed_ns: u64,
    outside: &mut u64,
) -> Option<Violation> {
    *outside += allowed_ns.saturating_sub(found_ns);
    (found_ns < allowed_ns).then_some(Violation { clause, at_ns, found_ns, allowed_ns })
}

/// A violation where `found` is more than `allowed`.
fn too_long(clause: BrokenClause, at_ns: u64, found_ns: u64, allowed_ns: u64) -> Option<Violation> {
    (found_ns > allowed_ns).then_some(Violation { clause, at_ns, found_ns, allowed_ns })
}

/// The stretches of a trace: one for each edge.
pub(super) fn stretches(trace: &Trace) -> impl Iterator<Item = Stretch> + '_ {
    let edges = trace.edges();
    edges.iter().enumerate().map(move |(index, &from)| Stretch {
        from,
        until: edges.get(index + 1).copied().unwrap_or(trace.end_ns()),
        line: trace.position_after(index + 1),
    })
}

/// Goes through a reading again and writes down what is in it.
pub(super) fn account(trace: &Trace, envelope: &PhysicalEnvelope, roles: &[Role]) -> Conformance {
    let rules = Rules::new(envelope);
    let mut clocks = Rules::start(trace.initial());
    let mut account = Conformance {
        violations: Vec::new(),
        doubtful: Vec::new(),
        changes: Vec::new(),
        disturbances: Vec::new(),
        search: Search::Complete,
    };
    // The last change and the end of its bounce, kept beyond the reach of the clauses.
    let mut bounce: Option<(Change, u64, u64)> = None;
    for (&role, stretch) in roles.iter().zip(stretches(trace)) {
        let Some(step) = rules.step(clocks, role, &stretch) else {
            unreachable!("the search follows only roles that the rules allow");
        };
        clocks = step.clocks;
        for violation in step.violations.into_iter().flatten() {
            // A bounce or disturbance that goes on is one violation, with its last value.
            account.violations.retain(|v| (v.clause, v.at_ns) != (violation.clause, violation.at_ns));
            account.violations.push(violation);
        }
        match role {
            Role::Return => {}
            Role::Change => {
                let change = stretch.line.reached_by();
                account.changes.push((change, stretch.from));
                bounce = Some((change, stretch.from, stretch.from));
            }
            Role::Bounce => bounce = bounce.map(|(change, at, _)| (change, at, stretch.until)),
            Role::Disturbed => {
                if let Some(last) = account.disturbances.last_mut() {
                    last.1 = stretch.until;
                }
                if let Some(last) =
                    account.doubtful.last_mut().filter(|d| Some(d.from_ns) == clocks.window.map(|w| w.from))
                {
                    last.until_ns = stretch.until;
                }
            }
            Role::NewDisturbance => {
                account.disturbances.push((stretch.from, stretch.until));
                if let Some((change, change_ns, end)) = bounce
                    && stretch.from - end <= envelope.bounce_ns.at(change)
                {
                    let (from_ns, until_ns) = (stretch.from, stretch.until);
                    account.doubtful.push(DoubtfulDisturbance { change, change_ns, from_ns, until_ns });
                }
            }
        }
    }
    account.violations.sort_by_key(|violation| violation.at_ns);
    account
}
