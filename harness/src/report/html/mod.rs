//! The report: one HTML file that needs nothing else.
//!
//! [`study`], [`proof`], [`characterised`], [`network`], [`limit`] and [`compared`] each put together a [`Page`] of [`Section`]s; a section appears when the
//! data for it exist. The page carries its style sheet and its one script; without the script every diagram is still
//! there, only not to be zoomed. The same results give the same bytes.
//!
//! A new section is a function that gives an `Option<Section>`, and a line in one of them.

mod answer;
mod bounce;
mod caution;
mod characterised;
mod claims;
mod compared;
mod conformance;
mod cost;
mod distribution;
mod envelope;
mod figure;
mod latency;
mod limit;
mod logic;
mod network;
mod origin;
mod page;
mod plane;
mod proof;
mod requirement;
mod simpler;
mod study;
mod table;
mod tick;
mod tick_curves;
mod timing;
mod witness;

#[cfg(test)]
mod contrast;
#[cfg(test)]
mod tests;

pub use characterised::{Characterised, characterised};
pub use compared::{Compared, compared};
pub use figure::Figure;
pub use limit::{Limited, Reaching, limit};
pub use network::{Networked, network};
pub use origin::{Origin, SourceFile};
pub use page::{Page, Section};
pub use proof::{Proved, proof};
pub use study::study;
pub use table::{Cell, table};
pub use witness::witness;
