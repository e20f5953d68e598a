//! The timing diagrams zoom and move by mouse, by keyboard and by touch, from nanoseconds to seconds.

use std::path::Path;

use serde_json::{Value, json};

use super::browser::Browser;
use super::layout::{self, WITH_FINGER, WITH_MOUSE};
use crate::session::{Session, say};

/// What a diagram shows: from when and for how long, in nanoseconds, and its axis.
#[derive(Clone, PartialEq, Debug)]
struct View {
    from: f64,
    span: f64,
    axis: String,
}

/// The middle of the first diagram, and half of its width.
#[derive(Clone, Copy)]
struct Place {
    x: f64,
    y: f64,
}

pub(super) fn check(session: &mut Session, browser: &mut Browser, file: &Path) -> Result<(), String> {
    layout::open(browser, file, &WITH_MOUSE)?;
    by_mouse(session, browser)?;
    by_keyboard(session, browser)?;
    layout::open(browser, file, &WITH_FINGER)?;
    by_touch(session, browser)?;
    for complaint in browser.complaints() {
        session.fail(format!("while zooming: {complaint}"));
    }
    say("the diagrams zoom and move by mouse, keyboard and touch");
    Ok(())
}

fn view(browser: &mut Browser) -> Result<View, String> {
    let expression = "new Promise(done => requestAnimationFrame(() => requestAnimationFrame(() => {\
        const picture = document.querySelector('.picture.live');\
        done([Number(picture.dataset.from), Number(picture.dataset.span), \
              picture.querySelector('.axis-title').textContent]); })))";
    let found = browser.evaluate(expression)?;
    let number =
        |at: usize| found[at].as_f64().ok_or(format!("the diagram does not say what it shows: {found}"));
    Ok(View { from: number(0)?, span: number(1)?, axis: found[2].as_str().unwrap_or_default().to_owned() })
}

fn place(browser: &mut Browser) -> Result<Place, String> {
    let expression = "(() => { const svg = document.querySelector('.picture.live svg');\
        svg.scrollIntoView({ block: 'center' }); const box = svg.getBoundingClientRect();\
        return [box.left + box.width / 2, box.top + box.height / 2]; })()";
    let found = browser.evaluate(expression)?;
    let number = |at: usize| found[at].as_f64().ok_or(format!("there is no diagram: {found}"));
    Ok(Place { x: number(0)?, y: number(1)? })
}

fn mouse(browser: &mut Browser, kind: &str, x: f64, y: f64, more: Value) -> Result<(), String> {
    let mut event = json!({ "type": kind, "x": x, "y": y });
    for (name, value) in more.as_object().into_iter().flatten() {
        event[name.as_str()] = value.clone();
    }
    browser.call("Input.dispatchMouseEvent", &event).map(drop)
}

fn by_mouse(session: &mut Session, browser: &mut Browser) -> Result<(), String> {
    let Place { x, y } = place(browser)?;
    let first = view(browser)?;
    let turn = json!({ "deltaX": 0, "deltaY": -240 });
    mouse(browser, "mouseWheel", x, y, turn.clone())?;
    let passed = view(browser)?;
    expect(
        session,
        passed == first,
        "the wheel over a diagram that was not clicked must scroll the page",
        &first,
        &passed,
    );
    let Place { x, y } = place(browser)?;
    let left = json!({ "button": "left", "buttons": 1, "clickCount": 1 });
    mouse(browser, "mousePressed", x, y, left.clone())?;
    mouse(browser, "mouseReleased", x, y, left.clone())?;
    mouse(browser, "mouseWheel", x, y, turn)?;
    let zoomed = view(browser)?;
    expect(session, zoomed.span < first.span * 0.7, "the wheel must zoom in", &first, &zoomed);
    mouse(browser, "mousePressed", x, y, left.clone())?;
    mouse(browser, "mouseMoved", x - 100.0, y, json!({ "button": "left", "buttons": 1 }))?;
    mouse(browser, "mouseMoved", x - 200.0, y, json!({ "button": "left", "buttons": 1 }))?;
    mouse(browser, "mouseReleased", x - 200.0, y, left)?;
    let moved = view(browser)?;
    let is_moved = moved.from > zoomed.from && (moved.span - zoomed.span).abs() < 1e-3;
    expect(session, is_moved, "dragging to the left must show what comes later", &zoomed, &moved);
    Ok(())
}

