//! Things that are counted: ticks and bytes.

use std::fmt;
use std::str::FromStr;

use super::decimal::{Manner, Unit, split};
use super::{Quantity, QuantityError};

/// A number of ticks, written "2 ticks".
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
pub struct Ticks(pub u32);

/// A number of instructions, written "40 instructions".
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
pub struct Instructions(pub u32);

/// A number of bytes, written "64 bytes" or "2 KiB".
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug, Default)]
pub struct Bytes(pub u32);

const TICKS: Manner = Manner { name: "a number of ticks", units: &["ticks"] };
const TICK_UNITS: &[Unit] = &[("tick", 1), ("ticks", 1)];
const INSTRUCTIONS: Manner = Manner { name: "a number of instructions", units: &["instructions"] };
const INSTRUCTION_UNITS: &[Unit] = &[("instruction", 1), ("instructions", 1)];
const BYTES: Manner = Manner { name: "a number of bytes", units: &["bytes", "KiB"] };
const BYTE_UNITS: &[Unit] =
    &[("byte", 1), ("bytes", 1), ("B", 1), ("kB", 1_000), ("KiB", 1_024), ("MiB", 1 << 20)];

/// A count with its noun: "1 make", "2 makes".
#[must_use]
pub fn counted(number: u64, noun: &str) -> String {
    if number == 1 { format!("1 {noun}") } else { format!("{number} {noun}s") }
}

fn count(text: &str, manner: &Manner, units: &[Unit], finest: &str) -> Result<u32, QuantityError> {
    let written = split(text, manner)?;
    let size = written.unit_size(units, manner)?;
    let number = written.whole(size, finest, manner)?;
    u32::try_from(number).map_err(|_| {
        QuantityError::new(format!("\"{}\" is too large", written.text), format!("the most is {}", u32::MAX))
    })
}

impl Quantity for Ticks {
    const NAME: &'static str = TICKS.name;
    const EXAMPLE: &'static str = "2 ticks";
}

impl FromStr for Ticks {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        count(text, &TICKS, TICK_UNITS, "1 tick").map(Self)
    }
}

impl fmt::Display for Ticks {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} {}", self.0, if self.0 == 1 { "tick" } else { "ticks" })
    }
}

impl Quantity for Instructions {
    const NAME: &'static str = INSTRUCTIONS.name;
    const EXAMPLE: &'static str = "40 instructions";
}

impl FromStr for Instructions {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        count(text, &INSTRUCTIONS, INSTRUCTION_UNITS, "1 instruction").map(Self)
    }
}

impl fmt::Display for Instructions {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} {}", self.0, if self.0 == 1 { "instruction" } else { "instructions" })
    }
}

impl Quantity for Bytes {
    const NAME: &'static str = BYTES.name;
    const EXAMPLE: &'static str = "4 bytes";
}

impl FromStr for Bytes {
    type Err = QuantityError;

    fn from_str(text: &str) -> Result<Self, QuantityError> {
        count(text, &BYTES, BYTE_UNITS, "1 byte").map(Self)
    }
}

impl fmt::Display for Bytes {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{} {}", self.0, if self.0 == 1 { "byte" } else { "bytes" })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn counts_with_their_unit_are_read_and_shown() {
        assert_eq!("1 tick".parse(), Ok(Ticks(1)));
        assert_eq!("2 ticks".parse(), Ok(Ticks(2)));
        assert_eq!("64 bytes".parse(), Ok(Bytes(64)));
        assert_eq!("2 KiB".parse(), Ok(Bytes(2_048)));
        assert_eq!(Ticks(1).to_string(), "1 tick");
        assert_eq!(Bytes(64).to_string(), "64 bytes");
        assert_eq!("40 instructions".parse(), Ok(Instructions(40)));
        assert_eq!(Instructions(1).to_string(), "1 instruction");
    }

    #[test]
    fn counts_that_are_none_are_refused() {
        let ticks = |text: &str| text.parse::<Ticks>().expect_err(text).to_string();
        assert_eq!(ticks("2"), "\"2\" has no unit; write \"2 ticks\"");
        assert_eq!(ticks("1.5 ticks"), "\"1.5 ticks\" is finer than 1 tick; write a multiple of 1 tick");
        assert_eq!(ticks("4294967296 ticks"), "\"4294967296 ticks\" is too large; the most is 4294967295");
        assert_eq!(
            ticks("2 ms"),
            "\"2 ms\" has an unknown unit \"ms\"; the unit of a number of ticks is ticks"
        );
    }
}
