//! What recordings show and what may be claimed from them, as lines of a summary.

use std::io;

use debounce_core::Change;

use super::lines::Lines;
use crate::report::words;
use crate::requirement::Resolved;
use crate::study::{Claim, Observed};

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
    for change in [Change::Make, Change::Break] {
        if let Some(bounce) = figures.changes.of(change).bounce_ns {
            lines.more(&format!(
                "bounce at a {:<6} median {:>8}, 95 % {:>8}, longest {:>8}",
                words::change(change),
                words::about(bounce.median),
                words::about(bounce.p95),
                words::about(bounce.max)
            ))?;
        }
    }
    Ok(())
}

/// What the recorded operations allow to claim of those to come.
pub(super) fn claims(lines: &mut Lines<'_>, observed: &[Observed], resolved: &Resolved) -> io::Result<()> {
    let (confidence, coverage) = (resolved.confidence.value, resolved.coverage.value);
    let mut parts = Vec::new();
    for change in [Change::Make, Change::Break] {
        let claim = Claim::of(observed, change, confidence, coverage);
        let Some(claim) = claim.map_err(io::Error::other)? else { continue };
        let enough = if claim.operations >= claim.needed {
            String::new()
        } else {
            format!("; {} are needed for {coverage}", claim.needed)
        };
        // Rounded down to a tenth of a percent, which understates what is covered.
        let covered = (claim.covered * 1000.0).floor() / 10.0;
        parts.push(format!(
            "{covered:.1} % of {}s bounce no longer than {} ({} recorded{enough})",
            words::change(change),
            words::at_most(claim.longest_ns),
            claim.operations,
        ));
    }
    if parts.is_empty() {
        return Ok(());
    }
    let text = format!("with {confidence} confidence, were they independent: {}", parts.join(", and "));
    lines.item("Claim", &text)
}
