//! The firmware is built, run in an emulator, and compared: with the host, with the table of costs, with what it
//! must print; and it must hold no panic.

mod costs;
mod emulator;
mod panics;
mod table;

use std::path::PathBuf;
use std::process::Command;

use crate::install;
use crate::session::{Session, cargo, output_of, say};
use emulator::{ALL, Machine, Time};

/// The workspace of what is checked, below the root.
const RIG: &str = "examples/firmware-checks";

/// An example that a reader may start from; what it prints is kept beside it.
struct Example {
    /// Below the root.
    folder: &'static str,
    image: &'static str,
    /// What it must print, in that folder.
    expected: &'static str,
    /// The machines that run it, by name.
    runs_on: &'static [&'static str],
    /// What it is built for besides.
    builds_for: &'static [&'static str],
}

const EXAMPLES: [Example; 3] = [
    Example {
        folder: "examples/firmware-cortex-m",
        image: "control-panel",
        expected: "expected.txt",
        runs_on: &["cortex-m3", "cortex-m0"],
        builds_for: &[],
    },
    Example {
        folder: "examples/firmware-cortex-m",
        image: "sleeping-port",
        expected: "expected-sleeping-port.txt",
        // The timer that moves its contacts is one of this part.
        runs_on: &["cortex-m3"],
        builds_for: &[],
    },
    Example {
        folder: "examples/async-panel",
        image: "async-panel",
        expected: "expected.txt",
        runs_on: &["cortex-m3"],
        builds_for: &["thumbv7em-none-eabihf"],
    },
];

/// The images of [`RIG`].
const IMAGES: [&str; 4] = ["cost", "replay-target", "uses", "twin"];

pub(super) fn run(session: &mut Session) {
    if !ready(session) {
        return;
    }
    lint(session, RIG, &IMAGES);
    if !build(session) {
        return;
    }
    same_on_host(session);
    panics::check(session);
    costs::check(session);
    EXAMPLES.iter().for_each(|example| example.check(session));
}

/// Measures, and writes the table anew.
pub(super) fn update(session: &mut Session) {
    if ready(session) && build(session) {
        costs::update(session);
    }
}

/// Makes sure of targets, emulators and the C compilers.
fn ready(session: &mut Session) -> bool {
    let mut ready = true;
    for machine in ALL {
        ready &= session.expect(install::target(machine.target));
        ready &= session.expect(machine.installed());
        ready &= session.expect(install::program(&machine.tool("gcc"), machine.tools_package));
    }
    ready
}

/// A cargo command for a workspace below the root.
fn words<'a>(command: &'a str, manifest: &'a str, rest: &[&'a str]) -> Vec<&'a str> {
    [&[command, "--manifest-path", manifest], rest].concat()
}

fn manifest(workspace: &str) -> String {
    format!("{workspace}/Cargo.toml")
}

fn lint(session: &mut Session, workspace: &str, images: &[&str]) {
    let manifest = manifest(workspace);
    session.cargo(&words("fmt", &manifest, &["--all", "--check"]));
    if session.expect(install::component("clippy", "clippy")) {
        let mut rest = vec!["--release", "--locked", "--target", ALL[0].target];
        rest.extend(images.iter().flat_map(|image| ["--bin", image]));
        rest.extend(["--", "-D", "warnings"]);
        session.cargo(&words("clippy", &manifest, &rest));
    }
}

/// Builds every image for every machine; true when all are there.
fn build(session: &mut Session) -> bool {
    let manifest = manifest(RIG);
    let bins = IMAGES.iter().flat_map(|image| ["--bin", image]);
    ALL.iter().fold(true, |built, machine| {
        let rest: Vec<&str> =
            ["--release", "--locked", "--target", machine.target].into_iter().chain(bins.clone()).collect();
        let words = words("build", &manifest, &rest);
        built & session.expect(crate::session::run(&mut cargo(&words)))
    })
}

/// Where an image of [`RIG`] is.
fn image(machine: &Machine, name: &str) -> PathBuf {
    Session::root().join(RIG).join("target").join(machine.target).join("release").join(name)
}

