//! Values of a scenario file that a requirement file does not have: whole numbers, ranges, names.

use std::ops::Range;

use toml::de::DeValue;

use crate::generate::dice::Between;
use crate::generate::part::Actuation;
use crate::nearest::nearest;
use crate::quantity::{Quantity, Share, Time};
use crate::requirement::section::{Reader, Section};
use crate::requirement::words::either;

/// The whole numbers that are allowed.
#[derive(Clone, Copy)]
pub(super) struct Count {
    pub(super) least: u64,
    pub(super) most: u64,
}

/// A whole number.
pub(super) fn integer(
    reader: &mut Reader,
    section: &mut Section<'_>,
    key: &'static str,
    allowed: Count,
) -> Option<u64> {
    let value = section.take(key)?;
    let raw = reader.raw(value.span()).to_owned();
    let number = match value.get_ref() {
        DeValue::Integer(_) => raw.replace('_', "").parse::<u64>().ok(),
        _ => None,
    };
    let number = number.filter(|number| (allowed.least..=allowed.most).contains(number));
    if number.is_none() {
        let message = format!("{raw} is not a number for {key}");
        let help = format!(
            "write a whole number from {} to {}, without quotation marks",
            allowed.least, allowed.most
        );
        reader.problem(value.span(), message, help);
    }
    number
}

/// An hour: no time of a scenario is longer, so that sums of them stay within bounds.
const LONGEST_NS: u64 = 3_600_000_000_000;

/// A time, or a range of times as a list of two.
pub(super) fn between(reader: &mut Reader, section: &mut Section<'_>, key: &'static str) -> Option<Between> {
    ranged::<Time>(reader, section, key, Time::ns, LONGEST_NS, "an hour")
}

/// A share in thousandths, or a range of them.
pub(super) fn permille(
    reader: &mut Reader,
    section: &mut Section<'_>,
    key: &'static str,
    most: (u64, &str),
) -> Option<Between> {
    ranged::<Share>(reader, section, key, |share| u64::from(share.ppm() / 1000), most.0, most.1)
}

fn ranged<T: Quantity>(
    reader: &mut Reader,
    section: &mut Section<'_>,
    key: &'static str,
    number: impl Fn(T) -> u64,
    most: u64,
    most_text: &str,
) -> Option<Between> {
    let value = section.take(key)?;
    let span = value.span();
    let pair = match value.get_ref() {
        DeValue::Array(items) if items.len() == 2 => {
            let mut ends = items.iter().map(|item| reader.quantity_of::<T>(item));
            let (least, greatest) = (ends.next()?, ends.next()?);
            (least?.value, greatest?.value)
        }
        DeValue::Array(_) => {
            let help = format!("write {key} = [\"{0}\", \"{0}\"] or {key} = \"{0}\"", T::EXAMPLE);
            reader.problem(span, "a range has two ends, the least and the greatest", help);
            return None;
        }
        _ => {
            let both = reader.quantity_of::<T>(value)?.value;
            (both.clone(), both)
        }
    };
    let range = Between(number(pair.0), number(pair.1));
    if range.0 > range.1 {
        reader.problem(span, "the least of a range stands first", "exchange the two");
        return None;
    }
    if range.1 > most {
        let message = format!("{key} of more than {most_text} is none of a contact");
        reader.problem(span, message, format!("write such as {key} = \"{}\"", T::EXAMPLE));
        return None;
    }
    Some(range)
}

/// One word of a list.
pub(super) fn choice<'w>(
    reader: &mut Reader,
    section: &mut Section<'_>,
    key: &'static str,
    what: &str,
    words: impl Iterator<Item = &'w str> + Clone,
) -> Option<String> {
    let value = section.take(key)?;
    let raw = reader.raw(value.span()).to_owned();
    let text = value.get_ref().as_str().unwrap_or(&raw);
    if words.clone().any(|word| word == text) {
        return Some(text.to_owned());
    }
    let help = match nearest(text, words.clone()) {
        Some(word) => format!("write \"{word}\""),
        None => format!("write {}", either(&words.map(|word| format!("\"{word}\"")).collect::<Vec<_>>())),
    };
    reader.problem(value.span(), format!("\"{text}\" is not {what}"), help);
    None
}

/// The contact that something is meant for.
pub(super) fn name(reader: &mut Reader, section: &mut Section<'_>) -> Option<(String, Range<usize>)> {
    let text = reader.text(section, "contact", "vent")?;
    text.origin.span().map(|span| (text.value, span))
}

pub(super) fn actuation(reader: &mut Reader, section: &mut Section<'_>) -> Actuation {
    let word =
        choice(reader, section, "actuation", "a speed of actuation", ["slow", "usual", "fast"].into_iter());
    match word.as_deref() {
        Some("slow") => Actuation::Slow,
        Some("fast") => Actuation::Fast,
        _ => Actuation::Usual,
    }
}
