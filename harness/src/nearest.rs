//! The word that was probably meant: nearest by edits, for help texts.
//!
//! An edit is one character put in, left out, replaced or swapped with its neighbour; upper and lower case count
//! as the same. A third of what was written may be wrong: a longer repair is a guess and not a slip. Of equally
//! near candidates the first one wins.

/// The candidate that takes the fewest edits to reach from `word`, if that is close enough to be a slip.
///
/// # Examples
/// ```
/// use harness::nearest::nearest;
/// assert_eq!(nearest("latancy", ["quiet", "latency"]), Some("latency"));
/// assert_eq!(nearest("colour", ["quiet", "latency"]), None);
/// ```
#[must_use]
pub fn nearest<'a>(word: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    least(word, candidates, |word, candidate| (edits(word, candidate), 0))
}

/// The same for names with scopes, such as `top.panel.button`: the last part alone may be the near one.
///
/// # Examples
/// ```
/// use harness::nearest::nearest_scoped;
/// assert_eq!(nearest_scoped("buton", ["top.lamp", "top.panel.button"]), Some("top.panel.button"));
/// ```
#[must_use]
pub fn nearest_scoped<'a>(name: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    fn last_part(name: &[char]) -> &[char] {
        name.rsplit(|&letter| letter == '.').next().unwrap_or_default()
    }
    least(name, candidates, |name, candidate| {
        let whole = edits(name, candidate);
        (whole.min(edits(last_part(name), last_part(candidate))), whole)
    })
}

/// The candidate of the least cost whose first part is small enough for a slip.
fn least<'a>(
    word: &str,
    candidates: impl IntoIterator<Item = &'a str>,
    cost: impl Fn(&[char], &[char]) -> (usize, usize),
) -> Option<&'a str> {
    // Longer input is no slip of the fingers, and the edits cost its square.
    const LONGEST: usize = 256;
    let letters = |text: &str| text.to_lowercase().chars().collect::<Vec<char>>();
    if word.len() > LONGEST {
        return None;
    }
    let word = letters(word);
    let allowed = (word.len() / 3).max(1);
    candidates
        .into_iter()
        .filter(|candidate| candidate.len() <= LONGEST)
        .map(|candidate| (cost(&word, &letters(candidate)), candidate))
        .filter(|((needed, _), _)| *needed <= allowed)
        .min_by_key(|(cost, _)| *cost)
        .map(|(_, candidate)| candidate)
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
    fn nearest_scoped_finds_the_slip_and_nothing_far() {
        let names = ["top.panel.button", "top.panel.lamp", "clock"];
        for (wanted, expected) in [
            ("buton", Some("top.panel.button")),
            ("top.panle.button", Some("top.panel.button")),
            ("BUTTON", Some("top.panel.button")),
            ("clok", Some("clock")),
            ("encoder_a", None),
        ] {
            assert_eq!(nearest_scoped(wanted, names), expected, "{wanted}");
        }
    }

    #[test]
    fn nearest_of_overlong_words_is_not_sought() {
        let (longest, longer) = ("a".repeat(256), "a".repeat(257));
        assert_eq!(nearest(&longest, [longest.as_str()]), Some(longest.as_str()));
        assert_eq!(nearest(&longer, [longest.as_str()]), None);
        assert_eq!(nearest(&longest, [longer.as_str()]), None);
    }

    #[test]
    fn edits_count_single_changes() {
        let letters = |text: &str| text.chars().collect::<Vec<char>>();
        for (a, b, expected) in [
            ("", "", 0),
            ("", "abc", 3),
            ("button", "buton", 1),
            ("button", "buttno", 1),
            ("kitten", "sitting", 3),
        ] {
            assert_eq!(edits(&letters(a), &letters(b)), expected, "{a} {b}");
            assert_eq!(edits(&letters(b), &letters(a)), expected, "{b} {a}");
        }
    }

    #[test]
    fn nearest_word_unlike_any_is_not_guessed() {
        check("latency", None);
        check("", None);
        check("ca", None);
    }
}
