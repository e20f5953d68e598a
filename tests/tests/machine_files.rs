//! Tables that are refused: every fault with its place, all at once.

use harness::machine::{MachineTable, Reading, TableFileError, read_csv, read_kiss2};

#[track_caller]
fn refused(result: Result<MachineTable, TableFileError>, expected: &[&str]) {
    let error = result.expect_err("a bad table");
    assert_eq!(error.to_string().lines().collect::<Vec<_>>(), expected);
    for fault in error.faults() {
        let first = fault.message().chars().next().expect("a message");
        assert!(!first.is_uppercase() && !fault.message().ends_with('.'), "{}", fault.message());
    }
}

/// Reads `lines` after a sound head of three lines, whose reset state is a.
#[track_caller]
fn kiss2(lines: &str, expected: &[&str]) {
    let text = format!(".i 1\n.o 1\n.r a\n{lines}");
    refused(read_kiss2("t.kiss2", text.as_bytes(), Reading::Moore), expected);
}

#[test]
fn table_that_is_incomplete_names_state_and_sample() {
    kiss2(
        "0 a a 0\n1 a b 0\n1 b b 1\n",
        &["t.kiss2:6:3: state \"b\" has no line for sample 0 (open); say where it goes then"],
    );
    kiss2(
        "0 a a 0\n",
        &["t.kiss2:4:3: state \"a\" has no line for sample 1 (closed); say where it goes then"],
    );
}

#[test]
fn table_that_is_not_deterministic_names_both_lines() {
    kiss2(
        "0 a a 0\n1 a b 0\n0 b a 1\n1 b b 1\n1 a a 0\n- b b 1\n0 a a 0\n",
        &[
            "t.kiss2:8:3: state \"a\" with sample 1 (closed) was already given in line 5, with another next state; \
             keep one of the two",
            "t.kiss2:9:3: state \"b\" with sample 0 (open) was already given in line 6, with another next state; \
             keep one of the two",
        ],
    );
    kiss2(
        "0 a a 0\n1 a b 0\n0 b a 1\n1 b b 1\n1 b b 0\n",
        &[
            "t.kiss2:8:3: state \"b\" with sample 1 (closed) was already given in line 7, with another output; \
             keep one of the two",
            "t.kiss2:8:7: state \"b\" has output 0 here and 1 in line 6, but in the Moore reading the output \
             belongs to the state; use the Mealy reading if the output belongs to the step",
        ],
    );
}

#[test]
fn table_with_an_unreachable_state_names_it() {
    kiss2(
        "0 a a 0\n1 a b 0\n0 b a 1\n1 b b 1\n- far a 1\n",
        &[
            "t.kiss2:8:3: state \"far\" is never reached from the reset state \"a\"; remove its lines, or add the \
           one that leads to it",
        ],
    );
}

#[test]
fn table_that_leads_to_a_state_without_lines_names_it_once() {
    kiss2(
        "0 a a 0\n1 a b 0\n0 b a 1\n1 b gone 1\n",
        &["t.kiss2:7:5: state \"gone\" has no line of its own; say where it goes at each sample"],
    );
}

#[test]
fn table_without_a_sound_reset_state_is_refused() {
    let sound = "0 a a 0\n1 a b 0\n0 b a 1\n1 b b 1\n";
    refused(
        read_kiss2("t.kiss2", format!(".i 1\n.o 1\n{sound}").as_bytes(), Reading::Moore),
        &["t.kiss2: the table names no reset state; add a line such as .r a"],
    );
    refused(
        read_kiss2("t.kiss2", format!(".i 1\n.o 1\n.r c\n{sound}").as_bytes(), Reading::Moore),
        &["t.kiss2:3:4: the reset state \"c\" has no line of its own; name a state that the table describes"],
    );
    // Waiting is not resting: w goes on to a at once.
    kiss2(
        "0 a b 0\n1 a b 0\n0 b b 0\n1 b c 0\n0 c b 1\n1 c c 1\n",
        &[
            "t.kiss2:3:4: the reset state \"a\" has output 0 but does not stay there: open samples lead to \"b\"; \
           name the state in which the machine waits for the contact as the reset state",
        ],
    );
}

#[test]
fn table_that_never_settles_says_where() {
    kiss2(
        "0 a a 0\n1 a b 0\n0 b a 1\n1 b c 1\n0 c a 1\n1 c b 1\n",
        &[
            "t.kiss2:3:4: closed samples never settle the machine: they lead round and round through state \"b\"; \
           from the reset state they must end in one state with output 1, and stay there",
        ],
    );
    kiss2(
        "0 a a 0\n1 a b 0\n0 b a 0\n1 b b 0\n",
        &[
            "t.kiss2:3:4: closed samples never settle the machine: they end in state \"b\", whose output is 0; from \
           the reset state they must end in one state with output 1, and stay there",
        ],
    );
}

