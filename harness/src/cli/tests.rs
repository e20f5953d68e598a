//! What is typed: every example in a help text must be a command line that parses.

use clap::{Args, FromArgMatches};

use super::*;

/// Splits an example as a shell would, as far as examples go: double quotes and spaces.
fn words(line: &str) -> Vec<String> {
    let mut words = vec![String::new()];
    let mut quoted = false;
    for character in line.chars() {
        match character {
            '"' => quoted = !quoted,
            ' ' if !quoted => words.push(String::new()),
            other => words.last_mut().expect("never empty").push(other),
        }
    }
    assert!(!quoted, "unbalanced quotes in {line}");
    words
}

#[track_caller]
fn examples_parse<A: Args + FromArgMatches>(command: &'static str, examples: &str) {
    assert!(examples.lines().all(|line| line.len() <= 80), "wider than 80 columns: {examples}");
    // A stroke at the end of a line joins it with the next, as a shell has it.
    let joined = examples.replace(" \\\n     ", "");
    let lines: Vec<&str> =
        joined.lines().map(str::trim).filter(|line| line.starts_with("harness ")).collect();
    assert_eq!(lines.len(), 3, "three examples for {command}");
    for line in lines {
        let words = words(line);
        assert_eq!(words[1], command, "{line}");
        let parser = GlobalOptions::augment_args(A::augment_args(clap::Command::new(command)));
        let matches =
            parser.try_get_matches_from(&words[1..]).unwrap_or_else(|error| panic!("{line}: {error}"));
        A::from_arg_matches(&matches).unwrap_or_else(|error| panic!("{line}: {error}"));
    }
}

#[test]
fn help_examples_of_every_command_parse() {
    examples_parse::<StudyArguments>("study", StudyArguments::EXAMPLES);
    examples_parse::<CharacteriseArguments>("characterise", CharacteriseArguments::EXAMPLES);
    examples_parse::<ChooseArguments>("choose", ChooseArguments::EXAMPLES);
    examples_parse::<ProveArguments>("prove", ProveArguments::EXAMPLES);
    examples_parse::<LimitArguments>("limit", LimitArguments::EXAMPLES);
    examples_parse::<CompareArguments>("compare", CompareArguments::EXAMPLES);
    examples_parse::<ReplayArguments>("replay", ReplayArguments::EXAMPLES);
    examples_parse::<NetworkArguments>("network", NetworkArguments::EXAMPLES);
    examples_parse::<EmitArguments>("emit", EmitArguments::EXAMPLES);
    examples_parse::<RecheckArguments>("recheck", RecheckArguments::EXAMPLES);
    examples_parse::<SchemaArguments>("schema", SchemaArguments::EXAMPLES);
    examples_parse::<CompletionsArguments>("completions", CompletionsArguments::EXAMPLES);
    examples_parse::<ManualArguments>("manual", ManualArguments::EXAMPLES);
}

#[test]
fn help_of_every_command_is_consistent() {
    fn check<A: Args>(name: &'static str) {
        GlobalOptions::augment_args(A::augment_args(clap::Command::new(name))).debug_assert();
    }
    check::<StudyArguments>("study");
    check::<CharacteriseArguments>("characterise");
    check::<ChooseArguments>("choose");
    check::<ProveArguments>("prove");
    check::<LimitArguments>("limit");
    check::<CompareArguments>("compare");
    check::<ReplayArguments>("replay");
    check::<NetworkArguments>("network");
    check::<EmitArguments>("emit");
    check::<RecheckArguments>("recheck");
    check::<SchemaArguments>("schema");
    check::<CompletionsArguments>("completions");
    check::<ManualArguments>("manual");
}

#[test]
fn option_without_a_unit_says_what_to_write() {
    let parser = ChooseArguments::augment_args(clap::Command::new("choose"));
    let error = parser.try_get_matches_from(["choose", "--latency", "20"]).expect_err("no unit");
    let text = error.to_string();
    assert!(
        text.contains("--latency") && text.contains("\"20\" has no unit; write \"20 ms\" or \"20 us\""),
        "{text}"
    );
}

#[test]
fn input_without_a_recording_says_where_to_name_one() {
    let failure = RequirementInput::default().load_with_recordings().expect_err("none");
    assert!(failure.problems().to_string().starts_with("no recording is given; name one after the command"));
}
