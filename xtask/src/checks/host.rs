//! All tests and doctests pass on this machine.

use crate::session::Session;

pub(super) fn run(session: &mut Session) {
    session.cargo_test(&["--workspace"]);
}
