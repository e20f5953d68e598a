//! A folder of its own for one run of the command, and what every refusal must look like.

use std::collections::BTreeMap;
use std::ffi::OsStr;
use std::fs;
use std::path::Path;
use std::process::{Command, Output, Stdio};

use serde_json::Value;
use tempfile::TempDir;

/// The command, in a plain environment.
pub(crate) fn harness() -> Command {
    plain(env!("CARGO_BIN_EXE_harness"))
}

fn plain(program: impl AsRef<OsStr>) -> Command {
    let mut command = Command::new(program);
    for name in ["NO_COLOR", "CLICOLOR", "CLICOLOR_FORCE"] {
        command.env_remove(name);
    }
    command.env("COLUMNS", "100").stdin(Stdio::null());
    command
}

/// What a run left behind.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Run {
    pub(crate) code: Option<i32>,
    pub(crate) stdout: String,
    pub(crate) stderr: String,
}

impl Run {
    pub(crate) fn of(output: Output) -> Self {
        let text = |bytes| String::from_utf8(bytes).expect("UTF-8");
        Self { code: output.status.code(), stdout: text(output.stdout), stderr: text(output.stderr) }
    }

    /// The JSON document on standard output.
    #[track_caller]
    pub(crate) fn json(&self) -> Value {
        serde_json::from_str(&self.stdout).unwrap_or_else(|error| panic!("{error}: {self:?}"))
    }

    /// Standard output with every run of white space as one space, so that it does not matter where lines break.
    pub(crate) fn flowing(&self) -> String {
        self.stdout.split_whitespace().collect::<Vec<_>>().join(" ")
    }

    /// Standard error in the same way.
    pub(crate) fn told(&self) -> String {
        self.stderr.split_whitespace().collect::<Vec<_>>().join(" ")
    }

    /// Checks the exit code.
    #[track_caller]
    pub(crate) fn ends(self, code: i32) -> Self {
        assert_eq!(self.code, Some(code), "{}\n{}", self.stdout, self.stderr);
        self
    }
}

