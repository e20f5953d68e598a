//! Requirement files, good and bad, and the options that stand over them.

use debounce_core::{Envelope, PerChange, PerPosition};

use super::*;
use crate::problem::Problems;
use crate::trace::{DecimalMark, Delimiter, TimeUnit, Unknown};

/// The file in the documentation of this module.
const FULL: &str = include_str!("mod.rs");

fn documented_example() -> String {
    let lines = FULL.lines().skip_while(|line| !line.contains("```toml")).skip(1);
    let lines = lines.take_while(|line| !line.contains("```"));
    lines.map(|line| line.trim_start_matches("//!").trim_start().to_owned() + "\n").collect()
}

fn read_text(text: &str) -> Result<Requirement, Problems> {
    parse(SourceText::new("bench/contact.toml", text))
}

#[track_caller]
fn accepts(text: &str) -> Requirement {
    read_text(text).unwrap_or_else(|problems| panic!("refused:\n{problems}"))
}

/// Every problem of `text`, each as `line:column: message; help`.
#[track_caller]
fn refuses(text: &str, expected: &[&str]) {
    let problems = match read_text(text) {
        Ok(_) => panic!("accepted:\n{text}"),
        Err(problems) => problems.to_string(),
    };
    let found: Vec<&str> =
        problems.lines().map(|line| line.strip_prefix("bench/contact.toml:").unwrap_or(line)).collect();
    assert_eq!(found, expected, "for\n{text}");
}

fn options(arguments: &[&str]) -> RequirementOptions {
    use clap::Parser;

    #[derive(Parser)]
    struct Command {
        #[command(flatten)]
        options: RequirementOptions,
    }
    let arguments = std::iter::once(&"harness").chain(arguments);
    Command::try_parse_from(arguments).unwrap_or_else(|error| panic!("{error}")).options
}

#[test]
fn requirement_in_the_documentation_is_read_in_full() {
    let requirement = accepts(&documented_example());
    let value = |figure: Option<Sourced<Time>>| figure.expect("given").value;
    assert_eq!(requirement.contact.name.unwrap().value, "sluice gate, upper end");
    assert_eq!(requirement.contact.kind.unwrap().value, ContactKind::LimitSwitch);
    assert_eq!(requirement.contact.closed.unwrap().value, Level::Low);
    assert_eq!(requirement.recordings.len(), 2);
    assert_eq!(requirement.recordings[0].path.value, PathBuf::from("bench/gate.vcd"));
    let thresholds = requirement.recordings[1].thresholds.unwrap().value;
    assert_eq!((thresholds.low.microvolts(), thresholds.high.microvolts()), (800_000, 2_000_000));
    assert_eq!(value(requirement.required.latency.make), Time::from_ms(20));
    assert_eq!(value(requirement.required.latency.break_), Time::from_ms(30));
    assert_eq!(value(requirement.required.disturbance.closed), Time::from_us(300));
    assert_eq!(requirement.clock.ticks.unwrap().value.periods().len(), 3);
    assert_eq!(requirement.budget.ram.unwrap().value, Bytes(4));
    assert_eq!(requirement.budget.fastest_tick.unwrap().value.to_string(), "500 us");
}

#[test]
fn requirement_value_knows_its_line_and_bytes() {
    let text = "[required]\nquiet = \"5 ms\"\n";
    let quiet = accepts(text).required.quiet.unwrap();
    assert!(matches!(quiet.origin, Origin::Given { line: 2, .. }));
    assert_eq!(&text[quiet.origin.span().unwrap()], "\"5 ms\"");
}

#[test]
fn requirement_one_value_for_both_or_for_one_is_read() {
    let both = accepts("[required]\nlatency = \"20 ms\"").required.latency;
    assert_eq!(both.make, both.break_);
    assert!(both.make.is_some());
    let one = accepts("[required]\nlatency = { break = \"20 ms\" }").required.latency;
    assert!(one.make.is_none() && one.break_.is_some());
}

