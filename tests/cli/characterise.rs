//! What `characterise` shows of recordings, and what it says of those that are not what they seem.

use crate::bench::Bench;

/// A recording of presses: closed high, from 100 ms on, one every 300 ms for 100 ms, each with the given bounce at the
/// make (a pulse that ends after so many microseconds).
fn presses(bounces_us: impl IntoIterator<Item = u64>, unit_us: u64) -> String {
    let mut changes = String::from("#0\n0!\n");
    let mut end = 0;
    for (press, bounce_us) in bounces_us.into_iter().enumerate() {
        let at = 100_000 + press as u64 * 300_000;
        let steps = [(at, 1), (at + bounce_us / 2, 0), (at + bounce_us, 1), (at + 100_000, 0)];
        for (us, level) in steps {
            changes.push_str(&format!("#{}\n{level}!\n", us / unit_us));
        }
        end = at + 300_000;
    }
    let (unit, end) = (unit_us, end / unit_us);
    format!(
        "$timescale {unit} us $end\n$scope module top $end\n$var wire 1 ! gate $end\n$upscope $end\n\
         $enddefinitions $end\n{changes}#{end}\n"
    )
}

/// Bounces that look independent: 200 to 1206 us, as the squares of a prime field are strewn.
fn shuffled(count: u64) -> impl Iterator<Item = u64> {
    (0..count).map(|press| 200 + (press + 7).pow(2) * 611 % 1_009 / 2 * 2)
}

const HIGH: [&str; 2] = ["--closed", "high"];

#[test]
fn characterise_lists_every_operation_in_80_columns_and_as_json() {
    let bench = Bench::with("gate.vcd", presses(shuffled(60), 1));
    let line = ["characterise", "gate.vcd", "--closed", "high", "--operations"];
    let run = bench.run(&line).ends(0);
    assert!(run.stderr.is_empty(), "{}", run.stderr);
    let rows: Vec<&str> = run.stdout.lines().skip_while(|line| !line.starts_with("number kind")).collect();
    assert!(rows.iter().all(|row| row.chars().count() <= 80), "{}", run.stdout);
    // So are the lines that say what is in doubt.
    let doubtful = Bench::with("gate.vcd", harness::demo::RECORDING).run(&line).ends(0);
    let rows_in_doubt: Vec<&str> =
        doubtful.stdout.lines().skip_while(|line| !line.starts_with("number kind")).collect();
    assert!(rows_in_doubt.iter().any(|row| row.contains("in doubt (?):")), "{}", doubtful.stdout);
    // The width that the tests ask for.
    assert!(rows_in_doubt.iter().all(|row| row.len() <= 100), "{}", doubtful.stdout);
    let first = rows.iter().find(|row| row.trim_start().starts_with("1 make")).expect("a row");
    let cells: Vec<&str> = first.split_whitespace().collect();
    assert_eq!(
        cells,
        ["1", "make", "0.100000", "s", "878", "us", "3", "439", "us", "439", "us", ">100", "ms", "100", "ms"]
    );
    assert_eq!(rows.iter().filter(|row| row.contains(" break ")).count(), 60);

    let document = bench.run(&[&line[..], &["--json"]].concat()).ends(0).json();
    let operations = document["result"]["recordings"][0]["operations"].as_array().expect("a list");
    assert_eq!(operations.len(), 120);
    let make = &operations[2];
    let bounce = 962;
    assert_eq!(make["bounce_ns"], bounce * 1_000);
    assert_eq!(make["bounce_at_most_ns"], (bounce + 1) * 1_000);
    assert_eq!((&make["kind"], &make["edges"]), (&"make".into(), &3.into()));
    assert_eq!(make["dwell_before"], serde_json::json!({ "ns": 200_000_000, "exact": true }));
    // Without the option the rows are left out; what sums them up is always there.
    let document = bench.run(&["characterise", "gate.vcd", "--closed", "high", "--json"]).ends(0).json();
    assert!(document["result"]["recordings"][0].get("operations").is_none());
    let makes = &document["result"]["pooled"]["make"];
    let counts = makes["histogram"]["counts"].as_array().expect("bins");
    assert_eq!(counts.iter().filter_map(serde_json::Value::as_u64).sum::<u64>(), 60);
    let steps = makes["distribution"].as_array().expect("steps");
    assert_eq!(steps.last().expect("a step")["at_most"], 60);
    assert_eq!(document["result"]["pooled"]["quantiles"], "type 7 (Hyndman and Fan, 1996)");
}

