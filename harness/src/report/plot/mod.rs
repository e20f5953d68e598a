//! What plots are drawn with: scales, ticks and axes, as SVG with classes.
//!
//! Nothing here chooses a colour or a letter: shapes carry classes, and the style sheet of the page does the rest, in
//! light, in dark and on paper. Lengths are in the units of the view box, of which about 480 make the width of a
//! column, so that letters stay readable on a phone. All numbers are written by [`px`], so that the same input
//! gives the same bytes.

mod axis;
mod length;
mod number;
mod place;
mod scale;
mod ticks;

pub use axis::{Axis, Plane, Side};
pub use length::TimeUnit;
pub use number::{Px, px};
pub use place::{kept_apart, rows_apart, text_width};
pub use scale::Scale;
pub use ticks::{linear_ticks, log_ticks};