#[test]
fn requirement_without_a_unit_says_what_to_write() {
    let refused = "\"12\" has no unit; write \"12 ms\" or \"12 us\"";
    refuses("[required]\nquiet = \"12\"", &[&format!("2:9: {refused}")]);
    refuses("[required]\nquiet = 12", &[&format!("2:9: {refused}")]);
    refuses("[required]\nlatency = { make = 12 }", &[&format!("2:20: {refused}")]);
    refuses("[clock]\ntick = [\"1 ms\", 30]", &["2:17: \"30\" has no unit; write \"30 ms\" or \"30 Hz\""]);
    refuses("[clock]\nlost = 2", &["2:8: \"2\" has no unit; write \"2 ticks\""]);
}

#[test]
fn requirement_with_an_unknown_key_names_the_nearest() {
    refuses("[required]\nlatancy = \"1 ms\"", &["2:1: unknown key \"latancy\" in [required]; write latency"]);
    refuses(
        "[requierd]\nlatency = \"1 ms\"",
        &["1:2: unknown key \"requierd\" in the file; write [required]"],
    );
    refuses(
        "[contact]\ncolour = \"red\"",
        &["2:1: unknown key \"colour\" in [contact]; [contact] knows name, kind, role and closed"],
    );
    refuses("[required]\nbounce = { mak = \"1 ms\" }", &["2:12: unknown key \"mak\" in bounce; write make"]);
}

#[test]
fn requirement_with_several_problems_lists_all_of_them() {
    refuses(
        "[contact]\nrole = \"gaurding\"\n[required]\nquiet = true\nlatency = \"5\"\n[clock]\ntolerance = \"2 pc\"",
        &[
            "2:8: \"gaurding\" is not a role; write \"guarding\"",
            "4:9: true or false is not a time; write \"12 ms\"",
            "5:11: \"5\" has no unit; write \"5 ms\" or \"5 us\"",
            "7:13: \"2 pc\" has an unknown unit \"pc\"; the unit of a share is % or ppm",
        ],
    );
}

#[test]
fn requirement_given_twice_is_refused() {
    let once = "every key stands once; several recordings are each written under [[recording]]";
    refuses("[required]\nquiet = \"1 ms\"\nquiet = \"2 ms\"", &[&format!("3:1: duplicate key; {once}")]);
    refuses(
        "[[recording]]\npath = \"a.vcd\"\n[[recording]]\npath = \"a.vcd\"",
        &["4:8: the same recording is given twice; take one of them out, or give each its own channel"],
    );
    accepts(
        "[[recording]]\npath = \"a.vcd\"\nchannel = \"x\"\n[[recording]]\npath = \"a.vcd\"\nchannel = \"y\"",
    );
    refuses(
        "[clock]\ntick = [\"1 ms\", \"1 kHz\"]",
        &["2:17: the tick period 1 ms is given twice; write each tick period once"],
    );
}

#[test]
fn requirement_of_the_wrong_shape_is_refused() {
    refuses(
        "recording = \"a.vcd\"",
        &[
            "1:13: there may be several recordings, so each is a section with two brackets; write [[recording]] on a line of its own",
        ],
    );
    refuses(
        "required = \"20 ms\"",
        &["1:12: required is a section, not a value; write [required] on a line of its own"],
    );
    refuses(
        "[[recording]]\nchannel = \"top\"",
        &["2:11: a recording has no path; write path = \"gate.vcd\" under [[recording]]"],
    );
    refuses(
        "[[recording]]\npath = \"a.csv\"\nthresholds = { low = \"2 V\", high = \"0.8 V\" }",
        &[
            "3:14: the low threshold 2 V is not below the high threshold 0.8 V; between the two the line keeps its level; write low below high",
        ],
    );
    refuses(
        "[[recording]]\npath = \"a.csv\"\nthresholds = { low = \"2 V\" }",
        &[
            "3:14: thresholds are two voltages, low and high; write thresholds = { low = \"0.8 V\", high = \"2.0 V\" }",
        ],
    );
    refuses(
        "[contact]\nname = \" \"",
        &["2:8: \" \" is not a text for name; write name = \"sluice gate, upper end\""],
    );
    refuses("[clock]\ntick = []", &["2:8: the list of tick periods is empty; write tick = [\"1 ms\"]"]);
    refuses(
        "[clock]\ntick = { from = \"1 ms\" }",
        &[
            "2:8: a range of tick periods has two ends, from and to; write tick = { from = \"500 us\", to = \"5 ms\" }",
        ],
    );
}

