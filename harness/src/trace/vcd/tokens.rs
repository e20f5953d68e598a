//! Splits a stream into tokens at white space, in bounded memory, knowing the place of each.

use std::io::{self, Read};

use crate::trace::error::Place;

const BLOCK: usize = 1 << 18;

/// A longer token than this is no VCD: a vector of a million bits still fits.
pub(super) const LONGEST_TOKEN: usize = 1 << 20;

/// One token and where it begins.
#[derive(Clone, Copy, Debug)]
pub(super) struct Token<'a> {
    pub(super) text: &'a [u8],
    pub(super) place: Place,
}

/// The tokens of a stream.
///
/// The text of the current token always lies in one piece in `buffer`; a token cut by the end of a block is
/// moved to the front before more is read, so the buffer grows only for a token longer than a block.
#[derive(Debug)]
pub(super) struct Tokens<R> {
    input: R,
    buffer: Vec<u8>,
    filled: usize,
    next: usize,
    /// Offset in the stream of `buffer[0]`.
    base: u64,
    line: u64,
    /// Offset in the stream of the first byte of the line.
    line_start: u64,
}

fn is_white_space(byte: u8) -> bool {
    matches!(byte, b' ' | b'\t'..=b'\r')
}

impl<R: Read> Tokens<R> {
    pub(super) fn new(input: R) -> Self {
        let buffer = vec![0; BLOCK];
        Self { input, buffer, filled: 0, next: 0, base: 0, line: 1, line_start: 0 }
    }

    /// The next token, or none at the end of the stream.
    #[inline]
    pub(super) fn next(&mut self) -> io::Result<Option<Token<'_>>> {
        loop {
            // Locals, because the compiler would store every step of a field.
            let (mut at, mut line, mut line_start) = (self.next, self.line, self.line_start);
            let block = &self.buffer[..self.filled];
            while let Some(&byte) = block.get(at).filter(|&&byte| is_white_space(byte)) {
                at += 1;
                if byte == b'\n' {
                    line += 1;
                    line_start = self.base + at as u64;
                }
            }
            (self.next, self.line, self.line_start) = (at, line, line_start);
            if at < self.filled {
                break;
            }
            if self.refill(at)? == 0 {
                return Ok(None);
            }
        }
        let mut start = self.next;
        let mut end = start + 1;
        loop {
            // Any byte up to the space ends a token: the one comparison is what makes this loop fast, and a
            // control character that is no white space then stands as a token of its own and is refused.
            let rest = self.buffer[..self.filled].get(end..).unwrap_or_default();
            match rest.iter().position(|&byte| byte <= b' ') {
                Some(length) => {
                    end += length;
                    break;
                }
                None => end = self.filled,
            }
            let length = end - start;
            if length > LONGEST_TOKEN {
                let Place { line, column } = self.place(start);
                return Err(io::Error::new(
                    io::ErrorKind::InvalidData,
                    format!("at {line}:{column} more than {LONGEST_TOKEN} bytes follow without white space"),
                ));
            }
            let read = self.refill(start)?;
            start = 0;
            end = length;
            if read == 0 {
                break;
            }
        }
        self.next = end;
        Ok(Some(Token { text: &self.buffer[start..end], place: self.place(start) }))
    }

    /// Where the next byte stands.
    pub(super) fn here(&self) -> Place {
        self.place(self.next)
    }

    #[inline]
    fn place(&self, index: usize) -> Place {
        let offset = self.base + index as u64;
        Place { line: self.line, column: offset.saturating_sub(self.line_start) + 1 }
    }

    /// Forgets what lies before `keep`, moves the rest to the front and reads once more behind it.
    #[cold]
    fn refill(&mut self, keep: usize) -> io::Result<usize> {
        self.buffer.copy_within(keep..self.filled, 0);
        self.base += keep as u64;
        self.filled -= keep;
        self.next = self.next.saturating_sub(keep);
        if self.filled == self.buffer.len() {
            self.buffer.resize(2 * self.buffer.len(), 0);
        }
        loop {
            match self.input.read(&mut self.buffer[self.filled..]) {
                Ok(read) => {
                    self.filled += read;
                    return Ok(read);
                }
                Err(error) if error.kind() == io::ErrorKind::Interrupted => {}
                Err(error) => return Err(error),
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Gives `step` bytes at a time, so that every token is cut everywhere.
    struct Slowly<'a>(&'a [u8], usize);

    impl Read for Slowly<'_> {
        fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
            let count = self.1.min(self.0.len()).min(buffer.len());
            let (now, later) = self.0.split_at(count);
            buffer[..count].copy_from_slice(now);
            self.0 = later;
            Ok(count)
        }
    }

    #[track_caller]
    fn check(text: &str, expected: &[(&str, u64, u64)]) {
        for step in [1, 2, 3, 7, usize::MAX] {
            let mut tokens = Tokens::new(Slowly(text.as_bytes(), step));
            let mut got = Vec::new();
            while let Some(token) = tokens.next().expect("reads") {
                got.push((
                    String::from_utf8_lossy(token.text).into_owned(),
                    token.place.line,
                    token.place.column,
                ));
            }
            let got: Vec<_> =
                got.iter().map(|(text, line, column)| (text.as_str(), *line, *column)).collect();
            assert_eq!(got, expected, "{text:?} in steps of {step}");
        }
    }

    #[test]
    fn tokens_any_white_space_separates_and_places_are_right() {
        check("", &[]);
        check(" \r\n\t", &[]);
        check("a", &[("a", 1, 1)]);
        check(
            "#0 1!\t0\"\r\n  $end\x0bx\x0cy",
            &[("#0", 1, 1), ("1!", 1, 4), ("0\"", 1, 7), ("$end", 2, 3), ("x", 2, 8), ("y", 2, 10)],
        );
        check("\n\nab\ncd\n", &[("ab", 3, 1), ("cd", 4, 1)]);
    }

    #[test]
    fn tokens_control_character_stands_alone() {
        check("a\0b \x01", &[("a", 1, 1), ("\0b", 1, 2), ("\x01", 1, 5)]);
    }

    #[test]
    fn tokens_of_a_long_file_need_one_block_of_memory() {
        let file = b"#123456789 1!\n".repeat(200_000);
        assert!(file.len() > 10 * BLOCK);
        let mut tokens = Tokens::new(&file[..]);
        let mut count = 0;
        while tokens.next().expect("reads").is_some() {
            count += 1;
        }
        assert_eq!((count, tokens.buffer.len()), (400_000, BLOCK));
    }

    #[test]
    fn tokens_longer_than_a_block_are_whole_and_the_longest_is_bounded() {
        let long = vec![b'b'; BLOCK + 5];
        let mut tokens = Tokens::new(&long[..]);
        assert_eq!(tokens.next().expect("reads").expect("a token").text, &long[..]);
        let endless = io::repeat(b'x');
        assert!(Tokens::new(endless).next().is_err());
    }
}