#[test]
fn characterise_says_which_claim_the_design_stands_on() {
    let bench = Bench::with("gate.vcd", presses(shuffled(60), 1));
    let run = bench.run(&["characterise", "gate.vcd", "--closed", "high", "--margin", "50 %"]).ends(0);
    let text = run.flowing();
    assert!(text.contains("95.1 % of makes bounce no longer than"), "{text}");
    assert!(text.contains("after a break: those claims with a margin of 50 %"), "{text}");
    assert!(text.contains("rank 1 of 60 (the longest), with 95.3 % confidence (asked 95 %)"), "{text}");
    // A stated bounce is held against what was recorded: 59 of 60 are no longer, which covers less.
    let line = [&["characterise", "gate.vcd", "--bounce", "1200 us", "--json"][..], &HIGH].concat();
    let design = &bench.run(&line).ends(0).json()["result"]["claims"]["make"]["design"];
    assert_eq!((&design["origin"], &design["margin"]), (&"option".into(), &serde_json::Value::Null));
    let longer = shuffled(60).filter(|bounce| bounce + 1 > 1_200).count();
    assert!(longer > 0);
    assert_eq!(design["longer"], longer);
    assert!(design["covered"].as_f64().expect("a share") < 0.951);
}

#[test]
fn characterise_of_too_few_operations_says_how_many_more() {
    let bench = Bench::with("gate.vcd", presses(shuffled(20), 1));
    let line = [&["characterise", "gate.vcd"][..], &HIGH].concat();
    let run = bench.run(&line).ends(0);
    // 59 for 95 %/95 %, 299 for 99 %/95 % (Wilks, 1941).
    assert!(run.told().contains("20 makes are too few"), "{}", run.stderr);
    assert!(run.told().contains("59 are needed; record 39 more"), "{}", run.stderr);
    assert!(
        run.flowing().contains("none for 95 % of makes: 20 recorded, 59 needed, 39 more"),
        "{}",
        run.stdout
    );
    // Whoever asks for a claim learns from the exit code that it cannot be made.
    let asked = bench.run(&[&line[..], &["--coverage", "99 %"]].concat()).ends(1);
    assert!(asked.told().contains("299 are needed; record 279 more"), "{}", asked.stderr);
    let less = bench.run(&[&line[..], &["--coverage", "80 %"]].concat()).ends(0);
    assert!(less.stderr.is_empty(), "{}", less.stderr);
    let study = bench.run(&[&["study", "gate.vcd"][..], &HIGH].concat());
    assert!(study.told().contains("59 are needed"), "{}", study.stderr);
}

/// Sixty presses, and half-way between two of them a disturbance of 40 us, so many times.
fn disturbed(disturbances: u64) -> String {
    let mut text = presses(shuffled(61), 1);
    for press in 0..disturbances {
        let at = 300_000 * (press + 1);
        let next = format!("#{}\n", 100_000 + 300_000 * (press + 1));
        text = text.replacen(&next, &format!("#{at}\n1!\n#{}\n0!\n{next}", at + 40), 1);
    }
    text
}