#[test]
fn requirement_with_broken_syntax_points_at_it() {
    let problems = read_text("[required\nquiet = \"1 ms\"").expect_err("broken");
    assert_eq!(problems.iter().next().unwrap().line_column().map(|(line, _)| line), Some(1), "{problems}");
    let problems = read_text("[required]\nquiet 5 ms").expect_err("broken");
    assert_eq!(problems.iter().next().unwrap().line_column().map(|(line, _)| line), Some(2), "{problems}");
}

#[test]
fn requirement_that_contradicts_itself_is_refused() {
    refuses(
        "[required]\nshortest_closed = \"5 ms\"\nbounce = { make = \"5 ms\" }",
        &["2:19: the shortest closed time of 5 ms is not longer than the bounce of 5 ms after a make; \
         an operation that only bounces cannot be told from noise; ask for a shortest closed time above 5 ms"],
    );
    accepts("[required]\nshortest_closed = \"5.000001 ms\"\nbounce = { make = \"5 ms\" }");
    // A long bounce at the break says nothing about the time closed.
    accepts("[required]\nshortest_closed = \"5 ms\"\nbounce = { break = \"9 ms\" }");
    refuses(
        "[required]\nquiet = \"1 ms\"\ndisturbance = \"1 ms\"",
        &["2:9: the quiet of 1 ms is not longer than the disturbances of 1 ms around it; \
         no logic can tell such disturbances from the contact; write a quiet above 1 ms"],
    );
    accepts("[required]\nquiet = \"1.001 ms\"\ndisturbance = \"1 ms\"");
    // Between the two widths a logic may exist; that is for the prover to say.
    accepts("[required]\nquiet = \"1 ms\"\ndisturbance = { open = \"1 ms\", closed = \"100 us\" }");
    refuses(
        "[required]\nshortest_open = \"1 ms\"\ndisturbance = { closed = \"1 ms\" }",
        &["2:17: the shortest open time of 1 ms is not longer than a disturbance of 1 ms while closed; \
         the two look the same on the line; ask for a shortest open time above 1 ms"],
    );
    refuses(
        "[required]\nlatency = \"0 ms\"",
        &[
            "2:11: a make latency of 0 cannot be met; write the longest delay you can accept, such as \"20 ms\"",
        ],
    );
    refuses(
        "[required]\nconfidence = \"100 %\"",
        &[
            "2:14: a confidence of 100 % cannot be reached; write a share above 0 % and below 100 %, such as \"95 %\"",
        ],
    );
    accepts("[required]\nconfidence = \"99.9999 %\"");
    refuses(
        "[clock]\ntolerance = \"100 %\"",
        &[
            "2:13: a clock tolerance of 100 % lets the period shrink to nothing; write a tolerance below 100 %, such as \"2 %\"",
        ],
    );
    refuses(
        "[clock]\ntick = [\"1 ms\", \"2 ms\"]\n[budget]\nfastest_tick = \"400 Hz\"",
        &[
            "2:8: every tick period is shorter than the fastest tick, 2.5 ms, that can be served; allow a tick period of 2.5 ms or longer",
        ],
    );
    accepts("[clock]\ntick = [\"1 ms\", \"2 ms\"]\n[budget]\nfastest_tick = \"500 Hz\"");
}

#[test]
fn requirement_contradiction_marks_both_places() {
    let problems =
        read_text("[required]\nquiet = \"1 ms\"\ndisturbance = \"1 ms\"").expect_err("contradiction");
    let shown = anstream::adapter::strip_str(&problems.iter().next().unwrap().rendered()).to_string();
    assert!(shown.contains("--> bench/contact.toml:2:9"), "{shown}");
    assert!(shown.contains("^^^^^^ the quiet"), "{shown}");
    assert!(shown.contains("------ the disturbance"), "{shown}");
}

