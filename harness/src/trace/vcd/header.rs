//! The declarations of a VCD: time scale, scopes, variables.

use std::io::{self, Read};

use super::codes::Codes;
use super::tokens::Tokens;
use crate::raw_input::quoted;
use crate::trace::error::{Faults, Place};
use crate::trace::{Channel, ChannelKind, TimeUnit};

/// A declared variable.
#[derive(Debug)]
pub(super) struct Variable {
    /// Scopes and reference name, joined by points, without the bit range.
    pub(super) name: String,
    pub(super) kind: Kind,
    /// Number of its identifier code; several variables may share one.
    pub(super) code: u32,
}

/// What values a variable takes.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Kind {
    /// One bit; its index where the reference names one, as in `bus [3]`.
    Bit(Option<i64>),
    /// More bits than one, and the indices of the outermost.
    Vector {
        left: i64,
        right: i64,
    },
    Real,
    /// Text, which no contact is recorded as.
    Text,
}

impl Variable {
    /// The variable as a channel, if it can be one.
    pub(super) fn channel(&self) -> Option<Channel> {
        let (name, kind) = match self.kind {
            Kind::Bit(None) => (self.name.clone(), ChannelKind::Levels),
            Kind::Bit(Some(index)) => (format!("{}[{index}]", self.name), ChannelKind::Levels),
            Kind::Vector { left, right } => (self.name.clone(), ChannelKind::Vector { left, right }),
            Kind::Real => (self.name.clone(), ChannelKind::Volts),
            Kind::Text => return None,
        };
        Some(Channel { name, kind })
    }
}

/// The time of one unit of a time mark: `multiply` nanoseconds, or the `divide`th part of one.
///
/// A time scale is a power of ten, so one of the two is always 1.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Scale {
    pub(super) multiply: u64,
    pub(super) divide: u64,
}

impl Scale {
    fn new(count: u64, unit: TimeUnit) -> Self {
        let power = |exponent: i32| 10_u64.pow(exponent.unsigned_abs());
        let exponent = unit.power_of_ten() + 9;
        if exponent >= 0 {
            Self { multiply: count * power(exponent), divide: 1 }
        } else {
            let divide = power(exponent);
            if count < divide {
                Self { multiply: 1, divide: divide / count }
            } else {
                Self { multiply: count / divide, divide: 1 }
            }
        }
    }

    /// One unit of the given kind.
    pub(super) fn one(unit: TimeUnit) -> Self {
        Self::new(1, unit)
    }

    /// IEEE 1364-2005 clause 18: 1, 10 or 100, and s, ms, us, ns, ps or fs, with or without a space.
    fn parse(text: &str) -> Option<Self> {
        let digits = text.find(|letter: char| !letter.is_ascii_digit())?;
        let (count, unit) = text.split_at(digits);
        let count = match count {
            "1" => 1,
            "10" => 10,
            "100" => 100,
            _ => return None,
        };
        match unit.to_ascii_lowercase().as_str() {
            unit @ ("s" | "ms" | "us" | "ns" | "ps" | "fs") => Some(Self::new(count, TimeUnit::parse(unit)?)),
            _ => None,
        }
    }
}

/// All declarations.
#[derive(Debug)]
pub(super) struct Header {
    pub(super) scale: Option<Scale>,
    pub(super) variables: Vec<Variable>,
    pub(super) codes: Codes,
}

/// Reads up to `$enddefinitions $end`.
pub(super) fn read<R: Read>(tokens: &mut Tokens<R>, faults: &mut Faults) -> io::Result<Header> {
    let mut header = Header { scale: None, variables: Vec::new(), codes: Codes::new() };
    let mut scopes: Vec<String> = Vec::new();
    while !faults.is_full() {
        let Some(token) = tokens.next()? else {
            faults.at(tokens.here(), "the file ends before $enddefinitions");
            break;
        };
        let place = token.place;
        let Some(keyword) = token.text.strip_prefix(b"$") else {
            faults.at(place, format!("{} comes before $enddefinitions", quoted(token.text)));
            faults.help("a VCD begins with declarations and \"$enddefinitions $end\"; is this a VCD?");
            break;
        };
        let keyword = keyword.to_vec();
        if keyword == b"end" {
            continue;
        }
        let Some(words) = section(tokens, &keyword, place, faults)? else { break };
        match keyword.as_slice() {
            b"enddefinitions" => break,
            b"timescale" => timescale(&words, place, &mut header, faults),
            b"scope" => scopes.push(scope_name(&words)),
            b"upscope" if scopes.pop().is_none() => {
                faults.at(place, "$upscope without a $scope that it closes");
            }
            b"var" => {
                if let Some(variable) = variable(&words, &scopes, &mut header.codes, place, faults) {
                    header.variables.push(variable);
                }
            }
            // $date, $version, $comment, and the extensions of other tools.
            _ => {}
        }
    }
    Ok(header)
}

/// Whether the words of a section are wanted; a comment may be as long as the file.
fn is_kept(keyword: &[u8]) -> bool {
    matches!(keyword, b"timescale" | b"scope" | b"var")
}

