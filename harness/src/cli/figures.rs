//! The figures of recordings, one or several, as lines of a summary.

use std::io;

use debounce_core::{Change, Position};

use super::lines::Lines;
use crate::characterise::{Figures, Histogram, Spread};
use crate::report::{claim_words, words};
use crate::study::{Claims, Observed};
use crate::trace::SamplePeriod;

/// What lies between the operations: disturbances, dwell, quiet; and what the recorder could not see.
pub(super) fn between(lines: &mut Lines<'_>, figures: &Figures, period: SamplePeriod) -> io::Result<()> {
    let seen = |ns| words::seen(ns, figures.resolution_ns);
    for position in Position::BOTH {
        let (disturbed, dwell) = (figures.disturbances.of(position), figures.dwell.of(position));
        let widths = disturbed.width_ns.map_or(String::new(), |width| {
            format!(", median {}, widest {}", seen(width.median), seen(width.max))
        });
        let shortest = dwell.shortest_ns.map_or(String::new(), |shortest| {
            let doubt = dwell.shortest_in_doubt_ns.map_or(String::new(), |ns| {
                format!(" (a run of {} may have been an operation)", words::about(ns))
            });
            format!("for {} at least{doubt}; ", words::at_least(shortest))
        });
        let in_doubt = match disturbed.widest_in_doubt_ns {
            0 => String::new(),
            widest => format!(", and perhaps parts of bounces of up to {}", seen(widest)),
        };
        lines.item(
            if position.is_closed() { "While closed" } else { "While open" },
            &format!("{shortest}{}{widths}{in_doubt}", words::count(disturbed.count, "disturbance")),
        )?;
    }
    let disturbed = figures.disturbances.open.count + figures.disturbances.closed.count;
    if figures.quiet_ns.is_none() && disturbed > 0 {
        lines.item("Quiet", "not known: no two disturbances were recorded one after the other")?;
    }
    if let Some(quiet) = figures.quiet_ns.filter(|_| figures.rests == 0) {
        let apart = words::at_least(quiet);
        lines.item(
            "Quiet",
            &format!(
                "no rest between two disturbances was recorded; with parts of bounces that may be disturbances, \
                 they lie {apart} apart at least"
            ),
        )?;
    }
    if let Some(quiet) = figures.quiet_ns.filter(|_| figures.rests > 0) {
        let rate = Some(figures.disturbances_per_second()).filter(|&rate| rate > 0.0);
        lines.item(
            "Quiet",
            &format!(
                "at least {} between two disturbances, by {} recorded{}{}",
                words::at_least(quiet),
                words::count(figures.rests, "rest"),
                rate.map_or(String::new(), |rate| format!("; {} of them a second", significant(rate))),
                figures.spacing_ns.map_or(String::new(), |spacing| format!(
                    ", from {} to {} apart, median {}",
                    words::about(spacing.min),
                    words::about(spacing.max),
                    words::about(spacing.median)
                ))
            ),
        )?;
    }
    lines.item(
        "Recorder",
        &match taken_by(period) {
            None => format!(
                "sample period {}: added to every claim; nothing shorter is seen",
                words::about(figures.resolution_ns)
            ),
            Some(by) => format!(
                "sample period {} by the {by}; if coarser, say --resolution",
                words::about(figures.resolution_ns)
            ),
        },
    )
}

/// What a sample period was guessed by, where it was.
fn taken_by(period: SamplePeriod) -> Option<&'static str> {
    match period {
        SamplePeriod::Stated | SamplePeriod::Spacing => None,
        SamplePeriod::TimeScale => Some("time scale"),
        SamplePeriod::Digits => Some("last digit"),
    }
}

/// Where the sample period of several recordings comes from, which is that of the coarsest; of equals a guess.
pub(super) fn period_of(observed: &[Observed]) -> SamplePeriod {
    let periods = observed.iter().map(|one| (one.segmentation.resolution_ns, one.recording.period));
    periods
        .max_by_key(|&(ns, period)| (ns, taken_by(period).is_some()))
        .map_or(SamplePeriod::Stated, |(_, period)| period)
}

