//! The machine behind a logic: tabulated, minimised, compared, written and read back, proved as drawn.

use std::hash::Hash;

use debounce_core::{
    Change, Envelope, Integrator, Law, MajorityRegister, Position, ShiftRegister, StateMachine,
    StateMachineParameters, TableLaw,
};
use harness::emit::table::TableRows;
use harness::machine::{
    Counts, MachineTable, Reading, compare, dot, read_csv, read_kiss2, read_table, table_text,
    terminal_diagram, write_csv, write_kiss2,
};
use harness::prove::{LawTable, Limits, prove, prove_within};
use harness::report::state_diagram::{LARGEST_STATE_DIAGRAM, state_diagram};
use integration_tests::toggle::TOGGLE;

fn machine<L: Law>(law: &L) -> MachineTable
where
    L::State: Hash,
{
    MachineTable::of(law).expect("a sound law")
}

fn state_machine(confirm: u8, patience: u8, lockout: u8) -> StateMachine {
    StateMachine::<u8>::new(
        StateMachineParameters::confirm(confirm, confirm)
            .patience(patience, patience)
            .lockout(lockout, lockout),
    )
}

/// Some machines of every kind, with the number of states they have when minimised.
fn machines() -> Vec<(MachineTable, usize)> {
    vec![
        (machine(&ShiftRegister::new(1)), 2),
        (machine(&ShiftRegister::new(4)), 8),
        (machine(&Integrator::<u8>::new(3)), 6),
        (machine(&Integrator::<u16>::with_steps(9, 3, 3)), 6),
        (machine(&MajorityRegister::<u8>::new(2, 3)), 6),
        (machine(&state_machine(3, 1, 0)), 6),
        (machine(&state_machine(2, 3, 4)), 16),
        (read_kiss2("lamp", TOGGLE.as_bytes(), Reading::Moore).expect("a sound table"), 4),
    ]
}

#[test]
fn machine_minimised_has_the_expected_states_and_does_the_same() {
    for (machine, states) in machines() {
        let small = machine.minimised();
        assert_eq!(small.machine.len(), states, "{}", table_text(&machine));
        assert_eq!(compare(&machine, &small.machine), None);
        assert_eq!(small.machine.minimised().machine, small.machine, "minimising twice changes nothing");
        for position in Position::BOTH {
            let rest = small.stands_for[machine.resting(position)];
            assert_eq!(rest, small.machine.resting(position));
        }
    }
}

/// A unanimous window, a counter that starts again and the textbook machine are one machine under three names;
/// so is an integrator whose steps and scale share a factor.
#[test]
fn machines_of_different_laws_that_do_the_same_are_equivalent() {
    for n in 1..=9 {
        let window = machine(&ShiftRegister::new(n));
        assert_eq!(compare(&window, &machine(&state_machine(n, 1, 0))), None);
        assert_eq!(compare(&window, &machine(&MajorityRegister::<u16>::new(n, n))), None);
    }
    let plain = machine(&Integrator::<u8>::new(4));
    assert_eq!(compare(&plain, &machine(&Integrator::<u16>::with_steps(12, 3, 3))), None);
}

/// Runs two laws over the samples and returns what each reports at each.
fn edges<L: Law>(law: &L, start: Position, samples: &[Position]) -> Vec<Option<Change>> {
    let mut state = law.rest(start);
    samples.iter().map(|&sample| law.step(&mut state, sample)).collect()
}

#[test]
fn machines_that_differ_are_told_apart_by_a_shortest_sequence() {
    use Position::{Closed, Open};
    let (integrator, window) = (Integrator::<u8>::new(3), ShiftRegister::new(3));
    let apart = compare(&machine(&integrator), &machine(&window)).expect("they differ");
    // Any contrary sample clears the window, while the integrator only goes one back.
    assert_eq!(apart.start, Open);
    assert_eq!(apart.samples, [Closed, Closed, Open, Closed, Closed]);
    assert_eq!(apart.edges, [Some(Change::Make), None]);
    let (mut one, mut other) =
        (edges(&integrator, apart.start, &apart.samples), edges(&window, apart.start, &apart.samples));
    assert_eq!([one.pop(), other.pop()], apart.edges.map(Some));
    assert_eq!(one, other);
    // By force: no shorter word tells them apart.
    for length in 1..apart.samples.len() {
        for word in 0..1_u32 << length {
            let samples: Vec<_> = (0..length).map(|at| Position::closed_if(word >> at & 1 != 0)).collect();
            for start in Position::BOTH {
                assert_eq!(edges(&integrator, start, &samples), edges(&window, start, &samples));
            }
        }
    }
}

