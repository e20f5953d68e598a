//! The sources are formatted.

use crate::install;
use crate::session::Session;

pub(super) fn run(session: &mut Session) {
    if session.expect(install::component("fmt", "rustfmt")) {
        session.cargo(&["fmt", "--all", "--check"]);
    }
}