fn key(browser: &mut Browser, name: &str) -> Result<(), String> {
    let text = if name.chars().count() == 1 { name } else { "" };
    let down =
        json!({ "type": if text.is_empty() { "rawKeyDown" } else { "keyDown" }, "key": name, "text": text });
    browser.call("Input.dispatchKeyEvent", &down)?;
    browser.call("Input.dispatchKeyEvent", &json!({ "type": "keyUp", "key": name })).map(drop)
}

fn by_keyboard(session: &mut Session, browser: &mut Browser) -> Result<(), String> {
    // The focus is where a keyboard brings it, and no mouse.
    browser.evaluate("document.querySelector('.picture.live').focus()")?;
    key(browser, "0")?;
    let home = view(browser)?;
    key(browser, "+")?;
    let near = view(browser)?;
    expect(session, (near.span - home.span / 2.0).abs() < 1.0, "+ must halve what is shown", &home, &near);
    key(browser, "ArrowRight")?;
    let moved = view(browser)?;
    expect(session, moved.from > near.from, "the arrow must move", &near, &moved);
    key(browser, "n")?;
    let next = view(browser)?;
    expect(session, next.from > moved.from, "N must go to the next operation", &moved, &next);
    key(browser, "a")?;
    let all = view(browser)?;
    expect(
        session,
        all.span > 1e9 && all.axis.ends_with(", s"),
        "A must show the whole recording, in seconds",
        &next,
        &all,
    );
    for _ in 0..40 {
        key(browser, "+")?;
    }
    let nearest = view(browser)?;
    let in_ns = nearest.span <= 100.0 && nearest.axis.ends_with(", ns");
    expect(session, in_ns, "+ must lead down to nanoseconds", &all, &nearest);
    key(browser, "0")?;
    let again = view(browser)?;
    expect(session, again == home, "0 must go back to the first view", &home, &again);
    Ok(())
}

fn touch(browser: &mut Browser, kind: &str, points: &[(f64, f64)]) -> Result<(), String> {
    let points: Vec<Value> =
        points.iter().zip(0..).map(|(&(x, y), id)| json!({ "x": x, "y": y, "id": id })).collect();
    browser.call("Input.dispatchTouchEvent", &json!({ "type": kind, "touchPoints": points })).map(drop)
}

fn by_touch(session: &mut Session, browser: &mut Browser) -> Result<(), String> {
    let Place { x, y } = place(browser)?;
    let first = view(browser)?;
    touch(browser, "touchStart", &[(x - 30.0, y), (x + 30.0, y)])?;
    for step in 1..=6 {
        let apart = 30.0 + 12.0 * f64::from(step);
        touch(browser, "touchMove", &[(x - apart, y), (x + apart, y)])?;
    }
    touch(browser, "touchEnd", &[])?;
    let zoomed = view(browser)?;
    expect(session, zoomed.span < first.span * 0.6, "two fingers moved apart must zoom in", &first, &zoomed);
    touch(browser, "touchStart", &[(x + 60.0, y)])?;
    for step in 1..=6 {
        touch(browser, "touchMove", &[(x + 60.0 - 20.0 * f64::from(step), y)])?;
    }
    touch(browser, "touchEnd", &[])?;
    let moved = view(browser)?;
    expect(
        session,
        moved.from > zoomed.from,
        "a finger pushed to the left must show what comes later",
        &zoomed,
        &moved,
    );
    Ok(())
}

fn expect(session: &mut Session, holds: bool, what: &str, before: &View, after: &View) {
    if !holds {
        session.fail(format!("{what}; before: {before:?}, after: {after:?}"));
    }
}
