//! The values of a requirement that are words: kind, role and level.

use std::fmt;
use std::str::FromStr;

pub use crate::level::Level;
use crate::nearest::nearest;

/// A value that is one word of a fixed list.
pub trait Word: Copy + PartialEq + Sized + 'static {
    /// What it is called in messages, with its article.
    const NAME: &'static str;
    /// Every value, in the order in which they are listed.
    const ALL: &'static [Self];
    /// How it is written.
    fn word(self) -> &'static str;
}

/// The value written as `text`, or what to say about it.
pub(crate) fn parse_word<W: Word>(text: &str) -> Result<W, WordError> {
    W::ALL.iter().copied().find(|value| value.word() == text).ok_or_else(|| {
        let words = || W::ALL.iter().map(|value| value.word());
        let listed = words().map(|word| format!("\"{word}\"")).collect::<Vec<_>>();
        let help = match nearest(text, words()) {
            Some(word) => format!("write \"{word}\""),
            None => format!("write {}", either(&listed)),
        };
        WordError { message: format!("\"{text}\" is not {}", W::NAME), help }
    })
}

/// "a, b or c".
pub(crate) fn either(items: &[String]) -> String {
    match items {
        [all @ .., last] if !all.is_empty() => format!("{} or {last}", all.join(", ")),
        _ => items.concat(),
    }
}

/// Why a text is not one of the words.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[error("{message}; {help}")]
pub struct WordError {
    pub(super) message: String,
    pub(super) help: String,
}

macro_rules! words {
    ($(#[$doc:meta])* $type:ident, $name:literal, { $($(#[$variant_doc:meta])* $variant:ident = $word:literal,)+ }) => {
        $(#[$doc])*
        #[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
        pub enum $type {
            $($(#[$variant_doc])* $variant,)+
        }

        spelled! { $type, $name, { $($variant = $word,)+ } }
    };
}

macro_rules! spelled {
    ($type:ident, $name:literal, { $($variant:ident = $word:literal,)+ }) => {
        word! { $type, $name, { $($variant = $word,)+ } }

        impl FromStr for $type {
            type Err = WordError;

            fn from_str(text: &str) -> Result<Self, WordError> {
                parse_word(text)
            }
        }

        impl fmt::Display for $type {
            fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
                f.write_str(self.word())
            }
        }
    };
}

macro_rules! word {
    ($type:ident, $name:literal, { $($variant:ident = $word:literal,)+ }) => {
        impl Word for $type {
            const NAME: &'static str = $name;
            const ALL: &'static [Self] = &[$(Self::$variant),+];

            fn word(self) -> &'static str {
                match self {
                    $(Self::$variant => $word,)+
                }
            }
        }
    };
}
pub(super) use word;

words! {
    /// What sort of contact it is; used for defaults and in reports only.
    ContactKind, "a kind of contact", {
        /// A momentary push-button.
        PushButton = "push-button",
        /// One key of a keypad.
        Key = "key",
        /// A switch that stays where it is put.
        Toggle = "toggle",
        /// A switch that a moving part works.
        LimitSwitch = "limit-switch",
        /// A reed contact and its magnet.
        Reed = "reed",
        /// The contact of a relay.
        Relay = "relay",
        /// One contact of a mechanical rotary encoder.
        Encoder = "encoder",
        /// Anything else.
        Other = "other",
    }
}

words! {
    /// What hangs on the contact.
    Role, "a role", {
        /// Ordinary control: a wrong or missing edge is a nuisance.
        Control = "control",
        /// The contact guards people or property.
        Guarding = "guarding",
        /// The contact counts for trade measurement.
        Metering = "metering",
    }
}

words! {
    /// Where a recording was taken, of a line with a network between contact and pin.
    TakenAt, "a place where a recording is taken", {
        /// At the bare contact, in front of the network.
        Contact = "contact",
        /// At the pin, behind the network.
        Pin = "pin",
    }
}

words! {
    /// A core on which the instructions of a tick were counted.
    Core, "a core whose instructions were counted", {
        /// Arm Cortex-M3, thumbv7m code.
        CortexM3 = "cortex-m3",
        /// Arm Cortex-M0, thumbv6m code.
        CortexM0 = "cortex-m0",
        /// A 32-bit RISC-V core with multiplication and short instructions.
        Riscv32imc = "riscv32imc",
    }
}

words! {
    /// A diode across the series resistor.
    DiodeKind, "a kind of diode", {
        /// A small-signal silicon diode.
        Silicon = "silicon",
        /// A small Schottky diode.
        Schottky = "schottky",
    }
}

words! {
    /// Which edge the diode makes quicker.
    Quickened, "an edge that a diode can quicken", {
        /// The one after a make: it carries what leaves the capacitor.
        Make = "make",
        /// The one after a break: it carries what fills the capacitor.
        Break = "break",
    }
}

spelled! { Level, "a level of the line", { Low = "low", High = "high", } }

impl Role {
    /// The caution that every report, configuration and output for this role carries; it cannot be switched off.
    #[must_use]
    pub const fn caution(self) -> Option<&'static str> {
        match self {
            Self::Control => None,
            Self::Guarding => Some(
                "debouncing makes no input safe: a contact that guards people or property (interlock, limit \
                 switch of a powered machine, emergency stop, door contact) needs certified parts, assessed by \
                 qualified people under the code that applies where it is used",
            ),
            Self::Metering => Some(
                "debouncing makes no input fit for trade: a contact that counts for trade measurement needs \
                 approved instruments, verified by qualified people under the law that applies where it is used",
            ),
        }
    }
}
