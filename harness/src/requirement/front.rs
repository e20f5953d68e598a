//! A network that stands in front of the pin of a requirement, and what it makes of the contact.

use super::{Origin, Requirement, ResolvedNetwork, ResolvedRow};
use crate::envelope::PhysicalEnvelope;
use crate::network::{AtPin, Disturbed, at_pin};
use crate::problem::{Problem, Problems};
use crate::report::words;

/// The network and the envelope it leaves at the pin.
#[derive(Clone, PartialEq, Debug)]
pub struct InFront {
    /// The network.
    pub resolved: ResolvedNetwork,
    /// What it makes of the contact.
    pub at_pin: AtPin,
    /// The contact itself.
    pub contact: PhysicalEnvelope,
}

impl Requirement {
    /// The network in front of the pin, every part filled in; `None` where there is none.
    ///
    /// # Errors
    /// Parts that are impossible or contradict one another.
    pub fn resolved_network(&self) -> Result<Option<ResolvedNetwork>, Problems> {
        let closed = self.contact.closed.map(|closed| closed.value);
        self.network.as_ref().map(|table| table.resolve(closed, self.source())).transpose()
    }
}

impl InFront {
    /// The network of a requirement whose contact stays inside `contact`; `None` where there is none.
    ///
    /// # Errors
    /// Where its parts are impossible, or it leaves nothing of the contact's operations.
    pub fn of(requirement: &Requirement, contact: PhysicalEnvelope) -> Result<Option<Self>, Problems> {
        let Some(resolved) = requirement.resolved_network()? else { return Ok(None) };
        let at_pin = at_pin(&resolved.network, &contact).map_err(|error| {
            let problem = Problem::told(error);
            match requirement.source() {
                Some(source) => problem.in_file(source.path()),
                None => problem,
            }
        })?;
        Ok(Some(Self { resolved, at_pin, contact }))
    }

    /// Its parts and its effects, for tables and for JSON.
    #[must_use]
    pub fn rows(&self) -> Vec<ResolvedRow> {
        let mut rows = self.resolved.rows.clone();
        let mut worked_out =
            |key: &'static str, text: String| rows.push(ResolvedRow { key, text, origin: Origin::Network });
        let AtPin { physical, delay_ns, disturbed } = &self.at_pin;
        let delay = |(from, to): (u64, u64)| format!("{} to {}", words::at_least(from), words::at_most(to));
        worked_out("network.delay.make", delay(delay_ns.make));
        worked_out("network.delay.break", delay(delay_ns.break_));
        worked_out("pin.bounce.make", words::at_most(physical.bounce_ns.make));
        worked_out("pin.bounce.break", words::at_most(physical.bounce_ns.break_));
        worked_out("pin.disturbance.open", shown(disturbed.open, physical.glitch_ns.open));
        worked_out("pin.disturbance.closed", shown(disturbed.closed, physical.glitch_ns.closed));
        if physical.has_disturbances() {
            worked_out("pin.quiet", words::at_least(physical.quiet_ns));
            worked_out("pin.calm", words::at_least(physical.calm_ns));
        }
        rows
    }

    /// The effect in sentences, hardware and software in one budget.
    #[must_use]
    pub fn sentences(&self) -> Vec<String> {
        let AtPin { physical, delay_ns, disturbed } = &self.at_pin;
        let delay = |(from, to): (u64, u64)| format!("{} to {}", words::at_least(from), words::at_most(to));
        vec![
            format!(
                "delays a make by {} and a break by {} (worked out from [network], over all tolerances); latencies are counted from the contact, so they hold this delay",
                delay(delay_ns.make),
                delay(delay_ns.break_)
            ),
            format!(
                "at the pin a make may bounce for {} in place of {}, a break for {} in place of {}",
                words::at_most(physical.bounce_ns.make),
                words::at_most(self.contact.bounce_ns.make),
                words::at_most(physical.bounce_ns.break_),
                words::at_most(self.contact.bounce_ns.break_)
            ),
            format!(
                "disturbances while open: {}; while closed: {}",
                shown(disturbed.open, physical.glitch_ns.open),
                shown(disturbed.closed, physical.glitch_ns.closed)
            ),
        ]
    }
}

fn shown(disturbed: Disturbed, width_ns: u64) -> String {
    match disturbed {
        Disturbed::Never => "none".to_owned(),
        Disturbed::Rejected { settles_ns } => {
            format!("rejected, once settled for {}", words::at_most(settles_ns))
        }
        Disturbed::Widened { by_ns } => {
            format!("up to {}, {} of it by the network", words::at_most(width_ns), words::at_most(by_ns))
        }
    }
}
