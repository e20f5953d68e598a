//! The axis of time below a timing diagram.

use maud::{Markup, html};

use crate::report::plot::{Scale, TimeUnit, linear_ticks, px};

/// Ticks and their texts; times count from `zero`.
pub(super) fn axis(x: &Scale, zero: f64, top: f64, bottom: f64) -> Markup {
    let (from, until) = x.values();
    let (left, right) = x.places();
    let unit = TimeUnit::of((until - from).max(1.0));
    let most = ((right - left) / 90.0).max(2.0) as usize;
    let (values, step) = linear_ticks(from - zero, until - zero, most);
    html! {
        @for value in values {
            @let at = x.at(value + zero);
            path class="rule" d={ "M" (px(at)) " " (px(top)) "V" (px(bottom + 5.0)) } {}
            // A text that would reach over an edge of the picture is left out.
            @if at > 18.0 && at < right - 18.0 {
                text class="tick" x=(px(at)) y=(px(bottom + 19.0)) text-anchor="middle" { (unit.tick(value, step)) }
            }
        }
        path class="axis" d={ "M" (px(left)) " " (px(bottom)) "H" (px(right)) } {}
        text class="axis-title" x=(px((left + right) / 2.0)) y=(px(bottom + 37.0)) text-anchor="middle" {
            "time after the first edge, " (unit.name())
        }
    }
}
