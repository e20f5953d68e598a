//! What several tests share.

pub mod firmware;
pub mod predicate;
pub mod toggle;

/// The SHA-256 of a file in hexadecimal, by `sha256sum` of the GNU coreutils; `None` where there is none.
#[must_use]
pub fn sha256(file: &std::path::Path) -> Option<String> {
    let output = std::process::Command::new("sha256sum").arg(file).output().ok()?;
    let text = String::from_utf8(output.stdout).ok()?;
    text.split_whitespace().next().map(str::to_owned)
}

/// The examples of the README, compiled and run.
#[cfg(doctest)]
#[doc = include_str!("../../README.md")]
pub struct Readme;
