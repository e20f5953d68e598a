//! Output that cannot be written. All of it holds for root too, who may write where nobody else may.

use crate::bench::Bench;

const EMIT: [&str; 4] = ["emit", "--bounce", "5 ms", "--output"];
const PROVE: [&str; 5] = ["prove", "shift-register 3", "--envelope", "dwell=20 bounce=5", "--witness"];

#[test]
fn output_folder_below_a_file_is_refused() {
    let bench = Bench::with("file", "mine");
    let helps = ["a file stands where a folder is needed"];
    bench.refuses(
        &["study", "--output", "file"],
        &[("file", "the output folder cannot be made: file exists", &helps)],
    );
    bench.refuses(
        &["study", "--output", "file/out"],
        &[("file/out", "the output folder cannot be made: not a directory", &helps)],
    );
    let told = ("file", "the output folder cannot be written: not a directory", &helps[..]);
    bench.refuses(&[&EMIT[..], &["file/gate.rs"]].concat(), &[told]);
    bench.refuses(&[&PROVE[..], &["file/w.vcd"]].concat(), &[told]);
}

#[test]
fn output_file_in_a_missing_folder_is_refused() {
    let told = ("none", "the output folder cannot be written: no such file", &["make the folder first"][..]);
    Bench::new().refuses(&[&EMIT[..], &["none/gate.rs"]].concat(), &[told]);
    Bench::new().refuses(&[&PROVE[..], &["none/w.vcd"]].concat(), &[told]);
}

#[test]
fn output_file_that_is_a_folder_is_refused() {
    let told = (".", "this names a folder, not a file", &["add the name of the file"][..]);
    Bench::new().refuses(&[&EMIT[..], &["."]].concat(), &[told]);
    let bench = Bench::new();
    std::fs::create_dir_all(bench.path().join("out/study.json")).expect("a folder");
    let told = ("out/study.json", "there is a folder of this name", &["move it away"][..]);
    bench.refuses(&["study", "--output", "out"], &[told]);
}

#[cfg(target_os = "linux")]
#[test]
fn output_where_nobody_may_write_is_refused() {
    let told = ("/proc/out", "the output folder cannot be made: ", &["folder"][..]);
    Bench::new().refuses(&["study", "--output", "/proc/out"], &[told]);
    let told = ("/proc/self", "the output folder cannot be written: ", &["folder"][..]);
    Bench::new().refuses(&["study", "--output", "/proc/self"], &[told]);
}

#[cfg(target_os = "linux")]
#[test]
fn output_file_that_is_a_device_is_refused_and_stays_one() {
    let told =
        ("/dev/full", "this is a device or a pipe, not an ordinary file", &["give the name of a file"][..]);
    Bench::new().refuses(&[&EMIT[..], &["/dev/full"]].concat(), &[told]);
    let link = Bench::new();
    std::os::unix::fs::symlink("/dev/full", link.path().join("gate.rs")).expect("a link");
    let told = ("gate.rs", told.1, told.2);
    link.refuses(&[&EMIT[..], &["gate.rs"]].concat(), &[told]);
}

#[cfg(unix)]
#[test]
fn output_that_finds_no_room_leaves_nothing_and_keeps_the_old() {
    let bench = Bench::with("gate.rs", "old");
    let before = bench.listing();
    for arguments in [&["study", "--output", "results"][..], &[&EMIT[..], &["gate.rs"]].concat()] {
        // With room enough the same line writes.
        bench.run(&[arguments, &["--quiet"]].concat()).ends(0);
        assert_ne!(bench.listing(), before, "{arguments:?}");
        for name in bench.listing().into_keys().filter(|name| name.starts_with("results/")) {
            std::fs::remove_file(bench.path().join(name)).expect("written just now");
        }
        drop(std::fs::remove_dir(bench.path().join("results")));
        std::fs::write(bench.path().join("gate.rs"), "old").expect("a file");
        assert_eq!(bench.listing(), before);

        let run = bench.run_without_room(arguments).ends(2);
        assert!(run.stdout.is_empty(), "{}", run.stdout);
        assert_eq!(run.stderr.matches("error: ").count(), 1, "{}", run.stderr);
        assert!(run.stderr.contains("the file cannot be written: file too large"), "{}", run.stderr);
        assert!(run.stderr.contains("help: make room on the disk"), "{}", run.stderr);
        assert_eq!(bench.listing(), before, "{arguments:?}");
    }
}
