//! The option `--report` of every command that has it: one whole file, or a refusal that leaves nothing.

use integration_tests::sha256;

use crate::bench::Bench;

/// Makes and breaks with a little bounce, as the edge recorder of a scope might export them.
fn recording() -> String {
    let mut text = "time,gate\n0,0\n".to_owned();
    for operation in 1..=20_u64 {
        let at = operation * 100_000;
        // Made, bounced, made again; broken half-way to the next.
        for (after, level) in [(0, 1), (300, 0), (700, 1), (50_000, 0), (50_400, 1), (50_900, 0)] {
            text.push_str(&format!("{},{level}\n", at + after));
        }
    }
    text
}

const READ: [&str; 6] = ["gate.csv", "--closed", "high", "--time-unit", "us", "--report"];

#[test]
fn report_is_written_by_every_command_that_has_it() {
    let bench = Bench::with("gate.csv", recording());
    let network = [
        "network",
        "--supply",
        "3.3 V 5 %",
        "--pull",
        "10 kohm 5 %",
        "--capacitor",
        "100 nF 10 % X7R",
        "--report",
    ];
    let commands: [(&str, Vec<&str>, i32, &str); 7] = [
        (
            "limit.html",
            vec!["limit", "--envelope", "dwell=20 bounce=5/3 glitch=1/1 quiet=10", "--report"],
            0,
            "No logic whatever can promise less",
        ),
        (
            "compare.html",
            vec!["compare", "integrator 3", "shift-register 3", "--report"],
            1,
            "The fewest samples that tell them apart",
        ),
        ("network.html", network.to_vec(), 0, "The pin after a make"),
        ("characterise.html", [&["characterise"][..], &READ].concat(), 0, "What the recordings show"),
        (
            "study.html",
            [&["study", "--tick", "1 ms", "--latency", "20 ms"][..], &READ].concat(),
            0,
            "Study of a contact",
        ),
        (
            "choose.html",
            vec!["choose", "--bounce", "5 ms", "--tick", "1 ms", "--latency", "20 ms", "--report"],
            0,
            "Study of a contact",
        ),
        (
            "prove.html",
            vec!["prove", "shift-register 2", "--envelope", "dwell=30 bounce=5", "--report"],
            1,
            "Refuted: ",
        ),
    ];
    for (file, words, code, part) in commands {
        let words: Vec<&str> = words.into_iter().chain([file]).collect();
        let run = bench.run(&words).ends(code);
        assert!(run.flowing().to_lowercase().contains("written"), "{}", run.stdout);
        let html = std::fs::read_to_string(bench.path().join(file)).expect(file);
        assert!(html.starts_with("<!DOCTYPE html>") && html.ends_with("</html>\n"), "{file}");
        assert!(html.contains(part), "{file} has no \"{part}\"");
    }
}

#[test]
fn report_names_command_and_files_by_their_contents() {
    let bench = Bench::with("gate.csv", recording());
    bench.run(&[&["characterise"][..], &READ, &["out.html"]].concat()).ends(0);
    let html = std::fs::read_to_string(bench.path().join("out.html")).expect("a report");
    assert!(html.contains("harness characterise gate.csv --closed high --time-unit us --report out.html"));
    // By another program, as the reader would do it.
    let Some(hash) = sha256(&bench.path().join("gate.csv")) else {
        panic!("sha256sum of coreutils is needed here")
    };
    assert!(html.contains(&hash), "{hash}");
}

#[test]
fn report_of_the_demo_is_small_and_the_same_twice() {
    let [one, two] = [Bench::new(), Bench::new()];
    for bench in [&one, &two] {
        bench.run(&["study", "--report", "report.html"]).ends(0);
    }
    assert_eq!(one.listing(), two.listing());
    let size = std::fs::metadata(one.path().join("report.html")).expect("a report").len();
    assert!(size < 1_000_000, "{size} bytes");
}

#[test]
fn report_that_cannot_be_written_is_refused_before_any_work() {
    let bench = Bench::with("gate.csv", recording());
    let told =
        ("report.pdf", "a report is an HTML file", &["end its name in .html, such as report.html"][..]);
    bench.refuses(&["study", "--report", "report.pdf"], &[told]);
    let told = ("none", "the output folder cannot be written: no such file", &["make the folder first"][..]);
    bench.refuses(&["study", "--report", "none/report.html"], &[told]);
}

#[cfg(target_os = "linux")]
#[test]
fn report_of_a_file_that_cannot_be_read_twice_is_refused() {
    let bench = Bench::with("gate.csv", recording());
    let line = "cat gate.csv | \"$1\" characterise /dev/stdin --closed high --time-unit us --report out.html";
    let mut shell = std::process::Command::new("sh");
    shell.args(["-c", line, "sh", env!("CARGO_BIN_EXE_harness")]).current_dir(bench.path());
    let output = shell.output().expect("a shell");
    let stderr = String::from_utf8(output.stderr).expect("UTF-8");
    assert_eq!(output.status.code(), Some(2), "{stderr}");
    assert!(
        stderr.contains("this one cannot be read again") && stderr.contains("leave out --report"),
        "{stderr}"
    );
    assert!(!bench.path().join("out.html").exists());
}
