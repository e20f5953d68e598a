//! Labelled lines of a summary, wrapped to the terminal.

use std::io::{self, Write};

use anstyle::{AnsiColor, Style};
use unicode_width::UnicodeWidthStr;

/// Columns of the labels.
const INDENT: usize = 13;

/// Columns where the width of the terminal is not known.
const COLUMNS: usize = 80;

const TITLE: Style = Style::new().bold().underline();
const LABEL: Style = Style::new().fg_color(Some(anstyle::Color::Ansi(AnsiColor::Cyan)));
const STRONG: Style = Style::new().bold();

/// Writes labelled items, their text wrapped beside the labels.
pub(super) struct Lines<'a> {
    out: &'a mut dyn Write,
    columns: usize,
}

/// The columns that text may take: what `COLUMNS` says, else those of the terminal, else 80.
pub(super) fn columns() -> usize {
    let stated = std::env::var("COLUMNS").ok().and_then(|text| text.parse().ok());
    let terminal = || terminal_size::terminal_size_of(io::stdout()).map(|(width, _)| usize::from(width.0));
    stated.or_else(terminal).unwrap_or(COLUMNS).clamp(40, 140)
}

/// A stretch of text that stands out where there is colour; its meaning must not hang on that.
pub(super) fn strong(text: &str) -> String {
    // Each word apart, so that a line may break between them.
    let words: Vec<String> = text.split(' ').map(|word| format!("{STRONG}{word}{STRONG:#}")).collect();
    words.join(" ")
}

impl<'a> Lines<'a> {
    pub(super) fn new(out: &'a mut dyn Write) -> Self {
        Self { out, columns: columns() }
    }

    /// A heading.
    pub(super) fn title(&mut self, text: &str) -> io::Result<()> {
        writeln!(self.out, "{TITLE}{text}{TITLE:#}\n")
    }

    /// A labelled item.
    pub(super) fn item(&mut self, label: &str, text: &str) -> io::Result<()> {
        write!(self.out, "{LABEL}{label:<INDENT$}{LABEL:#}")?;
        self.wrapped(text, INDENT)
    }

    /// A further line of the item before.
    pub(super) fn more(&mut self, text: &str) -> io::Result<()> {
        write!(self.out, "{:INDENT$}", "")?;
        self.wrapped(text, INDENT)
    }

    /// A sentence behind a word that says what it is, such as a warning.
    pub(super) fn sentence(&mut self, word: &str, text: &str) -> io::Result<()> {
        write!(self.out, "{word}: ")?;
        self.wrapped(text, word.len() + 2)
    }

    /// A command line to be typed again, broken only before options and as a shell takes it.
    pub(super) fn command(&mut self, text: &str) -> io::Result<()> {
        let mut column = 0;
        for (index, part) in text.split(" --").enumerate() {
            let (part, width) = match index {
                0 => (part.to_owned(), part.len()),
                _ => (format!("--{part}"), part.len() + 2),
            };
            // Two columns are kept for the stroke that joins the lines.
            if index > 0 && column + 1 + width + 2 > self.columns {
                self.out.write_all(b" \\\n    ")?;
                column = 4 + width;
            } else {
                self.out.write_all(if index > 0 { b" " } else { b"" })?;
                column += width + 1;
            }
            self.out.write_all(part.as_bytes())?;
        }
        self.out.write_all(b"\n")
    }

    /// Anything else, as it is.
    pub(super) fn plain(&mut self, text: &str) -> io::Result<()> {
        self.out.write_all(text.as_bytes())
    }

    fn wrapped(&mut self, text: &str, indent: usize) -> io::Result<()> {
        let mut column = indent;
        for (index, word) in text.split(' ').enumerate() {
            let width = shown_width(word);
            if index > 0 {
                if column + 1 + width > self.columns {
                    write!(self.out, "\n{:indent$}", "")?;
                    column = indent;
                } else {
                    self.out.write_all(b" ")?;
                    column += 1;
                }
            }
            self.out.write_all(word.as_bytes())?;
            column += width;
        }
        self.out.write_all(b"\n")
    }
}

/// A line broken between words before `columns`, the further lines indented; what stands in quotation marks is copied
/// in one piece, so it is not broken.
pub(super) fn wrap(line: &str, indent: usize, columns: usize) -> String {
    let (mut text, mut column) = (String::new(), 0);
    for word in unbroken(line) {
        let width = shown_width(word);
        if column > 0 && column + 1 + width > columns {
            text.push('\n');
            text.push_str(&" ".repeat(indent));
            column = indent;
        } else if column > 0 {
            text.push(' ');
            column += 1;
        }
        text.push_str(word);
        column += width;
    }
    text
}

/// The words of a line; quoted words are one.
fn unbroken(line: &str) -> impl Iterator<Item = &str> {
    let (mut is_quoted, is_paired) = (false, line.matches('"').count().is_multiple_of(2));
    line.split(move |letter| {
        is_quoted ^= letter == '"' && is_paired;
        letter == ' ' && !is_quoted
    })
}

/// The columns a word takes, colour codes left out.
fn shown_width(word: &str) -> usize {
    UnicodeWidthStr::width(anstream::adapter::strip_str(word).to_string().as_str())
}

/// A number with its thousands apart.
pub(super) fn grouped(number: u64) -> String {
    let digits = number.to_string();
    let mut text = String::new();
    for (index, digit) in digits.chars().enumerate() {
        if index > 0 && (digits.len() - index).is_multiple_of(3) {
            text.push(' ');
        }
        text.push(digit);
    }
    text
}
