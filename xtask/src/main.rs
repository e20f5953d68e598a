//! The chores of this workspace.
fn main() {}
