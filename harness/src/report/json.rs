//! Results as JSON values. Times are in nanoseconds, latencies in samples; the field names say so.

use debounce_core::{Bounds, Envelope, Latency, PerChange, PerPosition, Position};
use serde_json::{Value, json};

use super::{characterised, words};
use crate::choose::{Candidate, Evidence, Judgement, Ranking};
use crate::clock_range::{Asleep, ClockRange, Curve, Span};
use crate::conformance::Conformance;
use crate::envelope::PhysicalEnvelope;
use crate::prove::{Beyond, Proof, Recovery, Witness};
use crate::quantity::TickPeriod;
use crate::requirement::{Resolved, Word};
use crate::study::{Guarantees, Observed, Study};

/// A study.
#[must_use]
pub fn study(study: &Study) -> Value {
    let conforming = study.observed.iter().zip(&study.conformance);
    json!({
        "recordings": conforming.map(|(one, conforms)| recording(one, conforms)).collect::<Value>(),
        "requirement": requirement(&study.resolved),
        "claims": characterised::claims(&study.claims),
        "warnings": study.cautions().iter().map(ToString::to_string).collect::<Vec<_>>(),
        "envelope": physical(&study.physical),
        "envelope_in_words": words::envelope(&study.physical),
        "choice": ranking(&study.ranking),
        "proof": study.guarantees.as_ref().map(guarantees),
        "failures": study.failures().and_then(|found| characterised::failures(&found, study.claims.confidence)),
        "caution": study.resolved.caution(),
    })
}

/// A recording and whether it lies inside the envelope.
#[must_use]
pub fn recording(one: &Observed, conforms: &Conformance) -> Value {
    let mut value = observed(one);
    value["conforms"] = json!(conforms.conforms());
    value["violations"] = conforms
        .violations
        .iter()
        .map(|v| {
            json!({
                "clause": v.clause.text(),
                "at_ns": v.at_ns,
                "found_ns": v.found_ns,
                "allowed_ns": v.allowed_ns,
            })
        })
        .collect();
    value
}

/// What a recording shows.
#[must_use]
pub fn observed(one: &Observed) -> Value {
    let mut value = characterised::figures(&one.figures);
    value["name"] = json!(one.name);
    value["channel"] = json!(one.recording.channel);
    value["taken_at"] = json!(one.taken_at.map(|taken_at| taken_at.value.word()));
    value["notes"] = one.recording.notes.iter().map(ToString::to_string).collect();
    value["from_ns"] = json!(one.recording.trace.start_ns());
    value["until_ns"] = json!(one.recording.trace.end_ns());
    value["gap_ns"] = json!(one.segmentation.gap.ns);
    value
}

/// Every value of a requirement with its origin.
#[must_use]
pub fn requirement(resolved: &Resolved) -> Value {
    resolved
        .rows()
        .iter()
        .map(|row| {
            json!({
                "key": row.key,
                "value": row.text,
                "origin": row.origin.word(),
                "because": row.origin.to_string(),
            })
        })
        .collect()
}

/// An envelope in time.
#[must_use]
pub fn physical(physical: &PhysicalEnvelope) -> Value {
    json!({
        "bounce_ns": per_change(&physical.bounce_ns),
        "glitch_ns": per_position(&physical.glitch_ns),
        "quiet_ns": physical.quiet_ns,
        "calm_ns": physical.calm_ns,
        "dwell_ns": per_position(&physical.dwell_ns),
    })
}

/// An envelope in samples.
#[must_use]
pub fn envelope(envelope: &Envelope) -> Value {
    json!({
        "bounce": per_change(&envelope.bounce),
        "glitch": per_position(&envelope.glitch),
        "quiet": envelope.quiet,
        "calm": envelope.calm,
        "dwell": per_position(&envelope.dwell),
        "lost": envelope.lost,
    })
}

fn per_change<T: serde::Serialize>(pair: &PerChange<T>) -> Value {
    json!({ "make": pair.make, "break": pair.break_ })
}

fn per_position<T: serde::Serialize>(pair: &PerPosition<T>) -> Value {
    json!({ "open": pair.open, "closed": pair.closed })
}