#[test]
fn requirement_file_that_cannot_be_read_is_one_clear_problem() {
    let folder = tempfile::tempdir().unwrap();
    let refused = |name: &str, bytes: Option<&[u8]>| {
        let path = folder.path().join(name);
        if let Some(bytes) = bytes {
            std::fs::write(&path, bytes).unwrap();
        }
        let problems = read(&path).expect_err(name).to_string();
        problems.replace(&format!("{}/", folder.path().display()), "")
    };
    assert_eq!(
        refused("missing.toml", None),
        "missing.toml: the requirement cannot be read: no such file or directory; \
         check the path; every value can be given as an option, too"
    );
    assert_eq!(
        refused("empty.toml", Some(b" \n")),
        "empty.toml: the requirement file is empty; \
         write at least [required] with latency = \"20 ms\""
    );
    assert!(
        refused("rubbish.toml", Some(b"[contact]\nna\xff\xfe\x00"))
            .starts_with("rubbish.toml:2:3: the requirement is not text")
    );
    assert!(refused("huge.toml", Some(&vec![b'#'; (1 << 20) + 1])).contains("1048577 bytes are too many"));
    assert!(refused("", None).contains("is a directory"));
}

#[test]
fn options_stand_over_the_file_and_say_so() {
    let file = accepts("[required]\nlatency = \"20 ms\"\nquiet = \"5 ms\"");
    let options = options(&["--latency", "break=9 ms", "--tick", "1 ms,100 Hz", "--lost", "1 tick"]);
    let merged = options.over(file, &[]).unwrap();
    assert!(matches!(merged.required.latency.make.unwrap().origin, Origin::Given { line: 2, .. }));
    let break_ = merged.required.latency.break_.unwrap();
    assert_eq!((break_.value, break_.origin), (Time::from_ms(9), Origin::Option("--latency")));
    assert_eq!(merged.clock.ticks.unwrap().value.periods().len(), 2);
    assert_eq!(merged.clock.lost.unwrap().value, Ticks(1));
}

#[test]
fn options_that_contradict_the_file_are_refused() {
    let file = accepts("[required]\ndisturbance = \"2 ms\"\n");
    let problems = options(&["--quiet-time", "1 ms"]).over(file, &[]).expect_err("contradiction").to_string();
    assert!(problems.starts_with("bench/contact.toml:2:15: the quiet of 1 ms is not longer"), "{problems}");
    assert!(problems.contains("the quiet (1 ms) is from the option --quiet-time"), "{problems}");
}

#[test]
fn options_cannot_take_a_caution_away() {
    let file = accepts("[contact]\nrole = \"guarding\"");
    let problems = options(&["--role", "control"]).over(file.clone(), &[]).expect_err("weaker").to_string();
    assert!(problems.contains("would take away the caution"), "{problems}");
    assert!(options(&["--role", "guarding"]).over(file, &[]).is_ok());
    let file = accepts("[contact]\nrole = \"control\"");
    let merged = options(&["--role", "metering"]).over(file, &[]).unwrap();
    assert!(merged.resolve(&Measured::default()).unwrap().caution().is_some());
}

#[test]
fn recordings_as_arguments_take_the_place_of_the_file() {
    let file = accepts("[[recording]]\npath = \"a.vcd\"");
    let merged = options(&["--channel", "x"]).over(file, &["b.vcd".into()]).unwrap();
    assert_eq!(merged.recordings.len(), 1);
    assert_eq!(merged.recordings[0].path.value, PathBuf::from("b.vcd"));
    assert_eq!(merged.recordings[0].channel.as_ref().unwrap().value, "x");
    let problems =
        options(&[]).over(Requirement::default(), &["contact.toml".into()]).expect_err("a requirement");
    assert!(problems.to_string().ends_with("give it as --requirement contact.toml"), "{problems}");
}

#[test]
fn resolved_requirement_says_where_each_value_is_from() {
    let requirement = accepts("[required]\nlatency = \"20 ms\"\nmargin = \"50 %\"");
    let measured = Measured {
        bounce: PerChange { make: Some(Time::from_ms(4)), break_: None },
        quiet: Some(Seen { time: Time::from_ms(9), count: 59 }),
        ..Measured::default()
    };
    let resolved = requirement.resolve(&measured).unwrap();
    assert_eq!(resolved.required.latency.make.origin.word(), "given");
    let bounce = &resolved.required.bounce;
    assert_eq!((bounce.make.value, bounce.make.origin), (Time::from_ms(6), Origin::Measured));
    assert_eq!(bounce.break_.origin.word(), "default");
    // What must not be overestimated shrinks: 9 ms / 1.5.
    assert_eq!(resolved.required.quiet.value, Time::from_ms(6));
    assert!(resolved.rows().iter().any(|row| row.key == "required.bounce.make" && row.text == "6 ms"));
}

