//! A machine emitted as Rust: formatted, compiled for the host and for a small target, run on the host.

use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use debounce_core::{Change, Law, Position, StateMachine, StateMachineParameters};
use harness::emit::table::{EmitTableError, table_law};
use harness::machine::{MachineTable, Reading, read_kiss2};
use integration_tests::toggle::TOGGLE;

/// A directory that is removed when the test ends, with a crate in it that depends on the core alone.
struct Crate(PathBuf);

impl Crate {
    fn new(name: &str, source: &str) -> Self {
        let dir =
            Path::new(env!("CARGO_TARGET_TMPDIR")).join(format!("emitted-{name}-{}", std::process::id()));
        fs::create_dir_all(dir.join("src")).expect("a temporary directory");
        let core = Path::new(env!("CARGO_MANIFEST_DIR")).join("../debounce-core");
        let manifest = format!(
            "[package]\nname = \"emitted\"\nversion = \"0.0.0\"\nedition = \"2024\"\n\n\
             [dependencies]\ndebounce-core = {{ path = {core:?} }}\n\n[workspace]\n"
        );
        fs::write(dir.join("Cargo.toml"), manifest).expect("the manifest");
        fs::write(dir.join("src/lib.rs"), source).expect("the source");
        // With the versions already locked nothing is looked up anywhere.
        let lock = Path::new(env!("CARGO_MANIFEST_DIR")).join("../Cargo.lock");
        fs::copy(lock, dir.join("Cargo.lock")).expect("the lock file");
        Self(dir)
    }

    fn cargo(&self, arguments: &[&str]) -> Output {
        let cargo = std::env::var_os("CARGO").unwrap_or_else(|| "cargo".into());
        Command::new(cargo)
            .args(arguments)
            .arg("--offline")
            .current_dir(&self.0)
            .env("CARGO_TARGET_DIR", self.0.join("target"))
            .env_remove("RUSTFLAGS")
            .output()
            .expect("cargo runs")
    }
}

impl Drop for Crate {
    fn drop(&mut self) {
        // What is left behind is only a temporary directory.
        let _ = fs::remove_dir_all(&self.0);
    }
}

#[track_caller]
fn succeeded(output: &Output) -> String {
    let text = String::from_utf8_lossy(&output.stdout).into_owned();
    assert!(output.status.success(), "{text}\n{}", String::from_utf8_lossy(&output.stderr));
    text
}

fn toggle() -> MachineTable {
    read_kiss2("lamp.kiss2", TOGGLE.as_bytes(), Reading::Moore).expect("a sound table")
}

fn locked() -> MachineTable {
    let parameters = StateMachineParameters::confirm(2, 3).patience(2, 1).lockout(40, 30);
    MachineTable::of(&StateMachine::<u8>::new(parameters)).expect("a sound law")
}

/// Samples without an end that anyone would guess, the same each time: a linear congruential generator with the
/// constants of Knuth's MMIX.
fn samples(count: usize) -> Vec<Position> {
    let mut state = 1_u64;
    let mut next = || {
        state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        // Runs of a few alike, so that lock-outs pass and counts fill.
        vec![Position::closed_if(state >> 63 != 0); (state >> 40) as usize % 9 + 1]
    };
    let mut samples = Vec::new();
    while samples.len() < count {
        samples.extend(next());
    }
    samples
}

/// What a law reports at each sample, as one letter.
fn letters<L: Law>(law: &L, samples: &[Position]) -> String {
    let mut state = law.rest(Position::Open);
    let letter = |&sample| match law.step(&mut state, sample) {
        None => '.',
        Some(Change::Make) => 'm',
        Some(Change::Break) => 'b',
    };
    samples.iter().map(letter).collect()
}

