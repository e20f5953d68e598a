//! The network between contact and pin: its waveforms with the band of its tolerances, and what it does.

use debounce_core::{Change, PerChange, Position};
use maud::{Markup, html};

use super::{Cell, Figure, Origin, Page, Section, origin, table};
use crate::network::{Analysis, Delay, Review, Waveform};
use crate::report::plot::{Axis, Plane, Scale, kept_apart, px};
use crate::report::si::{at_least, at_most, between, si};
use crate::report::words;
use crate::requirement::ResolvedNetwork;

const PLANE: Plane =
    Plane { width: 480.0, height: 320.0, left: 46.0, right: 350.0, top: 30.0, bottom: 270.0 };

/// A network with everything a report says of it.
#[derive(Clone, Copy, Debug)]
pub struct Networked<'a> {
    /// Its parts.
    pub resolved: &'a ResolvedNetwork,
    /// What it does.
    pub analysis: &'a Analysis,
    /// What is to be said about it.
    pub review: &'a Review,
    /// The voltage of the pin after each change.
    pub waveforms: &'a PerChange<Waveform>,
    /// The cautions for the role of the contact and its wiring.
    pub cautions: &'a [&'static str],
}

/// The report of a network.
#[must_use]
pub fn network(found: &Networked<'_>, origin: &Origin) -> String {
    let sections = vec![
        section(found.waveforms),
        Section { id: "figures", heading: "All figures".to_owned(), body: figures(found.analysis) },
        Section { id: "parts", heading: "Parts".to_owned(), body: parts(found.resolved) },
        origin::section(origin, &[], &[]),
    ];
    let page = Page {
        title: "Network between contact and pin".to_owned(),
        kind: "What it does, over all tolerances".to_owned(),
        invented: false,
        cautions: found.cautions.to_vec(),
        answer: answer(found),
        sections,
    };
    page.html()
}

/// Both edges as the pin shows them.
pub(super) fn section(waveforms: &PerChange<Waveform>) -> Section {
    let body = html! {
        p {
            "The voltage of the pin after a change of the contact. The band lies between the quickest and the slowest \
             network that the tolerances allow, the line is the typical one. Between the outer two thresholds the pin \
             may read either way; beyond them it surely reads the new position."
        }
        div class="pair" {
            @for change in [Change::Make, Change::Break] { (figure(waveforms.of(change), change).markup()) }
        }
    };
    Section { id: "network", heading: "Between contact and pin".to_owned(), body }
}

fn figure(waveform: &Waveform, change: Change) -> Figure {
    let points = &waveform.points;
    let end = points.last().map_or(1.0, |point| point.seconds * 1e9);
    let levels = waveform.thresholds;
    let volts = points.iter().flat_map(|point| [point.lowest, point.highest]);
    let highest = volts.chain([levels.first, levels.surely]).fold(0.0, f64::max);
    let x = Scale::linear((0.0, end), PLANE.across());
    let y = Scale::linear((0.0, highest * 1.05), PLANE.up());
    let place = |seconds: f64, volts: f64| format!("{} {}", px(x.at(seconds * 1e9)), px(y.at(volts)));
    let line = |volts: fn(&crate::network::Point) -> f64| {
        points.iter().map(|point| place(point.seconds, volts(point))).collect::<Vec<_>>()
    };
    let (upper, mut lower) = (line(|point| point.highest), line(|point| point.lowest));
    lower.reverse();
    let names = [("may read", levels.first), ("typically", levels.typical), ("surely", levels.surely)];
    let wanted: Vec<f64> = names.iter().map(|(_, volts)| y.at(*volts)).collect();
    let places = kept_apart(&wanted, 17.0, (PLANE.top, PLANE.bottom));
    let word = words::change(change);
    Figure {
        id: format!("network-{word}"),
        title: format!("The pin after a {word}"),
        description: names
            .iter()
            .map(|(name, volts)| format!("Threshold, {name}: {}. ", si(*volts, "V")))
            .collect::<String>()
            + &format!("Drawn for {} after the change.", words::about(end.round() as u64)),
        view_box: PLANE.view_box(),
        drawing: html! {
            (PLANE.axes(&Axis::of_time("time after the change", x, 5), &Axis::of_values("pin, V", y, 6)))
            path class="band" d={ "M" (upper.join("L")) "L" (lower.join("L")) "z" } {}
            @for ((name, volts), at) in names.iter().zip(&places) {
                path class={ "limit" @if *name != "typically" { " asked" } }
                    d={ "M" (px(PLANE.left)) " " (px(y.at(*volts))) "H" (px(PLANE.right)) } {}
                text class="line-name" x=(px(PLANE.right + 6.0)) y=(px(at + 4.5)) { (name) " " (si(*volts, "V")) }
            }
            path class={ "curve " (word) } d={ "M" (line(|point| point.typical).join("L")) } {}
        },
        caption: html! {},
        data: Some(numbers(waveform, word)),
    }
}

