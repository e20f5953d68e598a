//! What is wrong with the parameters of a law: [`ParameterError`].

use core::fmt;

/// A parameter of a law, as named in a [`ParameterError`].
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum Parameter {
    /// The end of an integrator's count.
    FullScale,
    /// What a closed sample adds to an integrator.
    UpStep,
    /// What an open sample takes from an integrator.
    DownStep,
    /// The number of samples a register holds.
    Window,
    /// The number of samples in a register that decide.
    Majority,
    /// Closed samples that report a make.
    ConfirmMake,
    /// Open samples that report a break.
    ConfirmBreak,
    /// Open samples in a row that end the closing phase.
    PatienceMake,
    /// Closed samples in a row that end the opening phase.
    PatienceBreak,
    /// Ticks ignored after a make.
    LockoutMake,
    /// Ticks ignored after a break.
    LockoutBreak,
    /// Contrary samples that report an edge of a bank.
    Confirm,
    /// Agreeing samples in a row that clear the count of a bank.
    Patience,
    /// The time over which steps are counted.
    Gate,
    /// Samples alike after which a line is at rest.
    Rest,
    /// The shortest stay open.
    DwellOpen,
    /// The shortest stay closed.
    DwellClosed,
    /// The longest bounce after a make.
    BounceMake,
    /// The longest bounce after a break.
    BounceBreak,
    /// The widest disturbance while open.
    GlitchOpen,
    /// The widest disturbance while closed.
    GlitchClosed,
    /// The quiet between disturbances.
    Quiet,
    /// The calm after a bounce.
    Calm,
}

impl Parameter {
    const fn name(self) -> &'static str {
        match self {
            Self::FullScale => "full scale",
            Self::UpStep => "up step",
            Self::DownStep => "down step",
            Self::Window => "window",
            Self::Majority => "majority",
            Self::ConfirmMake => "confirm count of a make",
            Self::ConfirmBreak => "confirm count of a break",
            Self::PatienceMake => "patience of a make",
            Self::PatienceBreak => "patience of a break",
            Self::LockoutMake => "lock-out after a make",
            Self::LockoutBreak => "lock-out after a break",
            Self::Confirm => "confirm count",
            Self::Patience => "patience",
            Self::Gate => "gate",
            Self::Rest => "rest",
            Self::DwellOpen => "dwell while open",
            Self::DwellClosed => "dwell while closed",
            Self::BounceMake => "bounce after a make",
            Self::BounceBreak => "bounce after a break",
            Self::GlitchOpen => "disturbance while open",
            Self::GlitchClosed => "disturbance while closed",
            Self::Quiet => "quiet",
            Self::Calm => "calm",
        }
    }

    /// The refusal of a constant 0, whole, because a constant panic cannot join texts.
    const fn zero(self) -> &'static str {
        match self {
            Self::FullScale => "a full scale of 0 has no two ends; use at least 1",
            Self::UpStep => "an up step of 0 never makes; use at least 1",
            Self::DownStep => "a down step of 0 never breaks; use at least 1",
            Self::Window => "a window of 0 samples decides nothing; use at least 1",
            Self::Majority => "a majority of 0 samples decides nothing; use more than half the window",
            Self::ConfirmMake => "a make cannot be confirmed by 0 samples; use at least 1",
            Self::ConfirmBreak => "a break cannot be confirmed by 0 samples; use at least 1",
            Self::PatienceMake => "the patience of a make cannot be 0 samples; use at least 1",
            Self::PatienceBreak => "the patience of a break cannot be 0 samples; use at least 1",
            Self::Confirm => "an edge cannot be confirmed by 0 samples; use at least 1",
            Self::Patience => "a count cannot be cleared by 0 agreeing samples; use at least 1",
            Self::Gate => "a gate of 0 ticks counts no steps; use at least 1",
            Self::Rest => "a line is not at rest after 0 samples; use at least 1",
            Self::DwellOpen => {
                "no sample of a dwell while open is certain to be delivered; use more than are lost"
            }
            Self::DwellClosed => {
                "no sample of a dwell while closed is certain to be delivered; use more than are lost"
            }
            Self::LockoutMake | Self::LockoutBreak => "a lock-out of 0 ticks is allowed",
            Self::BounceMake | Self::BounceBreak => "a bounce of 0 samples is allowed",
            Self::GlitchOpen | Self::GlitchClosed => "a disturbance of 0 samples is allowed",
            Self::Quiet | Self::Calm => "a quiet or calm of 0 samples is allowed",
        }
    }
}

impl fmt::Display for Parameter {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}

