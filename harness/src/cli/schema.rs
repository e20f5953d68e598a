//! `harness schema`: the JSON Schema of what a command prints with `--json`.

use std::io::{self, Write};

use clap::Args;
use clap::builder::PossibleValuesParser;
use serde_json::{Value, json};

use super::{Answer, Failure, Outcome, Session};
use crate::schema::{bundled, names};

/// Prints the JSON Schema of what a command prints with --json.
#[derive(Args, Clone, PartialEq, Eq, Debug)]
#[command(
    long_about = "Prints the JSON Schema (draft 2020-12) of the document that a command prints with --json. Its \
                  version stands in every document as `schema` and goes up when a field changes its meaning or \
                  goes away; new fields may come at any time.",
    after_help = SchemaArguments::EXAMPLES
)]
pub struct SchemaArguments {
    /// The command; `usage` is for a slip in what was typed
    #[arg(value_name = "COMMAND", value_parser = PossibleValuesParser::new(names()))]
    pub command: String,
}

impl SchemaArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  Of the main job:
    harness schema study
  Of what continuous integration reads:
    harness schema recheck
  Of the answer to something that cannot be understood:
    harness schema usage";

    /// Runs the command.
    pub(super) fn run(&self, _: &Session) -> Result<Box<dyn Answer>, Failure> {
        Ok(Box::new(Published(bundled(&self.command).unwrap_or_default())))
    }
}

struct Published(Value);

impl Answer for Published {
    fn outcome(&self) -> Outcome {
        Outcome::Holds
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        serde_json::to_writer_pretty(&mut *out, &self.0)?;
        out.write_all(b"\n")
    }

    fn to_json(&self) -> Value {
        json!({ "json_schema": self.0 })
    }
}
