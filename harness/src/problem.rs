//! What is wrong with an input: what, where, and what to write instead.

use std::fmt;
use std::ops::Range;
use std::path::{Path, PathBuf};
use std::sync::Arc;

use annotate_snippets::{AnnotationKind, Group, Level, Renderer, Snippet};

/// The text of an input file, kept so that problems can point into it.
#[derive(PartialEq, Eq, Debug)]
pub struct SourceText {
    path: PathBuf,
    text: String,
}

impl SourceText {
    /// A text and the path it came from, as the user wrote it.
    #[must_use]
    pub fn new(path: impl Into<PathBuf>, text: impl Into<String>) -> Arc<Self> {
        Arc::new(Self { path: path.into(), text: text.into() })
    }

    /// The path, as the user wrote it.
    #[must_use]
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// The whole text.
    #[must_use]
    pub fn text(&self) -> &str {
        &self.text
    }

    /// Line and column of a byte, both from 1; columns count characters.
    #[must_use]
    pub fn line_column(&self, byte: usize) -> (usize, usize) {
        let before = &self.text[..boundary(&self.text, byte)];
        let line_start = before.rfind('\n').map_or(0, |newline| newline + 1);
        (before.matches('\n').count() + 1, before[line_start..].chars().count() + 1)
    }
}

/// One thing that is wrong with an input.
///
/// The message says what, with the value; the place says where; the help says what to write instead.
/// All three are lower case without a final full stop.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Problem {
    message: String,
    place: Place,
    help: Vec<String>,
}

#[derive(Clone, PartialEq, Eq, Debug)]
enum Place {
    /// Nowhere in particular, or the message names it.
    Unplaced,
    /// A file that is too large to be kept, or has no lines.
    File { path: PathBuf, line_column: Option<(usize, usize)> },
    /// Stretches of a kept text, the first of them the culprit.
    Text { source: Arc<SourceText>, marks: Vec<Mark> },
}

#[derive(Clone, PartialEq, Eq, Debug)]
struct Mark {
    span: Range<usize>,
    label: String,
}

impl Problem {
    /// A problem with no place.
    #[must_use]
    pub fn new(message: impl Into<String>) -> Self {
        Self { message: message.into(), place: Place::Unplaced, help: Vec::new() }
    }

    /// A problem from the text of an error, `what is wrong; what to do instead`: each part after a semicolon is
    /// help. A semicolon in quotation marks belongs to the input and parts nothing.
    #[must_use]
    pub fn told(text: impl fmt::Display) -> Self {
        let text = text.to_string();
        let mut parts = sentences(&text).map(str::to_owned);
        let message = parts.next().unwrap_or_default();
        Self { message, place: Place::Unplaced, help: parts.collect() }
    }

    /// Says in which file the problem lies.
    #[must_use]
    pub fn in_file(mut self, path: impl Into<PathBuf>) -> Self {
        self.place = Place::File { path: path.into(), line_column: None };
        self
    }

    /// Says at which line and column of a file the problem lies, both from 1.
    #[must_use]
    pub fn at(mut self, path: impl Into<PathBuf>, line: usize, column: usize) -> Self {
        self.place = Place::File { path: path.into(), line_column: Some((line, column)) };
        self
    }

    /// Points at a stretch of a kept text; a second call adds a further mark to the same text.
    #[must_use]
    pub fn mark(mut self, source: &Arc<SourceText>, span: Range<usize>, label: impl Into<String>) -> Self {
        let mark = Mark { span, label: label.into() };
        match &mut self.place {
            Place::Text { marks, .. } => marks.push(mark),
            place => *place = Place::Text { source: Arc::clone(source), marks: vec![mark] },
        }
        self
    }

    /// Adds a line that says what to write or do instead.
    #[must_use]
    pub fn help(mut self, help: impl Into<String>) -> Self {
        self.help.push(help.into());
        self
    }

    /// What is wrong, with the value.
    #[must_use]
    pub fn message(&self) -> &str {
        &self.message
    }

    /// What to write or do instead.
    #[must_use]
    pub fn helps(&self) -> &[String] {
        &self.help
    }

    /// The file the problem lies in.
    #[must_use]
    pub fn path(&self) -> Option<&Path> {
        match &self.place {
            Place::Unplaced => None,
            Place::File { path, .. } => Some(path),
            Place::Text { source, .. } => Some(source.path()),
        }
    }

