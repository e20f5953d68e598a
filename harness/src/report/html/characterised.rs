//! The report of what recordings show.

use debounce_core::{Change, Position};
use maud::{Markup, html};

use super::bounce::Limit;
use super::timing::{self, Shown};
use super::{Cell, Origin, Page, Section, answer, bounce, claims, distribution, origin, requirement, table};
use crate::characterise::Claim;
use crate::report::words;
use crate::requirement::Resolved;
use crate::study::{Caution, Claims, Observed};

/// What recordings show, with everything a report says of it.
#[derive(Clone, Copy, Debug)]
pub struct Characterised<'a> {
    /// The recordings.
    pub observed: &'a [Observed],
    /// The requirement, for its name, confidence and coverage.
    pub resolved: &'a Resolved,
    /// What all of them together allow to claim.
    pub claims: &'a Claims,
    /// What a reader should know before leaning on them.
    pub warnings: &'a [Caution],
}

/// The report of what recordings show.
#[must_use]
pub fn characterised(found: &Characterised<'_>, origin: &Origin) -> String {
    let shown: Vec<Shown<'_>> = found
        .observed
        .iter()
        .map(|one| {
            let mut moments = Vec::new();
            timing::remarkable(one, &mut moments, 0);
            Shown { one, runs: Vec::new(), moments }
        })
        .collect();
    let mut sections = Vec::new();
    sections.extend(timing::section(&shown, "Recorded"));
    sections.extend(bounce::section(found.observed, |change| limits(found, change)));
    sections.extend(distribution::section(found.observed, |change| limits(found, change)));
    sections.extend(claims::section(found.claims));
    sections.push(figures(found.observed));
    sections.push(requirement::section(found.resolved));
    sections.push(origin::section(origin, found.observed, &[]));
    let page = Page {
        title: found.resolved.name.value.clone(),
        kind: "What the recordings show".to_owned(),
        invented: false,
        cautions: found.resolved.caution().into_iter().collect(),
        answer: answered(found),
        sections,
    };
    page.html()
}

fn claim(found: &Characterised<'_>, change: Change) -> Option<Claim> {
    found.claims.bounce.at(change)
}

fn limits(found: &Characterised<'_>, change: Change) -> Vec<Limit> {
    let claimed = claim(found, change);
    claimed
        .map(|claim| Limit { name: "claimed", at_ns: claim.longest_ns, class: "claimed" })
        .into_iter()
        .collect()
}

fn answered(found: &Characterised<'_>) -> Markup {
    let confidence = found.resolved.confidence.value;
    html! {
        @for change in [Change::Make, Change::Break] {
            @if let Some(claim) = claim(found, change) {
                p class="choice" {
                    (words::covered(claim.covered)) " of " (words::change(change)) "s bounce no longer than "
                    strong { (words::at_most(claim.longest_ns)) }
                }
                p class="note" {
                    "With " (confidence) " confidence, from " (claim.operations) " recorded, were they independent."
                    @if claim.operations < claim.needed {
                        " For " (found.resolved.coverage.value) " " (claim.needed) " are needed."
                    }
                }
            }
        }
        (answer::warnings(found.warnings))
        @for one in found.observed {
            p {
                strong { (one.name) } ", channel " (one.recording.channel) ": "
                (words::count(one.figures.changes.make.count, "make")) ", "
                (words::count(one.figures.changes.break_.count, "break")) ", "
                (words::count(one.figures.disturbances.open.count + one.figures.disturbances.closed.count, "disturbance"))
                " in " (words::about(one.recording.trace.end_ns() - one.recording.trace.start_ns())) "; "
                (one.segmentation.ambiguous()) " in doubt."
                @for note in &one.recording.notes { " Note: " (note) "." }
            }
        }
    }
}

/// Every figure of every recording.
fn figures(observed: &[Observed]) -> Section {
    let body = html! {
        @for one in observed { (table(&format!("Figures of {}", one.name), &["figure", "value"], &rows(one))) }
    };
    Section { id: "figures", heading: "All figures".to_owned(), body }
}

fn rows(one: &Observed) -> Vec<Vec<Cell>> {
    let figures = &one.figures;
    let mut rows = Vec::new();
    let mut add = |name: String, value: Option<String>| {
        rows.extend(value.map(|value| vec![Cell::text(name), Cell::number(value)]));
    };
    for change in [Change::Make, Change::Break] {
        let (of, word) = (figures.changes.of(change), words::change(change));
        add(format!("{word}s recorded whole"), Some(of.count.to_string()));
        add(format!("of these in doubt ({word})"), Some(of.ambiguous.to_string()));
        add(format!("median bounce at a {word}"), of.bounce_ns.map(|spread| words::about(spread.median)));
        add(
            format!("95 % of bounces at a {word} within"),
            of.bounce_ns.map(|spread| words::about(spread.p95)),
        );
        add(format!("longest bounce at a {word}"), of.bounce_ns.map(|spread| words::about(spread.max)));
        add(format!("most edges of a {word}"), of.edges.map(|spread| spread.max.to_string()));
    }
    for position in Position::BOTH {
        let (of, word) = (figures.disturbances.of(position), words::position(position));
        add(format!("disturbances while {word}"), Some(of.count.to_string()));
        add(format!("widest disturbance while {word}"), of.width_ns.map(|spread| words::about(spread.max)));
        add(format!("shortest time {word}"), figures.dwell.of(position).shortest_ns.map(words::about));
    }
    add("shortest quiet between two disturbances".to_owned(), figures.quiet_ns.map(words::about));
    add("shortest calm between bounce and disturbance".to_owned(), figures.calm_ns.map(words::about));
    add("rest that ends a burst".to_owned(), Some(words::about(one.segmentation.gap.ns)));
    add("sample period of the recorder".to_owned(), Some(words::about(figures.resolution_ns)));
    rows
}