/// Firmware and host print the same digests over the same samples.
fn same_on_host(session: &mut Session) {
    /// The samples that must be compared at least.
    const ENOUGH: u64 = 10_000_000;
    let manifest = manifest(RIG);
    let rest = ["--quiet", "--release", "--locked", "--bin", "replay-host"];
    let host = match output_of(&mut cargo(&words("run", &manifest, &rest))) {
        Ok(host) => host,
        Err(message) => return session.fail(message),
    };
    let samples = host.lines().last().and_then(|line| line.strip_prefix("samples ")?.parse::<u64>().ok());
    if samples.is_none_or(|samples| samples < ENOUGH) {
        session.fail(format!("the host compared {samples:?} samples, fewer than {ENOUGH}"));
    }
    for machine in ALL {
        match machine.run(&image(machine, "replay-target"), Time::Free) {
            Ok(target) => match first_difference(&host, &target) {
                Some(found) => {
                    session.fail(format!("{}: the firmware parts from the host: {found}", machine.name))
                }
                None => say(&format!(
                    "{}: {} digests over {} samples are those of the host",
                    machine.name,
                    host.lines().count() - 1,
                    samples.unwrap_or(0)
                )),
            },
            Err(message) => session.fail(message),
        }
    }
}

/// The first line in which two texts differ.
fn first_difference(expected: &str, found: &str) -> Option<String> {
    let (mut expected, mut found) = (expected.lines(), found.lines());
    loop {
        match (expected.next(), found.next()) {
            (None, None) => return None,
            (one, other) if one == other => {}
            (one, other) => {
                let shown = |line: Option<&str>| line.unwrap_or("the end").to_owned();
                return Some(format!("expected `{}`, found `{}`", shown(one), shown(other)));
            }
        }
    }
}

impl Example {
    /// The example builds, runs, and prints what is kept beside it.
    fn check(&self, session: &mut Session) {
        lint(session, self.folder, &[self.image]);
        for target in self.builds_for {
            if session.expect(install::target(target)) {
                self.build(session, target);
            }
        }
        let folder = Session::root().join(self.folder);
        let expected = match std::fs::read_to_string(folder.join(self.expected)) {
            Ok(expected) => expected,
            Err(error) => {
                return session.fail(format!("cannot read {}/{}: {error}", self.folder, self.expected));
            }
        };
        for machine in ALL.iter().filter(|machine| self.runs_on.contains(&machine.name)) {
            if !self.build(session, machine.target) {
                continue;
            }
            let image = folder.join("target").join(machine.target).join("release").join(self.image);
            match machine.run(&image, Time::Steady) {
                Ok(found) => match first_difference(&expected, &found) {
                    Some(found) => session.fail(format!("{} on {}: {found}", self.image, machine.name)),
                    None => say(&format!("{} on {}: as expected", self.image, machine.name)),
                },
                Err(message) => session.fail(message),
            }
        }
    }

    fn build(&self, session: &mut Session, target: &str) -> bool {
        let manifest = manifest(self.folder);
        let words =
            words("build", &manifest, &["--release", "--locked", "--target", target, "--bin", self.image]);
        session.expect(crate::session::run(&mut cargo(&words)))
    }
}

/// What `program --version` says first.
fn version(program: &str) -> Result<String, String> {
    let text = output_of(Command::new(program).arg("--version"))?;
    Ok(text.lines().next().unwrap_or_default().trim().to_owned())
}

#[cfg(test)]
mod tests {
    use super::first_difference;

    #[test]
    fn first_difference_of_equal_texts_is_none() {
        assert_eq!(first_difference("a\nb\n", "a\nb\n"), None);
        assert_eq!(first_difference("", ""), None);
    }

    #[test]
    fn first_difference_names_both_lines() {
        let found = first_difference("a\nb\n", "a\nc\n");
        assert_eq!(found.as_deref(), Some("expected `b`, found `c`"));
    }

    #[test]
    fn first_difference_sees_a_text_that_ends_early() {
        let found = first_difference("a\nb\n", "a\n");
        assert_eq!(found.as_deref(), Some("expected `b`, found `the end`"));
        let found = first_difference("a\n", "a\nb\n");
        assert_eq!(found.as_deref(), Some("expected `the end`, found `b`"));
    }
}
