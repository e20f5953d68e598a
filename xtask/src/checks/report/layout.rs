//! A report in every size and scheme: nothing complains, no text covers another, all can be read.

use std::fs;
use std::path::Path;

use serde_json::{Value, json};

use super::browser::Browser;
use crate::session::{Session, say};

const PROBE: &str = include_str!("probe.js");

/// A way to look at a page.
#[derive(Clone, Copy)]
pub(super) struct Look {
    pub(super) name: &'static str,
    width: u32,
    height: u32,
    media: &'static str,
    scheme: &'static str,
    pub(super) touch: bool,
    scripts: bool,
}

const DESK: Look = Look {
    name: "desk",
    width: 1280,
    height: 900,
    media: "screen",
    scheme: "light",
    touch: false,
    scripts: true,
};
const PHONE: Look = Look { name: "phone", width: 390, height: 844, touch: true, ..DESK };

/// With the mouse and with the finger.
pub(super) const WITH_MOUSE: Look = DESK;
pub(super) const WITH_FINGER: Look = PHONE;

const LOOKS: [Look; 7] = [
    DESK,
    Look { name: "desk in the dark", scheme: "dark", ..DESK },
    PHONE,
    Look { name: "phone in the dark", scheme: "dark", ..PHONE },
    // A4 with margins of 16 mm, at 96 pixels an inch.
    Look { name: "paper", width: 673, height: 1001, media: "print", ..DESK },
    Look { name: "desk without scripts", scripts: false, ..DESK },
    Look { name: "phone without scripts", scripts: false, ..PHONE },
];

/// Opens a file so.
pub(super) fn open(browser: &mut Browser, file: &Path, look: &Look) -> Result<(), String> {
    let size =
        json!({ "width": look.width, "height": look.height, "deviceScaleFactor": 1, "mobile": look.touch });
    browser.call("Emulation.setDeviceMetricsOverride", &size)?;
    browser
        .call("Emulation.setTouchEmulationEnabled", &json!({ "enabled": look.touch, "maxTouchPoints": 2 }))?;
    let scheme = json!([{ "name": "prefers-color-scheme", "value": look.scheme }]);
    browser.call("Emulation.setEmulatedMedia", &json!({ "media": look.media, "features": scheme }))?;
    browser.call("Emulation.setScriptExecutionDisabled", &json!({ "value": !look.scripts }))?;
    browser.open(file)
}

/// Looks at a report in every way.
pub(super) fn check(session: &mut Session, browser: &mut Browser, file: &Path) -> Result<(), String> {
    let name = file.file_name().unwrap_or_default().to_string_lossy().into_owned();
    for look in &LOOKS {
        open(browser, file, look)?;
        let problems = problems(browser)?;
        for problem in &problems {
            session.fail(format!("{name}, {}: {problem}", look.name));
        }
        if !look.scripts {
            static_diagrams(session, browser, &name)?;
        }
    }
    say(&format!("{name}: looked at in {} ways", LOOKS.len()));
    Ok(())
}

fn problems(browser: &mut Browser) -> Result<Vec<String>, String> {
    let found = browser.evaluate(PROBE)?;
    let mut problems: Vec<String> =
        found.as_array().into_iter().flatten().filter_map(Value::as_str).map(str::to_owned).collect();
    problems.extend(browser.complaints());
    Ok(problems)
}

/// Without the script every diagram is there, and nothing that only the script could serve.
fn static_diagrams(session: &mut Session, browser: &mut Browser, name: &str) -> Result<(), String> {
    let empty = "Array.from(document.querySelectorAll('.drawn')).filter(g => g.children.length < 5).length";
    let served = "document.querySelectorAll('.tools, .live').length";
    for (what, expression) in [("empty diagrams", empty), ("tools that do nothing", served)] {
        let number = browser.evaluate(expression)?;
        if number != json!(0) {
            session.fail(format!("{name} without scripts has {number} {what}"));
        }
    }
    Ok(())
}

/// A page on which everything is wrong that is looked for: a look that finds nothing there would find nothing anywhere.
pub(super) fn check_twin(session: &mut Session, browser: &mut Browser, folder: &Path) -> Result<(), String> {
    let file = folder.join("twin.html");
    let page = "<!DOCTYPE html><html lang=\"en\"><head><title>a</title></head><body>\
        <p style=\"color: #999; width: 3000px\">faint and wide</p><button></button>\
        <svg width=\"100\" height=\"40\"><text x=\"5\" y=\"20\">one over</text><text x=\"9\" y=\"20\">the other</text>\
        <text x=\"80\" y=\"35\">cut off</text></svg><script>console.log('noise'); nothing.here();</script></body></html>";
    fs::write(&file, page).map_err(|error| format!("{}: {error}", file.display()))?;
    open(browser, &file, &DESK)?;
    let found = problems(browser)?.join("\n");
    for part in [
        "overlap",
        "is cut off",
        "has a contrast of only",
        "pixels wider",
        "has no name",
        "noise",
        "nothing is not defined",
    ] {
        if !found.contains(part) {
            session.fail(format!("a page with everything wrong is not told \"{part}\", only:\n{found}"));
        }
    }
    Ok(())
}
