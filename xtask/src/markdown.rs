//! Reads the parts of a Markdown text that the checks compare with the code.

/// The lines below `heading` (given with its marks, as `## Features`) up to the next one of its level or above.
pub(crate) fn section<'a>(text: &'a str, heading: &str) -> Option<Vec<&'a str>> {
    let level = level(heading);
    let mut lines = prose(text).skip_while(|(line, in_code)| *in_code || *line != heading);
    lines.next()?;
    let ends = move |line: &str| (1..=level).contains(&self::level(line));
    Some(lines.take_while(|(line, in_code)| *in_code || !ends(line)).map(|(line, _)| line).collect())
}

/// The code in the first cell of each row of the tables in `lines`.
pub(crate) fn first_cells<'a>(lines: &[&'a str]) -> Vec<&'a str> {
    let cells = lines.iter().filter_map(|line| line.strip_prefix('|')?.split('|').next());
    cells.filter_map(|cell| cell.trim().strip_prefix('`')?.strip_suffix('`')).collect()
}

/// Everything between two backticks on the same line.
pub(crate) fn code_spans<'a>(lines: &[&'a str]) -> Vec<&'a str> {
    lines.iter().flat_map(|line| line.split('`').skip(1).step_by(2)).collect()
}

/// Every version that follows the word Rust, as in `Rust 1.90`.
pub(crate) fn rust_versions(text: &str) -> Vec<&str> {
    let after = text.split("Rust ").skip(1);
    let numbers = after.map(|rest| {
        let end = rest.find(|c: char| c != '.' && !c.is_ascii_digit()).unwrap_or(rest.len());
        rest[..end].trim_end_matches('.')
    });
    numbers.filter(|number| number.contains('.')).collect()
}

/// Each line, and whether it belongs to a fenced block of code.
fn prose(text: &str) -> impl Iterator<Item = (&str, bool)> {
    let mut in_code = false;
    text.lines().map(move |line| {
        let fence = line.trim_start().starts_with("```");
        in_code ^= fence;
        (line, in_code || fence)
    })
}

/// The level of a heading; 0 for any other line.
fn level(line: &str) -> usize {
    let marks = line.len() - line.trim_start_matches('#').len();
    if line[marks..].starts_with(' ') { marks } else { 0 }
}

#[cfg(test)]
mod tests {
    use super::*;

    const TEXT: &str = "\
# Title
## Features
| feature | brings |
| --- | --- |
| `a` | needs Rust 1.90. |
| `b` | see `c` |
### Smaller
```text
# not a heading
## Checks
```
last
## Checks
| `d` | Rust 2024 edition |
";

    #[test]
    fn section_ends_at_the_next_heading_of_its_level() {
        let lines = section(TEXT, "## Features").unwrap();
        assert_eq!(lines.first(), Some(&"| feature | brings |"));
        assert_eq!(lines.last(), Some(&"last"));
    }

    #[test]
    fn section_heading_inside_code_is_not_found() {
        assert_eq!(section(TEXT, "## Checks").unwrap(), ["| `d` | Rust 2024 edition |"]);
        assert_eq!(section(TEXT, "# not a heading"), None);
    }

    #[test]
    fn cells_and_spans_are_read_without_their_marks() {
        let lines = section(TEXT, "## Features").unwrap();
        assert_eq!(first_cells(&lines), ["a", "b"]);
        assert_eq!(code_spans(&["see `c` and `d/e.rs`", "none"]), ["c", "d/e.rs"]);
    }

    #[test]
    fn rust_versions_leave_editions_and_full_stops_out() {
        assert_eq!(rust_versions(TEXT), ["1.90"]);
        assert_eq!(rust_versions("Rust 1.90.1, then Rust"), ["1.90.1"]);
    }
}
