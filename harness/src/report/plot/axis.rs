//! The plane of a plot and its two axes.

use maud::{Markup, html};

use super::{Scale, TimeUnit, linear_ticks, log_ticks, px, text_width};

/// The size of letters along an axis.
const LETTERS: f64 = 13.0;

/// Where an axis is.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Side {
    /// Below the plot, with values from left to right.
    Bottom,
    /// Left of the plot, with values from bottom to top.
    Left,
}

/// One axis: a scale, its ticks with their texts, and what it shows.
#[derive(Clone, PartialEq, Debug)]
pub struct Axis {
    /// From values to places.
    pub scale: Scale,
    /// Values with their texts.
    pub ticks: Vec<(f64, String)>,
    /// What is shown, with its unit.
    pub title: String,
}

impl Axis {
    /// An axis of times in nanoseconds; the unit is added to the title.
    #[must_use]
    pub fn of_time(what: &str, scale: Scale, most: usize) -> Self {
        let (from, until) = scale.values();
        let unit = TimeUnit::of(from.abs().max(until.abs()));
        let (values, step) = linear_ticks(from, until, most);
        let ticks = values.into_iter().map(|value| (value, unit.tick(value, step))).collect();
        Self { scale, ticks, title: format!("{what}, {}", unit.name()) }
    }

    /// A logarithmic axis of times in nanoseconds; the unit is added to the title.
    #[must_use]
    pub fn of_log_time(what: &str, scale: Scale, most: usize) -> Self {
        let (from, until) = scale.values();
        let unit = TimeUnit::of(until);
        let ticks =
            log_ticks(from, until, most).into_iter().map(|value| (value, unit.value(value))).collect();
        Self { scale, ticks, title: format!("{what}, {}", unit.name()) }
    }

    /// An axis of numbers.
    #[must_use]
    pub fn of_values(what: &str, scale: Scale, most: usize) -> Self {
        let (from, until) = scale.values();
        let (values, step) = linear_ticks(from, until, most);
        // As many decimals as tell one tick from the next.
        let decimals = (-(step * 1.000_001).log10().floor()).clamp(0.0, 9.0) as usize;
        let ticks = values.into_iter().map(|value| (value, format!("{value:.decimals$}"))).collect();
        Self { scale, ticks, title: what.to_owned() }
    }

    /// An axis of whole numbers.
    #[must_use]
    pub fn of_counts(what: &str, scale: Scale, most: usize) -> Self {
        let (from, until) = scale.values();
        let (values, _) = linear_ticks(from, until, most);
        let whole = values.into_iter().filter(|value| value.fract() == 0.0);
        Self {
            scale,
            ticks: whole.map(|value| (value, format!("{value:.0}"))).collect(),
            title: what.to_owned(),
        }
    }

    /// An axis of shares of a whole, in percent.
    #[must_use]
    pub fn of_shares(what: &str, scale: Scale) -> Self {
        let ticks = [0.0, 0.25, 0.5, 0.75, 1.0].map(|share| (share, format!("{:.0}", share * 100.0)));
        Self { scale, ticks: ticks.to_vec(), title: format!("{what}, %") }
    }

    /// Lines across the plot, ticks and texts.
    fn drawn(&self, side: Side, plane: &Plane) -> Markup {
        let Plane { left, right, top, bottom, .. } = *plane;
        let longest = self.ticks.iter().map(|(_, text)| text_width(text, LETTERS)).fold(0.0, f64::max);
        html! {
            @for (value, text) in &self.ticks {
                @let at = self.scale.at(*value);
                @match side {
                    Side::Bottom => {
                        path class="rule" d={ "M" (px(at)) " " (px(top)) "V" (px(bottom + 4.0)) } {}
                        text class="tick" x=(px(at)) y=(px(bottom + 18.0)) text-anchor="middle" { (text) }
                    }
                    Side::Left => {
                        path class="rule" d={ "M" (px(left - 4.0)) " " (px(at)) "H" (px(right)) } {}
                        text class="tick" x=(px(left - 8.0)) y=(px(at + 4.5)) text-anchor="end" { (text) }
                    }
                }
            }
            @match side {
                Side::Bottom => {
                    path class="axis" d={ "M" (px(left)) " " (px(bottom)) "H" (px(right)) } {}
                    text class="axis-title" x=(px((left + right) / 2.0)) y=(px(bottom + 37.0)) text-anchor="middle" {
                        (self.title)
                    }
                }
                // Above the axis and level: a title on its side is hard to read.
                Side::Left => {
                    text class="axis-title" x=(px(left - 8.0 - longest)) y=(px(top - 12.0)) { (self.title) }
                }
            }
        }
    }
}

/// The part of a picture that values are drawn in.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Plane {
    /// Width of the whole picture.
    pub width: f64,
    /// Height of the whole picture.
    pub height: f64,
    /// The left edge of the plane.
    pub left: f64,
    /// The right edge.
    pub right: f64,
    /// The upper edge.
    pub top: f64,
    /// The lower edge.
    pub bottom: f64,
}

impl Plane {
    /// A plane with room around it for the axes.
    #[must_use]
    pub const fn new(width: f64, height: f64, left: f64) -> Self {
        Self { width, height, left, right: width - 12.0, top: 30.0, bottom: height - 44.0 }
    }

    /// Left to right.
    #[must_use]
    pub const fn across(&self) -> (f64, f64) {
        (self.left, self.right)
    }

    /// Bottom to top.
    #[must_use]
    pub const fn up(&self) -> (f64, f64) {
        (self.bottom, self.top)
    }

    /// Both axes, to be drawn before the values.
    #[must_use]
    pub fn axes(&self, x: &Axis, y: &Axis) -> Markup {
        html! { (y.drawn(Side::Left, self)) (x.drawn(Side::Bottom, self)) }
    }

    /// The axis below alone.
    #[must_use]
    pub fn bottom_axis(&self, x: &Axis) -> Markup {
        x.drawn(Side::Bottom, self)
    }

    /// The view box of the whole picture.
    #[must_use]
    pub fn view_box(&self) -> String {
        format!("0 0 {} {}", px(self.width), px(self.height))
    }
}
