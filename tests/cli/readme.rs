//! What the README shows is what the command prints.

use std::process::Command;
use std::{env, fs};

const MARK: &str = "<!-- What `harness study` prints at 90 columns; a test compares the two. -->\n```text\n";

/// After a change to the output, rewrite the block with
/// `HARNESS_REWRITE_README=1 cargo test -p harness --test readme`, and look at what changed.
#[test]
fn readme_shows_what_study_prints() {
    let output = Command::new(env!("CARGO_BIN_EXE_harness"))
        .arg("study")
        .env("COLUMNS", "90")
        .env("NO_COLOR", "1")
        .output()
        .expect("the command runs");
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    let printed = String::from_utf8(output.stdout).expect("text");
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/../README.md");
    let readme = fs::read_to_string(path).expect("the README is there");
    let (before, rest) = readme.split_once(MARK).expect("the mark is there");
    let (shown, after) = rest.split_once("```\n").expect("the block ends");
    if env::var_os("HARNESS_REWRITE_README").is_some() {
        fs::write(path, format!("{before}{MARK}{printed}```\n{after}")).expect("the README can be written");
    } else {
        assert_eq!(shown, printed, "the README shows something else than the command prints");
    }
}
