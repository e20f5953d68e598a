//! The state diagram of a machine as SVG.
//!
//! Shapes carry classes and no colours of their own: lines and letters take the colour of the text around them
//! (`currentColor`), and a style sheet may say more. The classes are `state` with `open` or `closed` and perhaps
//! `rest` and `reset`, `name`, `step` with `open`, `closed` or `either` and perhaps `make` or `break`, and `label`.
//! The same machine gives the same bytes.

use std::fmt::Write as _;

use layout::core::base::Orientation;
use layout::core::color::Color;
use layout::core::format::{ClipHandle, RenderBackend};
use layout::core::geometry::Point;
use layout::core::style::StyleAttr;
use layout::std_shapes::shapes::{Arrow, Element, ShapeKind};
use layout::topo::layout::VisualGraph;

use debounce_core::{Change, Position};

use crate::machine::{MachineTable, arrows};

/// The most states that [`state_diagram`] draws.
pub const LARGEST_STATE_DIAGRAM: usize = 40;

const LETTER_SIZE: usize = 14;

/// The state diagram as an `svg` element, or `None` for a machine of more than [`LARGEST_STATE_DIAGRAM`] states.
///
/// `id` must be unique in the document; the arrow heads are named by it. Letters, digits and dashes only.
#[must_use]
pub fn state_diagram(machine: &MachineTable, id: &str) -> Option<String> {
    drawn(machine, id, Orientation::LeftToRight)
}

/// The same from top to bottom, which is narrower.
#[must_use]
pub fn state_diagram_downward(machine: &MachineTable, id: &str) -> Option<String> {
    drawn(machine, id, Orientation::TopToBottom)
}

fn drawn(machine: &MachineTable, id: &str, orientation: Orientation) -> Option<String> {
    if machine.len() > LARGEST_STATE_DIAGRAM {
        return None;
    }
    let mut graph = VisualGraph::new(orientation);
    let look = StyleAttr::new(Color::fast("black"), 1, None, 0, LETTER_SIZE);
    let handles: Vec<_> = (0..machine.len())
        .map(|state| {
            let name = machine.name(state);
            let width = (name.chars().count().max("closed".len()) as f64 + 4.0) * 9.0;
            let shape = ShapeKind::new_circle(&format!("{name}\n{}", position(machine.output_of(state))));
            let (size, class) = (Point::new(width, 60.0), state_class(machine, state));
            graph.add_node(Element::create_with_properties(shape, look.clone(), orientation, size, class))
        })
        .collect();
    for arrow in arrows(machine) {
        let sample = arrow.sample.map_or("either", position);
        let edge = match arrow.edge {
            None => "",
            Some(Change::Make) => " make",
            Some(Change::Break) => " break",
        };
        let drawn = Arrow::simple_with_properties(&arrow.label(), format!("step {sample}{edge}"));
        graph.add_edge(Arrow { look: look.clone(), ..drawn }, handles[arrow.from], handles[arrow.to]);
    }
    let mut canvas = Canvas { body: String::new(), extent: Extent::default(), inside: Inside::Diagram, id };
    graph.do_it(false, false, false, &mut canvas);
    Some(canvas.finished(machine))
}

fn position(position: Position) -> &'static str {
    match position {
        Position::Open => "open",
        Position::Closed => "closed",
    }
}

fn state_class(machine: &MachineTable, state: usize) -> String {
    let mut class = format!("state {}", position(machine.output_of(state)));
    if Position::BOTH.iter().any(|&position| machine.resting(position) == state) {
        class.push_str(" rest");
    }
    if machine.reset() == state {
        class.push_str(" reset");
    }
    class
}

/// Where the next text belongs: a shape is drawn right before its name, a label stands alone.
enum Inside {
    State,
    Diagram,
}

/// The stretch of the plane that was drawn on.
struct Extent {
    least: Point,
    most: Point,
}

impl Default for Extent {
    fn default() -> Self {
        Self { least: Point::splat(f64::MAX), most: Point::splat(f64::MIN) }
    }
}

impl Extent {
    fn reach(&mut self, at: Point, half_width: f64, half_height: f64) {
        self.least.x = self.least.x.min(at.x - half_width);
        self.least.y = self.least.y.min(at.y - half_height);
        self.most.x = self.most.x.max(at.x + half_width);
        self.most.y = self.most.y.max(at.y + half_height);
    }
}

struct Canvas<'a> {
    body: String,
    extent: Extent,
    inside: Inside,
    id: &'a str,
}

impl Canvas<'_> {
    // Writing to a string does not fail, here and below.
    fn add(&mut self, text: std::fmt::Arguments<'_>) {
        let _ = self.body.write_fmt(text);
    }

    fn finished(self, machine: &MachineTable) -> String {
        const MARGIN: f64 = 6.0;
        let Extent { least, most } = self.extent;
        let (x, y) = (least.x - MARGIN, least.y - MARGIN);
        let (width, height) = (most.x - least.x + 2.0 * MARGIN, most.y - least.y + 2.0 * MARGIN);
        let counts = machine.counts();
        let id = self.id;
        format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" class=\"state-diagram\" role=\"img\" \
             width=\"{width:.0}\" height=\"{height:.0}\" viewBox=\"{x:.1} {y:.1} {width:.1} {height:.1}\">\n\
             <title>state diagram: {} states, {} arrows</title>\n\
             <defs><marker id=\"{id}-head\" markerUnits=\"userSpaceOnUse\" markerWidth=\"9\" markerHeight=\"8\" refX=\"9\" refY=\"4\" \
             orient=\"auto-start-reverse\"><path class=\"head\" d=\"M 0 0 L 9 4 L 0 8 z\" \
             fill=\"currentColor\"/></marker></defs>\n<g font-size=\"{LETTER_SIZE}\">\n{}</g>\n</svg>\n",
            counts.states, counts.arrows, self.body
        )
    }
}

