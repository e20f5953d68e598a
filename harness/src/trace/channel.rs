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

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn listed_long_list_is_cut() {
        let channel = |n: usize| Channel { name: format!("c{n}"), kind: ChannelKind::Levels };
        let all: Vec<_> = (0..30).map(channel).collect();
        assert!(listed(&all).ends_with("c23, and 6 more"));
        assert!(listed(&all[..25]).ends_with("c23, and 1 more"));
        assert!(listed(&all[..24]).ends_with("c23"));
    }
}
