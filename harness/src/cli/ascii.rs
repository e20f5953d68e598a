//! Terminals that show nothing but ASCII: names with other letters are shown with question marks there.
//!
//! All other text is ASCII anyway. What goes to a file or a pipe is never changed: who reads it knows what it is.

use std::env;
use std::io::{self, IsTerminal, Write};

/// Whether the stream is a terminal whose locale has only ASCII.
pub(super) fn is_ascii_terminal(stream: &impl IsTerminal) -> bool {
    stream.is_terminal() && !cfg!(windows) && !is_utf8(|name| env::var(name).ok())
}

/// Whether the locale is one of UTF-8: the first variable that is set decides (POSIX, 8.2).
fn is_utf8(variable: impl Fn(&str) -> Option<String>) -> bool {
    let set = |name: &&str| variable(name).filter(|value| !value.is_empty());
    let locale = ["LC_ALL", "LC_CTYPE", "LANG"].iter().find_map(set).unwrap_or_default().to_lowercase();
    locale.contains("utf-8") || locale.contains("utf8")
}

/// Passes text on with a question mark for every letter that is not ASCII.
pub(super) struct AsciiOnly<W>(pub(super) W);

impl<W: Write> Write for AsciiOnly<W> {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        // The first byte of a letter in UTF-8 stands for it; those that go on with it are left out.
        let shown = bytes.iter().filter_map(|&byte| match byte {
            0..0x80 => Some(byte),
            0x80..0xC0 => None,
            _ => Some(b'?'),
        });
        self.0.write_all(&shown.collect::<Vec<u8>>())?;
        Ok(bytes.len())
    }

    fn flush(&mut self) -> io::Result<()> {
        self.0.flush()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ascii_only_shows_a_question_mark_for_each_other_letter() {
        let mut shown = AsciiOnly(Vec::new());
        // A letter may come in two pieces.
        let (first, rest) = "Tür, дверь".as_bytes().split_at(2);
        shown.write_all(first).unwrap();
        shown.write_all(rest).unwrap();
        assert_eq!(String::from_utf8(shown.0).unwrap(), "T?r, ?????");
    }

    #[test]
    fn locale_is_read_from_the_first_variable_that_is_set() {
        let with = |pairs: &'static [(&str, &str)]| {
            move |name: &str| pairs.iter().find(|(key, _)| *key == name).map(|(_, value)| (*value).to_owned())
        };
        assert!(is_utf8(with(&[("LANG", "en_GB.UTF-8")])));
        assert!(is_utf8(with(&[("LC_ALL", ""), ("LC_CTYPE", "C.utf8"), ("LANG", "C")])));
        assert!(!is_utf8(with(&[("LC_ALL", "C"), ("LANG", "en_GB.UTF-8")])));
        assert!(!is_utf8(with(&[])));
    }
}