/// 59 is the published size of a sample whose extreme covers 95 % with 95 % confidence (S. S. Wilks, 1941), 29 that for
/// 90 % with 95 %.
#[test]
fn resolved_extreme_of_too_few_counts_only_where_it_is_worse() {
    let seen = |ms, count| Some(Seen { time: Time::from_ms(ms), count });
    let resolve = |text: &str, count| {
        let measured = Measured {
            disturbance: PerPosition {
                open: seen(4, count),
                closed: Some(Seen { time: Time::from_us(80), count }),
            },
            quiet: seen(11_250, count),
            shortest: PerPosition { open: seen(500, count), closed: seen(50, count) },
            ..Measured::default()
        };
        let required = accepts(text).resolve(&measured).unwrap().required;
        let shortest = [required.shortest.open, required.shortest.closed];
        let wide = [required.disturbance.open, required.disturbance.closed];
        [shortest[0], shortest[1], wide[0], wide[1], required.quiet]
            .map(|it| (it.value.ns() / 1_000, it.origin.word()))
    };
    let few = [
        (70_000, "default"),
        (40_000, "measured"),
        (5_000, "measured"),
        (1_000, "default"),
        (9_000, "default"),
    ];
    let enough = [400_000, 40_000, 5_000, 100, 9_000_000].map(|us| (us, "measured"));
    let plain = "[required]\nmargin = \"25 %\"";
    for count in [0, 1, 58] {
        assert_eq!(resolve(plain, count), few, "{count}");
    }
    assert_eq!(resolve(plain, 59), enough);
    let less = "[required]\nmargin = \"25 %\"\ncoverage = \"90 %\"";
    assert_eq!((resolve(less, 28), resolve(less, 29)), (few, enough));
    let told = accepts(plain).resolve(&Measured { quiet: seen(500, 3), ..Measured::default() }).unwrap();
    assert!(
        told.required.quiet.origin.to_string().ends_with("too few were recorded to claim anything better")
    );
    let stated = accepts("[required]\nquiet = \"500 ms\"")
        .resolve(&Measured { quiet: seen(5, 3), ..Measured::default() });
    assert_eq!(
        stated.unwrap().required.quiet.value,
        Time::from_ms(500),
        "what is stated stands over everything"
    );
}

#[test]
fn recording_says_how_it_is_read() {
    let text = "[[recording]]\npath = \"a.csv\"\nresolution = \"2 us\"\ntime_unit = \"ms\"\ntime_column = \"t\"\n\
                delimiter = \"semicolon\"\ndecimal_mark = \"comma\"\nunknown = \"refuse\"\ngap = \"8 ms\"\n\
                [[recording]]\npath = \"b.csv\"\nsample_period = \"10 us\"";
    let recordings = accepts(text).recordings;
    let options = recordings[0].reading.options();
    assert_eq!((options.resolution_ns, options.time_unit), (Some(2_000), Some(TimeUnit::Milliseconds)));
    assert_eq!(
        (options.delimiter, options.decimal_mark),
        (Some(Delimiter::Semicolon), Some(DecimalMark::Comma))
    );
    assert_eq!((options.unknown, options.time_column.as_deref()), (Unknown::Refuse, Some("t")));
    assert_eq!(recordings[0].reading.gap.unwrap().value, Time::from_ms(8));
    assert_eq!(recordings[1].reading.options().sample_period_ns, Some(10_000));
    assert_eq!(recordings[1].reading.options().unknown, Unknown::Hold);
}

