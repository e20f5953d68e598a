//! A debouncing law and its parameters as data, written "state-machine confirm=3/2 patience=2/1 lockout=4/0".

use std::fmt;
use std::str::FromStr;

use debounce_core::{Envelope, ParameterError, PerChange, Verdict};

use crate::logic::Logic;
use crate::nearest::nearest;

/// One of the built-in laws with its parameters, in ticks.
///
/// Written as its name and its parameters; two numbers around a stroke are for make and for break:
/// `integrator 5`, `integrator 6 up=1 down=2`, `shift-register 8`, `majority-register 6 of 8`,
/// `state-machine confirm=3/2 patience=2/1 lockout=4/0`.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum LawParameters {
    /// Saturating count with both ends as thresholds.
    Integrator {
        /// The upper end; the lower one is 0.
        full_scale: u16,
        /// Counted up for a closed sample.
        up: u16,
        /// Counted down for an open sample.
        down: u16,
    },
    /// The last samples, all alike.
    ShiftRegister {
        /// How many of them.
        window: u8,
    },
    /// The last samples, most of them alike.
    MajorityRegister {
        /// So many must agree.
        majority: u8,
        /// So many are looked at.
        window: u8,
    },
    /// Four states with confirm, patience and lock-out.
    StateMachine {
        /// Samples of the new position that report the change.
        confirm: PerChange<u16>,
        /// Samples of the old position in a row that clear a count.
        patience: PerChange<u16>,
        /// Ticks ignored after a report.
        lockout: PerChange<u16>,
    },
}

/// Why a text is no law.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[error("{0}")]
pub struct LawTextError(String);

const NAMES: [&str; 4] = ["integrator", "shift-register", "majority-register", "state-machine"];

impl LawParameters {
    /// The name, without parameters.
    #[must_use]
    pub const fn name(&self) -> &'static str {
        match self {
            Self::Integrator { .. } => NAMES[0],
            Self::ShiftRegister { .. } => NAMES[1],
            Self::MajorityRegister { .. } => NAMES[2],
            Self::StateMachine { .. } => NAMES[3],
        }
    }
}

impl LawParameters {
    /// What the closed form of the law says about `envelope`.
    ///
    /// # Errors
    /// When the law refuses the parameters.
    pub fn verdict(&self, envelope: &Envelope) -> Result<Verdict, ParameterError> {
        Ok(Logic::try_new(self)?.verdict(envelope))
    }
}

/// `12` or `12/8`, shown as one number where both are alike.
struct Pair(PerChange<u16>);

impl fmt::Display for Pair {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Self(PerChange { make, break_ }) = self;
        if make == break_ { write!(f, "{make}") } else { write!(f, "{make}/{break_}") }
    }
}

impl fmt::Display for LawParameters {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())?;
        match *self {
            Self::Integrator { full_scale, up: 1, down: 1 } => write!(f, " {full_scale}"),
            Self::Integrator { full_scale, up, down } => write!(f, " {full_scale} up={up} down={down}"),
            Self::ShiftRegister { window } => write!(f, " {window}"),
            Self::MajorityRegister { majority, window } => write!(f, " {majority} of {window}"),
            Self::StateMachine { confirm, patience, lockout } => {
                write!(f, " confirm={} patience={} lockout={}", Pair(confirm), Pair(patience), Pair(lockout))
            }
        }
    }
}

/// The words after the name: bare numbers in order, and `key=value` pairs.
struct Parameters<'a> {
    law: &'static str,
    bare: Vec<&'a str>,
    named: Vec<(&'a str, &'a str)>,
}

impl Parameters<'_> {
    fn number<T: TryFrom<u32>>(&self, what: &str, text: &str) -> Result<T, LawTextError> {
        let number = text.parse::<u32>().ok().and_then(|number| T::try_from(number).ok());
        number.ok_or_else(|| {
            LawTextError(format!(
                "\"{text}\" is not a {what} of {}; write a whole number of ticks that fits the law, {}",
                self.law,
                example(self.law)
            ))
        })
    }

    fn pair(&self, key: &'static str, default: Option<u16>) -> Result<PerChange<u16>, LawTextError> {
        let Some((_, text)) = self.named.iter().find(|(name, _)| *name == key) else {
            let missing = || LawTextError(format!("{} needs {key}; write {}", self.law, example(self.law)));
            return default.map(|both| PerChange { make: both, break_: both }).ok_or_else(missing);
        };
        let (make, break_) = text.split_once('/').unwrap_or((text, text));
        Ok(PerChange { make: self.number(key, make)?, break_: self.number(key, break_)? })
    }

    fn expect(&self, bare: usize, named: &[&str]) -> Result<(), LawTextError> {
        if let Some((name, _)) = self.named.iter().find(|(name, _)| !named.contains(name)) {
            let help = match nearest(name, named.iter().copied()) {
                Some(known) => format!("write {known}="),
                None => format!("write {}", example(self.law)),
            };
            return Err(LawTextError(format!("{} has no parameter \"{name}\"; {help}", self.law)));
        }
        if let Some((name, _)) = (1..self.named.len())
            .map(|index| self.named[index])
            .enumerate()
            .find(|(before, (name, _))| self.named[..=*before].iter().any(|(other, _)| other == name))
            .map(|(_, named)| named)
        {
            return Err(LawTextError(format!("{name} is given twice; write it once")));
        }
        if self.bare.len() == bare {
            return Ok(());
        }
        Err(LawTextError(format!(
            "these are not the parameters of {}; write {}",
            self.law,
            example(self.law)
        )))
    }
}