    /// Line and column of the problem, both from 1.
    #[must_use]
    pub fn line_column(&self) -> Option<(usize, usize)> {
        match &self.place {
            Place::Unplaced => None,
            Place::File { line_column, .. } => *line_column,
            Place::Text { source, marks } => marks.first().map(|mark| source.line_column(mark.span.start)),
        }
    }

    /// The problem as it is shown to a person, with colour codes; print it through a stream that can strip them.
    #[must_use]
    pub fn rendered(&self) -> String {
        self.render(&Renderer::styled())
    }

    fn render(&self, renderer: &Renderer) -> String {
        let title = match &self.place {
            Place::File { path, line_column: Some((line, column)) } => {
                format!("{}:{line}:{column}: {}", path.display(), self.message)
            }
            Place::File { path, line_column: None } => format!("{}: {}", path.display(), self.message),
            _ => self.message.clone(),
        };
        let mut group = Group::with_title(Level::ERROR.primary_title(title));
        if let Place::Text { source, marks } = &self.place {
            let mut snippet = Snippet::source(source.text()).path(source.path().display().to_string());
            for (index, mark) in marks.iter().enumerate() {
                let kind = if index == 0 { AnnotationKind::Primary } else { AnnotationKind::Context };
                let annotation = kind.span(clamp(&mark.span, source.text()));
                snippet =
                    snippet.annotation(annotation.label(Some(mark.label.as_str()).filter(|l| !l.is_empty())));
            }
            group = group.element(snippet);
        }
        if let Place::Text { .. } = &self.place {
            group = group.elements(self.help.iter().map(|help| Level::HELP.message(help.as_str())));
            return renderer.render(&[group]);
        }
        // Without a text to hang it on, the help stands on a line of its own.
        let helps = self.help.iter().map(|help| Group::with_title(Level::HELP.primary_title(help.as_str())));
        let shown: Vec<String> =
            std::iter::once(group).chain(helps).map(|group| renderer.render(&[group])).collect();
        shown.join("\n")
    }
}

/// The parts of a text between semicolons that stand outside quotation marks.
fn sentences(text: &str) -> impl Iterator<Item = &str> {
    let (mut from, mut is_quoted, mut is_escaped) = (0, false, false);
    let mut cuts = Vec::new();
    for (at, letter) in text.char_indices() {
        match letter {
            '"' if !is_escaped => is_quoted = !is_quoted,
            ';' if !is_quoted && text[at..].starts_with("; ") => {
                cuts.push(&text[from..at]);
                from = at + 2;
            }
            _ => {}
        }
        is_escaped = letter == '\\' && !is_escaped;
    }
    cuts.push(&text[from..]);
    cuts.into_iter()
}

/// Keeps a span inside the text and on character boundaries, whatever a parser reported.
fn clamp(span: &Range<usize>, text: &str) -> Range<usize> {
    let start = boundary(text, span.start);
    let inside = span.end.clamp(start, text.len());
    let end = (inside..=text.len()).find(|&byte| text.is_char_boundary(byte)).unwrap_or(text.len());
    start..end
}

/// The last start of a character at or before `byte`.
fn boundary(text: &str, byte: usize) -> usize {
    (0..=byte.min(text.len())).rev().find(|&byte| text.is_char_boundary(byte)).unwrap_or(0)
}

impl fmt::Display for Problem {
    /// One line: `file:line:column: message; help`.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if let Some(path) = self.path() {
            write!(f, "{}:", path.display())?;
            if let Some((line, column)) = self.line_column() {
                write!(f, "{line}:{column}:")?;
            }
            f.write_str(" ")?;
        }
        f.write_str(&self.message)?;
        self.help.iter().try_for_each(|help| write!(f, "; {help}"))
    }
}

/// Everything that is wrong with an input, at least one problem.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Problems(Vec<Problem>);

impl Problems {
    /// The problems, file by file as they were found, and each file in its order; `None` where there are none.
    #[must_use]
    pub fn from_found(mut problems: Vec<Problem>) -> Option<Self> {
        let mut files: Vec<Option<PathBuf>> = Vec::new();
        for problem in &problems {
            if !files.iter().any(|known| known.as_deref() == problem.path()) {
                files.push(problem.path().map(Path::to_path_buf));
            }
        }
        let file = |problem: &Problem| files.iter().position(|known| known.as_deref() == problem.path());
        problems.sort_by_key(|problem| (file(problem), problem.line_column()));
        (!problems.is_empty()).then_some(Self(problems))
    }

    /// The problems.
    pub fn iter(&self) -> std::slice::Iter<'_, Problem> {
        self.0.iter()
    }
}