#[test]
fn machine_counts_states_bits_and_arrows() {
    let counts = |n| machine(&ShiftRegister::new(n)).counts();
    assert_eq!(counts(1), Counts { states: 2, state_bits: 1, arrows: 4 });
    assert_eq!(counts(2), Counts { states: 4, state_bits: 2, arrows: 8 });
    assert_eq!(counts(3), Counts { states: 6, state_bits: 3, arrows: 12 });
    let locked = machine(&state_machine(1, 1, 1));
    assert_eq!(locked.counts(), Counts { states: 4, state_bits: 2, arrows: 6 });
}

#[test]
fn machine_written_and_read_back_is_the_same() {
    for (machine, _) in machines() {
        for reading in [Reading::Moore, Reading::Mealy] {
            let kiss2 = write_kiss2(&machine, reading);
            let read = read_table("m.kiss2", kiss2.as_bytes(), reading).expect("what was written");
            assert_eq!(compare(&machine, &read), None);
            assert_eq!(write_kiss2(&read, reading), kiss2, "{reading:?}");
            assert_eq!(read.len(), machine.len());
            let csv = write_csv(&machine, reading);
            let read = read_table("m.csv", csv.as_bytes(), reading).expect("what was written");
            assert_eq!(compare(&machine, &read), None);
            assert_eq!((write_csv(&read, reading), read.len()), (csv, machine.len()), "{reading:?}");
        }
    }
}

#[test]
fn machine_read_from_a_table_is_proved_as_the_law_it_was_written_from() {
    let envelope = Envelope::clean(20, 20).bounce(3, 2).glitch(1, 1).quiet(4);
    let mut faithful = 0;
    for (machine, _) in machines() {
        let drawn = read_kiss2("m", write_kiss2(&machine, Reading::Mealy).as_bytes(), Reading::Mealy)
            .expect("what was written");
        let rows = TableRows::of(&drawn).expect("few states");
        let in_flash = TableLaw::try_new(&rows.rows, rows.closed_from, rows.rests).expect("a sound table");
        let outcome = |table: &LawTable| {
            prove_within(table, &envelope, &Limits::default()).expect("a sound envelope").outcome
        };
        let as_law = prove(&machine, &envelope).expect("a sound law").outcome;
        assert_eq!(outcome(&LawTable::of(&drawn).expect("a sound law")), as_law);
        assert_eq!(outcome(&LawTable::of(&in_flash).expect("a sound law")), as_law);
        assert_eq!(compare(&MachineTable::of(&in_flash).expect("a sound law"), &machine), None);
        faithful += u32::from(prove(&machine, &envelope).expect("a sound law").bounds().is_some());
    }
    assert_eq!(faithful, 5, "pinned; proofs and refutations both occur");
}

/// In the Mealy reading a state that is entered with both outputs stands for two.
#[test]
fn mealy_state_entered_with_both_outputs_becomes_two() {
    // One state that hands every sample on: the output is the sample.
    let through = ".i 1\n.o 1\n.r s\n0 s s 0\n1 s s 1\n";
    let read = read_kiss2("through", through.as_bytes(), Reading::Mealy).expect("a sound table");
    assert_eq!(compare(&read, &machine(&ShiftRegister::new(1))), None);
    assert_eq!([read.name(0), read.name(1)], ["s-0", "s-1"]);
    let error = read_kiss2("through", through.as_bytes(), Reading::Moore).expect_err("two outputs");
    assert_eq!(
        error.to_string(),
        "through:5:7: state \"s\" has output 1 here and 0 in line 4, but in the Moore reading the output \
         belongs to the state; use the Mealy reading if the output belongs to the step"
    );
}