fn example(law: &str) -> &'static str {
    match law {
        "integrator" => "\"integrator 5\" or \"integrator 6 up=1 down=2\"",
        "shift-register" => "\"shift-register 8\"",
        "majority-register" => "\"majority-register 6 of 8\"",
        _ => "\"state-machine confirm=3/2 patience=2/1 lockout=4/0\"",
    }
}

impl FromStr for LawParameters {
    type Err = LawTextError;

    fn from_str(text: &str) -> Result<Self, LawTextError> {
        let mut words = text.split_whitespace();
        let name = words.next().unwrap_or_default();
        let Some(&law) = NAMES.iter().find(|known| **known == name) else {
            let help = match nearest(name, NAMES) {
                Some(known) => format!("write {}", example(known)),
                None => format!("the laws are {}", NAMES.join(", ")),
            };
            return Err(LawTextError(format!("\"{name}\" is not a law; {help}")));
        };
        let (mut bare, mut named) = (Vec::new(), Vec::new());
        for word in words {
            match word.split_once('=') {
                Some(pair) => named.push(pair),
                None => bare.push(word),
            }
        }
        let given = Parameters { law, bare, named };
        match law {
            "integrator" => {
                given.expect(1, &["up", "down"])?;
                let step = |key| {
                    let found = given.named.iter().find(|(name, _)| *name == key);
                    found.map_or(Ok(1), |(_, text)| given.number(key, text))
                };
                let full_scale = given.number("full scale", given.bare[0])?;
                Ok(Self::Integrator { full_scale, up: step("up")?, down: step("down")? })
            }
            "shift-register" => {
                given.expect(1, &[])?;
                Ok(Self::ShiftRegister { window: given.number("window", given.bare[0])? })
            }
            "majority-register" => {
                given.expect(3, &[])?;
                if given.bare[1] != "of" {
                    return Err(LawTextError(format!("write {}", example(law))));
                }
                let majority = given.number("majority", given.bare[0])?;
                Ok(Self::MajorityRegister { majority, window: given.number("window", given.bare[2])? })
            }
            _ => {
                given.expect(0, &["confirm", "patience", "lockout"])?;
                Ok(Self::StateMachine {
                    confirm: given.pair("confirm", None)?,
                    patience: given.pair("patience", Some(1))?,
                    lockout: given.pair("lockout", Some(0))?,
                })
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use debounce_core::{Integrator, ShiftRegister};

    use super::*;

    #[track_caller]
    fn reads(text: &str, shown: &str) {
        let law: LawParameters = text.parse().unwrap_or_else(|error| panic!("{text}: {error}"));
        assert_eq!(law.to_string(), shown);
        assert_eq!(shown.parse(), Ok(law), "{shown} must read back");
    }

    #[track_caller]
    fn refuses(text: &str, expected: &str) {
        let error = text.parse::<LawParameters>().expect_err(text);
        assert_eq!(error.to_string(), expected);
    }

    #[test]
    fn law_text_reads_back_as_it_is_shown() {
        reads("integrator 5", "integrator 5");
        reads("integrator  6  down=2", "integrator 6 up=1 down=2");
        reads("shift-register 64", "shift-register 64");
        reads("majority-register 6 of 8", "majority-register 6 of 8");
        reads("state-machine confirm=3/2", "state-machine confirm=3/2 patience=1 lockout=0");
        reads(
            "state-machine lockout=4/0 confirm=3 patience=2/1",
            "state-machine confirm=3 patience=2/1 lockout=4/0",
        );
    }

    #[test]
    fn law_text_verdict_is_that_of_the_law() {
        let envelope = Envelope::clean(20, 20).bounce(3, 3);
        let verdict = |text: &str| text.parse::<LawParameters>().expect(text).verdict(&envelope);
        assert_eq!(verdict("shift-register 4"), Ok(ShiftRegister::new(4).verdict(&envelope)));
        assert_eq!(verdict("integrator 4"), Ok(Integrator::<u8>::new(4).verdict(&envelope)));
        assert!(matches!(verdict("state-machine confirm=1 lockout=2"), Ok(Verdict::Holds(_))));
        assert!(verdict("majority-register 3 of 8").is_err());
        assert!(verdict("integrator 0").is_err());
    }

    #[test]
    fn law_text_that_is_none_is_refused() {
        let machine = "\"state-machine confirm=3/2 patience=2/1 lockout=4/0\"";
        refuses("statemachine confirm=3", &format!("\"statemachine\" is not a law; write {machine}"));
        refuses(
            "filter 3",
            "\"filter\" is not a law; the laws are integrator, shift-register, majority-register, state-machine",
        );
        refuses(
            "",
            "\"\" is not a law; the laws are integrator, shift-register, majority-register, state-machine",
        );
        refuses("state-machine", &format!("state-machine needs confirm; write {machine}"));
        refuses("state-machine confrm=3", "state-machine has no parameter \"confrm\"; write confirm=");
        refuses("state-machine confirm=3 confirm=4", "confirm is given twice; write it once");
        refuses(
            "shift-register 5 6",
            "these are not the parameters of shift-register; write \"shift-register 8\"",
        );
        refuses(
            "shift-register 256",
            "\"256\" is not a window of shift-register; write a whole number of ticks that fits the law, \"shift-register 8\"",
        );
        refuses("majority-register 6 from 8", "write \"majority-register 6 of 8\"");
    }
}
