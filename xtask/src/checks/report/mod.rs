//! The report is valid HTML, and works in a browser: on a desk, on a phone, on paper, in the dark, without scripts.

mod browser;
mod layout;
mod zoom;

use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

use crate::install;
use crate::session::{Session, cargo, say};
use browser::Browser;

/// A report: its name, the words that make it, and the exit code that they end with.
struct Wanted {
    name: &'static str,
    words: &'static [&'static str],
    code: i32,
}

/// One report of each kind, and those that differ most from it.
const REPORTS: [Wanted; 8] = [
    Wanted { name: "study", words: &["study"], code: 0 },
    Wanted {
        name: "characterised",
        words: &[
            "characterise",
            "harness/src/demo/vent_button.vcd",
            "--closed",
            "high",
            "--resolution",
            "1 us",
        ],
        code: 0,
    },
    Wanted {
        name: "guarding",
        words: &[
            "choose",
            "--role",
            "guarding",
            "--bounce",
            "5 ms",
            "--latency",
            "30 ms",
            "--tick",
            "1 ms,5 ms",
        ],
        code: 0,
    },
    Wanted {
        name: "network",
        words: &[
            "network",
            "--supply",
            "3.3 V 5 %",
            "--pull",
            "10 kohm 5 %",
            "--capacitor",
            "100 nF 10 % X7R",
        ],
        code: 0,
    },
    Wanted {
        name: "proved",
        words: &["prove", "integrator 5", "--envelope", "dwell=40 bounce=5/3 glitch=1/1 quiet=30"],
        code: 0,
    },
    Wanted {
        name: "refuted",
        words: &["prove", "majority-register 9 of 16", "--envelope", "dwell=60 bounce=9 glitch=4 quiet=5"],
        code: 1,
    },
    Wanted {
        name: "limit",
        words: &["limit", "--envelope", "dwell=20 bounce=5/3 glitch=1/1 quiet=10"],
        code: 0,
    },
    Wanted { name: "different", words: &["compare", "integrator 3", "shift-register 3"], code: 1 },
];

pub(super) fn run(session: &mut Session) {
    let tools = [install::program("chromium", "chromium"), install::program("tidy", "tidy")];
    // Each is asked for, so that both are named where both are missing.
    let are_there = tools.map(|tool| session.expect(tool));
    let Some(folder) = fresh_folder(session) else { return };
    let reports: Vec<PathBuf> =
        REPORTS.iter().filter_map(|wanted| written(session, wanted, &folder)).collect();
    if are_there[1] {
        validity(session, &reports, &folder);
    }
    if are_there[0] {
        let result = in_browser(session, &reports, &folder);
        session.expect(result);
    }
}

fn fresh_folder(session: &mut Session) -> Option<PathBuf> {
    let folder = Session::root().join("target").join("report-check");
    // What an earlier run left there; it is fine if there is nothing.
    drop(fs::remove_dir_all(&folder));
    let made = fs::create_dir_all(&folder).map_err(|error| format!("{}: {error}", folder.display()));
    session.expect(made).then_some(folder)
}

/// Has the command write a report.
fn written(session: &mut Session, wanted: &Wanted, folder: &Path) -> Option<PathBuf> {
    let file = folder.join(format!("{}.html", wanted.name));
    let mut command = cargo(&["run", "--quiet", "--package", "harness", "--"]);
    command.args(wanted.words).arg("--report").arg(&file).stdin(Stdio::null()).stdout(Stdio::null());
    let words = wanted.words.join(" ");
    say(&format!("$ harness {words} --report {}", file.display()));
    match command.status().map(|status| status.code()) {
        Ok(code) if code == Some(wanted.code) => Some(file),
        ended => {
            session.fail(format!("`harness {words}` should end with {}, not with {ended:?}", wanted.code));
            None
        }
    }
}

/// What the validator says of a file; empty where it finds nothing.
fn tidied(file: &Path) -> Result<String, String> {
    let mut command = Command::new("tidy");
    command.args(["-quiet", "-errors", "--drop-empty-elements", "no"]).arg(file).stdin(Stdio::null());
    let output = command.output().map_err(|error| format!("tidy cannot be run: {error}"))?;
    Ok(String::from_utf8_lossy(&output.stderr).trim().to_owned())
}

fn validity(session: &mut Session, reports: &[PathBuf], folder: &Path) {
    for file in reports {
        match tidied(file) {
            Ok(told) if told.is_empty() => say(&format!("{} is valid HTML", file.display())),
            Ok(told) => session.fail(format!("{} is not valid HTML:\n{told}", file.display())),
            Err(message) => session.fail(message),
        }
    }
    // A validator that finds nothing in this would find nothing anywhere.
    let twin = folder.join("twin.html");
    let broken =
        "<!DOCTYPE html><html lang=\"en\"><head><title>a</title></head><body><p><div></p><b></body></html>";
    let found = fs::write(&twin, broken).map_err(|error| error.to_string()).and_then(|()| tidied(&twin));
    match found {
        Ok(told) if !told.is_empty() => {}
        other => session.fail(format!("the validator finds nothing wrong with a broken page: {other:?}")),
    }
}

fn in_browser(session: &mut Session, reports: &[PathBuf], folder: &Path) -> Result<(), String> {
    let mut browser = Browser::start(folder)?;
    for file in reports {
        layout::check(session, &mut browser, file)?;
    }
    layout::check_twin(session, &mut browser, folder)?;
    if let Some(study) = reports.iter().find(|file| file.ends_with("study.html")) {
        zoom::check(session, &mut browser, study)?;
    }
    Ok(())
}
