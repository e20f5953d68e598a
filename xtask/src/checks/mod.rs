//! The checks, in the order in which `verify` runs them: the quick and the likely to fail first.

mod docs;
mod documents;
mod features;
mod firmware;
mod format;
mod host;
mod lints;
mod packages;
mod report;
mod targets;
mod top_level;

use crate::session::Session;

/// One check.
pub(crate) struct Check {
    pub(crate) name: &'static str,
    /// What it makes sure of, in a few words.
    pub(crate) about: &'static str,
    /// Notes what fails in the session and goes on to the end.
    pub(crate) run: fn(&mut Session),
}

/// Every check.
pub(crate) const ALL: &[Check] = &[
    Check { name: "check-format", about: "the sources are formatted", run: format::run },
    Check { name: "check-lints", about: "no lint warns, in any target, all features on", run: lints::run },
    Check {
        name: "check-docs",
        about: "the docs build without a warning and agree with the code",
        run: docs::run,
    },
    Check {
        name: "check-packages",
        about: "both crates can be packaged and carry what a registry asks for",
        run: packages::run,
    },
    Check { name: "check-host", about: "all tests and doctests pass on this machine", run: host::run },
    Check {
        name: "check-report",
        about: "the report is valid HTML and works in a browser",
        run: report::run,
    },
    Check {
        name: "check-features",
        about: "debounce-core holds with every set of features",
        run: features::run,
    },
    Check { name: "check-targets", about: "debounce-core builds for bare metal", run: targets::run },
    Check {
        name: "check-firmware",
        about: "the firmware runs as the host says, at the cost stated, without a panic",
        run: firmware::run,
    },
];

/// What is no check, and so not part of `verify`.
pub(crate) const CHORES: &[Check] = &[Check {
    name: "update-costs",
    about: "measures the cost of a tick and writes the table anew",
    run: firmware::update,
}];