fn significant(rate: f64) -> String {
    // Two digits, and none behind the point from 10 on.
    let digits = (1.0 - rate.log10().floor()).clamp(0.0, 9.0) as usize;
    format!("{rate:.digits$}")
}

/// What the operations of one kind have in common; `drawn` with the histogram of their bounces.
pub(super) fn of_kind(
    lines: &mut Lines<'_>,
    figures: &Figures,
    change: Change,
    drawn: bool,
) -> io::Result<()> {
    let found = figures.changes.of(change);
    let Some(bounce) = found.bounce_ns else { return Ok(()) };
    let period = figures.resolution_ns;
    let label = if change == Change::Make { "Makes" } else { "Breaks" };
    lines.item(
        label,
        &format!(
            "{}, {} in doubt; bounce {}, longest on the safe side {}",
            found.count,
            found.ambiguous,
            quantiles(bounce, period),
            words::at_most(found.sorted_safe_bounces_ns.last().copied().unwrap_or(0)),
        ),
    )?;
    if let Some(Spread { min, median, p95, max, .. }) = found.edges {
        lines.more(&format!("edges {min} to {max}, median {median}, 95 % {p95}"))?;
    }
    if let Some(spread) = found.longest_gap_ns {
        lines.more(&format!("longest quiet gap inside: {}", quantiles(spread, period)))?;
    }
    if let Some(Spread { min, median, max, .. }) = found.shortest_pulse_ns {
        // How long the longest of the shortest are matters to nobody.
        let [min, median, max] = [min, median, max].map(|ns| words::seen(ns, period));
        lines.more(&format!("shortest pulse: {min} to {max}, median {median}"))?;
    }
    if found.count >= FEWEST {
        if let Some(histogram) = found.histogram(period).filter(|_| drawn) {
            bars(lines, &histogram)?;
        }
        lines.more(&claim_words::order(&found.independence))?;
    }
    claim_words::indication(found).map_or(Ok(()), |text| lines.more(&text))
}

/// Fewer operations than this make no picture.
const FEWEST: usize = 8;

fn quantiles(spread: Spread, resolution_ns: u64) -> String {
    let [min, median, p95, p99, max] = [spread.min, spread.median, spread.p95, spread.p99, spread.max]
        .map(|ns| words::seen(ns, resolution_ns));
    format!("{min} to {max}, median {median}, 95 % {p95}, 99 % {p99}")
}

/// Columns of the longest bar.
const BAR: u64 = 40;

fn bars(lines: &mut Lines<'_>, histogram: &Histogram) -> io::Result<()> {
    let most = histogram.counts.iter().copied().max().unwrap_or(0).max(1);
    for (from_ns, count) in histogram.bins() {
        // A bin that is not empty shows at least one mark.
        let marks = (count * BAR).div_ceil(most);
        let line = format!("{:>21} {count:>8}  {}", words::about(from_ns), "#".repeat(marks as usize));
        lines.plain(&format!("{}\n", line.trim_end()))?;
    }
    lines.more(&format!(
        "each line counts bounces from its time on, in bins of {}",
        words::about(histogram.bin_ns)
    ))
}

/// What is claimed of everything but the bounces.
pub(super) fn extremes(lines: &mut Lines<'_>, claims: &Claims) -> io::Result<()> {
    let mut found = claims.extremes.iter().filter_map(|extreme| extreme.claim(claims.coverage));
    let Some(first) = found.next() else { return Ok(()) };
    let confidence = claims.confidence;
    lines.item("Others", &format!("with {confidence} confidence, were they independent: {first}"))?;
    found.try_for_each(|claim| lines.more(&claim))
}

/// The limits that reach the wanted coverage, where there are enough operations for them.
pub(super) fn limits(lines: &mut Lines<'_>, claims: &Claims) -> io::Result<()> {
    for change in [Change::Make, Change::Break] {
        let Some(claim) = claims.bounce.at(change) else { continue };
        lines.item("Limit", &claim_words::limit(claims, &claim, change))?;
    }
    Ok(())
}