/// A rest between two disturbances that nobody recorded is no quiet, however long the recording went on.
#[test]
fn study_of_few_disturbances_assumes_and_says_how_many_it_takes() {
    let quiet = |json: &serde_json::Value| {
        let rows = json["result"]["claims"]["others"].as_array().expect("figures").clone();
        rows.into_iter().find(|row| row["figure"] == "required.quiet").expect("a row")
    };
    let line = [&["characterise", "gate.vcd", "--json"][..], &HIGH].concat();
    let one = Bench::with("gate.vcd", disturbed(1));
    let run = one.run(&line).ends(0);
    let told = "too few to claim anything of 95 % of all with 95 % confidence, which takes 59 of each: 1 disturbance \
                while open (1 ms assumed), 0 disturbances while closed (1 ms assumed), 0 rests between two \
                disturbances (9 ms assumed); state what you know with --disturbance and --quiet-time, or record more";
    assert!(run.told().contains(told), "{}", run.stderr);
    let row = quiet(&run.json());
    assert_eq!(
        (&row["recorded"], &row["needed"], &row["covered"]),
        (&0.into(), &59.into(), &serde_json::Value::Null)
    );
    assert_eq!((&row["taken_ns"], &row["taken_from"]), (&9_000_000.into(), &"default".into()));
    assert_eq!(run.json()["result"]["pooled"]["quiet_ns"], serde_json::Value::Null);
    for command in ["study", "choose"] {
        let run = one.run(&[&[command, "gate.vcd", "--tick", "2 ms"][..], &HIGH].concat());
        assert!(run.told().contains("0 rests between two disturbances (9 ms assumed)"), "{}", run.stderr);
    }
    let study = one.run(&[&["study", "gate.vcd", "--tick", "2 ms"][..], &HIGH].concat()).flowing();
    assert!(study.contains("with at least 9 ms between two disturbances"), "{study}");

    // 59 disturbances have 58 rests between them, 60 have 59; 1 - 0.05^(1/59) is 4.95 % (Wilks, 1941).
    let run = Bench::with("gate.vcd", disturbed(59)).run(&line).ends(0);
    assert!(run.told().contains("58 rests between two disturbances (9 ms assumed)"), "{}", run.stderr);
    let run = Bench::with("gate.vcd", disturbed(60)).run(&line).ends(0);
    assert!(!run.told().contains("rests"), "{}", run.stderr);
    let row = quiet(&run.json());
    assert_eq!((&row["recorded"], &row["taken_from"]), (&59.into(), &"measured".into()));
    assert!((row["covered"].as_f64().expect("a share") - 0.950_492).abs() < 5e-7, "{row}");
    assert!(row["taken_ns"].as_u64() > Some(200_000_000), "{row}");

    // What is stated needs no recording.
    let stated = ["--disturbance", "200 us", "--quiet-time", "50 ms"];
    let run = one.run(&[&line[..], &stated].concat()).ends(0);
    assert!(run.stderr.is_empty(), "{}", run.stderr);
}

/// One of 61 makes touches for 2 ms before it bounces, and what follows may be a disturbance of 2 ms: it is taken as the
/// widest, with the margin, although nothing was recorded that is a disturbance without doubt.
#[test]
fn study_of_what_is_only_perhaps_a_disturbance_says_that_none_was_recorded() {
    let bench = Bench::with("gate.vcd", presses(shuffled(60).chain([4_000]), 1));
    let told = "0 disturbances while closed (2.50 ms taken, for what are perhaps parts of bounces)";
    for command in ["study", "choose", "characterise"] {
        let run = bench.run(&[&[command, "gate.vcd"][..], &HIGH].concat());
        assert!(run.flowing().contains("0 disturbances") || command == "choose", "{}", run.stdout);
        assert!(run.told().contains(told), "{}", run.stderr);
    }
    let stated = ["study", "gate.vcd", "--disturbance", "1 ms", "--quiet-time", "9 ms"];
    let run = bench.run(&[&stated[..], &HIGH].concat());
    assert!(run.stderr.is_empty(), "{}", run.stderr);
    // Nothing in doubt and nothing recorded: a default is no reason to doubt a recording.
    let run =
        Bench::with("gate.vcd", presses(shuffled(60), 1)).run(&[&["study", "gate.vcd"][..], &HIGH].concat());
    assert!(run.stderr.is_empty(), "{}", run.stderr);
    assert!(run.flowing().contains("disturbance.open = 1 ms, disturbance.closed = 1 ms"), "{}", run.stdout);
}

#[test]
fn characterise_of_an_inverted_line_says_so() {
    let bench = Bench::with("gate.vcd", presses(shuffled(60), 1));
    let run = bench.run(&["characterise", "gate.vcd", "--closed", "low"]).ends(0);
    let told = "gate.vcd: the line rests closed, 67 % of the time, at the beginning and at the end; if this contact \
                rests open, the polarity is inverted: give --closed high";
    assert!(run.told().contains(told), "{}", run.stderr);
    let json = bench.run(&["characterise", "gate.vcd", "--json", "--quiet"]).ends(0);
    assert!(json.stderr.is_empty());
    let warnings = json.json()["result"]["warnings"].to_string();
    assert!(warnings.contains("the polarity is inverted"), "{warnings}");
    // A switch that stays where it is put rests anywhere.
    let toggle = bench.run(&["characterise", "gate.vcd", "--closed", "low", "--kind", "toggle"]).ends(0);
    assert!(toggle.stderr.is_empty(), "{}", toggle.stderr);
}

