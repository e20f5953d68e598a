//! A chosen configuration as code for the firmware.

mod identifier;
mod law_code;
mod layout;
mod rust;
pub mod table;

#[cfg(test)]
mod tests;

use debounce_core::{Bounds, Change, Envelope, ParameterError, Position, TickClock, Verdict};

use crate::law_text::LawParameters;
use crate::quantity::{TickPeriod, Time, counted};
use crate::requirement::{Figures, Level, Resolved, Role};

pub use identifier::{module_name, type_name};
pub use rust::rust_module;

/// How the bounds of a configuration were proved.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Proof {
    /// The closed form of the law answers for this envelope, so the compiler can check it again.
    ClosedForm,
    /// The prover explored every state of law and envelope; the closed form does not answer.
    Explored {
        /// States of law and envelope together.
        states: u64,
    },
}

/// A law with its parameters, and everything that it was chosen for.
#[derive(Clone, PartialEq, Debug)]
pub struct Configuration {
    /// What the contact is called.
    pub name: String,
    /// What hangs on it.
    pub role: Role,
    /// The level of the line while the contact is closed.
    pub closed: Level,
    /// The law and its parameters.
    pub law: LawParameters,
    /// The sample clock.
    pub clock: TickClock,
    /// The envelope, in delivered samples of that clock: lost ticks are taken off already.
    pub envelope: Envelope,
    /// The proved bounds.
    pub bounds: Bounds,
    /// How they were proved.
    pub proof: Proof,
    /// The requirement, in time.
    pub required: Figures<Time>,
    /// Where it all comes from, a line each: program, recordings, requirement file.
    pub provenance: Vec<String>,
}

/// Why a configuration must not be written: the module would not compile, or would claim what does not hold.
#[derive(Clone, PartialEq, Eq, Debug, thiserror::Error)]
#[non_exhaustive]
pub enum NotHeld {
    /// The clock turns a time into more samples than the envelope allows for, or fewer than it counts on.
    #[error(
        "{what} of {time} is {} of this clock, but the envelope was proved with {proved}",
        counted(u64::from(*.samples), "sample")
    )]
    OutsideEnvelope {
        /// Which time.
        what: &'static str,
        /// The time.
        time: Time,
        /// Its samples.
        samples: u32,
        /// The samples in the envelope.
        proved: u32,
    },
    /// The law refuses its parameters.
    #[error("{law}: {error}")]
    Refused {
        /// The law.
        law: LawParameters,
        /// Why.
        error: ParameterError,
    },
    /// The closed form does not answer with these bounds, or refutes bounds that were explored.
    #[error("the closed form of {law} does not say what was proved")]
    Disputed {
        /// The law.
        law: LawParameters,
    },
    /// The proved latency is longer than the required one.
    #[error(
        "the {edge} latency of up to {} can take {delay}, longer than the required {required}",
        counted(u64::from(*.samples), "sample")
    )]
    TooLate {
        /// Make or break.
        edge: &'static str,
        /// Proved samples.
        samples: u32,
        /// What they can take.
        delay: Time,
        /// What is required.
        required: Time,
    },
}

impl Configuration {
    /// A law for a requirement at one tick period, with the envelope in samples of that clock and the bounds that
    /// were proved for it.
    #[must_use]
    pub fn new(
        resolved: &Resolved,
        tick: TickPeriod,
        envelope: Envelope,
        law: LawParameters,
        bounds: Bounds,
        proof: Proof,
    ) -> Self {
        Self {
            name: resolved.name.value.clone(),
            role: resolved.role.value,
            closed: resolved.closed.value,
            law,
            clock: resolved.clock(tick),
            envelope,
            bounds,
            proof,
            required: resolved.required.clone().map(|time| time.value),
            provenance: Vec::new(),
        }
    }

    /// Adds a line about where the configuration comes from.
    #[must_use]
    pub fn provenance(mut self, line: impl Into<String>) -> Self {
        self.provenance.push(line.into());
        self
    }

    /// Makes sure that the envelope covers the requirement and the bounds keep it: what the generated module
    /// asserts again.
    ///
    /// # Errors
    /// The first thing that does not hold.
    pub fn check(&self) -> Result<(), NotHeld> {
        let (required, envelope) = (&self.required, &self.envelope.delivered());
        let touched = |time: Time| self.clock.samples_touched(time.ns());
        let seen = |time: Time| self.clock.samples_seen(time.ns());
        let most = |what, time: Time, proved: u32| match touched(time) {
            samples if samples > proved => Err(NotHeld::OutsideEnvelope { what, time, samples, proved }),
            _ => Ok(()),
        };
        let least = |what, time: Time, proved: u32| match seen(time) {
            samples if samples < proved => Err(NotHeld::OutsideEnvelope { what, time, samples, proved }),
            _ => Ok(()),
        };
        most("the bounce at a make", required.bounce.make, envelope.bounce.make)?;
        most("the bounce at a break", required.bounce.break_, envelope.bounce.break_)?;
        most("a disturbance while open", required.disturbance.open, envelope.glitch.open)?;
        most("a disturbance while closed", required.disturbance.closed, envelope.glitch.closed)?;
        least("the shortest open time", required.shortest.open, envelope.dwell.at(Position::Open))?;
        least("the shortest closed time", required.shortest.closed, envelope.dwell.at(Position::Closed))?;
        least("the quiet", required.quiet, envelope.quiet)?;
        least("the calm", required.calm, envelope.calm)?;
        for (edge, change) in [("make", Change::Make), ("break", Change::Break)] {
            let samples = self.bounds.latency.at(change).worst;
            let (delay, required) =
                (Time::from_ns(self.clock.delay_ns(samples).1), required.latency.at(change));
            if delay > required {
                return Err(NotHeld::TooLate { edge, samples, delay, required });
            }
        }
        let law = self.law;
        let verdict = law.verdict(envelope).map_err(|error| NotHeld::Refused { law, error })?;
        match (self.proof, verdict) {
            (_, Verdict::Holds(bounds)) if bounds == self.bounds => Ok(()),
            (Proof::Explored { .. }, Verdict::Unknown) => Ok(()),
            _ => Err(NotHeld::Disputed { law }),
        }
    }
}