/// Bounds in samples.
#[must_use]
pub fn bounds(bounds: &Bounds) -> Value {
    let one = |latency: Latency| json!({ "best": latency.best, "worst": latency.worst });
    json!({ "make": one(bounds.latency.make), "break": one(bounds.latency.break_) })
}

/// A ranking: all that hold, and the nearest misses.
#[must_use]
pub fn ranking(ranking: &Ranking) -> Value {
    json!({
        "tried": ranking.candidates.len(),
        "holding": ranking.holding(),
        "physical_limit_ns": per_change(&ranking.physical_limit_ns),
        "recommended": ranking.recommended().map(|best| candidate(ranking, best)),
        "reason": ranking.reason.as_ref().map(ToString::to_string),
        "candidates": ranking.candidates.iter().map(|one| candidate(ranking, one)).collect::<Value>(),
    })
}

/// One candidate.
#[must_use]
pub fn candidate(ranking: &Ranking, one: &Candidate) -> Value {
    let view = ranking.view(one);
    let tick = TickPeriod::from(view.clock.period());
    let (outcome, evidence) = match &one.judgement {
        Judgement::Faithful { evidence, .. } => ("faithful", Some(evidence)),
        Judgement::Refuted { evidence, .. } => ("refuted", Some(evidence)),
        Judgement::Unproven(_) => ("unproven", None),
    };
    json!({
        "law": one.parameters.to_string(),
        "tick": tick.to_string(),
        "ticks_per_second": tick.ticks_per_second(),
        "outcome": outcome,
        "evidence": evidence.map(|evidence| match evidence {
            Evidence::ClosedForm => json!("closed-form"),
            Evidence::Explored { states } => json!({ "explored_states": states }),
        }),
        "bounds_samples": one.bounds().as_ref().map(bounds),
        "worst_below_ns": one.worst_below_ns.as_ref().map(per_change),
        "limit_samples": view.limit.as_ref().map(per_change),
        "times_limit": one.times_limit,
        "times_physical_limit": one.times_physical_limit,
        "state_bytes": one.state_bytes,
        "holds": one.holds(),
        "shortfalls": one.shortfalls.iter().map(words::shortfall).collect::<Vec<_>>(),
        "pareto": one.pareto,
        "measured": one
            .measured
            .iter()
            .map(|m| json!({
                "make": m.make.latency.as_ref().map(|l| json!({ "samples": l.samples.worst, "delay": l.delay })),
                "break": m.break_.latency.as_ref().map(|l| json!({ "samples": l.samples.worst, "delay": l.delay })),
                "missed": m.missed.len(),
                "false_places": m.false_edges.places.len(),
            }))
            .collect::<Value>(),
    })
}

/// The sample clock: every rounding step, every curve, and the clock to take.
#[must_use]
pub fn clock_range(range: &ClockRange) -> Value {
    let span = |span: &Span| json!({ "from_ns": span.from_ns, "until_ns": span.until_ns });
    let spans = |all: &[Span]| all.iter().map(span).collect::<Value>();
    let curve = |curve: &Curve| {
        json!({
            "law": curve.family,
            "evidence": if curve.is_explored { "explored" } else { "closed-form" },
            "works": spans(&curve.works),
            "in_time": spans(&curve.holds),
            "pieces": curve
                .pieces
                .iter()
                .map(|piece| json!({
                    "from_ns": piece.span.from_ns,
                    "until_ns": piece.span.until_ns,
                    "law": piece.law.to_string(),
                    "worst_samples": per_change(&piece.worst),
                    "below_from_ns": per_change(&piece.below_from_ns),
                    "below_until_ns": per_change(&piece.below_until_ns),
                    "in_time_until_ns": piece.in_time_until_ns,
                }))
                .collect::<Value>(),
        })
    };
    json!({
        "span": span(&range.span),
        "steps": range
            .steps
            .iter()
            .map(|step| json!({ "at_ns": step.at_ns, "figure": step.figure.name(), "samples": step.samples }))
            .collect::<Value>(),
        "curves": range.curves.iter().map(curve).collect::<Value>(),
        "recommended": range.recommended.map(|best| json!({
            "slowest_ns": best.slowest_ns,
            "period_ns": best.period_ns,
            "law": best.law.to_string(),
            "worst_samples": per_change(&best.worst),
            "below_ns": per_change(&best.below_ns),
            "same_law": span(&best.same_law),
        })),
    })
}