#[test]
fn kiss2_of_the_wrong_width_is_refused() {
    let text = ".i 2\n.o 3\n.r a\n00 a a 0\n1 a a 000\n";
    refused(
        read_kiss2("t.kiss2", text.as_bytes(), Reading::Moore),
        &[
            "t.kiss2:1:4: .i says \"2\" bits; a table for one contact has 1, the sample of the contact",
            "t.kiss2:2:4: .o says \"3\" bits; a table for one contact has 1, the debounced position",
            "t.kiss2:4:1: \"00\" is no sample; use 0 (open), 1 (closed) or - (either)",
            "t.kiss2:5:7: \"000\" is no output; use 0 (open) or 1 (closed)",
        ],
    );
}

#[test]
fn kiss2_with_states_or_outputs_left_open_is_refused() {
    kiss2(
        "0 a * 0\n1 a - 0\n- * a 0\n1 b b -\n",
        &[
            "t.kiss2:4:5: the next state of \"a\" is left open; name the state: what is not said cannot be proved",
            "t.kiss2:5:5: the next state of \"a\" is left open; name the state: what is not said cannot be proved",
            "t.kiss2:6:3: \"*\" leaves the present state open; write a line for each state",
            "t.kiss2:7:7: the output of state \"b\" is left open; use 0 (open) or 1 (closed)",
        ],
    );
}

#[test]
fn kiss2_with_either_sample_is_both_lines() {
    let tick_between = ".i 1\n.o 1\n.r a\n0 a a 0\n1 a w 0\n- w b 0\n1 b b 1\n0 b a 1\n.e\n";
    let read = read_kiss2("t.kiss2", tick_between.as_bytes(), Reading::Moore).expect("a sound table");
    let wait = read.next(read.reset(), debounce_core::Position::Closed);
    let [open, closed] = debounce_core::Position::BOTH.map(|sample| read.name(read.next(wait, sample)));
    assert_eq!((read.name(wait).as_str(), open.as_str(), closed.as_str()), ("w", "b", "b"));
}

#[test]
fn kiss2_whose_lines_or_counts_do_not_fit_is_refused() {
    let text =
        ".i 1\n.i 1\n.o 1 1\n.q\n.s 3\n.p four\n.r a\n0 a a 0\n1 a b 0\n0 b a 1\n1 b b\n\n.e\n0 x x 0\n";
    refused(
        read_kiss2("t.kiss2", text.as_bytes(), Reading::Moore),
        &[
            "t.kiss2: the table has no .o; add .o 1",
            "t.kiss2:2:1: .i was already given in line 1",
            "t.kiss2:3:1: .o takes one value, not 2",
            "t.kiss2:4:1: \".q\" is no directive of KISS2; use .i .o .p .s .r .ilb .ob or .e",
            "t.kiss2:6:4: .p says \"four\" lines, the table has 4",
            "t.kiss2:11:1: a line of a table has 4 words, not 3; write: sample, present state, next state, output",
            "t.kiss2:14:1: there is more after the end (.e)",
        ],
    );
    kiss2(".s 3\n0 a a 0\n1 a b 0\n- b b 1\n", &["t.kiss2:4:4: .s says \"3\" states, the table has 2"]);
    refused(
        read_kiss2("t.kiss2", b".i 1\n.o 1\n.r a\n", Reading::Moore),
        &["t.kiss2: the table has no lines; write: sample, present state, next state, output"],
    );
    refused(
        read_kiss2("t.kiss2", b".i 1\n.o 1\n.r a\n\xff\n0 a a 0\n1 a b 0\n- b b 1\n", Reading::Moore),
        &["t.kiss2:4:1: this line is not UTF-8 text"],
    );
}

#[test]
fn csv_that_is_no_table_is_refused() {
    let csv = |text: &str, expected: &[&str]| {
        refused(read_csv("t.csv", text.as_bytes(), Reading::Moore), expected);
    };
    csv("", &["t.csv: the table has no lines; write the header state,sample,next,output, then the lines"]);
    csv(
        "a,0,a,0\na,1,b,0\nb,-,b,1\n",
        &["t.csv:1:1: the table does not begin with its header; the first line is state,sample,next,output"],
    );
    csv(
        "state,sample,next,output\na, 2,a,0\na,1,two words,0\na,0\n-,1,a,high\n",
        &[
            "t.csv:2:4: \"2\" is no sample; use 0 (open), 1 (closed) or - (either)",
            "t.csv:3:5: \"two words\" is no name: a name of a state has no spaces",
            "t.csv:4:1: a line of a table has 4 fields, not 2; write: state,sample,next,output",
            "t.csv:5:1: \"-\" is no name: it stands for any state",
            "t.csv:5:7: \"high\" is no output; use 0 (open) or 1 (closed)",
        ],
    );
    csv(
        "state,sample,next,output\na,0,a,0\nb,1,b,1\n",
        &[
            "t.csv:2:1: state \"a\" has no line for sample 1 (closed); say where it goes then",
            "t.csv:3:1: state \"b\" has no line for sample 0 (open); say where it goes then",
        ],
    );
}
