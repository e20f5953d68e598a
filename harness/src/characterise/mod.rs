//! What a recording says about a contact: operations, disturbances, and what may be claimed from them.
//!
//! [`segment`] turns a trace into makes, breaks and disturbances; [`Figures`] sums them up and turns them into
//! a [`PhysicalEnvelope`](crate::envelope::PhysicalEnvelope) with stated margins; [`tolerance`] says what n
//! operations allow to claim.

mod ambiguity;
mod around;
mod claim;
mod figures;
mod gap;
mod histogram;
pub mod independence;
mod lengths;
mod operations;
mod quantile;
mod resting;
mod segment;
pub mod tail;
pub mod tolerance;

pub use around::{Aligned, AlignedRun, aligned};
pub use claim::{Claim, Limit};
pub use figures::{Allowance, Calm, ChangeFigures, DisturbanceFigures, DwellFigures, Figures, MissingFigure};
pub use gap::{Gap, GapOrigin};
pub use histogram::{Histogram, Step, empirical_distribution};
pub use independence::Independence;
pub use operations::{
    Ambiguity, Burst, Disturbance, Doubt, Extent, Fragment, Operation, RecordingEnd, Segmentation,
};
pub use quantile::{Spread, quantile_type_7};
pub use resting::{Resting, resting};
pub use segment::{SegmentError, SegmentOptions, segment};