#[test]
fn recording_read_in_a_way_that_does_not_exist_is_refused_with_line_and_key() {
    let refused = |key: &str| {
        let source = SourceText::new("contact.toml", format!("[[recording]]\npath = \"a.csv\"\n{key}\n"));
        parse(source).expect_err("bad").to_string()
    };
    for (key, told) in [
        ("resolution = 5", "contact.toml:3:14: \"5\" has no unit"),
        (
            "resolution = \"0 us\"",
            "contact.toml:3:14: a resolution of 0 is no time; write resolution = \"1 us\"",
        ),
        ("gap = \"soon\"", "contact.toml:3:7: "),
        ("time_unit = \"hours\"", "contact.toml:3:13: \"hours\" is not a unit of time; write \"s\", \"ms\""),
        ("delimiter = \";\"", "contact.toml:3:13: \";\" is not a delimiter; write \"comma\", \"semicolon\""),
        (
            "unknown = \"hol\"",
            "contact.toml:3:11: \"hol\" is not a way to take unknown values; write \"hold\"",
        ),
        (
            "resolutoin = \"1 us\"",
            "contact.toml:3:1: unknown key \"resolutoin\" in [[recording]]; write resolution",
        ),
        (
            "time_unit = \"s\"\nsample_period = \"1 us\"",
            "contact.toml:3:13: times that are numbers of samples have no unit",
        ),
    ] {
        let found = refused(key);
        assert!(found.starts_with(told), "{key}: {found}");
    }
}

#[test]
fn resolved_default_against_a_given_value_names_the_default() {
    let requirement = accepts("[required]\nbounce = \"80 ms\"");
    let problems = requirement.resolve(&Measured::default()).expect_err("70 ms is the default").to_string();
    assert!(problems.contains("the shortest operation (70 ms) is from the default"), "{problems}");
}

#[test]
fn resolved_ticks_keep_to_the_budget() {
    let periods = |text: &str| {
        let resolved = accepts(text).resolve(&Measured::default()).unwrap();
        resolved.ticks.value.iter().map(TickPeriod::to_string).collect::<Vec<_>>()
    };
    assert_eq!(periods("[budget]\nfastest_tick = \"500 Hz\""), ["2 ms", "4 ms", "5 ms", "8 ms", "10 ms"]);
    assert_eq!(periods("[budget]\nfastest_tick = \"30 Hz\""), ["30 Hz"]);
    assert_eq!(
        periods("[clock]\ntick = { from = \"300 us\", to = \"2 ms\" }"),
        ["300 us", "500 us", "1 ms", "2 ms"]
    );
    assert_eq!(periods("[clock]\ntick = { from = \"1 kHz\", to = \"1 ms\" }"), ["1 ms"]);
    assert_eq!(periods("[clock]\ntick = [\"30 Hz\", \"1 ms\"]"), ["1 ms", "30 Hz"]);
}

#[test]
fn resolved_envelope_rounds_to_the_safe_side() {
    let text = "[required]\nlatency = \"20 ms\"\nshortest_closed = \"60 ms\"\nshortest_open = \"50.5 ms\"\n\
                bounce = { make = \"5 ms\", break = \"4.1 ms\" }\ndisturbance = { open = \"1 ms\", closed = \"0 ms\" }\n\
                quiet = \"9.9 ms\"\n[clock]\ntick = \"1 ms\"\ntolerance = \"0 %\"\njitter = \"0 ms\"\nlost = \"1 tick\"";
    let resolved = accepts(text).resolve(&Measured::default()).unwrap();
    let tick = resolved.ticks.value[0];
    let expected = Envelope::clean(49, 59).bounce(5, 5).glitch(1, 0).quiet(8);
    assert_eq!(resolved.physical().in_ticks(&resolved.clock(tick)), Ok(expected));
    // 20 ms hold 20 samples, one of which may be lost.
    assert_eq!(resolved.allowed_samples(tick), PerChange { make: 19, break_: 19 });
}

#[test]
fn resolved_jitter_stays_below_the_tick() {
    let resolve = |text: &str| accepts(text).resolve(&Measured::default());
    let text = "[clock]\ntick = \"1 ms\"\ntolerance = \"0 %\"\njitter = \"1 ms\"";
    let problems = resolve(text).expect_err("as long as the tick").to_string();
    assert!(problems.starts_with("bench/contact.toml:4:10: a jitter of 1 ms is not shorter"), "{problems}");
    assert!(resolve(&text.replace("jitter = \"1 ms\"", "jitter = \"999 us\"")).is_ok());
    let fast = resolve("[clock]\ntick = \"10 us\"").unwrap();
    assert_eq!(fast.jitter.value, Time::from_ns(200));
}
