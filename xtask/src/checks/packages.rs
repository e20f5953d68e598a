//! The two crates can be packaged for a registry, and carry what it asks for.

use std::fs;

use crate::manifest;
use crate::session::{Session, cargo, output_of};

/// A crate that is published, and files that must go with it.
struct Published {
    name: &'static str,
    holds: &'static [&'static str],
}

const PUBLISHED: [Published; 2] = [
    Published { name: "debounce-core", holds: &["README.md", "COST.md", "src/lib.rs"] },
    Published {
        name: "harness",
        holds: &["README.md", "schema/common.json", "src/demo/vent_button.vcd", "src/main.rs"],
    },
];

pub(super) fn run(session: &mut Session) {
    for published in &PUBLISHED {
        let path = Session::root().join(published.name).join("Cargo.toml");
        match fs::read_to_string(&path) {
            Ok(text) => metadata_faults(published.name, &text).into_iter().for_each(|f| session.fail(f)),
            Err(error) => session.fail(format!("cannot read {}: {error}", path.display())),
        }
        // The working tree may hold changes: what is checked is what it holds.
        let words = ["package", "--list", "--allow-dirty", "--offline", "--package", published.name];
        match output_of(&mut cargo(&words)) {
            Ok(list) => missing(published, &list).into_iter().for_each(|fault| session.fail(fault)),
            Err(message) => session.fail(message),
        }
    }
    // Both at once, because the one needs the other and neither has been published. What is packed builds here as
    // it stands: the other checks do that.
    let mut words = vec!["package", "--no-verify", "--allow-dirty", "--offline", "--quiet"];
    PUBLISHED.iter().for_each(|published| words.extend(["--package", published.name]));
    session.cargo(&words);
}

/// What the registry, or somebody who looks for the crate there, would miss.
fn metadata_faults(name: &str, text: &str) -> Vec<String> {
    let mut faults = Vec::new();
    for key in ["description", "readme"] {
        if manifest::string(text, "package", key).is_none_or(str::is_empty) {
            faults.push(format!("{name}/Cargo.toml has no {key}"));
        }
    }
    for key in ["license.workspace", "rust-version.workspace"] {
        if !text.lines().any(|line| line == format!("{key} = true")) {
            faults.push(format!("{name}/Cargo.toml lacks {key} = true"));
        }
    }
    // The registry takes five of each at most.
    for key in ["keywords", "categories"] {
        let number = manifest::list(text, "package", key).len();
        if !(1..=5).contains(&number) {
            faults.push(format!("{name}/Cargo.toml has {number} {key}; one to five are taken"));
        }
    }
    if !text.lines().any(|line| line == "[package.metadata.docs.rs]") {
        faults.push(format!("{name}/Cargo.toml does not say how docs.rs builds it"));
    }
    faults
}

fn missing(published: &Published, list: &str) -> Vec<String> {
    let lacks = published.holds.iter().filter(|file| !list.lines().any(|line| line == **file));
    lacks.map(|file| format!("the package of {} holds no {file}", published.name)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn manifest_of(name: &str) -> String {
        fs::read_to_string(Session::root().join(name).join("Cargo.toml")).unwrap()
    }

    #[test]
    fn published_manifests_have_all_that_is_asked_for() {
        for published in &PUBLISHED {
            assert_eq!(metadata_faults(published.name, &manifest_of(published.name)), [""; 0]);
        }
    }

    #[test]
    fn manifest_without_one_of_them_is_a_fault() {
        let text = manifest_of("harness");
        for (from, to) in [
            ("description = ", "about = "),
            ("readme = ", "read = "),
            ("license.workspace", "licence.workspace"),
            ("keywords = [", "keywords = [\"a\", \"b\", \"c\", \"d\", "),
            ("categories = [", "tags = ["),
            ("[package.metadata.docs.rs]", "[package.metadata.docs]"),
        ] {
            assert!(text.contains(from), "{from}");
            let faults = metadata_faults("harness", &text.replace(from, to));
            assert_eq!(faults.len(), 1, "{from}: {faults:?}");
        }
    }

    #[test]
    fn package_that_lacks_a_file_is_a_fault() {
        let found = missing(&PUBLISHED[0], "README.md\nsrc/lib.rs\n");
        assert_eq!(found, ["the package of debounce-core holds no COST.md"]);
    }
}
