//! The root of the repository stays as it is: a newcomer sees what there is at one glance.

use std::collections::BTreeSet;
use std::fs;
use std::process::Command;

use crate::install;
use crate::session::{Session, output_of, say};

/// What must stand in the root.
const REQUIRED: [&str; 13] = [
    ".ci",
    ".cargo",
    "CHANGELOG.md",
    "Cargo.lock",
    "Cargo.toml",
    "DEVELOPERS.md",
    "LICENSE-APACHE",
    "LICENSE-MIT",
    "README.md",
    "debounce-core",
    "examples",
    "harness",
    "tests",
];

/// What else may: configuration that tools look for there, and the chores.
const ALLOWED: [&str; 7] =
    [".clippy.toml", ".editorconfig", ".gitattributes", ".github", ".gitignore", ".rustfmt.toml", "xtask"];

/// What is there without being part of the source.
const UNTRACKED: [&str; 2] = [".git", "target"];

pub(super) fn run(session: &mut Session) {
    match names() {
        Ok(names) => judge(&names).into_iter().for_each(|fault| session.fail(fault)),
        Err(message) => session.fail(message),
    }
}

/// What the repository holds in its root; in an unpacked archive, what the folder holds.
fn names() -> Result<BTreeSet<String>, String> {
    let root = Session::root();
    if root.join(".git").exists() {
        install::program("git", "git")?;
        // The checkout may belong to someone else than the user in a container; reading its list is harmless.
        let mut git = Command::new("git");
        git.args(["-c", "safe.directory=*", "ls-files", "-z"]).current_dir(root);
        let listed = output_of(&mut git)?;
        let names = listed.split('\0').filter_map(|path| path.split('/').next());
        return Ok(names.filter(|name| !name.is_empty()).map(str::to_owned).collect());
    }
    say("no .git here: judging the folder itself");
    let unreadable = |error| format!("cannot list {}: {error}", root.display());
    let mut names = BTreeSet::new();
    for entry in fs::read_dir(root).map_err(unreadable)? {
        names.insert(entry.map_err(unreadable)?.file_name().to_string_lossy().into_owned());
    }
    names.retain(|name| !UNTRACKED.contains(&name.as_str()));
    Ok(names)
}

fn judge(names: &BTreeSet<String>) -> Vec<String> {
    let mut faults = Vec::new();
    for name in REQUIRED {
        if !names.contains(name) {
            faults.push(format!("{name} is missing from the root of the repository"));
        }
    }
    for name in names {
        if !REQUIRED.contains(&name.as_str()) && !ALLOWED.contains(&name.as_str()) {
            faults.push(format!(
                "{name} does not belong in the root of the repository; move it into a package"
            ));
        }
    }
    faults
}

#[cfg(test)]
mod tests {
    use super::*;

    fn required() -> BTreeSet<String> {
        REQUIRED.iter().map(|name| (*name).to_owned()).collect()
    }

    #[test]
    fn root_with_exactly_what_is_required_passes() {
        assert!(judge(&required()).is_empty());
    }

    #[test]
    fn root_with_allowed_names_passes() {
        let mut names = required();
        names.extend(ALLOWED.iter().map(|name| (*name).to_owned()));
        assert!(judge(&names).is_empty());
    }

    #[test]
    fn root_with_anything_else_fails() {
        for stray in ["notes.txt", "rustfmt.toml", "Readme.md", "docs"] {
            let mut names = required();
            names.insert(stray.to_owned());
            assert_eq!(
                judge(&names),
                [format!("{stray} does not belong in the root of the repository; move it into a package")]
            );
        }
    }

    #[test]
    fn root_without_any_one_required_name_fails() {
        for missing in REQUIRED {
            let mut names = required();
            names.remove(missing);
            assert_eq!(judge(&names), [format!("{missing} is missing from the root of the repository")]);
        }
    }
}
