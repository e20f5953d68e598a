//! `harness completions`: what a shell needs to complete command lines.

use std::io::{self, Write};

use clap::Args;
use clap_complete::Shell;
use serde_json::{Value, json};

use super::run::command_line;
use super::{Answer, Failure, Outcome, Session};

/// Prints what a shell needs to complete command lines of harness.
#[derive(Args, Clone, PartialEq, Eq, Debug)]
#[command(
    long_about = "Prints a script for a shell; with it the tabulator key completes commands, options and their \
                  words. Put it where the shell looks for such scripts.",
    after_help = CompletionsArguments::EXAMPLES
)]
pub struct CompletionsArguments {
    /// The shell
    #[arg(value_enum, value_name = "SHELL")]
    pub shell: Shell,
}

impl CompletionsArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  For bash; send it to ~/.local/share/bash-completion/completions/harness:
    harness completions bash
  For zsh; send it to a file _harness in a folder of $fpath:
    harness completions zsh
  For fish; send it to ~/.config/fish/completions/harness.fish:
    harness completions fish";

    /// Runs the command.
    pub(super) fn run(&self, _: &Session) -> Result<Box<dyn Answer>, Failure> {
        let mut script = Vec::new();
        clap_complete::generate(self.shell, &mut command_line(), "harness", &mut script);
        Ok(Box::new(Script { shell: self.shell, text: String::from_utf8_lossy(&script).into_owned() }))
    }
}

struct Script {
    shell: Shell,
    text: String,
}

impl Answer for Script {
    fn outcome(&self) -> Outcome {
        Outcome::Holds
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        out.write_all(self.text.as_bytes())
    }

    fn to_json(&self) -> Value {
        json!({ "shell": self.shell.to_string(), "script": self.text })
    }
}
