//! The word that was probably meant: nearest by edits, for help texts.

/// The candidate that takes the fewest edits to reach from `word`, if that is close enough to be a slip.
///
/// An edit is one character put in, left out, replaced or swapped with its neighbour; upper and lower case
/// count as the same. Of equally near candidates the first one wins.
///
/// # Examples
/// ```
/// use harness::nearest::nearest;
/// assert_eq!(nearest("latancy", ["quiet", "latency"]), Some("latency"));
/// assert_eq!(nearest("colour", ["quiet", "latency"]), None);
/// ```
#[must_use]
pub fn nearest<'a>(word: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let word: Vec<char> = word.to_lowercase().chars().collect();
    // A third of the word may be wrong; a longer repair is a guess and not a slip.
    let allowed = (word.len() / 3).max(1);
    let mut best: Option<(usize, &str)> = None;
    for candidate in candidates {
        let other: Vec<char> = candidate.to_lowercase().chars().collect();
        let needed = edits(&word, &other);
        if needed <= allowed && best.is_none_or(|(least, _)| needed < least) {
            best = Some((needed, candidate));
        }
    }
    best.map(|(_, candidate)| candidate)
}

/// Edits between two words, by the usual table of prefixes (optimal string alignment).
fn edits(a: &[char], b: &[char]) -> usize {
    let mut before_last: Vec<usize> = Vec::new();
    let mut last: Vec<usize> = (0..=b.len()).collect();
    for i in 1..=a.len() {
        let mut row = vec![i];
        for j in 1..=b.len() {
            let replaced = last[j - 1] + usize::from(a[i - 1] != b[j - 1]);
            let mut least = replaced.min(last[j] + 1).min(row[j - 1] + 1);
            if i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                least = least.min(before_last[j - 2] + 1);
            }
            row.push(least);
        }
        before_last = std::mem::replace(&mut last, row);
    }
    last[b.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    const KEYS: [&str; 4] = ["shortest_closed", "shortest_open", "quiet", "calm"];

    #[track_caller]
    fn check(word: &str, expected: Option<&str>) {
        assert_eq!(nearest(word, KEYS), expected, "for {word}");
    }

    #[test]
    fn nearest_word_with_a_slip_is_found() {
        check("queit", Some("quiet"));
        check("Quiet", Some("quiet"));
        check("shortest-open", Some("shortest_open"));
        check("shortest_close", Some("shortest_closed"));
        check("cal", Some("calm"));
    }

    #[test]
    fn nearest_word_unlike_any_is_not_guessed() {
        check("latency", None);
        check("", None);
        check("ca", None);
    }
}
