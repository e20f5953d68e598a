//! A value for both changes or both positions, as one option: `20 ms` or `make=20 ms,break=30 ms`.

use std::str::FromStr;

use debounce_core::{PerChange, PerPosition};

use crate::quantity::Quantity;

/// A quantity for each change, from `20 ms` (both) or `make=20 ms,break=30 ms` (either may be left out).
#[derive(Clone, PartialEq, Debug)]
pub struct ForChanges<T>(pub PerChange<Option<T>>);

/// A quantity for each position, from `1 ms` (both) or `open=1 ms,closed=0 ms` (either may be left out).
#[derive(Clone, PartialEq, Debug)]
pub struct ForPositions<T>(pub PerPosition<Option<T>>);

/// Why a text is no such pair.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[error("{0}")]
pub struct PairError(String);

fn parse_pair<T: Quantity>(text: &str, names: [&str; 2]) -> Result<[Option<T>; 2], PairError> {
    let quantity = |text: &str| text.parse::<T>().map_err(|error| PairError(error.to_string()));
    if !text.contains('=') {
        let both = quantity(text)?;
        return Ok([Some(both.clone()), Some(both)]);
    }
    let mut found = [None, None];
    for part in text.split(',') {
        let (name, value) = part.split_once('=').unwrap_or((part, ""));
        let Some(index) = names.iter().position(|known| *known == name.trim()) else {
            return Err(PairError(format!(
                "\"{}\" is neither {} nor {}; write \"{}={example},{}={example}\" or one for both, \"{example}\"",
                name.trim(),
                names[0],
                names[1],
                names[0],
                names[1],
                example = T::EXAMPLE,
            )));
        };
        if found[index].replace(quantity(value)?).is_some() {
            return Err(PairError(format!("{} is given twice; write it once", names[index])));
        }
    }
    Ok(found)
}

impl<T: Quantity> FromStr for ForChanges<T> {
    type Err = PairError;

    fn from_str(text: &str) -> Result<Self, PairError> {
        let [make, break_] = parse_pair(text, ["make", "break"])?;
        Ok(Self(PerChange { make, break_ }))
    }
}

impl<T: Quantity> FromStr for ForPositions<T> {
    type Err = PairError;

    fn from_str(text: &str) -> Result<Self, PairError> {
        let [open, closed] = parse_pair(text, ["open", "closed"])?;
        Ok(Self(PerPosition { open, closed }))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::Time;

    #[track_caller]
    fn reads(text: &str, make: Option<u32>, break_: Option<u32>) {
        let expected = PerChange { make: make.map(Time::from_ms), break_: break_.map(Time::from_ms) };
        assert_eq!(text.parse(), Ok(ForChanges(expected)), "for {text}");
    }

    #[track_caller]
    fn refuses(text: &str, expected: &str) {
        assert_eq!(text.parse::<ForChanges<Time>>(), Err(PairError(expected.to_owned())), "for {text}");
    }

    #[test]
    fn pair_for_both_or_either_is_read() {
        reads("20 ms", Some(20), Some(20));
        reads("make=20 ms,break=30 ms", Some(20), Some(30));
        reads("break = 30 ms, make = 20 ms", Some(20), Some(30));
        reads("break=30 ms", None, Some(30));
    }

    #[test]
    fn pair_that_is_none_is_refused() {
        refuses("20", "\"20\" has no unit; write \"20 ms\" or \"20 us\"");
        refuses("make=20", "\"20\" has no unit; write \"20 ms\" or \"20 us\"");
        refuses("make=1 ms,make=2 ms", "make is given twice; write it once");
        refuses(
            "close=1 ms",
            "\"close\" is neither make nor break; write \"make=12 ms,break=12 ms\" or one for both, \"12 ms\"",
        );
    }
}
