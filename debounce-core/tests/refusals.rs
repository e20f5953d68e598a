//! Bad constants do not compile, and the compiler says why.
//!
//! Each `refusals/*.rs` is built for real and must fail; what it is refused with must be the text beside it in the
//! `*.txt` of the same name: the message, and the line that holds the constant. Everything else that a compiler
//! prints around them differs between releases and is not compared. Where one text is to change, edit both.

use std::ffi::{OsStr, OsString};
use std::path::{Path, PathBuf};
use std::process::{Command, Output};
use std::sync::LazyLock;
use std::{env, fs};

fn rustc() -> Command {
    let mut command = Command::new(env::var_os("RUSTC").unwrap_or_else(|| "rustc".into()));
    command.args([
        "--edition",
        "2024",
        "--emit",
        "link",
        "--color",
        "never",
        "--out-dir",
        env!("CARGO_TARGET_TMPDIR"),
    ]);
    command
}

/// The crate itself, built without features and so without dependencies, for the others to use.
fn library() -> &'static Path {
    static BUILT: LazyLock<PathBuf> = LazyLock::new(|| {
        let built = rustc()
            .args(["--crate-type", "lib", "--crate-name", "debounce_core"])
            .arg(Path::new(env!("CARGO_MANIFEST_DIR")).join("src/lib.rs"))
            .output()
            .expect("the compiler that built this test can be started");
        assert!(built.status.success(), "{}", String::from_utf8_lossy(&built.stderr));
        Path::new(env!("CARGO_TARGET_TMPDIR")).join("libdebounce_core.rlib")
    });
    &BUILT
}

fn build(source: &Path) -> Output {
    let mut with = OsString::from("debounce_core=");
    with.push(library());
    rustc()
        .args(["--crate-type", "lib", "--extern"])
        .arg(with)
        .arg(source)
        .output()
        .expect("the compiler ran before")
}

/// What the compiler refuses and where: `message` and `line N`, in the order they were printed.
fn refusals(printed: &str, source: &Path) -> String {
    let mut found = String::new();
    let mut lines = printed.lines();
    while let Some(line) = lines.next() {
        let Some(error) = line.strip_prefix("error[") else { continue };
        let message = error.rsplit_once("panicked: ").map_or(error, |(_, message)| message);
        let place = lines.next().unwrap_or_default();
        let place = place.trim_start().strip_prefix("--> ").unwrap_or(place);
        let place = place.strip_prefix(&format!("{}:", source.display())).unwrap_or(place);
        let line = place.split(':').next().unwrap_or_default();
        found.push_str(&format!("{message}\nline {line}\n"));
    }
    found
}

fn sources(folder: &str) -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests").join(folder);
    let entries = fs::read_dir(folder).expect("the folder is part of the crate");
    let mut found: Vec<_> = entries.map(|entry| entry.expect("the folder can be read").path()).collect();
    found.retain(|path| path.extension() == Some(OsStr::new("rs")));
    found.sort();
    found
}

#[test]
fn bad_constants_are_refused_by_the_compiler() {
    let sources = sources("refusals");
    assert_eq!(sources.len(), 13, "a refusal was added or lost");
    let mut wrong = String::new();
    for source in sources {
        let built = build(&source);
        let printed = String::from_utf8_lossy(&built.stderr);
        let expected = fs::read_to_string(source.with_extension("txt")).unwrap_or_default();
        if built.status.success() || refusals(&printed, &source) != expected {
            wrong.push_str(&format!("{}: expected\n{expected}but got\n{printed}\n", source.display()));
        }
    }
    assert!(wrong.is_empty(), "{wrong}");
}

/// Were the set-up broken, everything would be refused; and these are the last values that are not.
#[test]
fn good_constants_at_the_limit_are_accepted_by_the_compiler() {
    let sources = sources("accepted");
    assert_eq!(sources.len(), 1);
    for source in sources {
        let built = build(&source);
        assert!(built.status.success(), "{}", String::from_utf8_lossy(&built.stderr));
    }
}
