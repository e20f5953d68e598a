//! Where the report goes, as an option.

use std::io;
use std::path::{Path, PathBuf};

use clap::Args;

use super::lines::Lines;
use super::{Failure, OutputFolder, Session};
use crate::problem::Problem;
use crate::report::html::{Origin, SourceFile};

/// The report of a command.
#[derive(Args, Clone, PartialEq, Eq, Debug, Default)]
pub struct ReportOption {
    /// Where the report is written: one HTML file that needs no other
    #[arg(long, value_name = "FILE")]
    pub report: Option<PathBuf>,
}

impl ReportOption {
    /// Whether a report is asked for.
    pub(super) fn is_wanted(&self) -> bool {
        self.report.is_some()
    }

    /// Makes sure that the file can be written, before any long work begins.
    pub(super) fn prepare(&self) -> Result<Option<ReportFile>, Problem> {
        let Some(path) = &self.report else { return Ok(None) };
        if !ends_as_html(path) {
            return Err(Problem::new("a report is an HTML file")
                .in_file(path)
                .help("end its name in .html, such as report.html"));
        }
        let (folder, name) = OutputFolder::of_file(path)?;
        Ok(Some(ReportFile { folder, name }))
    }
}

fn ends_as_html(path: &Path) -> bool {
    let ending = path.extension().and_then(|ending| ending.to_str()).unwrap_or_default();
    ending.eq_ignore_ascii_case("html") || ending.eq_ignore_ascii_case("htm")
}

/// A place for a report that can be written.
pub(super) struct ReportFile {
    folder: OutputFolder,
    name: String,
}

impl ReportFile {
    /// Writes the report that `html` makes of a run, whole or not at all.
    pub(super) fn write(
        self,
        session: &Session,
        files: Vec<SourceFile>,
        html: impl FnOnce(&Origin) -> String,
    ) -> Result<PathBuf, Failure> {
        self.write_html(&html(&origin(session, files)))
    }

    /// Writes a report, whole or not at all.
    pub(super) fn write_html(self, html: &str) -> Result<PathBuf, Failure> {
        let mut files = self.folder.stage();
        files.add(&self.name, |out| out.write_all(html.as_bytes()))?;
        Ok(files.commit()?.swap_remove(0))
    }
}

/// How a run that read `files` obtained what it reports. No command that reports draws anything at random.
pub(super) fn origin(session: &Session, files: Vec<SourceFile>) -> Origin {
    Origin { command: session.line().to_owned(), files, seeds: Vec::new() }
}

/// The files that a command wrote, where it wrote any.
pub(super) fn written(lines: &mut Lines<'_>, files: &[PathBuf]) -> io::Result<()> {
    if files.is_empty() {
        return Ok(());
    }
    let names: Vec<String> = files.iter().map(|path| path.display().to_string()).collect();
    lines.item("Written", &names.join(", "))
}