impl From<Problem> for Problems {
    fn from(problem: Problem) -> Self {
        Self(vec![problem])
    }
}

impl<'a> IntoIterator for &'a Problems {
    type Item = &'a Problem;
    type IntoIter = std::slice::Iter<'a, Problem>;

    fn into_iter(self) -> Self::IntoIter {
        self.iter()
    }
}

impl fmt::Display for Problems {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (index, problem) in self.0.iter().enumerate() {
            if index > 0 {
                f.write_str("\n")?;
            }
            problem.fmt(f)?;
        }
        Ok(())
    }
}

impl std::error::Error for Problem {}
impl std::error::Error for Problems {}

/// An operating system's reason in lower case, without the number that Rust puts after it.
#[must_use]
pub fn plain_reason(error: &std::io::Error) -> String {
    let text = error.to_string();
    let reason = text.split(" (os error").next().unwrap_or(&text);
    let mut letters = reason.chars();
    letters.next().map(|first| first.to_lowercase().chain(letters).collect()).unwrap_or_default()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn problem_in_a_text_points_at_line_and_column_in_characters() {
        let source = SourceText::new("größe.toml", "a = 1\nµ = 2 # ü\n");
        let at = source.text().find('2').unwrap();
        let problem =
            Problem::new("\"2\" has no unit").mark(&source, at..at + 1, "no unit").help("write \"2 ms\"");
        assert_eq!(problem.to_string(), "größe.toml:2:5: \"2\" has no unit; write \"2 ms\"");
        let shown = problem.render(&Renderer::plain());
        assert!(shown.starts_with("error: \"2\" has no unit"), "{shown}");
        assert!(shown.contains("--> größe.toml:2:5"), "{shown}");
        assert!(shown.contains("^ no unit"), "{shown}");
        assert!(shown.contains("= help: write \"2 ms\""), "{shown}");
    }

    #[test]
    fn problem_in_a_large_file_leads_with_its_place() {
        let problem = Problem::new("time runs backwards").at("latch.vcd", 17, 9).help("sort the recording");
        let shown = problem.render(&Renderer::plain());
        assert!(shown.starts_with("error: latch.vcd:17:9: time runs backwards"), "{shown}");
        assert!(shown.contains("help: sort the recording"), "{shown}");
    }

    #[test]
    fn problem_with_a_span_outside_the_text_is_still_shown() {
        let source = SourceText::new("x", "ü");
        for span in [0..9, 1..1, 7..9, 2..2] {
            let shown = Problem::new("odd").mark(&source, span.clone(), "").render(&Renderer::plain());
            assert!(shown.contains("odd"), "{span:?}: {shown}");
        }
    }

    #[test]
    fn problem_told_by_an_error_parts_what_from_what_to_do() {
        let told = |text: &str| {
            let problem = Problem::told(text);
            assert_eq!(problem.to_string(), text, "nothing is lost");
            (problem.message().to_owned(), problem.helps().to_vec())
        };
        assert_eq!(told("a; b; c"), ("a".to_owned(), vec!["b".to_owned(), "c".to_owned()]));
        assert_eq!(told("\"a; b\" is odd"), ("\"a; b\" is odd".to_owned(), vec![]));
        assert_eq!(told(r#""\"; b" is odd; c"#), (r#""\"; b" is odd"#.to_owned(), vec!["c".to_owned()]));
        assert_eq!(told("a;b"), ("a;b".to_owned(), vec![]));
    }

    #[test]
    fn problems_of_several_files_stay_together() {
        let at = |file: &str, line| Problem::new(format!("{file}{line}")).at(file, line, 1);
        let found = vec![at("b", 9), at("a", 1), at("b", 2), Problem::new("whole").in_file("b"), at("a", 3)];
        let problems = Problems::from_found(found).unwrap();
        let order: Vec<&str> = problems.iter().map(Problem::message).collect();
        assert_eq!(order, ["whole", "b2", "b9", "a1", "a3"]);
    }

    #[test]
    fn problems_are_listed_in_the_order_of_the_text() {
        let source = SourceText::new("x", "a\nb\n");
        let found = vec![
            Problem::new("second").mark(&source, 2..3, ""),
            Problem::new("first").mark(&source, 0..1, ""),
        ];
        let problems = Problems::from_found(found).unwrap();
        assert_eq!(problems.to_string(), "x:1:1: first\nx:2:1: second");
        assert_eq!(Problems::from_found(Vec::new()), None);
    }
}
