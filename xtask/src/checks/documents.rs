//! README.md and DEVELOPERS.md agree with the manifests, the checks and the command line.

use std::fs;
use std::path::Path;

use crate::markdown::{code_spans, first_cells, rust_versions, section};
use crate::session::{Session, cargo, output_of};
use crate::{checks, manifest};

/// The two commands that a reader of the README needs, word for word.
const COMMANDS: [&str; 2] = ["cargo run --release -p harness -- study", "cargo xtask verify"];

/// The texts that are compared.
struct Documents {
    readme: String,
    developers: String,
    workspace: String,
    core: String,
}

impl Documents {
    fn read(root: &Path) -> Result<Self, String> {
        let read =
            |name: &str| fs::read_to_string(root.join(name)).map_err(|e| format!("cannot read {name}: {e}"));
        Ok(Self {
            readme: read("README.md")?,
            developers: read("DEVELOPERS.md")?,
            workspace: read("Cargo.toml")?,
            core: read("debounce-core/Cargo.toml")?,
        })
    }

    /// Where the texts and the code part, `exists` telling which paths there are.
    fn faults(&self, exists: impl Fn(&str) -> bool) -> Vec<String> {
        let mut faults = Vec::new();
        for command in COMMANDS {
            if !self.readme.lines().any(|line| line == command) {
                faults.push(format!("README.md lacks the line `{command}`"));
            }
        }
        match manifest::string(&self.workspace, "workspace.package", "rust-version") {
            Some(version) => {
                faults.extend(version_faults("README.md", &self.readme, version));
                faults.extend(version_faults("DEVELOPERS.md", &self.developers, version));
            }
            None => faults.push("Cargo.toml states no rust-version in [workspace.package]".to_owned()),
        }
        let features = manifest::features(&self.core);
        let rows = rows("README.md", &self.readme, "## Features", &mut faults);
        faults.extend(list_faults("README.md, Features", &rows, "debounce-core/Cargo.toml", &features));
        let names: Vec<&str> = checks::ALL.iter().map(|check| check.name).collect();
        let rows = self::rows("DEVELOPERS.md", &self.developers, "## Checks", &mut faults);
        faults.extend(list_faults("DEVELOPERS.md, Checks", &rows, "`cargo xtask help`", &names));
        match section(&self.developers, "## Code map") {
            Some(lines) => {
                let paths = code_spans(&lines).into_iter().filter(|span| span.contains('/'));
                faults.extend(
                    paths
                        .filter(|path| !exists(path))
                        .map(|path| format!("DEVELOPERS.md, Code map: there is no {path}")),
                );
            }
            None => faults.push("DEVELOPERS.md has no section \"## Code map\"".to_owned()),
        }
        faults
    }
}

pub(super) fn run(session: &mut Session) {
    let root = Session::root();
    let documents = match Documents::read(root) {
        Ok(documents) => documents,
        Err(message) => return session.fail(message),
    };
    documents.faults(|path| root.join(path).exists()).into_iter().for_each(|fault| session.fail(fault));
    let stated =
        section(&documents.readme, "## The command").map(|lines| first_cells(&lines)).unwrap_or_default();
    // A command line that is not there yet is compared too: the README may then list no command.
    let help = if root.join("harness/src/main.rs").exists() {
        output_of(&mut cargo(&["run", "--quiet", "--package", "harness", "--bin", "harness", "--", "--help"]))
    } else {
        Ok(String::new())
    };
    match help {
        Ok(help) => list_faults("README.md, The command", &stated, "`harness --help`", &subcommands(&help))
            .into_iter()
            .for_each(|fault| session.fail(fault)),
        Err(message) => session.fail(message),
    }
}

/// The first cells of the tables below a heading; a heading that is not there is a fault.
fn rows<'a>(document: &str, text: &'a str, heading: &str, faults: &mut Vec<String>) -> Vec<&'a str> {
    let lines = section(text, heading);
    if lines.is_none() {
        faults.push(format!("{document} has no section \"{heading}\""));
    }
    first_cells(&lines.unwrap_or_default())
}

fn version_faults(document: &str, text: &str, version: &str) -> Vec<String> {
    let stated = rust_versions(text);
    if stated.is_empty() {
        return vec![format!("{document} does not state \"Rust {version}\", the rust-version of Cargo.toml")];
    }
    let wrong = stated.into_iter().filter(|stated| *stated != version);
    wrong
        .map(|stated| format!("{document} states Rust {stated}, Cargo.toml rust-version {version}"))
        .collect()
}