/// The words up to `$end`, or none where the file ends first.
pub(super) fn section<R: Read>(
    tokens: &mut Tokens<R>,
    keyword: &[u8],
    place: Place,
    faults: &mut Faults,
) -> io::Result<Option<Vec<String>>> {
    /// A declaration has a handful of words; more mean that its `$end` is missing.
    const MOST_WORDS: usize = 64;
    let mut words = Vec::new();
    while let Some(token) = tokens.next()? {
        if token.text == b"$end" {
            return Ok(Some(words));
        }
        if !is_kept(keyword) {
            continue;
        }
        if words.len() == MOST_WORDS {
            break;
        }
        words.push(String::from_utf8_lossy(token.text).into_owned());
    }
    let keyword = String::from_utf8_lossy(keyword);
    faults.at(place, format!("${keyword} has no $end"));
    Ok(None)
}

fn timescale(words: &[String], place: Place, header: &mut Header, faults: &mut Faults) {
    let text = words.concat();
    let Some(scale) = Scale::parse(&text) else {
        let text = quoted(words.join(" ").as_bytes());
        faults
            .at(place, format!("{text} is not a time scale; use 1, 10 or 100 with s, ms, us, ns, ps or fs"));
        return;
    };
    if header.scale.is_some_and(|given| given != scale) {
        faults.at(place, format!("a second time scale, {text}, differs from the first"));
    }
    header.scale = Some(scale);
}

fn scope_name(words: &[String]) -> String {
    // `$scope module top $end`; a scope without a type or a name is tolerated.
    words.get(1..).filter(|name| !name.is_empty()).unwrap_or(words).join(" ")
}

fn variable(
    words: &[String],
    scopes: &[String],
    codes: &mut Codes,
    place: Place,
    faults: &mut Faults,
) -> Option<Variable> {
    let [kind, width, code, reference @ ..] = words else {
        faults.at(place, "$var needs a type, a width, an identifier code and a name");
        return None;
    };
    // Events, texts and reals have no width to speak of, and some tools write 0.
    let may_be_empty = matches!(kind.as_str(), "event" | "string" | "real" | "realtime" | "shortreal");
    let Some(width) = width.parse::<u32>().ok().filter(|&width| width > 0 || may_be_empty) else {
        faults.at(place, format!("{} is not the width of a variable", quoted(width.as_bytes())));
        return None;
    };
    if !Codes::is_legal(code.as_bytes()) {
        faults.at(place, format!("{} is not an identifier code", quoted(code.as_bytes())));
        return None;
    }
    if reference.is_empty() {
        faults.at(place, "$var has no name");
        return None;
    }
    let (base, range) = split_range(&reference.join(" "));
    let kind = match kind.as_str() {
        "real" | "realtime" | "shortreal" => Kind::Real,
        "string" => Kind::Text,
        _ if width > 1 => {
            let (left, right) = match range {
                Some((left, right)) if left.abs_diff(right) == u64::from(width - 1) => (left, right),
                _ => (i64::from(width) - 1, 0),
            };
            Kind::Vector { left, right }
        }
        _ => Kind::Bit(range.filter(|(left, right)| left == right).map(|(left, _)| left)),
    };
    let name = scopes.iter().map(String::as_str).chain([base.as_str()]).collect::<Vec<_>>().join(".");
    Some(Variable { name, kind, code: codes.declare(code.as_bytes()) })
}

/// Splits `bus[3:0]`, `bus [3:0]` or `bus[3]` into the name and the outermost indices.
pub(super) fn split_range(reference: &str) -> (String, Option<(i64, i64)>) {
    let range = || {
        let (base, inside) = reference.strip_suffix(']')?.rsplit_once('[')?;
        let (left, right) = inside.split_once(':').unwrap_or((inside, inside));
        let indices = (left.trim().parse().ok()?, right.trim().parse().ok()?);
        let base = base.trim_end();
        (!base.is_empty()).then(|| (base.to_owned(), Some(indices)))
    };
    range().unwrap_or_else(|| (reference.to_owned(), None))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn scale_every_legal_timescale_is_exact() {
        for (text, multiply, divide) in [
            ("1s", 1_000_000_000, 1),
            ("10s", 10_000_000_000, 1),
            ("100s", 100_000_000_000, 1),
            ("1ms", 1_000_000, 1),
            ("10ms", 10_000_000, 1),
            ("100ms", 100_000_000, 1),
            ("1us", 1_000, 1),
            ("10us", 10_000, 1),
            ("100us", 100_000, 1),
            ("1ns", 1, 1),
            ("10ns", 10, 1),
            ("100ns", 100, 1),
            ("1ps", 1, 1_000),
            ("10ps", 1, 100),
            ("100ps", 1, 10),
            ("1fs", 1, 1_000_000),
            ("10fs", 1, 100_000),
            ("100fs", 1, 10_000),
        ] {
            assert_eq!(Scale::parse(text), Some(Scale { multiply, divide }), "{text}");
        }
        for text in ["", "1", "ns", "2ns", "1000ns", "1 ns", "1as", "-1ns", "1sec"] {
            assert_eq!(Scale::parse(text), None, "{text}");
        }
    }

    #[test]
    fn split_range_finds_the_last_brackets() {
        for (reference, base, range) in [
            ("a", "a", None),
            ("a[3:0]", "a", Some((3, 0))),
            ("a [3:0]", "a", Some((3, 0))),
            ("a[7]", "a", Some((7, 7))),
            ("mem[3][0:-4]", "mem[3]", Some((0, -4))),
            ("a[x]", "a[x]", None),
            ("[3]", "[3]", None),
        ] {
            assert_eq!(split_range(reference), (base.to_owned(), range), "{reference}");
        }
    }
}
