//! What every command shares: where output, warnings and progress go.

use std::fmt;
use std::io::{self, BufWriter, IsTerminal, Write};
use std::thread;
use std::time::Duration;

use anstream::AutoStream;
use clap::Args;
use indicatif::{
    HumanDuration, MultiProgress, ProgressBar, ProgressDrawTarget, ProgressFinish, ProgressState,
    ProgressStyle,
};
use serde_json::{Value, json};

use super::ascii::{AsciiOnly, is_ascii_terminal};
use super::lines::Lines;
use super::{Failure, Outcome};
use crate::problem::{Problem, Problems};

/// The version of the JSON output; it goes up when a field changes its meaning or goes away.
pub const SCHEMA: u32 = 1;

/// How long a person waits without asking whether anything happens.
const PATIENCE: Duration = Duration::from_secs(1);

/// Steps with their rate and the time left, in ASCII.
const BAR: &str = "{msg} [{wide_bar}] {percent} %, {per_sec}, {left}";

/// Bytes that are read, in the same way.
const READING: &str = "{msg} [{wide_bar}] {percent} %, {binary_bytes_per_sec}, {left}";

/// Time that passes, in ASCII.
const SPINNER: &str = "{spinner} {msg}, {elapsed} so far";

fn style(template: &str) -> ProgressStyle {
    let style = ProgressStyle::with_template(template).unwrap_or_else(|_| ProgressStyle::default_bar());
    style.progress_chars("#>-").tick_chars("|/-\\ ").with_key("left", time_left)
}

/// The time left, as far as the steps done tell it.
fn time_left(state: &ProgressState, out: &mut dyn fmt::Write) {
    // What cannot be drawn is missed by nobody but the one who looks.
    let _lost = match state.pos() {
        0 => out.write_str("time left not known yet"),
        _ => write!(out, "{} left", HumanDuration(state.eta())),
    };
}

/// Options of every command.
#[derive(Args, Clone, Copy, PartialEq, Eq, Debug, Default)]
pub struct GlobalOptions {
    /// Print one JSON document instead of text
    #[arg(long, global = true)]
    pub json: bool,
    /// Print no warnings and no progress
    #[arg(long, short, global = true)]
    pub quiet: bool,
}

/// What a command has found out, ready to be printed.
pub trait Answer {
    /// Whether what was asked holds.
    fn outcome(&self) -> Outcome;

    /// The answer for a person. Colour codes are welcome: they are stripped where they do not belong.
    ///
    /// # Errors
    /// Those of `out`.
    fn write_text(&self, out: &mut dyn Write) -> io::Result<()>;

    /// The answer for a program.
    fn to_json(&self) -> Value;
}

/// One run of the command.
#[derive(Clone, Debug)]
pub struct Session {
    options: GlobalOptions,
    command: &'static str,
    line: String,
    /// All that are drawn, each on a line of its own.
    bars: MultiProgress,
}

impl Session {
    /// A run of `command`, typed as `line`.
    #[must_use]
    pub fn new(command: &'static str, options: GlobalOptions, line: String) -> Self {
        let bars = MultiProgress::with_draw_target(ProgressDrawTarget::stderr_with_hz(8));
        Self { options, command, line, bars }
    }

    /// The command line, as a shell takes it again.
    #[must_use]
    pub fn line(&self) -> &str {
        &self.line
    }

    /// Tells a person something on standard error, unless they asked for quiet. It ends with what to try.
    pub fn warn(&self, message: &str) {
        if !self.options.quiet {
            // Losing a warning because nobody reads standard error is no reason to lose the answer.
            drop(self.bars.suspend(|| {
                let mut text = Vec::new();
                Lines::new(&mut text).sentence("warning", message)?;
                to_stderr(&String::from_utf8_lossy(&text))
            }));
        }
    }

    /// A progress bar on standard error for `steps` steps; it draws nothing where no person would see it, and
    /// nothing for the first second.
    #[must_use]
    pub fn progress(&self, what: &'static str, steps: u64) -> ProgressBar {
        self.bar(what, Some(steps), BAR)
    }

    /// As [`progress`](Self::progress), for a file of so many bytes.
    #[must_use]
    pub fn reading(&self, bytes: u64) -> ProgressBar {
        self.bar("reading", Some(bytes), READING)
    }

    /// As [`progress`](Self::progress), for work whose end nobody can tell: it shows that time passes.
    #[must_use]
    pub fn waiting(&self, what: &'static str) -> ProgressBar {
        self.bar(what, None, SPINNER)
    }

    /// Does some work whose end nobody can tell, [`waiting`](Self::waiting) meanwhile.
    pub fn during<T>(&self, what: &'static str, work: impl FnOnce() -> T) -> T {
        let bar = self.waiting(what);
        let done = work();
        bar.finish_and_clear();
        done
    }