fn list_faults(document: &str, stated: &[&str], code: &str, actual: &[&str]) -> Vec<String> {
    let missing = actual.iter().filter(|name| !stated.contains(name));
    let missing = missing.map(|name| format!("{document}: `{name}` of {code} is not listed"));
    let extra = stated.iter().filter(|name| !actual.contains(name));
    missing.chain(extra.map(|name| format!("{document}: `{name}` is not in {code}"))).collect()
}

/// The subcommands in a help text, each as `harness name`.
fn subcommands(help: &str) -> Vec<&str> {
    let lines = help.lines().skip_while(|line| *line != "Commands:").skip(1);
    let lines = lines.take_while(|line| line.starts_with("  "));
    // A name stands two spaces in; a line that stands further in goes on with the text before it.
    let named = lines.filter_map(|line| line.strip_prefix("  ")).filter(|line| !line.starts_with(' '));
    named.filter_map(|line| line.split(' ').next()).filter(|name| *name != "help").collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn documents() -> Documents {
        Documents::read(Session::root()).unwrap()
    }

    /// The faults after `from` was turned into `to` in one of the texts.
    #[track_caller]
    fn check(text: fn(&mut Documents) -> &mut String, from: &str, to: &str, expected: &[&str]) {
        let mut documents = documents();
        let text = text(&mut documents);
        assert!(text.contains(from), "nothing to change: {from}");
        *text = text.replace(from, to);
        assert_eq!(documents.faults(|_| true), expected);
    }

    #[test]
    fn readme_states_both_commands_word_for_word() {
        for command in ["cargo run --release -p harness -- study", "cargo xtask verify"] {
            assert!(documents().readme.lines().any(|line| line == command), "{command}");
        }
    }

    #[test]
    fn ci_script_runs_the_command_of_the_readme() {
        let script = fs::read_to_string(Session::root().join(".ci/run")).unwrap();
        assert!(script.lines().any(|line| line == "cargo xtask verify"));
    }

    #[test]
    fn documents_as_they_stand_agree_with_the_code() {
        assert_eq!(documents().faults(|path| Session::root().join(path).exists()), [""; 0]);
    }

    #[test]
    fn documents_command_changed_is_a_fault() {
        let expected = ["README.md lacks the line `cargo xtask verify`"];
        check(|d| &mut d.readme, "cargo xtask verify\n", "cargo xtask check\n", &expected);
    }

    #[test]
    fn documents_other_rust_version_is_a_fault() {
        let mut documents = documents();
        documents.workspace = "[workspace.package]\nrust-version = \"1.2\"\n".to_owned();
        let faults = documents.faults(|_| true);
        assert!(faults.iter().any(|fault| fault.starts_with("README.md states Rust 1.")), "{faults:?}");
        assert!(faults.iter().any(|fault| fault.starts_with("DEVELOPERS.md states Rust 1.")), "{faults:?}");
        assert_eq!(
            version_faults("README.md", "no word of it", "1.2"),
            ["README.md does not state \"Rust 1.2\", the rust-version of Cargo.toml"]
        );
    }

    #[test]
    fn documents_feature_on_one_side_only_is_a_fault() {
        let expected = ["README.md, Features: `telepathy` of debounce-core/Cargo.toml is not listed"];
        check(|d| &mut d.core, "[features]\n", "[features]\ntelepathy = []\n", &expected);
        let expected = ["README.md, Features: `telepathy` is not in debounce-core/Cargo.toml"];
        check(|d| &mut d.readme, "| `defmt` |", "| `telepathy` |\n| `defmt` |", &expected);
    }

    #[test]
    fn documents_check_not_listed_is_a_fault() {
        let expected = ["DEVELOPERS.md, Checks: `check-host` of `cargo xtask help` is not listed"];
        check(|d| &mut d.developers, "| `check-host` |", "| the tests |", &expected);
    }

    #[test]
    fn documents_path_that_is_not_there_is_a_fault() {
        let faults = documents().faults(|path| path != "debounce-core/src/law.rs");
        assert_eq!(faults, ["DEVELOPERS.md, Code map: there is no debounce-core/src/law.rs"]);
    }

    #[test]
    fn subcommands_are_read_from_help() {
        let help = "\
Does things

Usage: harness [COMMAND]

Commands:
  study    The main job
           over two lines
  prove    Proves
  help     Print this message

Options:
  -h, --help  Print help
";
        assert_eq!(subcommands(help), ["study", "prove"]);
        assert_eq!(subcommands(""), [""; 0]);
    }
}