/// What is saved where the tick stops while the law is settled.
#[must_use]
pub fn asleep(found: &Asleep) -> Value {
    json!({
        "ticks_after": per_change(&found.ticks_after),
        "ticks_after_disturbance": per_position(&found.ticks_after_disturbance),
        "ticking_per_second": found.ticking_per_second,
        "stopping_per_second": found.stopping_per_second,
        "share_asleep": found.share,
    })
}

/// The full exploration of the recommended candidate.
#[must_use]
pub fn guarantees(found: &Guarantees) -> Value {
    let beyond = beyond(&found.beyond);
    json!({
        "envelope": envelope(&found.envelope),
        "exploration": proof(&found.proof),
        "law_states": found.law_states,
        "lone_disturbance": beyond["lone_disturbance"],
        "immunity": beyond["immunity"],
        "shortest_operations": beyond["shortest_operations"],
        "after_short_operations": beyond["after_short_operations"],
        "from_any_state": beyond["from_any_state"],
        "not_searched": beyond["not_searched"],
    })
}

/// What was found beyond the bounds; what was not searched is `null`, with the reason under `not_searched`.
#[must_use]
pub fn beyond(found: &Beyond) -> Value {
    let mut reasons = serde_json::Map::new();
    let mut value = json!({ "lone_disturbance": per_position(&found.lone_disturbance) });
    let immunity = found.immunity.as_ref().map(per_position);
    let shortest = found.shortest_operations.as_ref();
    let shortest = shortest.map(|pairs| pairs.iter().map(per_position).collect::<Value>());
    let searches = [
        ("immunity", immunity),
        ("shortest_operations", shortest),
        ("after_short_operations", found.after_short_operations.as_ref().map(recovery)),
        ("from_any_state", found.from_any_state.as_ref().map(recovery)),
    ];
    for (name, search) in searches {
        match search {
            Ok(found) => value[name] = found,
            Err(reason) => {
                value[name] = Value::Null;
                reasons.insert(name.to_owned(), json!(reason.to_string()));
            }
        }
    }
    value["not_searched"] = reasons.into();
    value
}

fn recovery(recovery: &Recovery) -> Value {
    match recovery {
        Recovery::Within(samples) => json!({ "within_samples": samples }),
        Recovery::Never(shown) => json!({ "never": witness(shown) }),
    }
}

/// A proof with its counter-example or its slowest waveforms.
#[must_use]
pub fn proof(proof: &Proof) -> Value {
    use crate::prove::Outcome;
    let mut value = json!({
        "law_states": proof.law_states,
        "environment_states": proof.environment_states,
        "states": proof.states,
        "transitions": proof.transitions,
    });
    match &proof.outcome {
        Outcome::Faithful { bounds: found, slowest } => {
            value["outcome"] = json!("faithful");
            value["bounds_samples"] = bounds(found);
            value["slowest"] = json!({
                "make": slowest.make.as_ref().map(witness),
                "break": slowest.break_.as_ref().map(witness),
            });
        }
        Outcome::Refuted { clause, witness: shown } => {
            value["outcome"] = json!("refuted");
            value["broken"] = json!(words::clause(*clause));
            value["witness"] = witness(shown);
        }
    }
    value
}

/// A witness: one character a tick in each lane, `0` open, `1` closed.
#[must_use]
pub fn witness(witness: &Witness) -> Value {
    let digit = |position: Position| if position.is_closed() { '1' } else { '0' };
    let lane =
        |f: &dyn Fn(&crate::prove::WitnessTick) -> char| witness.ticks.iter().map(f).collect::<String>();
    json!({
        "start": words::position(witness.start),
        "contact": lane(&|tick| digit(tick.contact)),
        "samples": lane(&|tick| digit(tick.sample)),
        "output": lane(&|tick| digit(tick.output)),
        "repeats_from_tick": witness.loop_from.map(|from| from + 1),
    })
}
