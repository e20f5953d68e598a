//! The values that nobody gave, as lines of a summary.

use std::io;

use super::lines::Lines;
use crate::requirement::{Origin, Resolved, ResolvedRow};

/// Every value that nobody gave; with `details` why it is what it is, those for the same reason together.
pub(super) fn assumed(lines: &mut Lines<'_>, resolved: &Resolved, details: bool) -> io::Result<()> {
    let mut groups: Vec<(String, Vec<String>)> = Vec::new();
    for row in resolved.rows() {
        // What the network does has just been said.
        if matches!(row.origin, Origin::Given { .. } | Origin::Option(_) | Origin::Network) {
            continue;
        }
        let (reason, key) = match row.origin {
            Origin::Default(_) if !details => ("by default".to_owned(), short(row.key)),
            origin => (origin.to_string(), if details { row.key } else { short(row.key) }),
        };
        let value = format!("{key} = {}", row.text);
        match groups.iter_mut().find(|(known, _)| *known == reason) {
            Some((_, values)) => values.push(value),
            None => groups.push((reason, vec![value])),
        }
    }
    for (reason, values) in &groups {
        lines.item("Assumed", &format!("{} ({reason})", values.join(", ")))?;
    }
    if !details && !groups.is_empty() {
        lines.more("--details says why each of them, and more of clock and sleep")?;
    }
    Ok(())
}

/// The defaults that shape the envelope and the clock, without reasons.
pub(super) fn assumed_briefly(lines: &mut Lines<'_>, resolved: &Resolved) -> io::Result<()> {
    let is_default = |row: &ResolvedRow| matches!(row.origin, Origin::Default(_)) && shapes(row.key);
    let rows = resolved.rows().into_iter().filter(is_default);
    let values: Vec<String> = rows.map(|row| format!("{} = {}", short(row.key), row.text)).collect();
    if values.is_empty() {
        return Ok(());
    }
    lines.item("Assumed", &format!("{} (by default; choose --details says why)", values.join(", ")))
}

/// Whether a value is part of the envelope, of the latency or of the clock.
fn shapes(key: &str) -> bool {
    let is_claim = ["required.confidence", "required.coverage", "required.margin"].contains(&key);
    (key.starts_with("required.") || key.starts_with("clock.")) && !is_claim
}

/// A key without its section, which is told by the name.
fn short(key: &'static str) -> &'static str {
    key.split_once('.').map_or(key, |(_, name)| name)
}