/// Rows of the table of one edge.
const ROWS: usize = 20;

/// Evenly spaced points, the first and the last among them.
fn numbers(waveform: &Waveform, word: &str) -> Markup {
    let every = waveform.points.len().saturating_sub(1).div_ceil(ROWS).max(1);
    let row = |point: &crate::network::Point| {
        let volts = [point.lowest, point.typical, point.highest].map(|volts| Cell::number(si(volts, "V")));
        core::iter::once(Cell::number(si(point.seconds, "s"))).chain(volts).collect::<Vec<_>>()
    };
    let rows: Vec<Vec<Cell>> = waveform.points.iter().step_by(every).map(row).collect();
    table(&format!("The pin after a {word}"), &["after", "lowest", "typical", "highest"], &rows)
}

fn answer(found: &Networked<'_>) -> Markup {
    let delay = &found.analysis.delay;
    html! {
        @if found.review.troubles.is_empty() {
            p class="choice holds" { strong { "Nothing speaks against this network" } }
        } @else {
            p class="choice fails" { strong { (words::count(found.review.troubles.len(), "trouble")) " with this network" } }
            ul {
                @for trouble in &found.review.troubles {
                    li { (trouble.what) ": " (trouble.help) "." }
                }
            }
        }
        div class="figures" {
            @for change in [Change::Make, Change::Break] {
                @let Delay { min, max, .. } = delay.of(change);
                p class={ "fact " (words::change(change)) } {
                    b { (at_most(*max, "s")) } " "
                    span { "at most until a " (words::change(change)) " is read, at least " (at_least(*min, "s")) }
                }
            }
        }
        @if !found.review.notes.is_empty() { ul { @for note in &found.review.notes { li { (note) "." } } } }
    }
}

fn figures(analysis: &Analysis) -> Markup {
    let row = |name: String, value: String| vec![Cell::text(name), Cell::number(value)];
    let mut rows = Vec::new();
    for change in [Change::Make, Change::Break] {
        let Delay { min, typ, max } = analysis.delay.of(change);
        let word = words::change(change);
        rows.push(row(format!("delay of a {word}"), between(*min, *max, "s")));
        rows.push(row(format!("delay of a {word}, typical"), si(*typ, "s")));
    }
    for position in Position::BOTH {
        let word = words::position(position);
        rows.push(row(
            format!("lone pulse rejected while {word}"),
            at_least(*analysis.lone_pulse.of(position), "s"),
        ));
    }
    let Analysis { inrush, steady, energy, held_power, .. } = analysis;
    rows.push(row("contact current just after a make".to_owned(), between(inrush.min, inrush.max, "A")));
    rows.push(row("it lasts, at most about".to_owned(), at_most(analysis.inrush_lasts, "s")));
    rows.push(row("contact current, steady".to_owned(), between(steady.min, steady.max, "A")));
    rows.push(row("energy at a make, at most".to_owned(), at_most(*energy, "J")));
    rows.push(row("power while held closed".to_owned(), between(held_power.min, held_power.max, "W")));
    table("What the network does", &["figure", "value"], &rows)
}

fn parts(resolved: &ResolvedNetwork) -> Markup {
    let rows: Vec<Vec<Cell>> = resolved
        .rows
        .iter()
        .map(|row| vec![Cell::text(row.key), Cell::text(&row.text), Cell::text(row.origin.to_string())])
        .collect();
    table("Parts and where they come from", &["part", "is", "because"], &rows)
}