    fn bar(&self, what: &'static str, steps: Option<u64>, template: &str) -> ProgressBar {
        let bar = ProgressBar::with_draw_target(steps, ProgressDrawTarget::hidden())
            .with_style(style(template))
            .with_message(what)
            // Where the work fails, the refusal takes the place of the bar.
            .with_finish(ProgressFinish::AndClear);
        self.show_later(bar)
    }

    /// Draws the bar where a person sees it, once the work has taken so long that they may wonder.
    fn show_later(&self, bar: ProgressBar) -> ProgressBar {
        if !self.options.quiet && io::stderr().is_terminal() {
            let (later, bars) = (bar.downgrade(), self.bars.clone());
            thread::spawn(move || {
                thread::sleep(PATIENCE);
                if let Some(bar) = later.upgrade().filter(|bar| !bar.is_finished()) {
                    let bar = bars.add(bar);
                    bar.enable_steady_tick(Duration::from_millis(250));
                }
            });
        }
        bar
    }

    /// Prints an answer.
    ///
    /// A reader that went away has seen what it wanted: that ends quietly, and the exit code still tells the
    /// outcome.
    ///
    /// # Errors
    /// Where standard output cannot be written for any other reason.
    pub fn print(&self, answer: &dyn Answer) -> Result<(), Failure> {
        if self.options.json {
            return print_json(&document(self.command, answer.outcome().word(), "result", answer.to_json()));
        }
        to_stdout(|out| answer.write_text(out))
    }

    /// Reports a failure: to a person on standard error and, with `--json`, as a document on standard output.
    ///
    /// # Errors
    /// Where standard output cannot be written.
    pub fn print_failure(&self, failure: &Failure) -> Result<(), Failure> {
        // Nothing is left to tell it to if standard error is closed too; the exit code stays.
        drop(to_stderr(&failure.rendered()));
        if !self.options.json {
            return Ok(());
        }
        print_problems(self.command, failure.problems())
    }
}

/// What was wrong, for a program.
pub(super) fn print_problems(command: &str, problems: &Problems) -> Result<(), Failure> {
    print_json(&document(command, "failed", "problems", problems.iter().map(problem_json).collect()))
}

fn document(command: &str, outcome: &str, key: &str, value: Value) -> Value {
    json!({
        "schema": SCHEMA,
        "version": env!("CARGO_PKG_VERSION"),
        "command": command,
        "outcome": outcome,
        key: value,
    })
}

fn print_json(document: &Value) -> Result<(), Failure> {
    to_stdout(|out| {
        serde_json::to_writer_pretty(&mut *out, document)?;
        out.write_all(b"\n")
    })
}

fn problem_json(problem: &Problem) -> Value {
    let place = problem.line_column();
    json!({
        "message": problem.message(),
        "file": problem.path().map(|path| path.display().to_string()),
        "line": place.map(|(line, _)| line),
        "column": place.map(|(_, column)| column),
        "help": problem.helps(),
    })
}

/// Writes to standard error, colours only on a terminal.
pub(super) fn to_stderr(text: &str) -> io::Result<()> {
    if is_ascii_terminal(&io::stderr()) {
        return AsciiOnly(anstream::stderr()).write_all(text.as_bytes());
    }
    anstream::stderr().write_all(text.as_bytes())
}

/// Writes to standard output, colours only on a terminal; a closed pipe ends quietly.
pub(super) fn to_stdout(write: impl FnOnce(&mut dyn Write) -> io::Result<()>) -> Result<(), Failure> {
    let stdout = io::stdout();
    let mut out = BufWriter::new(AutoStream::auto(stdout.lock()));
    let is_plain = is_ascii_terminal(&stdout);
    let written = if is_plain { write(&mut AsciiOnly(&mut out)) } else { write(&mut out) };
    let result = written.and_then(|()| out.flush());
    // What could not be written is not tried again when the buffer goes.
    drop(out.into_parts());
    match result {
        Err(error) if error.kind() != io::ErrorKind::BrokenPipe => Err(Failure::of_stdout(&error)),
        _ => Ok(()),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn progress_is_ascii_with_rate_and_time_left() {
        for template in [BAR, READING, SPINNER] {
            assert!(ProgressStyle::with_template(template).is_ok() && template.is_ascii(), "{template}");
        }
        assert!(BAR.contains("{per_sec}") && BAR.contains("{left}"));
        assert!(READING.contains("{binary_bytes_per_sec}") && READING.contains("{left}"));
    }

    #[test]
    fn document_of_a_failure_holds_its_place_and_help() {
        let problem = Problem::new("\"12\" has no unit").at("contact.toml", 2, 9).help("write \"12 ms\"");
        let expected = json!({
            "message": "\"12\" has no unit", "file": "contact.toml", "line": 2, "column": 9,
            "help": ["write \"12 ms\""],
        });
        assert_eq!(problem_json(&problem), expected);
        let document = document("choose", "failed", "problems", json!([]));
        assert_eq!(document["schema"], SCHEMA);
        assert_eq!(document["command"], "choose");
        assert_eq!(document["outcome"], "failed");
    }
}
