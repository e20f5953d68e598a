//! The envelope of a command: given in ticks, or following from a requirement and one tick period.

use clap::Args;
use debounce_core::{Envelope, PerChange, TickClock};

use super::envelope_text::EnvelopeText;
use super::input::Input;
use super::recordings::RequirementInput;
use super::{Failure, Session};
use crate::problem::Problem;
use crate::quantity::{TickPeriod, Time};
use crate::report::html::SourceFile;
use crate::report::words;
use crate::requirement::{Origin, RequirementOptions, Sourced};
use crate::study::{Caution, Claims, measured};

/// An envelope in ticks, or a requirement.
#[derive(Args, Clone, PartialEq, Debug, Default)]
pub struct EnvelopeInput {
    /// The envelope in ticks, in place of a requirement; --tick then only adds times to the answer
    #[arg(long, value_name = "ENVELOPE")]
    pub envelope: Option<EnvelopeText>,
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
}

impl EnvelopeInput {
    /// The envelope in samples, the tick period where there is one, and what a report says of where both come from; the
    /// files only where they are wanted.
    pub(super) fn given(&self, session: &Session, with_files: bool) -> Result<EnvelopeGiven, Failure> {
        if let Some(EnvelopeText(envelope)) = self.envelope {
            let tick = self.tick_beside_envelope()?;
            let clock = tick.map(|tick| TickClock::new(tick.period()));
            return Ok(EnvelopeGiven {
                envelope,
                tick,
                clock,
                allowed: PerChange::default(),
                caution: None,
                files: Vec::new(),
            });
        }
        if self.input.is_empty() {
            return Err(Problem::new("no envelope is given")
                .help("give one in ticks, such as --envelope \"dwell=20 bounce=5/3 glitch=1/1 quiet=10\"")
                .help(
                    "or a requirement and a tick period, such as --requirement contact.toml --tick \"1 ms\"",
                )
                .into());
        }
        let input = Input::with_or_without_recordings(&self.input, session)?;
        let resolved = input.requirement.resolve(&measured(&input.observed))?;
        if !input.observed.is_empty() {
            let claims = Claims::of(&input.observed, &resolved).map_err(Problem::told)?;
            let cautions = Caution::all(&input.observed, &resolved, &claims);
            cautions.iter().for_each(|caution| session.warn(&caution.to_string()));
        }
        let tick = only(&resolved.ticks.value)?;
        let clock = resolved.clock(tick);
        let envelope = resolved.physical().in_ticks(&clock).map_err(Problem::told)?;
        let files = if with_files { input.files()? } else { Vec::new() };
        let asked =
            |latency: Sourced<Time>| (!matches!(latency.origin, Origin::Default(_))).then_some(latency.value);
        let latency = resolved.required.latency;
        let allowed = PerChange { make: asked(latency.make), break_: asked(latency.break_) };
        let (tick, clock) = (Some(tick), Some(clock));
        Ok(EnvelopeGiven { envelope, tick, clock, allowed, caution: resolved.caution(), files })
    }

    /// An envelope in ticks leaves nothing open but how long a tick is.
    fn tick_beside_envelope(&self) -> Result<Option<TickPeriod>, Failure> {
        let ticks = &self.input.requirement.tick;
        let only_ticks = RequirementInput {
            requirement: RequirementOptions { tick: ticks.clone(), ..RequirementOptions::default() },
            ..RequirementInput::default()
        };
        if self.input != only_ticks {
            return Err(Problem::new(
                "the envelope is given in ticks and by a requirement or recordings as well",
            )
            .help("give either --envelope, with --tick for times in the answer, or the requirement alone")
            .into());
        }
        if ticks.is_empty() { Ok(None) } else { Ok(Some(only(ticks)?)) }
    }
}

/// An envelope with what came with it.
pub(super) struct EnvelopeGiven {
    pub(super) envelope: Envelope,
    pub(super) tick: Option<TickPeriod>,
    /// Of a requirement with its tolerance and jitter.
    pub(super) clock: Option<TickClock>,
    /// The latencies that a requirement states.
    pub(super) allowed: PerChange<Option<Time>>,
    pub(super) caution: Option<&'static str>,
    pub(super) files: Vec<SourceFile>,
}

/// The one tick period that an answer is for.
fn only(ticks: &[TickPeriod]) -> Result<TickPeriod, Problem> {
    if let &[tick] = ticks {
        return Ok(tick);
    }
    let periods: Vec<String> = ticks.iter().map(ToString::to_string).collect();
    let example = periods.first().map_or("1 ms", String::as_str);
    Err(Problem::new(format!("there are several tick periods: {}", periods.join(", ")))
        .help(format!("a proof is for one tick period; choose one, such as --tick \"{example}\"")))
}

/// The envelope in one sentence.
pub(super) fn in_ticks(e: &Envelope) -> String {
    format!(
        "in ticks: dwell {} open, {} closed; bounce {} at make, {} at break; disturbance {} open, {} closed; quiet {}; calm {}; lost {}",
        e.dwell.open,
        e.dwell.closed,
        e.bounce.make,
        e.bounce.break_,
        e.glitch.open,
        e.glitch.closed,
        e.quiet,
        e.calm,
        e.lost
    )
}

/// Samples, and the delay they stand for where the clock is known.
pub(super) fn latency(samples: u32, clock: Option<&TickClock>) -> String {
    let counted = words::count(samples as usize, "sample");
    clock.map_or(counted.clone(), |clock| format!("{counted} ({})", words::delay_below(clock, samples)))
}
