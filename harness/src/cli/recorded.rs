//! What recordings show and what may be claimed from them, as lines of a summary.

use std::io;

use debounce_core::Change;

use super::lines::Lines;
use crate::report::{claim_words, words};
use crate::requirement::{Origin, TakenAt};
use crate::study::{Claims, DesignBounce, Observed};

/// What one recording holds.
pub(super) fn recorded(lines: &mut Lines<'_>, one: &Observed) -> io::Result<()> {
    let figures = &one.figures;
    let span = one.recording.trace.end_ns() - one.recording.trace.start_ns();
    let disturbances = figures.disturbances.open.count + figures.disturbances.closed.count;
    lines.item(
        "Recorded",
        &format!(
            "{}, channel {}, {}: {}, {}, {}; {} in doubt",
            one.name,
            one.recording.channel,
            words::about(span),
            words::count(figures.changes.make.count, "make"),
            words::count(figures.changes.break_.count, "break"),
            words::count(disturbances, "disturbance"),
            one.segmentation.ambiguous(),
        ),
    )?;
    if let Some(text) = taken_at(one) {
        lines.more(&text)?;
    }
    for change in [Change::Make, Change::Break] {
        if let Some(bounce) = figures.changes.of(change).bounce_ns {
            lines.more(&format!(
                "bounce at a {:<6} median {:>8}, 95 % {:>8}, longest {:>8}",
                words::change(change),
                words::seen(bounce.median, figures.resolution_ns),
                words::seen(bounce.p95, figures.resolution_ns),
                words::seen(bounce.max, figures.resolution_ns)
            ))?;
        }
    }
    Ok(())
}

/// Where a recording was taken, if a network makes a difference between contact and pin, and what follows from it.
pub(super) fn taken_at(one: &Observed) -> Option<String> {
    let taken_at = one.taken_at?;
    let told = match taken_at.value {
        TakenAt::Contact => "taken at the contact, so the pin sees it through [network]",
        TakenAt::Pin => {
            "taken at the pin, so [network] is in it: it is sampled as it is, and no figure of the contact is read \
             off it"
        }
    };
    let because = match taken_at.origin {
        Origin::Default(_) => {
            format!(" ({}; if it was taken behind the network, write taken_at = \"pin\")", taken_at.origin)
        }
        origin => format!(" ({origin})"),
    };
    Some(format!("{told}{because}"))
}

/// What the recorded operations allow to claim of those to come, and which claim the design stands on.
pub(super) fn claims(lines: &mut Lines<'_>, claims: &Claims) -> io::Result<()> {
    let both = [Change::Make, Change::Break];
    let part = |change| {
        let claim = claims.bounce.at(change)?;
        let enough = match claim.more_needed() {
            0 => String::new(),
            more => format!("; {more} more are needed for {}", claims.coverage),
        };
        Some(format!("{} ({} recorded{enough})", claim_words::claim(&claim, change), claim.operations))
    };
    let parts: Vec<String> = both.into_iter().filter_map(part).collect();
    if parts.is_empty() {
        return Ok(());
    }
    let confidence = claims.confidence;
    lines.item(
        "Claim",
        &format!("with {confidence} confidence, were they independent: {}", parts.join(", and ")),
    )?;
    let of = |change| claims.design.of(change);
    if let [Some(margin), Some(_)] = both.map(|change| of(change).margin) {
        let [make, break_] = both.map(|change| words::at_most(of(change).ns));
        let text =
            format!("{make} after a make, {break_} after a break: those claims with a margin of {margin}");
        return lines.item("Design", &text);
    }
    let designs: Vec<String> = both.into_iter().map(|change| design(change, of(change))).collect();
    lines.item("Design", &designs.join("; "))
}

/// The bounce that is designed for, and the claim that it stands on.
fn design(change: Change, design: &DesignBounce) -> String {
    let basis = claim_words::design_basis(design);
    format!("{} after a {}: {basis}", words::at_most(design.ns), words::change(change))
}
