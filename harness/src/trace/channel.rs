//! The channels of a file, and what to say when the wanted one is not among them.

use std::fmt;

/// A channel that a file offers.
#[derive(Clone, PartialEq, Eq, Debug)]
#[non_exhaustive]
pub struct Channel {
    /// Its full name, as `ReadOptions::channel` accepts it.
    pub name: String,
    /// What it carries.
    pub kind: ChannelKind,
}

/// What a channel carries.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
#[non_exhaustive]
pub enum ChannelKind {
    /// Two levels.
    Levels,
    /// Several bits, of which one is chosen as `name[index]`.
    Vector {
        /// Index of the leftmost bit.
        left: i64,
        /// Index of the rightmost bit.
        right: i64,
    },
    /// A voltage, which takes two thresholds.
    Volts,
}

impl fmt::Display for Channel {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.kind {
            ChannelKind::Levels => f.write_str(&self.name),
            ChannelKind::Vector { left, right } => write!(f, "{}[{left}:{right}]", self.name),
            ChannelKind::Volts => write!(f, "{} (volts)", self.name),
        }
    }
}

/// The channels in one line, cut where a person would stop reading.
pub(super) fn listed(channels: &[Channel]) -> String {
    const SHOWN: usize = 24;
    let mut text = channels.iter().take(SHOWN).map(Channel::to_string).collect::<Vec<_>>().join(", ");
    if let Some(more) = channels.len().checked_sub(SHOWN + 1) {
        text.push_str(&format!(", and {} more", more + 1));
    }
    text
}

/// The channel that was probably meant, if one comes near: by edit distance, case aside, to the whole name or
/// to its last part.
pub(super) fn nearest<'a>(wanted: &str, names: impl Iterator<Item = &'a str>) -> Option<&'a str> {
    // Longer input is no slip of the fingers, and the distance costs its square.
    const LONGEST: usize = 256;
    if wanted.len() > LONGEST {
        return None;
    }
    let wanted = wanted.to_lowercase();
    let last_part = |name: &str| name.rsplit('.').next().unwrap_or_default().to_owned();
    let allowed = (wanted.chars().count() / 3).max(1);
    names
        .filter(|name| name.len() <= LONGEST)
        .map(|name| {
            let lower = name.to_lowercase();
            let whole = distance(&wanted, &lower);
            (whole.min(distance(&last_part(&wanted), &last_part(&lower))), whole, name)
        })
        .filter(|&(best, ..)| best <= allowed)
        .min_by_key(|&(best, whole, _)| (best, whole))
        .map(|(.., name)| name)
}

/// Insertions, deletions, replacements and swaps of neighbours that turn one text into the other
/// (optimal string alignment; the usual dynamic programme with three rows).
fn distance(a: &str, b: &str) -> usize {
    let a: Vec<char> = a.chars().collect();
    let b: Vec<char> = b.chars().collect();
    let mut before = vec![0; b.len() + 1];
    let mut above: Vec<usize> = (0..=b.len()).collect();
    for i in 1..=a.len() {
        let mut row = vec![i; b.len() + 1];
        for j in 1..=b.len() {
            let replaced = above[j - 1] + usize::from(a[i - 1] != b[j - 1]);
            row[j] = replaced.min(above[j] + 1).min(row[j - 1] + 1);
            if i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                row[j] = row[j].min(before[j - 2] + 1);
            }
        }
        before = std::mem::replace(&mut above, row);
    }
    above[b.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn distance_counts_single_edits() {
        for (a, b, expected) in [
            ("", "", 0),
            ("", "abc", 3),
            ("button", "buton", 1),
            ("button", "buttno", 1),
            ("kitten", "sitting", 3),
        ] {
            assert_eq!(distance(a, b), expected, "{a} {b}");
            assert_eq!(distance(b, a), expected, "{b} {a}");
        }
    }

    #[test]
    fn nearest_finds_the_slip_and_nothing_far() {
        let names = ["top.panel.button", "top.panel.lamp", "clock"];
        for (wanted, expected) in [
            ("buton", Some("top.panel.button")),
            ("top.panle.button", Some("top.panel.button")),
            ("BUTTON", Some("top.panel.button")),
            ("clok", Some("clock")),
            ("encoder_a", None),
        ] {
            assert_eq!(nearest(wanted, names.into_iter()), expected, "{wanted}");
        }
    }

    #[test]
    fn listed_long_list_is_cut() {
        let channel = |n: usize| Channel { name: format!("c{n}"), kind: ChannelKind::Levels };
        let all: Vec<_> = (0..30).map(channel).collect();
        assert!(listed(&all).ends_with("c23, and 6 more"));
        assert!(listed(&all[..25]).ends_with("c23, and 1 more"));
        assert!(listed(&all[..24]).ends_with("c23"));
    }
}
