//! Timing diagrams of a recording: contact, samples, states of the logic, output, and the latencies between.
//!
//! Every diagram is drawn here, once and for good. Its numbers go into the page as well, as JSON, so that the script
//! can draw any other stretch of the recording in its place.

mod axis;
mod draw;
mod moments;
mod run;
mod tables;
mod waves;

use debounce_core::Change;
use maud::{Markup, PreEscaped, html};

use super::Section;
use crate::study::Observed;

pub(super) use moments::{Moment, outside, remarkable, slowest};
pub(super) use run::LogicRun;
use waves::Waves;

/// Room for the numbers of all recordings together: about half a megabyte of text.
const MOST_NUMBERS: usize = 60_000;

/// One recording with the moments to show of it, and the logic at work on it.
pub(super) struct Shown<'a> {
    pub(super) one: &'a Observed,
    pub(super) runs: Vec<LogicRun>,
    pub(super) moments: Vec<Moment>,
}

/// The diagrams of all recordings; `None` where there is no moment to show.
pub(super) fn section(shown: &[Shown<'_>], heading: &str) -> Option<Section> {
    if shown.iter().all(|shown| shown.moments.is_empty()) {
        return None;
    }
    let room = MOST_NUMBERS / shown.len();
    let body = html! {
        p {
            "Up is closed. A shaded stretch of the contact is bounce, a hatched one a disturbance. "
            @if shown.iter().any(|shown| !shown.runs.is_empty()) {
                "Every sample is a stroke with a dot, above where it reads closed; the boxes are the states of the \
                 logic, by the names of its next-state table. The measure on top is the latency: from the first touch \
                 or parting of the contact to the sample that reports it. "
            }
            "Times count from the first edge of the operation."
        }
        p class="with-script" {
            "Each diagram moves and zooms over the whole recording: click it, then turn the wheel, or drag; on a \
             touch screen, pinch or push sideways; with the keyboard, arrow keys move, "
            kbd { "+" } " and " kbd { "-" } " zoom, " kbd { "N" } " and " kbd { "P" }
            " go to the next and the previous operation, " kbd { "A" } " shows all, " kbd { "0" } " goes back."
        }
        @for (index, shown) in shown.iter().enumerate() {
            @let waves = Waves::of(shown, room);
            @if !shown.moments.is_empty() {
                div class="moments" {
                    @for (number, moment) in shown.moments.iter().enumerate() {
                        (figure(shown, &waves, moment, index, number))
                    }
                }
                script type="application/json" id={ "waves-" (index) } { (PreEscaped(waves.json())) }
                @if let Some(note) = waves.note() { p class="note" { (note) } }
                details {
                    summary { "All operations and disturbances of " (shown.one.name) }
                    (tables::operations(shown))
                    (tables::disturbances(shown))
                }
            }
        }
    };
    Some(Section { id: "recorded", heading: heading.to_owned(), body })
}

fn figure(shown: &Shown<'_>, waves: &Waves<'_>, moment: &Moment, index: usize, number: usize) -> Markup {
    let id = format!("timing-{index}-{number}");
    let (title, description) = (format!("{id}-title"), format!("{id}-description"));
    let wide = number == 0;
    let width = if wide { 940.0 } else { 460.0 };
    let drawing = draw::drawing(shown, waves, moment, width);
    html! {
        figure class={ "figure timing" @if wide { " wide" } } id=(id) {
            h3 id=(title) { (moment.title) }
            div class="picture" data-waves={ "waves-" (index) } data-view=(moment.data()) data-label=(moment.title) {
                svg xmlns="http://www.w3.org/2000/svg" class="plot" role="img"
                    viewBox={ "0 0 " (width) " " (draw::height(shown)) }
                    aria-labelledby={ (title) " " (description) } {
                    title { (moment.title) }
                    desc id=(description) { (moment.description) }
                    g class="drawn" { (drawing) }
                }
            }
            figcaption { (moment.description) }
        }
    }
}

/// "make" or "break", as the first word of a title.
fn title_word(change: Change) -> &'static str {
    match change {
        Change::Make => "make",
        Change::Break => "break",
    }
}