impl RenderBackend for Canvas<'_> {
    fn draw_rect(
        &mut self,
        at: Point,
        size: Point,
        _: &StyleAttr,
        class: Option<String>,
        _: Option<ClipHandle>,
    ) {
        let (Point { x, y }, class) = (at, class.unwrap_or_default());
        self.extent.reach(at.add(size.scale(0.5)), size.x / 2.0, size.y / 2.0);
        self.add(format_args!(
            "<rect class=\"{class}\" x=\"{x:.1}\" y=\"{y:.1}\" width=\"{:.1}\" height=\"{:.1}\" fill=\"none\" \
             stroke=\"currentColor\"/>\n",
            size.x, size.y
        ));
        self.inside = Inside::State;
    }

    fn draw_line(&mut self, from: Point, to: Point, _: &StyleAttr, class: Option<String>) {
        let class = class.unwrap_or_default();
        self.extent.reach(from, 0.0, 0.0);
        self.extent.reach(to, 0.0, 0.0);
        self.add(format_args!(
            "<line class=\"{class}\" x1=\"{:.1}\" y1=\"{:.1}\" x2=\"{:.1}\" y2=\"{:.1}\" \
             stroke=\"currentColor\"/>\n",
            from.x, from.y, to.x, to.y
        ));
    }

    fn draw_circle(&mut self, at: Point, size: Point, _: &StyleAttr, class: Option<String>) {
        let class = class.unwrap_or_default();
        let (rx, ry) = (size.x / 2.0, size.y / 2.0);
        self.extent.reach(at, rx, ry);
        self.add(format_args!(
            "<ellipse class=\"{class}\" cx=\"{:.1}\" cy=\"{:.1}\" rx=\"{rx:.1}\" ry=\"{ry:.1}\" fill=\"none\" \
             stroke=\"currentColor\"/>\n",
            at.x, at.y
        ));
        // The double outline of a state in which the machine rests.
        if class.contains("rest ") || class.ends_with("rest") {
            self.add(format_args!(
                "<ellipse class=\"inner\" cx=\"{:.1}\" cy=\"{:.1}\" rx=\"{:.1}\" ry=\"{:.1}\" fill=\"none\" \
                 stroke=\"currentColor\"/>\n",
                at.x,
                at.y,
                rx - 4.0,
                ry - 4.0
            ));
        }
        self.inside = Inside::State;
    }

    fn draw_text(&mut self, at: Point, text: &str, _: &StyleAttr) {
        let class = match core::mem::replace(&mut self.inside, Inside::Diagram) {
            Inside::State => "name",
            Inside::Diagram => "label",
        };
        let lines: Vec<&str> = text.lines().collect();
        let line_height = LETTER_SIZE as f64 * 1.2;
        let longest = lines.iter().map(|line| line.chars().count()).max().unwrap_or(0);
        let half_height = lines.len() as f64 * line_height / 2.0;
        // A label is placed on its line; lifted a little it stands above it.
        let at = match class {
            "label" => Point::new(at.x, at.y - line_height * 0.6),
            _ => at,
        };
        self.extent.reach(at, longest as f64 * LETTER_SIZE as f64 * 0.3, half_height);
        for (index, line) in lines.iter().enumerate() {
            let y = at.y - half_height + line_height * (index as f64 + 0.5);
            self.add(format_args!(
                "<text class=\"{class}\" x=\"{:.1}\" y=\"{y:.1}\" text-anchor=\"middle\" \
                 dominant-baseline=\"central\" fill=\"currentColor\">{}</text>\n",
                at.x,
                escaped(line)
            ));
        }
    }

    fn draw_arrow(
        &mut self,
        path: &[(Point, Point)],
        _: bool,
        (head_at_start, head_at_end): (bool, bool),
        look: &StyleAttr,
        class: Option<String>,
        text: &str,
    ) {
        // Every pair is a point and the control point beside it: the first leaves, the others arrive.
        let Some((&(start, leaving), rest)) = path.split_first() else { return };
        self.extent.reach(start, 0.0, 0.0);
        let mut d = format!("M {:.1} {:.1}", start.x, start.y);
        for (index, &(arriving, at)) in rest.iter().enumerate() {
            self.extent.reach(arriving, 0.0, 0.0);
            self.extent.reach(at, 0.0, 0.0);
            let _ = match index {
                0 => write!(
                    d,
                    " C {:.1} {:.1} {:.1} {:.1} {:.1} {:.1}",
                    leaving.x, leaving.y, arriving.x, arriving.y, at.x, at.y
                ),
                _ => write!(d, " S {:.1} {:.1} {:.1} {:.1}", arriving.x, arriving.y, at.x, at.y),
            };
        }
        let (class, id) = (class.unwrap_or_default(), self.id);
        let marker = |end: &str| format!(" marker-{end}=\"url(#{id}-head)\"");
        let heads = [(head_at_start, "start"), (head_at_end, "end")]
            .into_iter()
            .filter(|(is_there, _)| *is_there)
            .map(|(_, end)| marker(end))
            .collect::<String>();
        self.add(format_args!(
            "<path class=\"{class}\" d=\"{d}\" fill=\"none\" stroke=\"currentColor\"{heads}/>\n"
        ));
        if !text.is_empty() {
            let middle = rest.get(rest.len() / 2).map_or(start, |&(arriving, _)| arriving);
            self.inside = Inside::Diagram;
            self.draw_text(middle, text, look);
        }
    }

    fn create_clip(&mut self, _: Point, _: Point, _: usize) -> ClipHandle {
        // Only shapes with several fields are clipped, and none is drawn here.
        0
    }
}

fn escaped(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;").replace('"', "&quot;")
}
