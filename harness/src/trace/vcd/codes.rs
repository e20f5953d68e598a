//! Identifier codes to numbers: looked up once for every value in the file.

use rustc_hash::FxHashMap;

const FIRST: u8 = b'!';
const LAST: u8 = b'~';
const LETTERS: usize = (LAST - FIRST + 1) as usize;

/// No variable has this code.
const NONE: u32 = u32::MAX;

/// The declared identifier codes, numbered from 0.
///
/// Codes of one or two letters, all there are in most files, go through a table without hashing.
#[derive(Debug)]
pub(super) struct Codes {
    short: Vec<u32>,
    long: FxHashMap<Box<[u8]>, u32>,
    count: u32,
}

/// The table index of a code of one or two letters.
#[inline]
fn short_index(code: &[u8]) -> Option<usize> {
    let letter = |byte: u8| (FIRST..=LAST).contains(&byte).then(|| usize::from(byte - FIRST));
    match *code {
        [only] => letter(only),
        [first, second] => Some((letter(first)? + 1) * LETTERS + letter(second)?),
        _ => None,
    }
}

impl Codes {
    pub(super) fn new() -> Self {
        Self { short: vec![NONE; LETTERS * (LETTERS + 1)], long: FxHashMap::default(), count: 0 }
    }

    /// Whether a token may be a code: at least one letter, each from `!` to `~`.
    pub(super) fn is_legal(code: &[u8]) -> bool {
        !code.is_empty() && code.iter().all(|byte| (FIRST..=LAST).contains(byte))
    }

    /// The number of a legal code, a new one where it is new.
    pub(super) fn declare(&mut self, code: &[u8]) -> u32 {
        let entry = match short_index(code) {
            Some(index) => &mut self.short[index],
            None => self.long.entry(code.into()).or_insert(NONE),
        };
        if *entry == NONE {
            *entry = self.count;
            self.count += 1;
        }
        *entry
    }

    /// The number of a code, if it was declared.
    #[inline]
    pub(super) fn number(&self, code: &[u8]) -> Option<u32> {
        match short_index(code) {
            Some(index) => Some(self.short[index]).filter(|&number| number != NONE),
            None => self.long.get(code).copied(),
        }
    }

    pub(super) fn count(&self) -> usize {
        self.count as usize
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn codes_all_lengths_get_their_own_number() {
        let all: [&[u8]; 8] = [b"!", b"~", b"!!", b"~~", b"!!!", b"$end", b"!~", b"verylongcode"];
        let mut codes = Codes::new();
        for code in all {
            assert_eq!(codes.number(code), None);
            codes.declare(code);
        }
        for (number, code) in all.iter().enumerate() {
            assert_eq!(codes.declare(code) as usize, number);
            assert_eq!(codes.number(code), Some(number as u32));
        }
        assert_eq!(codes.count(), all.len());
        assert_eq!(codes.number(b""), None);
        assert_eq!(codes.number(b"\x7f"), None);
    }

    #[test]
    fn codes_every_short_code_has_its_own_place() {
        let mut seen = vec![false; LETTERS * (LETTERS + 1)];
        for first in FIRST..=LAST {
            let mut mark = |code: &[u8]| {
                let index = short_index(code).expect("legal");
                assert!(!std::mem::replace(&mut seen[index], true), "{code:?}");
            };
            mark(&[first]);
            for second in FIRST..=LAST {
                mark(&[first, second]);
            }
        }
        assert!(seen.iter().all(|&hit| hit));
    }
}