#[test]
fn characterise_pools_recordings_and_tells_different_sample_periods() {
    let bench = Bench::with("a.vcd", presses(shuffled(30), 1)).and("b.vcd", presses(shuffled(31), 10));
    let line = [&["characterise", "a.vcd", "b.vcd"][..], &HIGH].concat();
    let run = bench.run(&line).ends(0);
    assert!(run.told().contains("sample periods from 1 us to 10 us"), "{}", run.stderr);
    assert!(run.flowing().contains("Pooled 2 recordings"), "{}", run.stdout);
    assert!(run.flowing().contains("(61 recorded)"), "{}", run.stdout);
    let document = bench.run(&[&line[..], &["--json"]].concat()).ends(0).json();
    let result = &document["result"];
    assert_eq!(result["recordings"][0]["make"]["count"], 30);
    assert_eq!(result["pooled"]["make"]["count"], 61);
    assert_eq!(result["pooled"]["resolution_ns"], 10_000);
    assert_eq!(result["claims"]["make"]["operations"], 61);
    // Each bounce is taken with the sample period of its own recorder.
    let longest = shuffled(30).map(|us| us + 1).chain(shuffled(31).map(|us| us / 10 * 10 + 10)).max();
    let claimed = result["claims"]["make"]["longest_bounce_ns"].as_u64().expect("a time") / 1_000;
    assert!(claimed.abs_diff(longest.expect("bounces")) <= 10, "{claimed} {longest:?}");
}

#[test]
fn characterise_of_drifting_bounces_warns() {
    let bench = Bench::with("gate.vcd", presses((0..60).map(|press| 200 + press * 20), 1));
    let run = bench.run(&[&["characterise", "gate.vcd"][..], &HIGH].concat()).ends(0);
    assert!(
        run.told().contains("the bounces of the makes grow longer (trend test: chance"),
        "{}",
        run.stderr
    );
    assert!(run.told().contains("resemble their neighbours (runs test: chance"), "{}", run.stderr);
    assert!(run.flowing().contains("not what independent ones show"), "{}", run.stdout);
}

#[test]
fn characterise_of_a_line_that_never_settles_is_refused() {
    let clock: String = (1..4_000).map(|step| format!("#{}\n{}!\n", step * 500, step % 2)).collect();
    let vcd = format!(
        "$timescale 1 us $end\n$scope module top $end\n$var wire 1 ! gate $end\n$upscope $end\n\
         $enddefinitions $end\n#0\n0!\n{clock}"
    );
    let told = ("gate.vcd", "the line never settles", &["check the channel"][..]);
    Bench::with("gate.vcd", vcd).refuses(&["characterise", "gate.vcd"], &[told]);
}

const THRESHOLDS: [&str; 4] = ["--threshold-low", "0.8 V", "--threshold-high", "2 V"];

fn volts(high: &str) -> String {
    let level = |ms: u32| if (200..400).contains(&(ms % 500)) { high } else { "0.1" };
    let rows: String = (0..1_000).map(|ms| format!("{ms},{}\n", level(ms))).collect();
    format!("time [ms],gate [V]\n{rows}")
}

#[test]
fn characterise_with_thresholds_outside_the_range_says_the_range() {
    let message = "never reaches the upper threshold of 2 V: it holds 0.1 V to 1.8 V, 400 of 1000 readings exactly \
                   1.8 V (clipped by the recorder's range?)";
    let told = ("gate.csv", message, &["--threshold-low \"0.61 V\" --threshold-high \"1.29 V\""][..]);
    let line = [&["characterise", "gate.csv"][..], &THRESHOLDS].concat();
    Bench::with("gate.csv", volts("1.8")).refuses(&line, &[told]);
}

#[test]
fn characterise_with_voltages_that_are_none_is_refused_or_told() {
    let line = [&["characterise", "gate.csv"][..], &THRESHOLDS].concat();
    let told = (
        "gate.csv:3:3",
        "\"NaN\" is not a voltage: it is not finite",
        &["a voltage is a number such as 3.3"][..],
    );
    Bench::with("gate.csv", "time [ms],gate [V]\n0,0.1\n1,NaN\n2,3.1\n").refuses(&line, &[told]);
    let told = (
        "gate.csv:3:3",
        "\"9.91E37\" stands for a missing reading",
        &["a voltage is a number such as 3.3"][..],
    );
    Bench::with("gate.csv", "time [ms],gate [V]\n0,0.1\n1,9.91E37\n2,3.1\n").refuses(&line, &[told]);
    // Beyond the range of the instrument is beyond the threshold: the job can go on, and it is said.
    let bench = Bench::with("gate.csv", volts("9.9E37"));
    let run = bench.run(&[&line[..], &HIGH].concat()).ends(0);
    assert!(run.told().contains("400 readings beyond the recorder's range"), "{}", run.stderr);
    assert!(run.flowing().contains("2 makes, 2 breaks"), "{}", run.stdout);
}

