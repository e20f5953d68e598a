//! `harness manual`: the manual pages, made from the same text as `--help`.

use std::io::{self, Write};
use std::path::PathBuf;

use clap::Args;
use clap_mangen::Man;
use serde_json::{Value, json};

use super::lines::Lines;
use super::run::command_line;
use super::{Answer, Failure, Outcome, OutputFolder, Session};
use crate::nearest::nearest;
use crate::problem::Problem;

/// Prints or writes the manual pages.
#[derive(Args, Clone, PartialEq, Eq, Debug, Default)]
#[command(
    long_about = "Prints the manual page of harness or of one of its commands, as roff; or writes all of them into \
                  a folder, such as share/man/man1 of where harness is installed.",
    after_help = ManualArguments::EXAMPLES
)]
pub struct ManualArguments {
    /// The command whose page is printed; that of harness itself without it
    #[arg(value_name = "COMMAND", conflicts_with = "output")]
    pub command: Option<String>,
    /// Folder for all pages; made if it is not there
    #[arg(long, short, value_name = "FOLDER")]
    pub output: Option<PathBuf>,
}

impl ManualArguments {
    /// Shown below the options.
    pub const EXAMPLES: &'static str = "\
Examples:
  The page of harness itself; read it with `harness manual | man -l -`:
    harness manual
  The page of one command:
    harness manual study
  All pages, where man looks for them:
    harness manual --output man1";

    /// Runs the command.
    pub(super) fn run(&self, _: &Session) -> Result<Box<dyn Answer>, Failure> {
        let pages = pages().map_err(|error| Problem::told(format!("a page cannot be made: {error}")))?;
        if let Some(folder) = &self.output {
            let mut files = OutputFolder::prepare(folder)?.stage();
            for page in &pages {
                files.add(&page.name, |out| out.write_all(&page.text))?;
            }
            return Ok(Box::new(Manual { page: None, written: files.commit()? }));
        }
        let wanted =
            self.command.as_ref().map_or("harness.1".to_owned(), |command| format!("harness-{command}.1"));
        let known: Vec<String> = pages.iter().map(|page| page.name.clone()).collect();
        let Some(page) = pages.into_iter().find(|page| page.name == wanted) else {
            return Err(unknown(self.command.as_deref().unwrap_or_default(), &known).into());
        };
        Ok(Box::new(Manual { page: Some(page), written: Vec::new() }))
    }
}

fn unknown(command: &str, pages: &[String]) -> Problem {
    let commands: Vec<&str> =
        pages.iter().filter_map(|page| page.strip_prefix("harness-")?.strip_suffix(".1")).collect();
    let help = match nearest(command, commands.iter().copied()) {
        Some(known) => format!("write {known}"),
        None => format!("the commands are {}", commands.join(", ")),
    };
    Problem::new(format!("\"{command}\" is not a command")).help(help)
}

/// One page: the name of its file, and its text.
struct Page {
    name: String,
    text: Vec<u8>,
}

/// The page of harness, then one for each command.
fn pages() -> io::Result<Vec<Page>> {
    let mut command = command_line();
    command.build();
    let page = |command: clap::Command| -> io::Result<Page> {
        let man = Man::new(command);
        let mut text = Vec::new();
        man.render(&mut text)?;
        Ok(Page { name: man.get_filename(), text })
    };
    let mut pages = vec![page(command.clone())?];
    for sub in command.get_subcommands() {
        pages.push(page(sub.clone())?);
    }
    Ok(pages)
}

struct Manual {
    page: Option<Page>,
    written: Vec<PathBuf>,
}

impl Answer for Manual {
    fn outcome(&self) -> Outcome {
        Outcome::Holds
    }

    fn write_text(&self, out: &mut dyn Write) -> io::Result<()> {
        match &self.page {
            Some(page) => out.write_all(&page.text),
            None => {
                let files: Vec<String> = self.written.iter().map(|path| path.display().to_string()).collect();
                Lines::new(out).item("Written", &files.join(", "))
            }
        }
    }

    fn to_json(&self) -> Value {
        json!({
            "page": self.page.as_ref().map(|page| String::from_utf8_lossy(&page.text)),
            "written": self.written.iter().map(|path| path.display().to_string()).collect::<Value>(),
        })
    }
}
