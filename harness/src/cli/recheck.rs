//! `harness recheck`: every claim of a requirement file, checked again.

use std::fs::{self, File};
use std::io::{self, Write};
use std::path::{Path, PathBuf};

use clap::Args;
use serde_json::{Value, json};

use super::input::Input;
use super::lines::{Lines, strong};
use super::recordings::RequirementInput;
use super::report::written;
use super::study::failure;
use super::{Answer, Failure, Outcome, OutputFolder, ReadingOptions, Session, faults};
use crate::choose::Preference;
use crate::digest::Digest;
use crate::logic::Logic;
use crate::problem::Problem;
use crate::quantity::Time;
use crate::recheck::{FileDigest, Recheck, ShippedModule, junit, markdown, recheck};
use crate::report::words;
use crate::requirement::{Requirement, RequirementOptions};
use crate::study::Study;

/// Checks every claim of requirement files again.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Checks again what a requirement file claims: that its recordings can be read, are unchanged where \
                  their SHA-256 is stated, and lie inside the envelope; that the law reports every operation, in \
                  time and within the budget; and that the generated module named under [firmware] is still what \
                  the requirement gives. It says which claim broke and by how much. Meant for continuous \
                  integration.",
    after_help = RecheckArguments::EXAMPLES
)]
pub struct RecheckArguments {
    /// Requirement files
    #[arg(value_name = "FILE", required = true)]
    pub files: Vec<PathBuf>,
    /// Where the answer is written as JUnit XML
    #[arg(long, value_name = "FILE")]
    pub junit: Option<PathBuf>,
    /// Where the answer is written in Markdown, for a pull request
    #[arg(long, value_name = "FILE")]
    pub summary: Option<PathBuf>,
    /// The rest that ends a burst of bounce; found from each recording without it
    #[arg(long, value_name = "TIME", help_heading = "Recordings")]
    pub gap: Option<Time>,
    /// How the recordings are read.
    #[command(flatten)]
    pub reading: ReadingOptions,
}

impl RecheckArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  One contact:
    harness recheck contact.toml
  All inputs of a firmware, with files for continuous integration:
    harness recheck gate/contact.toml door/contact.toml --junit recheck.xml \\
      --summary recheck.md
  For a program, with the sample period of the recorder:
    harness recheck contact.toml --resolution \"1 us\" --json";

    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        // A file that cannot be written must not cost a long wait first.
        let junit = self.junit.as_deref().map(OutputFolder::of_file).transpose()?;
        let summary = self.summary.as_deref().map(OutputFolder::of_file).transpose()?;
        let answers = match self.answers(session) {
            Ok(answers) => answers,
            Err(failure) => {
                if let Some(file) = junit {
                    write(file, &junit::failure(failure.problems().iter()).map_err(Problem::told)?)?;
                }
                return Err(failure);
            }
        };
        let mut written = Vec::new();
        if let Some(file) = junit {
            written.extend(write(file, &junit::answers(&answers).map_err(Problem::told)?)?);
        }
        if let Some(file) = summary {
            written.extend(write(file, &markdown::summary(&answers))?);
        }
        Ok(Box::new(Rechecked { answers, written }))
    }

    /// The answers, or everything that is wrong with any of the files.
    fn answers(&self, session: &Session) -> Result<Vec<Recheck>, Failure> {
        let (mut answers, mut problems) = (Vec::new(), Vec::new());
        let bar = session.progress("checking again", self.files.len() as u64);
        for file in &self.files {
            match self.one(file, session) {
                Ok(answer) => answers.push(answer),
                Err(failure) => problems.extend(failure.problems().iter().cloned()),
            }
            bar.inc(1);
        }
        bar.finish_and_clear();
        if problems.is_empty() { Ok(answers) } else { Err(Failure::from_found(problems)) }
    }

    fn one(&self, file: &Path, session: &Session) -> Result<Recheck, Failure> {
        let input = RequirementInput {
            gap: self.gap,
            reading: self.reading.clone(),
            requirement: RequirementOptions {
                requirement: Some(file.to_path_buf()),
                ..RequirementOptions::default()
            },
            ..RequirementInput::default()
        };
        let Input { requirement, observed, .. } = Input::with_or_without_recordings(&input, session)?;
        let module = module(&requirement)?;
        let digests = digests(&requirement)?;
        let (mut shipped, law) = requirement.as_shipped();
        // Its tick is a claim to be judged, not a reason to choose another.
        shipped.budget.fastest_tick = None;
        if let Some(law) = law {
            Logic::try_new(&law).map_err(|error| refused_law(&requirement, &format!("{law}: {error}")))?;
        }
        let only = law.map(|law| vec![law]);
        let study = Study::among(observed, &shipped, Preference::default(), only, |_| {}).map_err(failure)?;
        Ok(recheck(file.display().to_string(), &requirement, &study, digests, module.as_ref()))
    }
}

