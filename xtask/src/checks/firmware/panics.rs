//! Linked images hold no panic.

use std::process::Command;

use super::emulator::{ALL, Machine};
use super::image;
use crate::session::{Session, output_of, say};

/// What only a panic brings into an image: symbols by these words, and this text of the handler.
const WORDS: [&str; 4] = ["panic", "unwrap_failed", "expect_failed", "begin_unwind"];
const TEXT: &str = "this image can panic";

pub(super) fn check(session: &mut Session) {
    match unused() {
        Ok(names) if names.is_empty() => {}
        Ok(names) => session.fail(format!(
            "the image that must hold no panic uses nothing of: {}; add them in examples/firmware-checks/no-panic",
            names.join(", ")
        )),
        Err(message) => session.fail(message),
    }
    for machine in ALL {
        let (uses, twin) = (traces(machine, "uses"), traces(machine, "twin"));
        match uses {
            Ok(found) if found.is_empty() => {
                say(&format!("{}: no panic in the image of every public type", machine.name));
            }
            Ok(found) => session.fail(format!("{}: the image can panic: {}", machine.name, found.join(", "))),
            Err(message) => session.fail(message),
        }
        match twin {
            Ok(found) if found.len() < 2 => {
                session.fail(format!("{}: the panic put in on purpose was not found", machine.name));
            }
            Ok(_) => {}
            Err(message) => session.fail(message),
        }
    }
}

/// Everything in an image that speaks of a panic.
fn traces(machine: &Machine, name: &str) -> Result<Vec<String>, String> {
    let path = image(machine, name);
    let symbols = output_of(Command::new(machine.tool("nm")).arg("-C").arg(&path))?;
    let bytes = std::fs::read(&path).map_err(|error| format!("cannot read {}: {error}", path.display()))?;
    let mut found = suspicious(&symbols);
    if bytes.windows(TEXT.len()).any(|window| window == TEXT.as_bytes()) {
        found.push(format!("\"{TEXT}\""));
    }
    Ok(found)
}

/// The symbols, in the text of `nm`, that only a panic brings.
fn suspicious(symbols: &str) -> Vec<String> {
    let names = symbols.lines().filter_map(|line| line.split_once(' ').map(|(_, name)| name));
    let suspicious = names.filter(|name| WORDS.iter().any(|word| name.contains(word)));
    suspicious.map(|name| name.trim_start_matches(|c: char| c.is_alphabetic()).trim().to_owned()).collect()
}

/// The public types of the core that the image's sources do not name.
fn unused() -> Result<Vec<String>, String> {
    let root = Session::root();
    let read = |path: &str| {
        std::fs::read_to_string(root.join(path)).map_err(|error| format!("cannot read {path}: {error}"))
    };
    let library = read("debounce-core/src/lib.rs")?;
    let mut sources = String::new();
    for file in ["bin/uses.rs", "laws.rs", "meaning.rs", "wiring.rs"] {
        sources += &read(&format!("examples/firmware-checks/no-panic/src/{file}"))?;
    }
    Ok(exported(&library).into_iter().filter(|name| !names(&sources, name)).collect())
}

/// The names that `pub use` gives out.
fn exported(library: &str) -> Vec<String> {
    let uses = library.split("\npub use ").skip(1).filter_map(|rest| rest.split_once(';'));
    let paths = uses.flat_map(|(path, _)| path.split([',', '{', '}']));
    let names = paths.map(|path| path.rsplit("::").next().unwrap_or(path).trim());
    names.filter(|name| !name.is_empty()).map(str::to_owned).collect()
}

/// Whether `name` stands in `text` as a word of its own.
fn names(text: &str, name: &str) -> bool {
    text.split(|c: char| !c.is_alphanumeric() && c != '_').any(|word| word == name)
}

#[cfg(test)]
mod tests {
    use super::{exported, names, suspicious};

    #[test]
    fn symbols_of_a_panic_are_suspicious_and_no_others() {
        let symbols = "\
00000041 T rig_reset
000000fa t core::panicking::panic_bounds_check
0000cd62 t <u32 as core::fmt::Display>::fmt
00000088 T _RNvCs_7___rustc17rust_begin_unwind
";
        assert_eq!(
            suspicious(symbols),
            ["core::panicking::panic_bounds_check", "_RNvCs_7___rustc17rust_begin_unwind"]
        );
        assert!(suspicious("").is_empty());
    }

    #[test]
    fn exported_names_are_read_from_lists_and_single_lines() {
        let library = "mod a;\n\npub use a::{\n    One, Two,\n};\n#[cfg(x)]\npub use b::Three;\npub use c::{Four, five};\n";
        assert_eq!(exported(library), ["One", "Two", "Three", "Four", "five"]);
    }

    #[test]
    fn name_within_another_is_not_named() {
        assert!(names("let bank: Bank<u8>;", "Bank"));
        assert!(!names("let bank: BankState<u8>;", "Bank"));
    }
}
