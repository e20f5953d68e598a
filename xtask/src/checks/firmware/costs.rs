//! Instructions, flash and RAM of a tick: measured, and no more than the table says.

use std::fs;
use std::process::Command;

use super::emulator::{ALL, Machine, Time};
use super::table::{self, Row};
use super::{RIG, image, version};
use crate::session::{Session, output_of, say};

/// The exact numbers, below the root.
const NUMBERS: &str = "examples/firmware-checks/costs.txt";
/// The same as a section of the crate's documentation.
const SECTION: &str = "debounce-core/COST.md";

pub(super) fn check(session: &mut Session) {
    let root = Session::root();
    let read = |path: &str| {
        fs::read_to_string(root.join(path)).map_err(|error| format!("cannot read {path}: {error}"))
    };
    let compared = measured().and_then(|(tools, rows)| {
        let numbers = read(NUMBERS)?;
        let (stated_tools, stated) = table::read(&numbers)?;
        let mut faults = table::faults(&stated, &rows);
        if !faults.is_empty() && stated_tools != tools {
            faults.push(format!(
                "the table was measured with {}; here are {}; `cargo xtask update-costs` writes it anew",
                stated_tools.join(", "),
                tools.join(", ")
            ));
        }
        if read(SECTION)? != table::section(&stated_tools, &stated) {
            faults.push(format!(
                "{SECTION} is not what {NUMBERS} says; `cargo xtask update-costs` writes both"
            ));
        }
        Ok((faults, table::savings(&stated, &rows)))
    });
    match compared {
        Ok((faults, savings)) => {
            if faults.is_empty() {
                say("no tick takes more instructions, flash or RAM than the table says");
            }
            faults.into_iter().for_each(|fault| session.fail(fault));
            savings.into_iter().for_each(|saving| say(&saving));
        }
        Err(message) => session.fail(message),
    }
}

pub(super) fn update(session: &mut Session) {
    let written = measured().and_then(|(tools, rows)| {
        let write = |path: &str, text: String| {
            fs::write(Session::root().join(path), text)
                .map_err(|error| format!("cannot write {path}: {error}"))
        };
        write(NUMBERS, table::write(&tools, &rows))?;
        write(SECTION, table::section(&tools, &rows))
    });
    if session.expect(written) {
        say(&format!("{NUMBERS} and {SECTION} are written"));
    }
}

/// The tools, and a row for everything that was measured.
fn measured() -> Result<(Vec<String>, Vec<Row>), String> {
    let tools = vec![
        version("rustc")?,
        version(&ALL[0].tool("gcc"))?,
        version(&ALL[2].tool("gcc"))?,
        ALL[0].version()?,
    ];
    let mut rows = Vec::new();
    for machine in ALL {
        let printed = machine.run(&image(machine, "cost"), Time::Counted)?;
        let sizes = sizes(machine)?;
        let mut lines = printed.lines();
        let ticks = format!("ticks {}", table::TICKS);
        if lines.next() != Some(&ticks) {
            return Err(format!("{}: the image of {RIG}/cost does not begin with \"{ticks}\"", machine.name));
        }
        for line in lines {
            rows.push(Row::printed(machine.name, line, &sizes)?);
        }
    }
    Ok((tools, rows))
}

/// The bytes of every function whose name begins with `cost_`.
fn sizes(machine: &Machine) -> Result<Vec<(String, u32)>, String> {
    let symbols = output_of(Command::new(machine.tool("nm")).arg("-S").arg(image(machine, "cost")))?;
    let sized = symbols.lines().filter_map(|line| {
        let mut words = line.split_whitespace().skip(1);
        let (size, _, name) = (words.next()?, words.next()?, words.next()?);
        Some((name.strip_prefix("cost_")?.to_owned(), u32::from_str_radix(size, 16).ok()?))
    });
    Ok(sized.collect())
}
