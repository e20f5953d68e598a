//! The claims one by one.

use debounce_core::Change;

use super::{Claim, FileDigest, Standing, Subject};
use crate::choose::{Candidate, Evidence, Judgement};
use crate::cost;
use crate::report::words;
use crate::requirement::Requirement;
use crate::study::{self, Study};

/// Places listed of one recording.
const SHOWN: usize = 5;

/// That every recording is the one that was shipped with, and lies inside the envelope.
pub(super) fn recordings(requirement: &Requirement, study: &Study, digests: &[FileDigest]) -> Vec<Claim> {
    let mut claims = Vec::new();
    for (recording, digest) in requirement.recordings.iter().zip(digests) {
        let Some(pinned) = &recording.sha256 else { continue };
        let standing = if pinned.value == digest.sha256 {
            Standing::Holds(format!("SHA-256 {}", pinned.value))
        } else {
            Standing::Broken(vec![format!("its SHA-256 is {}, stated is {}", digest.sha256, pinned.value)])
        };
        claims.push(Claim::new(Subject::Recording, format!("{} is unchanged", digest.name), standing));
    }
    for (one, conforms) in study.observed.iter().zip(&study.conformance) {
        let claimed = format!("{} lies inside the envelope", one.name);
        let mut places: Vec<String> = conforms
            .violations
            .iter()
            .take(SHOWN)
            .map(|place| {
                format!(
                    "at {} the {}: {} found, {} allowed, {} off",
                    words::instant(place.at_ns),
                    place.clause.text(),
                    words::about(place.found_ns),
                    words::about(place.allowed_ns),
                    words::about(place.found_ns.abs_diff(place.allowed_ns)),
                )
            })
            .collect();
        if conforms.violations.len() > SHOWN {
            places.push(format!("and {} more places", conforms.violations.len() - SHOWN));
        }
        let standing = if places.is_empty() {
            let changes = &one.figures.changes;
            Standing::Holds(format!(
                "{} and {}",
                words::count(changes.make.count, "make"),
                words::count(changes.break_.count, "break")
            ))
        } else {
            Standing::Broken(places)
        };
        claims.push(Claim::new(Subject::Recording, claimed, standing));
    }
    claims
}

/// That enough operations were recorded for the coverage asked for; a claim only where the file asks for it.
pub(super) fn coverage(requirement: &Requirement, study: &Study) -> Vec<Claim> {
    if requirement.coverage.is_none() || study.observed.is_empty() {
        return Vec::new();
    }
    let (confidence, coverage) = (study.resolved.confidence.value, study.resolved.coverage.value);
    let claim = |change| {
        let claimed = format!(
            "with {confidence} confidence, {coverage} of {}s bounce no longer than the longest recorded",
            words::change(change)
        );
        let standing = match study.claims.bounce.at(change) {
            Some(found) if found.more_needed() == 0 => {
                Standing::Holds(format!("{} recorded, {} needed", found.operations, found.needed))
            }
            Some(found) => Standing::Broken(vec![format!(
                "{} recorded, {} needed, {} too few",
                found.operations,
                found.needed,
                found.more_needed()
            )]),
            None => Standing::Broken(vec!["none was recorded whole".to_owned()]),
        };
        Claim::new(Subject::Recording, claimed, standing)
    };
    [Change::Make, Change::Break].map(claim).into()
}

/// That every operation inside the envelope is reported.
pub(super) fn proof(study: &Study, candidate: &Candidate) -> Option<Claim> {
    let tick = study.tick(candidate);
    let claimed = format!(
        "{} at a tick of {tick} reports every operation inside the envelope once and in order",
        candidate.parameters
    );
    let standing = match &candidate.judgement {
        Judgement::Faithful { evidence, .. } => Standing::Holds(match (&study.guarantees, evidence) {
            (Some(found), _) => format!("all {} reachable states explored", found.proof.states),
            (None, Evidence::Explored { states }) => format!("all {states} reachable states explored"),
            (None, Evidence::ClosedForm) => "by its closed form".to_owned(),
        }),
        Judgement::Refuted { clause, .. } => Standing::Broken(vec![words::clause(*clause).to_owned()]),
        Judgement::Unproven(reason) => Standing::Broken(vec![format!("not proved: {reason}")]),
    };
    Some(Claim::new(Subject::Proof, claimed, standing))
}

