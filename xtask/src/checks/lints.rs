//! No lint warns, in any target of any package.

use crate::install;
use crate::session::Session;

pub(super) fn run(session: &mut Session) {
    if session.expect(install::component("clippy", "clippy")) {
        session.cargo(&["clippy", "--workspace", "--all-targets", "--all-features", "--", "-D", "warnings"]);
    }
}
