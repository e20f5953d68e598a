//! What is proved beyond the bounds, in lines of a summary.

use std::io;

use debounce_core::PerPosition;

use super::lines::{Lines, grouped};
use crate::prove::{Beyond, NotSearched, Recovery, Searched};
use crate::report::timing::TimingDiagram;
use crate::report::words;

/// Pairs of shortest operations listed on the screen.
const SHOWN: usize = 6;

/// Immunity, shortest operations and recovery of a logic that is faithful.
pub(super) fn beyond(lines: &mut Lines<'_>, found: &Beyond) -> io::Result<()> {
    if let Err(NotSearched::Large { states }) = &found.immunity {
        lines.item("Alone", &lone(&found.lone_disturbance))?;
        return lines.item(
            "Not searched",
            &format!(
                "immunity, shortest operations and recovery, because that repeats the proof with its {} states many times; --thorough does it all the same",
                grouped(*states)
            ),
        );
    }
    match &found.immunity {
        Ok(immunity) => lines.item("Immunity", &format!("bears disturbances up to {}", widths(immunity)))?,
        Err(reason) => lines.item("Immunity", &reason.to_string())?,
    }
    lines.more(&lone(&found.lone_disturbance))?;
    match &found.shortest_operations {
        Ok(pairs) => lines.item("Shortest", &served(pairs))?,
        Err(reason) => lines.item("Shortest", &reason.to_string())?,
    }
    lines.item(
        "Recovery",
        &recovery(&found.after_short_operations, "after an operation that was too short"),
    )?;
    // A logic that turns over is said once to have no such thing.
    if !matches!(found.from_any_state, Err(NotSearched::TurnsOver)) {
        lines.more(&recovery(&found.from_any_state, "from any state of the law, as after an upset"))?;
    }
    circles(lines, found)
}

/// Of a refuted logic: the disturbances it would still bear, and what it never reports from rest.
pub(super) fn still_bears(lines: &mut Lines<'_>, found: &Beyond) -> io::Result<()> {
    match &found.immunity {
        Ok(PerPosition { open: None, closed: None }) => {
            lines
                .item("Immunity", "none: it is refuted without disturbances at open or at closed as well")?;
        }
        Ok(immunity) => {
            lines.item("Immunity", &format!("would hold with disturbances up to {}", widths(immunity)))?
        }
        Err(reason) => lines.item("Immunity", &reason.to_string())?,
    }
    lines.more(&lone(&found.lone_disturbance))
}

fn ticks(width: Option<u32>) -> String {
    width.map_or("none".to_owned(), |samples| words::count(samples as usize, "sample"))
}

fn widths(found: &PerPosition<Option<u32>>) -> String {
    format!(
        "{} while open, or up to {} while closed, all else as it is",
        ticks(found.open),
        ticks(found.closed)
    )
}

fn lone(found: &PerPosition<Option<u32>>) -> String {
    let one = |width: Option<u32>| width.map_or("however wide".to_owned(), |width| format!("up to {width}"));
    format!(
        "a lone one from rest is never reported {} while open and {} while closed",
        one(found.open),
        one(found.closed)
    )
}

fn served(pairs: &[PerPosition<u32>]) -> String {
    if pairs.is_empty() {
        return "none is always served".to_owned();
    }
    let one = |pair: &PerPosition<u32>| format!("{} closed with {} open", pair.closed, pair.open);
    let listed: Vec<String> = pairs.iter().take(SHOWN).map(one).collect();
    let more = match pairs.len().saturating_sub(SHOWN) {
        0 => String::new(),
        more => format!("; and {more} more, which --json lists"),
    };
    format!("operations always served, in samples: {}{more}", listed.join("; or "))
}

fn recovery(found: &Searched<Recovery>, after: &str) -> String {
    match found {
        Ok(Recovery::Within(samples)) => {
            format!("right for good within {} {after}", words::count(*samples as usize, "sample"))
        }
        Ok(Recovery::Never(_)) => format!("may stay wrong for ever {after}: shown below"),
        Err(reason) => reason.to_string(),
    }
}

/// The waveforms in which a logic never comes back.
fn circles(lines: &mut Lines<'_>, found: &Beyond) -> io::Result<()> {
    let shown = [
        ("after an operation that was too short", &found.after_short_operations),
        ("from some state", &found.from_any_state),
    ];
    for (after, recovery) in shown {
        if let Ok(Recovery::Never(witness)) = recovery {
            lines.plain(&format!("\nwrong for ever {after}:\n{}", TimingDiagram(witness)))?;
        }
    }
    Ok(())
}