/// One thing that must be told: `file:line:column`, `file` or nothing; what is wrong; parts of the help.
pub(crate) type Told<'a> = (&'a str, &'a str, &'a [&'a str]);

/// A folder of its own.
pub(crate) struct Bench(TempDir);

impl Bench {
    pub(crate) fn new() -> Self {
        Self(tempfile::tempdir().expect("a folder"))
    }

    /// A folder with one file in it.
    pub(crate) fn with(name: &str, content: impl AsRef<[u8]>) -> Self {
        Self::new().and(name, content)
    }

    /// One more file.
    pub(crate) fn and(self, name: &str, content: impl AsRef<[u8]>) -> Self {
        fs::write(self.path().join(name), content).expect("a file");
        self
    }

    pub(crate) fn path(&self) -> &Path {
        self.0.path()
    }

    pub(crate) fn command(&self) -> Command {
        let mut command = harness();
        command.current_dir(self.path());
        command
    }

    pub(crate) fn run(&self, arguments: &[&str]) -> Run {
        Run::of(self.command().args(arguments).output().expect("the command runs"))
    }

    /// Runs where no file may grow beyond a few hundred bytes, as on a disk that is all but full.
    #[cfg(unix)]
    pub(crate) fn run_without_room(&self, arguments: &[&str]) -> Run {
        let mut shell = plain("sh");
        // Ignored signals are inherited; the write then fails with an error, as on a full disk.
        shell.args(["-c", "trap '' XFSZ; ulimit -f 1; exec \"$@\"", "sh", env!("CARGO_BIN_EXE_harness")]);
        shell.args(arguments).current_dir(self.path());
        Run::of(shell.output().expect("a shell"))
    }

    /// Every file and folder with its content.
    pub(crate) fn listing(&self) -> BTreeMap<String, Option<Vec<u8>>> {
        let mut found = BTreeMap::new();
        let mut folders = vec![self.path().to_path_buf()];
        while let Some(folder) = folders.pop() {
            for entry in fs::read_dir(folder).expect("a folder") {
                let path = entry.expect("an entry").path();
                let name = path.strip_prefix(self.path()).expect("inside").display().to_string();
                let kind = fs::symlink_metadata(&path).expect("an entry").file_type();
                let content = kind.is_file().then(|| fs::read(&path).expect("a file"));
                if kind.is_dir() {
                    folders.push(path);
                }
                found.insert(name, content);
            }
        }
        found
    }

    /// The command refuses: exit code 2, exactly these problems, nothing on standard output, nothing left
    /// behind; and with `--json` the same problems as a document.
    #[track_caller]
    pub(crate) fn refuses(&self, arguments: &[&str], told: &[Told<'_>]) {
        let before = self.listing();
        let run = self.run(arguments);
        let json = self.run(&[arguments, &["--json"]].concat());
        let shown = format!("{arguments:?}\n{}{}", run.stdout, run.stderr);
        assert_eq!(self.listing(), before, "something was left behind by {shown}");
        assert_eq!((run.code, run.stdout.as_str()), (Some(2), ""), "{shown}");
        assert!(!run.stderr.contains('\x1b'), "no colour without a terminal: {shown}");
        let errors = run.stderr.lines().filter(|line| line.starts_with("error: ")).count();
        assert_eq!(errors, told.len(), "{shown}");

        assert_eq!((json.code, &json.stderr), (Some(2), &run.stderr), "{shown}");
        let document = json.json();
        assert_eq!(document["outcome"], "failed", "{shown}");
        assert_eq!(document["schema"], 1, "{shown}");
        assert_eq!(document["command"], arguments[0], "{shown}");
        let problems = document["problems"].as_array().expect("a list");
        assert_eq!(problems.len(), told.len(), "{shown}");
        for (problem, &(place, message, helps)) in problems.iter().zip(told) {
            let said = problem["message"].as_str().expect("a message");
            assert!(said.contains(message), "\"{message}\" is not in \"{said}\": {shown}");
            assert!(run.stderr.contains(said), "{said}: {shown}");
            check_style(said);
            assert_eq!(place_of(problem), place, "{shown}");
            assert!(run.stderr.contains(place), "{place}: {shown}");
            let help: Vec<&str> =
                problem["help"].as_array().expect("a list").iter().filter_map(Value::as_str).collect();
            help.iter().for_each(|help| check_style(help));
            for part in helps {
                assert!(
                    help.iter().any(|help| help.contains(part)),
                    "\"{part}\" is not in {help:?}: {shown}"
                );
                assert!(run.told().contains(part), "{part}: {shown}");
            }
        }
        let has_help =
            problems.iter().any(|problem| problem["help"].as_array().is_some_and(|h| !h.is_empty()));
        assert!(has_help, "nothing says what to do instead: {shown}");
    }
    /// A slip in what was typed: told on standard error with the usage, and with `--json` as a document.
    #[track_caller]
    pub(crate) fn refuses_usage(&self, arguments: &[&str], (_, message, helps): Told<'_>) {
        let run = self.run(arguments).ends(2);
        assert!(run.stdout.is_empty() && run.stderr.contains(message), "{run:?}");
        let json = self.run(&[arguments, &["--json"]].concat()).ends(2);
        let document = json.json();
        assert_eq!((&document["outcome"], &document["command"]), (&"failed".into(), &"usage".into()));
        let problem = document["problems"][0].to_string();
        for part in helps {
            assert!(run.stderr.contains(part), "\"{part}\" is not in {}", run.stderr);
            let escaped = part.replace('"', "\\\"");
            assert!(problem.contains(&escaped), "\"{part}\" is not in {problem}");
        }
    }
}

/// Lower case, one line, no final full stop.
#[track_caller]
fn check_style(text: &str) {
    assert!(!text.starts_with(char::is_uppercase), "{text}");
    assert!(!text.ends_with('.') && !text.contains('\n') && !text.is_empty(), "{text}");
}

fn place_of(problem: &Value) -> String {
    let part = |key: &str| match &problem[key] {
        Value::Null => None,
        Value::String(text) => Some(text.clone()),
        other => Some(other.to_string()),
    };
    [part("file"), part("line"), part("column")].into_iter().flatten().collect::<Vec<_>>().join(":")
}
