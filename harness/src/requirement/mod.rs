//! The requirement: what the contact is, what is asked of its conditioning, what the firmware can afford.
//!
//! It comes from a file, `contact.toml`, from options of the command, or from both; an option stands over the
//! file. Every value may be left out: it is then taken from the recordings or from a stated default, and each
//! value of the [`Resolved`] requirement says where it came from.
//!
//! ```toml
//! [contact]
//! name = "sluice gate, upper end"
//! kind = "limit-switch"     # push-button, key, toggle, limit-switch, reed, relay, encoder, other
//! role = "control"          # control, guarding, metering
//! closed = "low"            # level of the line while the contact is closed: low, high
//!
//! [[recording]]
//! path = "gate.vcd"         # relative to this file
//! channel = "top.gate"
//! taken_at = "contact"      # with a [network] between contact and pin: contact, pin
//! resolution = "1 us"       # the recorder's own sample period, which a VCD does not show
//! unknown = "hold"          # values that are neither 0 nor 1: hold, open, closed, refuse
//! gap = "8 ms"              # the rest that ends a burst; found without it
//! sha256 = "9f86d081884c7d659a2feaa0c55ad015a3bf4f1b2b0b822cd15d6c15b0f00a08"
//!
//! [[recording]]
//! path = "gate.csv"
//! thresholds = { low = "0.8 V", high = "2.0 V" }
//! closed = "high"           # where this recording differs from the contact
//! time_column = "Time"      # by name or number; found without it
//! time_unit = "ms"          # s, ms, us, ns, ps, fs; or sample_period = "10 us" for numbered samples
//! delimiter = "semicolon"   # comma, semicolon, tab, space; found without it
//! decimal_mark = "comma"    # point, comma; found without it
//!
//! [required]
//! latency = { make = "20 ms", break = "30 ms" }   # or one for both: "20 ms"
//! shortest_closed = "60 ms"
//! shortest_open = "60 ms"
//! bounce = { make = "6 ms", break = "4 ms" }
//! disturbance = { open = "500 us", closed = "300 us" }
//! quiet = "5 ms"
//! calm = "0 ms"
//! confidence = "95 %"
//! coverage = "99 %"
//! margin = "25 %"
//!
//! [clock]
//! tick = ["500 us", "1 ms", "100 Hz"]   # or a range: { from = "500 us", to = "5 ms" }
//! tolerance = "2 %"
//! jitter = "20 us"
//! lost = "0 ticks"
//!
//! [budget]
//! ram = "4 bytes"           # for each input
//! fastest_tick = "2 kHz"
//! instructions = "40 instructions"   # of the worst tick of an input, as counted for its kind of law
//! core = "cortex-m3"        # where they are counted; without it the most of all cores counts
//!
//! [network]                 # what stands between the contact and the pin, if anything does
//! input = "schmitt-pin"
//! supply = "3.3 V 5 %"
//! pull = "10 kohm 5 %"
//! series = "4.7 kohm 5 %"
//! capacitor = "100 nF 10 % X7R"
//!
//! [firmware]                # what was shipped, for `harness recheck` and `harness emit`
//! module = "src/gate_input.rs"
//! law = "state-machine confirm=2 patience=2 lockout=2/1"   # without it the best candidate
//! tick = "1 ms"             # without it the best of those above
//! ```
//!
//! With a `[network]`, figures are those of the contact, and everything is proved for what the network makes of them at
//! the pin. A recording is one of the bare contact unless it says `taken_at = "pin"`: of such a one no figure is taken
//! for the contact's, and it is sampled and held against the envelope as it is.

mod check;
mod firmware;
mod front;
mod network;
mod network_options;
mod network_resolve;
mod options;
mod pair;
pub(crate) mod read;
mod reading;
mod resolve;
pub(crate) mod section;
mod source;
pub(crate) mod words;

#[cfg(test)]
mod tests;

use std::path::{Path, PathBuf};
use std::sync::Arc;

use debounce_core::{PerChange, PerPosition};

use crate::problem::SourceText;
use crate::quantity::{Bytes, Instructions, Share, TickPeriod, Ticks, Time, Voltage};

pub use firmware::Firmware;
pub use front::InFront;
pub use network::{NetworkTable, ResolvedNetwork};
pub use network_options::NetworkOptions;
pub use options::RequirementOptions;
pub use pair::{ForChanges, ForPositions};
pub use read::{parse, read};
pub use reading::Reading;
pub use resolve::{Measured, Resolved, ResolvedRow, Seen, allowed_samples};
pub use source::{Origin, Sourced};
pub use words::{ContactKind, Core, DiodeKind, Level, Quickened, Role, TakenAt, Word};