#[test]
fn emitted_tables_are_formatted_compile_for_host_and_target_and_do_what_the_machine_does() {
    let source = "#![no_std]\n#![allow(missing_docs)]\n\npub mod locked;\npub mod toggle;\n";
    let made = Crate::new("run", source);
    let emitted = [(toggle(), "toggle", "TOGGLE"), (locked(), "locked", "LOCKED_OUT_WITH_THE_LONGEST_NAME")];
    for (machine, file, name) in &emitted {
        let text = table_law(machine, name).expect("few states");
        fs::write(made.0.join(format!("src/{file}.rs")), text).expect("a file");
    }
    let main = r#"
        use debounce_core::{Change, Law, Machine, Position, TableLaw};
        use std::io::Read;

        fn main() {
            let mut word = String::new();
            std::io::stdin().read_to_string(&mut word).unwrap();
            let laws: [&TableLaw<'static>; 2] =
                [&emitted::toggle::TOGGLE, &emitted::locked::LOCKED_OUT_WITH_THE_LONGEST_NAME];
            for law in laws {
                let mut state = law.rest(Position::Open);
                let line: String = word
                    .bytes()
                    .map(|bit| match law.step(&mut state, Position::closed_if(bit == b'1')) {
                        None => '.',
                        Some(Change::Make) => 'm',
                        Some(Change::Break) => 'b',
                    })
                    .collect();
                println!("{line}");
            }
        }
    "#;
    fs::write(made.0.join("src/main.rs"), main).expect("a file");
    for file in ["toggle", "locked"] {
        let path = made.0.join(format!("src/{file}.rs"));
        let output = Command::new("rustfmt").args(["--check", "--edition", "2024"]).arg(path).output();
        succeeded(&output.expect("rustfmt runs"));
    }
    integration_tests::firmware::have("thumbv6m-none-eabi");
    succeeded(&made.cargo(&["build", "--lib", "--target", "thumbv6m-none-eabi"]));
    succeeded(&made.cargo(&["build", "--bin", "emitted"]));
    let samples = samples(20_000);
    let word: String = samples.iter().map(|&sample| if sample.is_closed() { '1' } else { '0' }).collect();
    let file = made.0.join("word");
    fs::write(&file, word).expect("a file");
    let run = Command::new(made.0.join("target/debug/emitted"))
        .stdin(fs::File::open(&file).expect("the file"))
        .output()
        .expect("the program runs");
    let expected = [letters(&toggle(), &samples), letters(&locked(), &samples)];
    assert!(expected.iter().all(|line| line.contains('m') && line.contains('b')));
    assert_eq!(succeeded(&run).lines().collect::<Vec<_>>(), expected);
}

#[test]
fn emitted_table_that_was_spoilt_by_hand_does_not_compile() {
    let text = table_law(&toggle(), "TOGGLE").expect("few states").replace("[0, 2],", "[0, 4],");
    let made = Crate::new("spoilt", &format!("#![no_std]\n\n{}", text.replace("//!", "//")));
    let output = made.cargo(&["build", "--lib"]);
    let error = String::from_utf8_lossy(&output.stderr);
    assert!(!output.status.success());
    assert!(error.contains("a row of the table leads to a state that has no row"), "{error}");
}

#[test]
fn emitted_table_reads_as_pinned() {
    let text = "\
//! A debouncing logic as a next-state table: 4 states, 8 bytes of flash, 1 byte of RAM for each input.
//!
//! Generated; change the table it was made from instead.

use debounce_core::TableLaw;

/// Next state at an open sample, next state at a closed sample.
static TOGGLE_ROWS: [[u8; 2]; 4] = [
    // 0: off, open, at rest
    [0, 2],
    // 1: off_held, open
    [0, 1],
    // 2: on_held, closed, at rest
    [3, 2],
    // 3: on, closed
    [3, 1],
];

/// The logic; checked by the compiler when the firmware is built.
pub static TOGGLE: TableLaw<'static> = TableLaw::new(&TOGGLE_ROWS, 2, [0, 2]);
";
    assert_eq!(table_law(&toggle(), "TOGGLE").expect("few states"), text);
}

#[test]
fn emission_of_a_bad_name_or_too_many_states_is_refused() {
    for name in ["", "toggle", "1A", "A-B", "_A", "A23456789012345678901234567890123"] {
        let refused = EmitTableError::BadName { name: name.to_owned() };
        assert_eq!(table_law(&toggle(), name), Err(refused));
    }
    let locked = |ticks| {
        let parameters = StateMachineParameters::confirm(1, 1).lockout(ticks, 126);
        MachineTable::of(&StateMachine::<u8>::new(parameters)).expect("a sound law")
    };
    // Two states at rest, and one for each tick that is ignored.
    assert!(table_law(&locked(128), "FITS").is_ok());
    assert_eq!(table_law(&locked(129), "ONE_MORE"), Err(EmitTableError::TooManyStates { states: 257 }));
}
