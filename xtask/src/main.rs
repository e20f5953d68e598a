//! The chores of this workspace: `cargo xtask verify` runs every check, `cargo xtask check-...` runs one.
#![forbid(unsafe_code)]

mod checks;
mod install;
mod manifest;
mod markdown;
mod session;
mod table;
mod tally;

use std::io::{self, Write};
use std::process::ExitCode;
use std::time::Instant;

use checks::Check;
use session::{Session, give_up, say};
use table::Row;

fn main() -> ExitCode {
    let words: Vec<String> = std::env::args().skip(1).collect();
    let plan = match plan(&words) {
        Ok(plan) => plan,
        Err(message) => {
            eprintln!("error: {message}");
            return ExitCode::from(2);
        }
    };
    let done = if plan.is_empty() { write_help(&mut io::stdout()).map(|()| true) } else { run(&plan) };
    match done {
        Ok(true) => ExitCode::SUCCESS,
        Ok(false) => ExitCode::FAILURE,
        Err(error) => give_up(&error),
    }
}

/// The checks that the words on the command line ask for; none means that help is wanted.
fn plan(words: &[String]) -> Result<Vec<&'static Check>, String> {
    let mut plan = Vec::new();
    for word in words {
        match word.as_str() {
            "help" | "--help" | "-h" => return Ok(Vec::new()),
            "verify" => plan.extend(checks::ALL),
            name => match named().find(|check| check.name == name) {
                Some(check) => plan.push(check),
                None => {
                    let names: Vec<&str> = named().map(|check| check.name).collect();
                    return Err(format!("\"{name}\" is not a chore; use verify, {}", names.join(", ")));
                }
            },
        }
    }
    Ok(plan)
}

/// Everything that has a name of its own.
fn named() -> impl Iterator<Item = &'static Check> {
    checks::ALL.iter().chain(checks::CHORES)
}

/// Runs every check of the plan, whatever the ones before it found, and then reports; true when all passed.
fn run(plan: &[&'static Check]) -> io::Result<bool> {
    let mut session = Session::new();
    let mut rows = Vec::new();
    for check in plan {
        say(&format!("\n==> {}: {}", check.name, check.about));
        let start = Instant::now();
        (check.run)(&mut session);
        rows.push(Row {
            name: check.name,
            seconds: start.elapsed().as_secs_f64(),
            failures: session.take_failures(),
        });
    }
    let mut out = io::stdout().lock();
    table::write(&mut out, &rows)?;
    // Last, alone on its line, so that a machine can read it.
    writeln!(out, "{}", session.tally())?;
    out.flush()?;
    Ok(rows.iter().all(|row| row.failures.is_empty()))
}

fn write_help(out: &mut impl Write) -> io::Result<()> {
    writeln!(out, "usage: cargo xtask <chore>...\n")?;
    writeln!(out, "  {:<16} every check below, in this order", "verify")?;
    for check in named() {
        writeln!(out, "  {:<16} {}", check.name, check.about)?;
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn names(words: &[&str]) -> Result<Vec<&'static str>, String> {
        let words: Vec<String> = words.iter().map(|word| (*word).to_owned()).collect();
        plan(&words).map(|plan| plan.iter().map(|check| check.name).collect())
    }

    #[test]
    fn plan_verify_holds_every_check_in_order() {
        let all: Vec<&str> = checks::ALL.iter().map(|check| check.name).collect();
        assert_eq!(names(&["verify"]), Ok(all));
    }

    #[test]
    fn plan_named_checks_hold_only_those() {
        assert_eq!(names(&["check-docs", "check-format"]), Ok(vec!["check-docs", "check-format"]));
    }

    #[test]
    fn plan_without_words_or_with_help_is_empty() {
        assert_eq!(names(&[]), Ok(vec![]));
        assert_eq!(names(&["verify", "--help"]), Ok(vec![]));
    }

    #[test]
    fn plan_unknown_word_names_it_and_the_choices() {
        let message = names(&["check-everything"]).unwrap_err();
        assert!(
            message.starts_with("\"check-everything\" is not a chore; use verify, check-format"),
            "{message}"
        );
    }

    #[test]
    fn help_lists_every_check_once() {
        let mut text = Vec::new();
        write_help(&mut text).unwrap();
        let text = String::from_utf8(text).unwrap();
        for check in checks::ALL {
            assert_eq!(text.matches(&format!("  {} ", check.name)).count(), 1, "{}", check.name);
        }
    }
}