/// A requirement as far as it has been given.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Requirement {
    /// What the contact is.
    pub contact: Contact,
    /// Where it has been recorded.
    pub recordings: Vec<Recording>,
    /// The times that are asked for.
    pub required: Figures<Option<Sourced<Time>>>,
    /// How sure a claim from recordings must be.
    pub confidence: Option<Sourced<Share>>,
    /// Which share of all operations such a claim must cover.
    pub coverage: Option<Sourced<Share>>,
    /// How much is added to what the recordings show.
    pub margin: Option<Sourced<Share>>,
    /// The sample clock.
    pub clock: Clock,
    /// What the firmware can afford.
    pub budget: Budget,
    /// What stands between the contact and the pin.
    pub network: Option<NetworkTable>,
    /// What was shipped.
    pub firmware: Option<Firmware>,
    source: Option<Arc<SourceText>>,
}

/// What the contact is.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Contact {
    /// What it is called; the generated module takes its name from here.
    pub name: Option<Sourced<String>>,
    /// What sort of contact it is.
    pub kind: Option<Sourced<ContactKind>>,
    /// What hangs on it.
    pub role: Option<Sourced<Role>>,
    /// The level of the line while the contact is closed.
    pub closed: Option<Sourced<Level>>,
}

/// One recording of the contact.
#[derive(Clone, PartialEq, Debug)]
pub struct Recording {
    /// Where it is, with the folder of the requirement file before a relative path.
    pub path: Sourced<PathBuf>,
    /// The channel, by its hierarchical or column name.
    pub channel: Option<Sourced<String>>,
    /// The two thresholds of an analogue recording.
    pub thresholds: Option<Sourced<Thresholds>>,
    /// The level of the line while the contact is closed, where this recording differs from the contact.
    pub closed: Option<Sourced<Level>>,
    /// Where it was taken, where a network stands between the contact and the pin.
    pub taken_at: Option<Sourced<TakenAt>>,
    /// How the file is read, where it does not say it itself.
    pub reading: Reading,
    /// The SHA-256 of the file (FIPS 180-4), in hexadecimal, that nobody may change unnoticed.
    pub sha256: Option<Sourced<String>>,
}

/// The two thresholds that turn volts into a level.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Thresholds {
    /// At or below it the line reads low.
    pub low: Voltage,
    /// At or above it the line reads high.
    pub high: Voltage,
}

/// The times of a requirement, each as a `V`.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Figures<V> {
    /// Longest allowed time from a change to its report.
    pub latency: PerChange<V>,
    /// Shortest time in each position that must still be reported.
    pub shortest: PerPosition<V>,
    /// Longest bounce after each change.
    pub bounce: PerChange<V>,
    /// Widest disturbance that begins in each position.
    pub disturbance: PerPosition<V>,
    /// Shortest time between two disturbances.
    pub quiet: V,
    /// Shortest settled time between the end of a bounce and a disturbance.
    pub calm: V,
}

/// The sample clock.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Clock {
    /// The tick periods that may be chosen from.
    pub ticks: Option<Sourced<TickChoice>>,
    /// How far the period may be off, either way.
    pub tolerance: Option<Sourced<Share>>,
    /// Peak-to-peak jitter of a sample instant and the sampling aperture.
    pub jitter: Option<Sourced<Time>>,
    /// Ticks that may be lost in a row.
    pub lost: Option<Sourced<Ticks>>,
}

/// The tick periods that may be chosen from.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum TickChoice {
    /// These.
    OneOf(Vec<TickPeriod>),
    /// Any from the first to the second, both included.
    Range(TickPeriod, TickPeriod),
}

/// What the firmware can afford.
#[derive(Clone, PartialEq, Debug, Default)]
pub struct Budget {
    /// RAM for each input.
    pub ram: Option<Sourced<Bytes>>,
    /// The fastest tick that the firmware can serve.
    pub fastest_tick: Option<Sourced<TickPeriod>>,
    /// Instructions of a tick, for each input.
    pub instructions: Option<Sourced<Instructions>>,
    /// The core on which they are counted.
    pub core: Option<Sourced<Core>>,
}

impl Requirement {
    /// The text it was read from, if it came from a file.
    #[must_use]
    pub fn source(&self) -> Option<&Arc<SourceText>> {
        self.source.as_ref()
    }

    /// A path as the requirement file writes it: without the folder of that file, so that it does not depend on
    /// where the command runs.
    #[must_use]
    pub fn as_written<'a>(&self, path: &'a Path) -> &'a Path {
        let folder = self.source().map(folder_of).unwrap_or_default();
        if folder.as_os_str().is_empty() { path } else { path.strip_prefix(folder).unwrap_or(path) }
    }
}

/// The folder that relative paths of a requirement file begin at.
fn folder_of(source: &Arc<SourceText>) -> PathBuf {
    source.path().parent().map(Path::to_path_buf).unwrap_or_default()
}