/// Why a law refuses its parameters.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
#[cfg_attr(feature = "defmt", derive(defmt::Format))]
#[non_exhaustive]
pub enum ParameterError {
    /// The parameter must be at least 1.
    Zero(Parameter),
    /// A step of the integrator is longer than its whole scale.
    StepBeyondFullScale {
        /// The step given.
        step: u16,
        /// The full scale it must fit.
        full_scale: u16,
    },
    /// The register cannot hold so many samples.
    WindowTooLong {
        /// The window given.
        window: u8,
        /// The longest it may be.
        most: u8,
    },
    /// At most half of the window would decide, so that both positions could win at once.
    NotAMajority {
        /// The majority given.
        majority: u8,
        /// The window it must be more than half of.
        window: u8,
    },
    /// More samples are asked for than the window holds.
    MajorityBeyondWindow {
        /// The majority given.
        majority: u8,
        /// The window it must fit.
        window: u8,
    },
    /// Disturbances follow each other too closely for the closed form.
    QuietTooShort {
        /// Samples between disturbances that are certain to be delivered.
        quiet: u32,
        /// The widest disturbance, which quiet must exceed.
        glitch: u32,
    },
    /// The calm is neither 0 nor longer than the widest disturbance: no closed form is proved there.
    CalmTooShort {
        /// Settled samples after a bounce that are certain to be delivered.
        calm: u32,
        /// The widest disturbance, which a calm other than 0 must exceed.
        glitch: u32,
    },
    /// The count is too narrow for a parameter, as it is given or as an envelope asks for it.
    CountTooNarrow {
        /// The parameter.
        parameter: Parameter,
        /// What is asked for, in ticks.
        ticks: u32,
        /// The most that the count holds.
        most: u16,
    },
}

impl ParameterError {
    /// The text a constant is refused with at compile time, where numbers cannot be printed.
    pub(crate) const fn refusal(self) -> &'static str {
        match self {
            Self::Zero(parameter) => parameter.zero(),
            Self::StepBeyondFullScale { .. } => {
                "a step is longer than the full scale; use at most the full scale"
            }
            Self::WindowTooLong { .. } => {
                "the window holds more samples than the register; use a shorter window"
            }
            Self::NotAMajority { .. } => "the majority is at most half the window; use more than half",
            Self::MajorityBeyondWindow { .. } => {
                "the majority is more than the whole window; use at most the window"
            }
            Self::QuietTooShort { .. } => "quiet must be longer than the widest disturbance",
            Self::CalmTooShort { .. } => "calm must be 0 or longer than the widest disturbance",
            Self::CountTooNarrow { .. } => {
                "more ticks are asked for than this count holds; use a wider count"
            }
        }
    }
}

impl fmt::Display for ParameterError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match *self {
            Self::Zero(parameter) => f.write_str(parameter.zero()),
            Self::StepBeyondFullScale { step, full_scale } => {
                write!(
                    f,
                    "a step of {step} is longer than the full scale of {full_scale}; use at most {full_scale}"
                )
            }
            Self::WindowTooLong { window, most } => {
                write!(f, "a window of {window} samples does not fit the register; use at most {most}")
            }
            Self::NotAMajority { majority, window } => {
                let least = window / 2 + 1;
                write!(f, "{majority} of {window} samples is not a majority; use at least {least}")
            }
            Self::MajorityBeyondWindow { majority, window } => {
                write!(f, "{majority} of {window} samples can never be reached; use at most {window}")
            }
            Self::QuietTooShort { quiet, glitch } => write!(
                f,
                "a quiet of {quiet} samples is not longer than the widest disturbance of {glitch}; use at least {}",
                glitch.saturating_add(1)
            ),
            Self::CalmTooShort { calm, glitch } => write!(
                f,
                "a calm of {calm} samples is not longer than the widest disturbance of {glitch}; \
                 use 0 or at least {}",
                glitch.saturating_add(1)
            ),
            Self::CountTooNarrow { parameter, ticks, most } => {
                write!(
                    f,
                    "a {parameter} of {ticks} ticks does not fit the count; the most it holds is {most}"
                )
            }
        }
    }
}

impl core::error::Error for ParameterError {}

#[cfg(test)]
mod tests {
    extern crate std;

    use std::string::ToString;

    use super::{Parameter, ParameterError};

    #[track_caller]
    fn says(error: ParameterError, expected: &str) {
        assert_eq!(error.to_string(), expected);
        assert!(!error.refusal().ends_with('.'));
    }

    #[test]
    fn parameter_error_message_names_both_numbers_that_clash() {
        says(ParameterError::Zero(Parameter::FullScale), "a full scale of 0 has no two ends; use at least 1");
        says(
            ParameterError::StepBeyondFullScale { step: 5, full_scale: 4 },
            "a step of 5 is longer than the full scale of 4; use at most 4",
        );
        says(
            ParameterError::WindowTooLong { window: 65, most: 64 },
            "a window of 65 samples does not fit the register; use at most 64",
        );
        says(
            ParameterError::NotAMajority { majority: 2, window: 4 },
            "2 of 4 samples is not a majority; use at least 3",
        );
        says(
            ParameterError::MajorityBeyondWindow { majority: 6, window: 5 },
            "6 of 5 samples can never be reached; use at most 5",
        );
        says(
            ParameterError::QuietTooShort { quiet: 3, glitch: 3 },
            "a quiet of 3 samples is not longer than the widest disturbance of 3; use at least 4",
        );
        says(
            ParameterError::CalmTooShort { calm: 1, glitch: 3 },
            "a calm of 1 samples is not longer than the widest disturbance of 3; use 0 or at least 4",
        );
        says(
            ParameterError::CountTooNarrow { parameter: Parameter::LockoutMake, ticks: 256, most: 255 },
            "a lock-out after a make of 256 ticks does not fit the count; the most it holds is 255",
        );
        says(ParameterError::Zero(Parameter::Gate), "a gate of 0 ticks counts no steps; use at least 1");
    }
}
