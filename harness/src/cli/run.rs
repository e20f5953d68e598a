//! From what was typed to an exit code.

use std::ffi::OsString;
use std::process::ExitCode;

use clap::error::ErrorKind;
use clap::{CommandFactory, Parser, Subcommand};

use super::session::{print_problems, to_stderr, to_stdout};
use super::shell::shell_line;
use super::{
    Answer, CharacteriseArguments, ChooseArguments, CompareArguments, CompletionsArguments, EmitArguments,
    Failure, GenerateArguments, GlobalOptions, LimitArguments, ManualArguments, NetworkArguments,
    ProveArguments, RecheckArguments, ReplayArguments, SchemaArguments, Session, StudyArguments,
};
use crate::problem::Problem;

/// The workbench for mechanical contacts: from a recording to a proven debouncer.
#[derive(Parser, Debug)]
#[command(
    name = "harness",
    version,
    after_help = "Exit codes: 0 holds, 1 does not hold, 2 bad input or usage.",
    disable_help_subcommand = true,
    max_term_width = 80
)]
pub(super) struct CommandLine {
    #[command(flatten)]
    global: GlobalOptions,
    #[command(subcommand)]
    command: Option<Command>,
}

/// The commands whose parts are all there.
#[derive(Subcommand, Debug)]
enum Command {
    Study(StudyArguments),
    Characterise(CharacteriseArguments),
    Choose(ChooseArguments),
    Prove(ProveArguments),
    Limit(LimitArguments),
    Compare(CompareArguments),
    Replay(ReplayArguments),
    Network(NetworkArguments),
    Generate(GenerateArguments),
    Emit(EmitArguments),
    Recheck(RecheckArguments),
    Schema(SchemaArguments),
    Completions(CompletionsArguments),
    Manual(ManualArguments),
}

impl Command {
    const fn name(&self) -> &'static str {
        match self {
            Self::Study(_) => "study",
            Self::Characterise(_) => "characterise",
            Self::Choose(_) => "choose",
            Self::Prove(_) => "prove",
            Self::Limit(_) => "limit",
            Self::Compare(_) => "compare",
            Self::Replay(_) => "replay",
            Self::Network(_) => "network",
            Self::Generate(_) => "generate",
            Self::Emit(_) => "emit",
            Self::Recheck(_) => "recheck",
            Self::Schema(_) => "schema",
            Self::Completions(_) => "completions",
            Self::Manual(_) => "manual",
        }
    }

    fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        match self {
            Self::Study(arguments) => arguments.run(session),
            Self::Characterise(arguments) => arguments.run(session),
            Self::Choose(arguments) => arguments.run(session),
            Self::Prove(arguments) => arguments.run(session),
            Self::Limit(arguments) => arguments.run(session),
            Self::Compare(arguments) => arguments.run(session),
            Self::Replay(arguments) => arguments.run(session),
            Self::Network(arguments) => arguments.run(session),
            Self::Generate(arguments) => arguments.run(session),
            Self::Emit(arguments) => arguments.run(session),
            Self::Recheck(arguments) => arguments.run(session),
            Self::Schema(arguments) => arguments.run(session),
            Self::Completions(arguments) => arguments.run(session),
            Self::Manual(arguments) => arguments.run(session),
        }
    }
}

/// Runs the command line `arguments`, the first of which is the name of the program.
pub fn run(arguments: impl IntoIterator<Item = OsString>) -> ExitCode {
    let arguments: Vec<OsString> = arguments.into_iter().collect();
    let line = match CommandLine::try_parse_from(&arguments) {
        Ok(line) => line,
        Err(error) => {
            let error = below_zero(&arguments).unwrap_or(error);
            return usage(&error, arguments.iter().any(|argument| argument == "--json"));
        }
    };
    let Some(command) = line.command else {
        return end(first_steps(), 0);
    };
    let typed = shell_line(arguments.iter().map(|word| word.to_string_lossy().into_owned()));
    let session = Session::new(command.name(), line.global, typed);
    let (printed, code) = match command.run(&session) {
        Ok(answer) => (session.print(answer.as_ref()), answer.outcome().code()),
        Err(failure) => (session.print_failure(&failure), Failure::CODE),
    };
    end(printed, code)
}

/// What is wrong with a value such as "-3 ms": it looks like an option, and being told so helps nobody.
fn below_zero(arguments: &[OsString]) -> Option<clap::Error> {
    let is_value = |word: &str| {
        word.strip_prefix('-').is_some_and(|rest| rest.starts_with(|c: char| c.is_ascii_digit()))
    };
    let mut joined: Vec<OsString> = Vec::new();
    for argument in arguments {
        let before = joined.last_mut().filter(|before| before.to_string_lossy().starts_with("--"));
        match before.filter(|_| argument.to_str().is_some_and(is_value)) {
            Some(option) => {
                option.push("=");
                option.push(argument);
            }
            None => joined.push(argument.clone()),
        }
    }
    CommandLine::try_parse_from(joined).err().filter(|error| error.kind() == ErrorKind::ValueValidation)
}

/// The exit code, unless the output was lost.
fn end(printed: Result<(), Failure>, code: u8) -> ExitCode {
    match printed {
        Ok(()) => ExitCode::from(code),
        Err(failure) => {
            // Standard error is all that is left; if that is closed too, the exit code stays.
            drop(to_stderr(&failure.rendered()));
            failure.into()
        }
    }
}

/// Help and version go to standard output, a slip to standard error and, for a program, as a document as well.
fn usage(error: &clap::Error, wants_json: bool) -> ExitCode {
    let rendered = error.render();
    if matches!(error.kind(), ErrorKind::DisplayHelp | ErrorKind::DisplayVersion) {
        return end(to_stdout(|out| write!(out, "{}", rendered.ansi())), 0);
    }
    drop(to_stderr(&rendered.ansi().to_string()));
    if !wants_json {
        return ExitCode::from(Failure::CODE);
    }
    let text = rendered.to_string();
    let mut paragraphs = text.split("\n\n").map(|paragraph| paragraph.trim().trim_start_matches("error: "));
    let problem = Problem::told(paragraphs.next().unwrap_or_default().replace("\n ", ""));
    let problem = paragraphs.fold(problem, Problem::help);
    end(print_problems("usage", &problem.into()), Failure::CODE)
}

/// What to do first, for someone who typed nothing but the name.
fn first_steps() -> Result<(), Failure> {
    to_stdout(|out| {
        writeln!(out, "Start with the built-in demo:  harness study")?;
        writeln!(out, "Then with your own recording:  harness study gate.vcd --latency \"20 ms\"")?;
        writeln!(out, "Once it is shipped, in CI:     harness recheck contact.toml\n")?;
        writeln!(out, "harness --help lists the commands; harness COMMAND --help shows three examples")
    })
}

/// The whole command line, for what is made from it.
pub(super) fn command_line() -> clap::Command {
    CommandLine::command()
}