fn refused_law(requirement: &Requirement, told: &str) -> Problem {
    let problem = Problem::told(told);
    let span = requirement.firmware.as_ref().and_then(|firmware| firmware.law?.origin.span());
    match (requirement.source(), span) {
        (Some(source), Some(span)) => problem.mark(source, span, ""),
        _ => problem,
    }
}

/// The module in the firmware tree, where the requirement names one.
fn module(requirement: &Requirement) -> Result<Option<ShippedModule>, Problem> {
    let Some(firmware) = &requirement.firmware else { return Ok(None) };
    let path = &firmware.module.value;
    let text = fs::read_to_string(path).map_err(|error| {
        let problem = faults::unreadable("generated module", path, &error);
        let from =
            requirement.source().map_or("contact.toml".into(), |source| source.path().display().to_string());
        problem.help(format!("`harness emit --requirement {from} --output {}` writes it", path.display()))
    })?;
    Ok(Some(ShippedModule { path: requirement.as_written(path).to_path_buf(), text }))
}

/// What tells the recordings from any other files.
fn digests(requirement: &Requirement) -> Result<Vec<FileDigest>, Failure> {
    let digest = |path: &Path| -> Result<FileDigest, Problem> {
        let found = File::open(path).and_then(Digest::of);
        let Digest { sha256, .. } = found.map_err(|error| faults::unreadable("recording", path, &error))?;
        Ok(FileDigest { name: requirement.as_written(path).display().to_string(), sha256 })
    };
    requirement.recordings.iter().map(|one| Ok(digest(&one.path.value)?)).collect()
}

fn write((folder, name): (OutputFolder, String), text: &str) -> Result<Vec<PathBuf>, Problem> {
    let mut files = folder.stage();
    files.add(&name, |out| out.write_all(text.as_bytes()))?;
    files.commit()
}

/// All answers.
struct Rechecked {
    answers: Vec<Recheck>,
    written: Vec<PathBuf>,
}

impl Answer for Rechecked {
    fn outcome(&self) -> Outcome {
        if self.answers.iter().all(Recheck::holds) { Outcome::Holds } else { Outcome::DoesNotHold }
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        let mut lines = Lines::new(out);
        for (index, answer) in self.answers.iter().enumerate() {
            if index > 0 {
                lines.plain("\n")?;
            }
            one(&mut lines, answer)?;
        }
        written(&mut lines, &self.written)
    }

    fn to_json(&self) -> Value {
        json!({
            "checked": self.answers.iter().map(answer_json).collect::<Value>(),
            "written": self.written.iter().map(|path| path.display().to_string()).collect::<Value>(),
        })
    }
}

fn one(lines: &mut Lines<'_>, answer: &Recheck) -> io::Result<()> {
    lines.title(&format!("{}  ({})", answer.contact, answer.requirement))?;
    for claim in &answer.claims {
        let label = match claim.word() {
            "holds" => "Holds",
            "broken" => "Broken",
            _ => "Open",
        };
        if claim.is_broken() {
            lines.item(label, &strong(&claim.claimed))?;
            for remark in claim.remarks() {
                lines.more(remark)?;
            }
        } else {
            lines.item(label, &format!("{}: {}", claim.claimed, claim.remarks().join("; ")))?;
        }
    }
    if let Some(caution) = answer.caution {
        lines.item("Caution", caution)?;
    }
    let all = words::count(answer.claims.len(), "claim");
    let verdict = match answer.broken() {
        0 => format!("all {all} hold"),
        1 => format!("1 of {all} is broken"),
        more => format!("{more} of {all} are broken"),
    };
    lines.item("Together", &strong(&verdict))
}

fn answer_json(answer: &Recheck) -> Value {
    let claims = answer.claims.iter().map(|claim| {
        json!({
            "subject": claim.subject.word(),
            "claim": claim.claimed,
            "standing": claim.word(),
            "remarks": claim.remarks(),
        })
    });
    let recordings = answer.recordings.iter().map(|file| json!({ "path": file.name, "sha256": file.sha256 }));
    json!({
        "requirement": answer.requirement,
        "contact": answer.contact,
        "broken": answer.broken(),
        "claims": claims.collect::<Value>(),
        "recordings": recordings.collect::<Value>(),
        "caution": answer.caution,
    })
}
