//! All tests and doctests pass on this machine.

use crate::install;
use crate::session::Session;

pub(super) fn run(session: &mut Session) {
    // The modules that the tests generate are built for it, too.
    session.expect(install::target("thumbv6m-none-eabi"));
    // The network in front of the pin is compared with a circuit simulator.
    session.expect(install::program("ngspice", "ngspice"));
    // Manual pages are set, and JUnit is held against its schema, by programs that others wrote.
    session.expect(install::program("groff", "groff"));
    session.expect(install::program("xmllint", "libxml2-utils"));
    session.cargo_test(&["--workspace"]);
}
