//! `harness emit`: the Rust configuration for the firmware.

use std::io::{self, Write};
use std::path::{Path, PathBuf};

use clap::Args;
use serde_json::{Value, json};

use super::input::Input;
use super::lines::Lines;
use super::preference::PreferenceOption;
use super::recordings::RequirementInput;
use super::study::{failure, judging};
use super::study_answer::nothing_holds;
use super::{Answer, Failure, Outcome, OutputFolder, Session};
use crate::emit::rust_module;
use crate::law_text::LawParameters;
use crate::logic::Logic;
use crate::problem::Problem;
use crate::report::json as report;
use crate::study::Study;

/// Writes the Rust configuration for the firmware.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Writes a Rust module with documented constants, a ready-made type and assertions that fail to \
                  compile when someone edits the parameters out of the requirement. Without --law the best \
                  candidate for the requirement is taken; with it, that law is proved first, and nothing is \
                  written unless the requirement holds.",
    after_help = EmitArguments::EXAMPLES
)]
pub struct EmitArguments {
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
    /// The law with its parameters in ticks, in place of the best candidate, at the best of the tick periods
    #[arg(long, value_name = "LAW")]
    pub law: Option<LawParameters>,
    /// What counts most.
    #[command(flatten)]
    pub preference: PreferenceOption,
    /// The file to write; standard output without it
    #[arg(long, short, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

impl EmitArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  The best candidate for a requirement file:
    harness emit --requirement contact.toml --output src/gate.rs
  A law of your own choice:
    harness emit --requirement contact.toml --law \"integrator 5\" --tick \"1 ms\" \\
      --output src/gate.rs
  From figures alone, to standard output:
    harness emit --name \"sluice gate\" --bounce \"5 ms\" --latency \"20 ms\"";
}

impl EmitArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        self.input.recordings.iter().try_for_each(|path| no_law(path))?;
        let input = Input::with_or_without_recordings(&self.input, session)?;
        let file = self.output.as_deref().map(OutputFolder::of_file).transpose()?;
        if let Some(law) = &self.law {
            // A law that cannot be is bad input, and not a candidate that fails.
            Logic::try_new(law).map_err(|error| Problem::told(format!("{law}: {error}")))?;
        }
        // What the requirement file says was shipped is made again, unless a law or a tick is typed.
        let (requirement, shipped) = match (&self.law, self.input.requirement.tick.is_empty()) {
            (None, true) => input.requirement.as_shipped(),
            _ => (input.requirement, None),
        };
        let only = self.law.or(shipped).map(|law| vec![law]);
        let bar = judging(session, &requirement);
        let study = Study::among(input.observed, &requirement, self.preference.into(), only, |_| bar.inc(1))
            .map_err(failure)?;
        bar.finish_and_clear();
        let Some(configuration) = study.configuration() else {
            return Ok(Box::new(Emitted { study, module: None, written: None }));
        };
        let module = rust_module(&configuration).map_err(Problem::told)?;
        let mut written = None;
        if let Some((folder, name)) = file {
            let mut files = folder.stage();
            files.add(&name, |out| out.write_all(module.as_bytes()))?;
            written = files.commit()?.pop();
        }
        Ok(Box::new(Emitted { study, module: Some(module), written }))
    }
}

/// Refuses a law in the place of a recording, where other commands take it.
fn no_law(path: &Path) -> Result<(), Problem> {
    let text = path.to_string_lossy();
    if path.exists() || text.parse::<LawParameters>().is_err() {
        return Ok(());
    }
    let problem = Problem::new(format!("\"{text}\" stands where a recording does, and reads as a law"));
    Err(problem.help(format!("give --law \"{text}\"")))
}

/// A module, or why there is none.
struct Emitted {
    study: Study,
    module: Option<String>,
    written: Option<PathBuf>,
}

impl Answer for Emitted {
    fn outcome(&self) -> Outcome {
        if self.module.is_some() { Outcome::Holds } else { Outcome::DoesNotHold }
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        match (&self.module, &self.written) {
            (Some(module), None) => lines.plain(module),
            (Some(_), Some(path)) => lines.item("Written", &path.display().to_string()),
            (None, _) => nothing_holds(&mut lines, &self.study),
        }
    }

    fn to_json(&self) -> Value {
        json!({
            "choice": report::ranking(&self.study.ranking),
            "module": self.module,
            "written": self.written.as_ref().map(|path| path.display().to_string()),
        })
    }
}