#[test]
fn replay_bounds_the_rate_of_misses() {
    let bench = Bench::with("gate.vcd", presses(shuffled(60), 1));
    let line = ["replay", "integrator 4", "gate.vcd", "--closed", "high", "--tick", "1 ms"];
    let run = bench.run(&line).ends(0);
    // None of 120 failed: 1 - 0.05^(1/120) is 2.47 % (Clopper and Pearson, 1934), rounded up.
    assert!(
        run.flowing().contains(
            "0 missed, 0 doubled of 120 changes; with 95 % confidence at most 2.5 % of all missed, 2.5 % doubled"
        ),
        "{}",
        run.stdout
    );
    let document = bench.run(&[&line[..], &["--json"]].concat()).ends(0).json();
    let bound = document["result"]["runs"][0]["failures"]["missed_at_most"].as_f64().expect("a rate");
    assert!((bound - (1.0 - 0.05_f64.powf(1.0 / 120.0))).abs() < 1e-9, "{bound}");
    // A law that is too hasty fails, and the rate says how often.
    let hasty =
        bench.run(&["replay", "shift-register 1", "gate.vcd", "--closed", "high", "--tick", "100 us"]);
    assert!(hasty.flowing().contains("60 doubled of 120 changes"), "{}", hasty.stdout);
}

#[test]
fn characterise_calls_a_guessed_sample_period_one() {
    let guessed = "if coarser, say --resolution";
    let bench = Bench::with("gate.vcd", presses(shuffled(20), 1));
    let run = bench.run(&["characterise", "gate.vcd", "--closed", "high"]).ends(0).flowing();
    assert!(run.contains("sample period 1 us by the time scale") && run.contains(guessed), "{run}");
    let line = ["characterise", "gate.vcd", "--closed", "high", "--resolution", "2 us"];
    let run = bench.run(&line).ends(0).flowing();
    assert!(run.contains("sample period 2 us: added to every claim") && !run.contains(guessed), "{run}");

    let csv = "Time [s],gate\n0.000000000,0\n0.300000000,1\n0.300161010,0\n0.300463320,1\n0.500000000,0\n\
               0.900000000,1\n1.300000000,0\n2.000000000,0\n";
    let line = ["characterise", "gate.csv", "--closed", "high"];
    let run = Bench::with("gate.csv", csv).run(&line).ends(0).flowing();
    assert!(run.contains("sample period 1 ns by the last digit") && run.contains(guessed), "{run}");
    // Samples at even times show their period.
    let rows: String =
        (0..400).map(|row| format!("{}.{:03},{}\n", row / 100, row % 100 * 10, row / 50 % 2)).collect();
    let run = Bench::with("gate.csv", format!("Time [s],gate\n{rows}")).run(&line).ends(0).flowing();
    assert!(run.contains("sample period 10 ms: added to every claim"), "{run}");
}

#[test]
fn characterise_rounds_the_shortest_times_down() {
    // A press of 60.664 ms, whose nearest three digits, 60.7 ms, would be too long.
    let text = "Time [us],gate\n0,0\n300000,1\n360664,0\n721000,1\n781664,0\n1200000,0\n";
    let line = ["characterise", "gate.csv", "--closed", "high"];
    let run = Bench::with("gate.csv", text).run(&line).ends(0).flowing();
    assert!(run.contains("While closed for 60.6 ms at least"), "{run}");
}

#[test]
fn characterise_of_one_cut_burst_without_disturbances_counts_in_the_singular() {
    let text = "Time [us],gate\n0,0\n100,1\n300000,0\n600000,1\n900000,0\n1200000,1\n1500000,0\n2000000,0\n";
    let line = ["characterise", "gate.csv", "--closed", "high"];
    let run = Bench::with("gate.csv", text).run(&line).ends(0).flowing();
    assert!(run.contains("1 burst cut off by an end of the recording, which counts as nothing"), "{run}");
    assert!(!run.contains("0 rests recorded"), "{run}");
}
