//! Words as a shell takes them again.

/// A word as a shell takes it: in single quotes where it holds anything but letters, digits and `._-/=,:`.
pub(super) fn shell_word(text: &str) -> String {
    if !text.is_empty() && text.chars().all(|letter| letter.is_alphanumeric() || "._-/=,:".contains(letter)) {
        return text.to_owned();
    }
    format!("'{}'", text.replace('\'', r"'\''"))
}

/// A whole command line: the program by its name alone, wherever it lies, and the words after it.
pub(super) fn shell_line(words: impl IntoIterator<Item = String>) -> String {
    let quoted = words.into_iter().skip(1).map(|word| shell_word(&word));
    core::iter::once("harness".to_owned()).chain(quoted).collect::<Vec<_>>().join(" ")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn shell_line_quotes_what_a_shell_would_split() {
        let line = shell_line(["/opt/harness", "prove", "integrator 5", "it's", ""].map(str::to_owned));
        assert_eq!(line, r"harness prove 'integrator 5' 'it'\''s' ''");
    }
}
