//! Lines of bounded length, and their fields.

use std::io::{self, BufRead, BufReader, Read};
use std::ops::Range;

use crate::trace::Delimiter;

/// A longer line is no row of a recording.
pub(super) const LONGEST_LINE: usize = 1 << 20;

/// Reads line by line, in one buffer.
#[derive(Debug)]
pub(in crate::trace) struct Lines<R> {
    input: BufReader<R>,
    terminator: u8,
    text: Vec<u8>,
    number: u64,
}

impl<R: Read> Lines<R> {
    pub(in crate::trace) fn new(input: R, terminator: u8) -> Self {
        Self { input: BufReader::with_capacity(1 << 17, input), terminator, text: Vec::new(), number: 0 }
    }

    /// The next line without its end, and its number from 1.
    pub(in crate::trace) fn next(&mut self) -> io::Result<Option<(u64, &[u8])>> {
        self.text.clear();
        let limit = LONGEST_LINE as u64 + 2;
        let read = (&mut self.input).take(limit).read_until(self.terminator, &mut self.text)?;
        if read == 0 {
            return Ok(None);
        }
        self.number += 1;
        let line = without_end(&self.text);
        if line.len() > LONGEST_LINE {
            let number = self.number;
            return Err(io::Error::new(
                io::ErrorKind::InvalidData,
                format!("line {number} is longer than {LONGEST_LINE} bytes"),
            ));
        }
        Ok(Some((self.number, line)))
    }
}

fn without_end(line: &[u8]) -> &[u8] {
    let line = line.strip_suffix(b"\n").unwrap_or(line);
    line.strip_suffix(b"\r").unwrap_or(line)
}

/// Some old instruments end lines in a bare carriage return.
pub(super) fn terminator(prefix: &[u8]) -> u8 {
    if !prefix.contains(&b'\n') && prefix.contains(&b'\r') { b'\r' } else { b'\n' }
}

/// Whether a line holds nothing to read: blank, or a comment.
pub(super) fn is_skipped(line: &[u8]) -> bool {
    let line = line.trim_ascii();
    line.is_empty() || line.starts_with(b"#")
}

/// The fields of a line, without the white space and the quotes around them.
pub(super) fn split(line: &[u8], delimiter: Delimiter, fields: &mut Vec<Range<usize>>) {
    fields.clear();
    let is_end = |byte: u8| match delimiter {
        Delimiter::Comma => byte == b',',
        Delimiter::Semicolon => byte == b';',
        Delimiter::Tab => byte == b'\t',
        Delimiter::Space => matches!(byte, b' ' | b'\t'),
    };
    let mut start = 0;
    let mut quotes = 0_u32;
    for (index, &byte) in line.iter().enumerate() {
        if byte == b'"' {
            quotes += 1;
        } else if is_end(byte) && quotes.is_multiple_of(2) {
            fields.push(trimmed(line, start..index));
            start = index + 1;
        }
    }
    fields.push(trimmed(line, start..line.len()));
    if delimiter == Delimiter::Space {
        fields.retain(|field| !field.is_empty());
    }
}

fn trimmed(line: &[u8], field: Range<usize>) -> Range<usize> {
    let Range { mut start, mut end } = field;
    let is_white_space = |index: usize| line[index].is_ascii_whitespace();
    while start < end && is_white_space(start) {
        start += 1;
    }
    while start < end && is_white_space(end - 1) {
        end -= 1;
    }
    if end - start >= 2 && line[start] == b'"' && line[end - 1] == b'"' {
        return trimmed(line, start + 1..end - 1);
    }
    start..end
}

/// Text of a cell; what is no UTF-8 is taken as Latin-1, where instruments find their µ.
pub(super) fn decoded(cell: &[u8]) -> String {
    std::str::from_utf8(cell).map_or_else(|_| cell.iter().copied().map(char::from).collect(), str::to_owned)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(line: &str, delimiter: Delimiter, expected: &[&str]) {
        let mut fields = Vec::new();
        split(line.as_bytes(), delimiter, &mut fields);
        let got: Vec<_> = fields.into_iter().map(|field| &line[field]).collect();
        assert_eq!(got, expected, "{line:?}");
    }

    #[test]
    fn split_fields_lose_space_and_quotes() {
        check("a,b", Delimiter::Comma, &["a", "b"]);
        check(" a , \"b,c\" ,", Delimiter::Comma, &["a", "b,c", ""]);
        check("\" a \";b", Delimiter::Semicolon, &["a", "b"]);
        check("", Delimiter::Comma, &[""]);
        check("  a \t b ", Delimiter::Space, &["a", "b"]);
        check("a\t\tb", Delimiter::Tab, &["a", "", "b"]);
        check("\"a,b", Delimiter::Comma, &["\"a,b"]);
    }

    #[test]
    fn lines_any_end_is_taken_off() {
        let mut lines = Lines::new(&b"a\r\nb\n\nc"[..], b'\n');
        let mut got = Vec::new();
        while let Some((number, line)) = lines.next().expect("reads") {
            got.push((number, line.to_vec()));
        }
        assert_eq!(got, [(1, b"a".to_vec()), (2, b"b".to_vec()), (3, vec![]), (4, b"c".to_vec())]);
    }

    #[test]
    fn lines_endless_line_is_refused() {
        assert!(Lines::new(io::repeat(b'x'), b'\n').next().is_err());
    }
}