/// That no report is later than allowed.
pub(super) fn latency(study: &Study, candidate: &Candidate) -> Vec<Claim> {
    let claim = |change: Change| {
        let allowed_ns = study.resolved.required.latency.at(change).value.ns();
        let which = words::change(change);
        let claimed = format!("a {which} is reported within {}", words::about(allowed_ns));
        let standing = match candidate.worst_below_ns.map(|worst| worst.at(change)) {
            None => Standing::Open("nothing is promised while the proof is broken".to_owned()),
            Some(below_ns) if below_ns <= allowed_ns => {
                Standing::Holds(format!("in less than {}", words::at_most(below_ns)))
            }
            Some(below_ns) => Standing::Broken(vec![format!(
                "it can take {}, {} too long",
                words::at_most(below_ns),
                words::at_most(below_ns - allowed_ns)
            )]),
        };
        Claim::new(Subject::Latency, claimed, standing)
    };
    [Change::Make, Change::Break].map(claim).into()
}

/// That the recordings themselves are followed, at every phase of the tick.
pub(super) fn replayed(study: &Study, candidate: &Candidate) -> Vec<Claim> {
    let claim = |(one, measured): (&study::Observed, &crate::replay::Measurement)| {
        let claimed = format!("every operation in {} is reported at every phase of the tick", one.name);
        let (missed, places) = (measured.missed.len(), measured.false_edges.places.len());
        let standing = if measured.is_faithful() {
            Standing::Holds("none missed, none false".to_owned())
        } else {
            Standing::Broken(vec![format!(
                "{} missed at some phase, {} with a false edge",
                words::count(missed, "operation"),
                words::count(places, "place")
            )])
        };
        Claim::new(Subject::Proof, claimed, standing)
    };
    study.observed.iter().zip(&candidate.measured).map(claim).collect()
}

/// What it costs, as far as that is limited.
pub(super) fn budget(requirement: &Requirement, study: &Study, candidate: &Candidate) -> Vec<Claim> {
    let mut claims = Vec::new();
    let mut claim = |claimed: String, standing| claims.push(Claim::new(Subject::Budget, claimed, standing));
    if let Some(allowed) = requirement.budget.ram.map(|ram| ram.value.0) {
        let bytes = candidate.state_bytes;
        let standing = if bytes <= allowed {
            Standing::Holds(format!("{bytes} bytes"))
        } else {
            Standing::Broken(vec![format!("{bytes} bytes, {} too many", bytes - allowed)])
        };
        claim(format!("an input takes at most {allowed} bytes of RAM"), standing);
    }
    if let Some(allowed) = requirement.budget.instructions.map(|most| most.value.0) {
        let core = requirement.budget.core.map(|core| core.value);
        let place = core.map_or("any core that was looked at".to_owned(), |core| core.to_string());
        let standing = match cost::instructions(&candidate.parameters, core) {
            Some(count) if count <= allowed => Standing::Holds(format!(
                "{count}, as counted for a {}",
                cost::counted_as(&candidate.parameters)
            )),
            Some(count) => Standing::Broken(vec![format!(
                "{count}, as counted for a {}, {} too many",
                cost::counted_as(&candidate.parameters),
                count - allowed
            )]),
            None => Standing::Broken(vec!["not counted for so wide a state".to_owned()]),
        };
        claim(format!("a tick takes at most {allowed} instructions an input on {place}"), standing);
    }
    let tick = study.tick(candidate);
    if let Some(fastest) = requirement.budget.fastest_tick.map(|fastest| fastest.value) {
        let standing = if tick >= fastest {
            Standing::Holds(format!("{tick}"))
        } else {
            let more = tick.ticks_per_second() - fastest.ticks_per_second();
            Standing::Broken(vec![format!("a tick of {tick} is {more:.0} ticks a second too many")])
        };
        claim(format!("the tick is no faster than {fastest}"), standing);
    }
    if let Some(ticks) = &requirement.clock.ticks {
        let standing = if ticks.value.allows(tick) {
            Standing::Holds(format!("{tick}"))
        } else {
            Standing::Broken(vec![format!("a tick of {tick} is not among them")])
        };
        claim("the tick is one of those under [clock]".to_owned(), standing);
    }
    claims
}
