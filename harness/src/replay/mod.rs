//! Any law over a trace: its edges, matched with what the contact did.
//!
//! * [`Replay`] and [`follow`] run a law over one train of samples, [`judge`] says what its edges are worth.
//! * [`PreparedTrace`] does so at every phase at once, exactly; [`Measurement`] sums that up.
//! * [`PreparedClock`] adds what a real clock does: both ends of its tolerance exactly, and seeded draws of jitter
//!   and lost ticks.
//!
//! # The matching rule
//! In the order of time; changes of the contact alternate, and so do the edges of a law.
//!
//! * A change waits from the first sample at or after it.
//! * An edge reports the waiting change of its own direction; an older one still waiting is then missed.
//!   With none waiting it is false.
//! * When the next change of the same direction comes, the one that waited is missed.
//! * Once the law is settled with sample and output where the contact is, all that waits is missed.
//!   So an operation that left no edge counts as a missed make and a missed break.
//! * At the end of the trace, what waits is missed if the law is settled where the line is, else undecided.

mod clock;
mod failures;
mod feed;
mod latency;
#[cfg(test)]
mod laws;
mod matching;
mod measurement;
mod outcome;
mod pass;
mod prepared;
#[cfg(test)]
mod tests;

pub use clock::{ClockError, ClockMeasurement, Drawn, DrawnWorst, Draws, PreparedClock};
pub use failures::Failures;
pub use latency::{Delay, Latencies, LatencyShare, SampleLatency, Slowest};
pub use measurement::{ChangeFigures, FalseEdges, FalsePlace, Measurement, UnreportedChange};
pub use outcome::{FalseEdge, Outcome, PhaseSpan, Reported, Unreported};
pub use pass::{Pass, PassReport, Replay, ReportedEdge, follow, judge};
pub use prepared::{PrepareError, PreparedTrace};