#[test]
fn machine_shown_as_table_and_diagram_reads_as_pinned() {
    let machine = read_kiss2("lamp", TOGGLE.as_bytes(), Reading::Moore).expect("a sound table");
    let table = "\
state     output  open sample  closed sample
off       open    off          on_held make    rest, reset
on_held   closed  on           on_held         rest
on        closed  on           off_held break
off_held  open    off          off_held
";
    assert_eq!(table_text(&machine), table);
    let diagram = "\
at an open sample                  at a closed sample
           +---->[ off open       ]
           stays [ rest, reset    ]-make---+
           |     [ on_held closed ]<-------+
           | +---[ rest           ] stays
           | +-->[ on closed      ]
           stays [                ]-break--+
           |     [ off_held open  ]<-------+
           +-----[                ] stays
";
    assert_eq!(terminal_diagram(&machine).expect("few states"), diagram);
    let graph = dot(&machine);
    assert!(graph.contains("  s0 -> s1 [label=\"closed / make\"];\n"), "{graph}");
    assert!(graph.contains("  s2 [label=\"on\\nclosed\"];\n"), "{graph}");
    assert!(terminal_diagram(&self::machine(&ShiftRegister::new(6))).is_some());
    assert!(terminal_diagram(&self::machine(&ShiftRegister::new(7))).is_none(), "14 states are too many");
}

#[test]
fn state_diagram_is_well_formed_has_classes_and_no_colours_and_is_the_same_each_time() {
    for (machine, _) in machines() {
        let svg = state_diagram(&machine, "m").expect("few states");
        assert_eq!(state_diagram(&machine, "m").as_ref(), Some(&svg));
        let count = |what: &str| svg.matches(what).count();
        assert_eq!(count("class=\"state "), machine.len(), "{svg}");
        assert_eq!(count("class=\"inner\""), 2, "{svg}");
        assert_eq!(count("class=\"step "), machine.counts().arrows, "{svg}");
        assert_eq!(count("class=\"label\""), machine.counts().arrows, "{svg}");
        for colour in ["#0", "#f", "rgb", "black", "white"] {
            assert_eq!(count(colour), 0, "{colour}: {svg}");
        }
        assert_eq!(count("=\"currentColor\""), count("currentColor"));
        assert!(!svg.contains("NaN") && !svg.contains("inf"), "{svg}");
    }
    // Two states a sample of the window.
    let window = LARGEST_STATE_DIAGRAM as u8 / 2;
    assert!(state_diagram(&machine(&ShiftRegister::new(window)), "m").is_some());
    assert!(state_diagram(&machine(&ShiftRegister::new(window + 1)), "m").is_none());
}

#[test]
fn table_of_either_format_with_comments_windows_line_ends_or_a_byte_order_mark_is_read() {
    let (plain, _) = machines().swap_remove(0);
    let kiss2 = write_kiss2(&plain, Reading::Moore).replace('\n', "\r\n");
    let csv = write_csv(&plain, Reading::Moore).replace('\n', "\r\n");
    for text in [format!("# drawn, by hand\r\n{kiss2}"), format!("# drawn, by hand\r\n\r\n{csv}"), kiss2, csv]
    {
        for mark in ["", "\u{feff}"] {
            let read = read_table("t", format!("{mark}{text}").as_bytes(), Reading::Moore).expect("a table");
            assert_eq!(compare(&read, &plain), None, "{mark}{text}");
        }
    }
}

#[test]
fn csv_table_with_words_and_either_sample_is_read() {
    let table = "# one tick of delay\nstate,sample,next,output\nidle,open,idle,open\nidle,closed,held,open\n\
                 held,1,held,1\nheld,0,idle,closed\n";
    let read = read_csv("t.csv", table.as_bytes(), Reading::Moore).expect("a sound table");
    assert_eq!(compare(&read, &machine(&ShiftRegister::new(1))), None);
    assert_eq!(read.name(read.reset()), "idle");
}
