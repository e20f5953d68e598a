//! A machine as a file; the ending of its name says in which format.

use std::path::{Path, PathBuf};

use super::OutputFolder;
use crate::emit::module_name;
use crate::emit::table::table_law;
use crate::machine::{MachineTable, Reading, dot, table_text, terminal_diagram, write_csv, write_kiss2};
use crate::problem::Problem;
use crate::report::state_diagram::state_diagram;

/// A file that a machine will be written to. Its place and its format are known to be good before any long work.
pub(super) struct MachineFile {
    path: PathBuf,
    folder: OutputFolder,
    name: String,
    format: Format,
}

#[derive(Clone, Copy)]
enum Format {
    Kiss2,
    Csv,
    Text,
    Dot,
    Svg,
    Rust,
}

impl Format {
    fn of(path: &Path) -> Result<Self, Problem> {
        match path.extension().and_then(|ending| ending.to_str()).unwrap_or_default() {
            "kiss2" => Ok(Self::Kiss2),
            "csv" => Ok(Self::Csv),
            "txt" => Ok(Self::Text),
            "dot" => Ok(Self::Dot),
            "svg" => Ok(Self::Svg),
            "rs" => Ok(Self::Rust),
            other => Err(Problem::new(format!("\"{other}\" is no format for a machine"))
                .in_file(path)
                .help("end the file in .kiss2, .csv, .txt, .dot, .svg or .rs")),
        }
    }
}

impl MachineFile {
    pub(super) fn prepare(path: &Path) -> Result<Self, Problem> {
        let format = Format::of(path)?;
        let (folder, name) = OutputFolder::of_file(path)?;
        Ok(Self { path: path.to_path_buf(), folder, name, format })
    }

    /// Writes the machine, minimised.
    pub(super) fn write(self, machine: &MachineTable) -> Result<Vec<PathBuf>, Problem> {
        let text = self.text(&machine.minimised().machine)?;
        let mut files = self.folder.stage();
        files.add(&self.name, |out| out.write_all(text.as_bytes()))?;
        files.commit()
    }

    fn text(&self, machine: &MachineTable) -> Result<String, Problem> {
        let refused = |message: String| Problem::new(message).in_file(&self.path);
        match self.format {
            Format::Kiss2 => Ok(write_kiss2(machine, Reading::Moore)),
            Format::Csv => Ok(write_csv(machine, Reading::Moore)),
            Format::Text => {
                let diagram = terminal_diagram(machine).map_or(String::new(), |drawn| format!("\n{drawn}"));
                Ok(format!("{}{diagram}", table_text(machine)))
            }
            Format::Dot => Ok(dot(machine)),
            Format::Svg => state_diagram(machine, "machine").ok_or_else(|| {
                refused(format!("a diagram of {} states cannot be read", machine.len()))
                    .help("write it as .dot or .kiss2 instead")
            }),
            Format::Rust => table_law(machine, &constant_name(&self.path))
                .map_err(|error| Problem::told(error).in_file(&self.path)),
        }
    }
}

/// The name of the table in the module: that of the file, as constants are written.
fn constant_name(path: &Path) -> String {
    let stem = path.file_stem().and_then(|stem| stem.to_str()).unwrap_or("logic");
    module_name(stem).to_uppercase()
}
