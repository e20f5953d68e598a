//! `debounce-core` holds with every set of its features: all are linted, the two ends are tested.

use std::fs;

use crate::session::Session;
use crate::{install, manifest};

pub(super) fn run(session: &mut Session) {
    if !session.expect(install::component("clippy", "clippy")) {
        return;
    }
    let path = Session::root().join("debounce-core/Cargo.toml");
    let text = match fs::read_to_string(&path) {
        Ok(text) => text,
        Err(error) => return session.fail(format!("cannot read {}: {error}", path.display())),
    };
    for set in sets(&manifest::features(&text)) {
        let set = format!("--features={}", set.join(","));
        let package = ["clippy", "--package", "debounce-core", "--all-targets", "--no-default-features"];
        let rest = [&set, "--", "-D", "warnings"];
        session.cargo(&[&package[..], &rest[..]].concat());
    }
    session.cargo_test(&["--package", "debounce-core", "--no-default-features"]);
    session.cargo_test(&["--package", "debounce-core", "--all-features"]);
}

/// Every set of the features, from none to all.
fn sets<'a>(features: &[&'a str]) -> Vec<Vec<&'a str>> {
    features.iter().fold(vec![Vec::new()], |sets, &feature| {
        let with = sets.iter().map(|set| set.iter().copied().chain([feature]).collect());
        sets.iter().cloned().chain(with).collect()
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sets_of_no_feature_are_the_empty_one() {
        assert_eq!(sets(&[]), [Vec::<&str>::new()]);
    }

    #[test]
    fn sets_of_three_features_are_all_eight() {
        let expected: [&[&str]; 8] =
            [&[], &["a"], &["b"], &["a", "b"], &["c"], &["a", "c"], &["b", "c"], &["a", "b", "c"]];
        assert_eq!(sets(&["a", "b", "c"]), expected);
    }
}
