//! The docs build without a warning, and the documents agree with the code.

use super::{documents, top_level};
use crate::session::Session;

pub(super) fn run(session: &mut Session) {
    let words = ["doc", "--workspace", "--no-deps", "--all-features"];
    session.cargo_with(&words, &[("RUSTDOCFLAGS", "-D warnings")]);
    documents::run(session);
    top_level::run(session);
}
