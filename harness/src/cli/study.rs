//! `harness study`: the main job, from recordings and a requirement to a proven configuration.

use std::path::PathBuf;

use clap::Args;
use indicatif::ProgressBar;

use super::input::Input;
use super::preference::PreferenceOption;
use super::recordings::RequirementInput;
use super::report::{ReportOption, origin};
use super::study_answer::StudyAnswer;
use super::{Answer, Failure, OutputFolder, Session};
use crate::clock_range::{ClockQuestion, clock_range};
use crate::emit::{module_name, rust_module};
use crate::problem::Problem;
use crate::report::html;
use crate::report::json;
use crate::requirement::Requirement;
use crate::study::{Study, StudyError};

/// From recordings and a requirement to a proven, compilable configuration.
#[derive(Args, Clone, PartialEq, Debug, Default)]
#[command(
    long_about = "Characterises the recordings, chooses tick period, law and parameters for the requirement, \
                  proves the choice for every waveform inside the stated envelope, checks that the recordings \
                  lie inside it, and writes report, results and a Rust configuration. Without any argument it does \
                  so for the built-in demo recording, which is invented.",
    after_help = StudyArguments::EXAMPLES
)]
pub struct StudyArguments {
    /// Recordings and requirement.
    #[command(flatten)]
    pub input: RequirementInput,
    /// What counts most.
    #[command(flatten)]
    pub preference: PreferenceOption,
    /// Folder for the results; made if it is not there
    #[arg(long, short, value_name = "FOLDER")]
    pub output: Option<PathBuf>,
    /// The report.
    #[command(flatten)]
    pub report: ReportOption,
}

impl StudyArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  The built-in demo:
    harness study
  A recording, with the one figure that matters:
    harness study gate.vcd --channel top.gate --latency \"20 ms\"
  Everything from a requirement file, results into a folder:
    harness study --requirement contact.toml --output results";
}

impl StudyArguments {
    /// Runs the command.
    pub(super) fn run(&self, session: &Session) -> Result<Box<dyn Answer>, Failure> {
        let input = Input::or_demo(&self.input, session)?;
        // A folder that cannot be written must not cost a long wait first.
        let folder = self.output.as_ref().map(OutputFolder::prepare).transpose()?;
        let report = self.report.prepare()?;
        let wanted = folder.is_some() || report.is_some();
        let files = if wanted { input.files()? } else { Vec::new() };
        let bar = judging(session, &input.requirement);
        let study = Study::of(input.observed, &input.requirement, self.preference.into(), |_| bar.inc(1))
            .map_err(failure)?;
        bar.finish_and_clear();
        for caution in study.cautions() {
            session.warn(&caution.to_string());
        }
        let html = wanted.then(|| {
            let range = clock_range(&ClockQuestion::of(&study.resolved));
            html::study(&study, &range, input.demo, &origin(session, files))
        });
        let html = html.unwrap_or_default();
        let mut written = match folder {
            Some(folder) => write(&study, &html, folder)?,
            None => Vec::new(),
        };
        if let Some(report) = report {
            written.push(report.write_html(&html)?);
        }
        Ok(Box::new(StudyAnswer { study, demo: input.demo, written }))
    }
}

/// A bar for the tick periods that are tried one after the other.
pub(super) fn judging(session: &Session, requirement: &Requirement) -> ProgressBar {
    session.progress("judging candidates", requirement.tick_periods().value.len() as u64)
}

pub(super) fn failure(error: StudyError) -> Failure {
    match error {
        StudyError::Requirement(problems) => problems.into(),
        StudyError::NoClock { reason } => {
            let problem = Problem::new(format!("no tick period serves the requirement: {reason}"));
            problem.help("add a shorter period with --tick or under [clock], or state a longer quiet").into()
        }
        other => Problem::told(other).into(),
    }
}

/// The report, the results as JSON, and the module where something holds.
fn write(study: &Study, html: &str, folder: OutputFolder) -> Result<Vec<PathBuf>, Failure> {
    let mut files = folder.stage();
    files.add("report.html", |out| out.write_all(html.as_bytes()))?;
    files.add("study.json", |out| {
        serde_json::to_writer_pretty(&mut *out, &json::study(study))?;
        out.write_all(b"\n")
    })?;
    if let Some(configuration) = study.configuration().filter(|_| study.holds()) {
        let module = rust_module(&configuration).map_err(|error| {
            Problem::new(format!("the recommended configuration does not keep the requirement: {error}"))
        })?;
        let name = format!("{}.rs", module_name(&configuration.name));
        files.add(&name, |out| out.write_all(module.as_bytes()))?;
    }
    Ok(files.commit()?)
}
