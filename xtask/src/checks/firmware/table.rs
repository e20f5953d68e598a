//! The table of costs: read, written, compared.

use std::fmt::Write as _;

/// The ticks that a total is over.
pub(super) const TICKS: u64 = 8000;

/// The kinds of input, in the order of the numbers.
const KINDS: [&str; 3] = ["constant", "random", "contact"];

/// What one contender costs in one use on one machine.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) struct Row {
    /// Machine, method, language, use.
    key: [String; 4],
    state_bytes: u32,
    /// Of the method as a function of its own, where the tools can tell.
    flash_bytes: Option<u32>,
    /// Instructions of all ticks, of each kind.
    totals: [u32; 3],
    /// Instructions of the dearest tick, of each kind.
    worsts: [u32; 3],
}

impl Row {
    /// Reads `METHOD LANGUAGE USE: state S bytes; KIND total T worst W; ...` as an image prints it.
    pub(super) fn printed(machine: &str, line: &str, sizes: &[(String, u32)]) -> Result<Self, String> {
        let parsed = (|| {
            let (name, numbers) = line.split_once(": ")?;
            let [method, language, usage] = words(name)?;
            let mut parts = numbers.split("; ");
            let state_bytes = parts.next()?.strip_prefix("state ")?.strip_suffix(" bytes")?.parse().ok()?;
            let (mut totals, mut worsts) = ([0; 3], [0; 3]);
            for (kind, (total, worst)) in KINDS.iter().zip(totals.iter_mut().zip(&mut worsts)) {
                let [name, _, all, _, most] = words(parts.next()?)?;
                (name == *kind).then_some(())?;
                (*total, *worst) = (all.parse().ok()?, most.parse().ok()?);
            }
            let symbol = format!("{language}_{method}_step");
            let flash_bytes = sizes.iter().find(|(name, _)| *name == symbol).map(|(_, size)| *size);
            let key = [machine, method, language, usage].map(str::to_owned);
            Some(Self { key, state_bytes, flash_bytes, totals, worsts })
        })();
        parsed.ok_or_else(|| format!("{machine}: the image printed \"{line}\", which is no row of the table"))
    }

    /// Reads a line of the file of numbers.
    fn read(line: &str) -> Option<Self> {
        let fields: [&str; 12] = words(line)?;
        let key = [fields[0], fields[1], fields[2], fields[3]].map(str::to_owned);
        let number = |index: usize| fields[index].parse().ok();
        Some(Self {
            key,
            state_bytes: number(4)?,
            flash_bytes: if fields[5] == "-" { None } else { Some(number(5)?) },
            totals: [number(6)?, number(8)?, number(10)?],
            worsts: [number(7)?, number(9)?, number(11)?],
        })
    }

    /// Every number with its name.
    fn numbers(&self) -> Vec<(String, u32)> {
        let mut numbers = vec![("bytes of state".to_owned(), self.state_bytes)];
        numbers.extend(self.flash_bytes.map(|bytes| ("bytes of flash".to_owned(), bytes)));
        for (index, kind) in KINDS.iter().enumerate() {
            numbers.push((format!("instructions of {TICKS} ticks, {kind} input"), self.totals[index]));
            numbers.push((format!("instructions of the dearest tick, {kind} input"), self.worsts[index]));
        }
        numbers
    }

    fn name(&self) -> String {
        self.key.join(" ")
    }

    /// The C beside our own is a yardstick; what another compiler makes of it is no fault of ours.
    fn is_ours(&self) -> bool {
        self.key[2] != "c"
    }
}

fn words<const N: usize>(text: &str) -> Option<[&str; N]> {
    text.split_whitespace().collect::<Vec<_>>().try_into().ok()
}

/// The file of numbers.
pub(super) fn write(tools: &[String], rows: &[Row]) -> String {
    let mut text =
        String::from("# Written by `cargo xtask update-costs`; exact, for `cargo xtask check-firmware`.\n");
    for tool in tools {
        text += &format!("# tool: {tool}\n");
    }
    text += "# machine method language use, bytes of state, bytes of flash; then of constant, random and contact input:\n";
    text += &format!("# instructions of {TICKS} ticks, instructions of the dearest\n");
    for row in rows {
        let flash = row.flash_bytes.map_or("-".to_owned(), |bytes| bytes.to_string());
        let _ = write!(text, "{} {} {flash}", row.name(), row.state_bytes);
        for (total, worst) in row.totals.iter().zip(row.worsts) {
            let _ = write!(text, " {total} {worst}");
        }
        text += "\n";
    }
    text
}

/// The tools and the rows of the file of numbers.
pub(super) fn read(text: &str) -> Result<(Vec<String>, Vec<Row>), String> {
    let tools = text.lines().filter_map(|line| line.strip_prefix("# tool: ")).map(str::to_owned).collect();
    let rows = text.lines().filter(|line| !line.starts_with('#'));
    let rows = rows.map(|line| Row::read(line).ok_or_else(|| format!("\"{line}\" is no row of costs")));
    Ok((tools, rows.collect::<Result<_, _>>()?))
}

/// Where more was measured than is stated, and rows that only one side has.
pub(super) fn faults(stated: &[Row], measured: &[Row]) -> Vec<String> {
    let mut faults = Vec::new();
    for row in stated.iter().filter(|row| !measured.iter().any(|other| other.key == row.key)) {
        faults.push(format!("{} is in the table and was not measured", row.name()));
    }
    for row in measured {
        match stated.iter().find(|other| other.key == row.key) {
            None => faults.push(format!("{} was measured and is not in the table", row.name())),
            Some(other) if row.is_ours() => {
                faults.extend(changes(other, row, |stated, measured| measured > stated));
            }
            Some(_) => {}
        }
    }
    faults
}

/// Where less was measured than is stated; nothing wrong, but worth writing down.
pub(super) fn savings(stated: &[Row], measured: &[Row]) -> Vec<String> {
    let pairs =
        measured.iter().filter_map(|row| Some((stated.iter().find(|other| other.key == row.key)?, row)));
    pairs.flat_map(|(stated, row)| changes(stated, row, |stated, measured| measured < stated)).collect()
}

fn changes(stated: &Row, measured: &Row, differ: fn(u32, u32) -> bool) -> Vec<String> {
    let pairs = stated.numbers().into_iter().zip(measured.numbers());
    let changed = pairs.filter(|((_, old), (_, new))| differ(*old, *new));
    changed
        .map(|((name, old), (_, new))| format!("{}: {name}: {new}, in the table {old}", measured.name()))
        .collect()
}

/// The section of the crate's documentation.
pub(super) fn section(tools: &[String], rows: &[Row]) -> String {
    let mut text = String::from(INTRODUCTION);
    let _ = writeln!(text, "Measured with {}.", tools.join("; "));
    let mut machines: Vec<&str> = rows.iter().map(|row| row.key[0].as_str()).collect();
    machines.dedup();
    for machine in machines {
        let _ = writeln!(text, "\n## On {machine}\n");
        text += "| method, language, use | constant | random: average, worst | contact: average, worst | state, flash: bytes |\n";
        text += "|---|---|---|---|---|\n";
        for row in rows.iter().filter(|row| row.key[0] == machine) {
            let [constant, random, contact] = row.totals.map(average);
            let flash = row.flash_bytes.map_or("–".to_owned(), |bytes| bytes.to_string());
            let language = if row.is_ours() { "Rust" } else { "C" };
            let _ = writeln!(
                text,
                "| {}, {language}, {} | {constant} | {random}, {} | {contact}, {} | {}, {flash} |",
                row.key[1].replace('_', " "),
                row.key[3].replace('-', " "),
                row.worsts[1],
                row.worsts[2],
                row.state_bytes
            );
        }
    }
    text
}

/// Instructions a tick, to two places.
fn average(total: u32) -> String {
    let hundredths = (u64::from(total) * 100 + TICKS / 2) / TICKS;
    format!("{}.{:02}", hundredths / 100, hundredths % 100)
}

const INTRODUCTION: &str = "\
<!-- Written by `cargo xtask update-costs`. -->
# Cost

Instructions of one tick, counted in an emulator, where a run is the same every time: cortex-m3 is thumbv7m code on
the machine lm3s6965evb, cortex-m0 thumbv6m code on microbit, riscv32imc that code on virt. The counter is calibrated
with a loop of known length. `cargo xtask check-firmware` counts again, and one instruction more than here fails.

A tick is what comes on top of a loop that finds the sample in memory and looks whether it was the last: the state is
loaded, stepped and stored, and an edge, where there is one, calls a function that returns at once. *Inlined* stands the
step in that loop, *called* it is a function of its own; there rustc keeps a frame pointer and the C compiler does not,
so compare inlined with inlined. *Looked at* has the lanes that changed handed to a function, where any did.

*Constant* input is settled. *Random* reads either way at each tick. *Contact* is held for 40 to 167 ticks, reads at
random for 8, and then the other position. Averages are over 8000 ticks.

Full scale, window and confirm are 16 samples, the majority 5 of 8; the patient ones have confirm 3, patience 3 and a
lock-out of 4; the chain is a majority of 2 of 3 before a confirm of 3, the table has three states. All are constants
([`ConstLaw`](crate::ConstLaw)). A bank has 32 inputs, so a 32nd of its state is an input's. *Starting* has an
integrator in it, *starting bank* a bank of 2 bits: both soon have nothing left to start. The matrix has four rows and
four columns without diodes, in banks of 2 bits; an encoder is turned a quarter cycle at each change; the speed has a gate
of 100 ticks; the mailbox gets an event at every closed sample and is emptied at every tick, critical sections included.

The plain C beside them is a yardstick of the same published methods, compiled by GCC with `-O2` into
the same image. Flash is that of the step as a function of its own, without what it calls in turn.

";

#[cfg(test)]
mod tests {
    use super::*;

    const LINE: &str = "bank rust inlined: state 12 bytes; constant total 72000 worst 9; \
                        random total 72001 worst 10; contact total 72002 worst 11";

    fn row() -> Row {
        Row::printed("cortex-m3", LINE, &[("rust_bank_step".to_owned(), 40)]).unwrap()
    }

    #[test]
    fn row_printed_is_read_with_its_size() {
        let row = row();
        assert_eq!(row.name(), "cortex-m3 bank rust inlined");
        assert_eq!((row.state_bytes, row.flash_bytes), (12, Some(40)));
        assert_eq!((row.totals, row.worsts), ([72_000, 72_001, 72_002], [9, 10, 11]));
    }

    #[test]
    fn row_printed_otherwise_is_refused_with_the_line() {
        let message = Row::printed("cortex-m3", "panicked at x", &[]).unwrap_err();
        assert_eq!(message, "cortex-m3: the image printed \"panicked at x\", which is no row of the table");
    }

    #[test]
    fn numbers_written_read_back_the_same() {
        let tools = vec!["rustc 1".to_owned()];
        let mut bare = row();
        bare.flash_bytes = None;
        let rows = vec![row(), bare];
        assert_eq!(read(&write(&tools, &rows)), Ok((tools, rows)));
        assert_eq!(read("cortex-m3 bank\n"), Err("\"cortex-m3 bank\" is no row of costs".to_owned()));
    }

    #[test]
    fn one_instruction_more_is_a_fault_and_one_less_a_saving() {
        let stated = row();
        assert!(faults(std::slice::from_ref(&stated), &[row()]).is_empty());
        let mut more = row();
        more.totals[2] += 1;
        let text = "cortex-m3 bank rust inlined: instructions of 8000 ticks, contact input: 72003, in the table 72002";
        assert_eq!(faults(std::slice::from_ref(&stated), std::slice::from_ref(&more)), [text]);
        assert_eq!(savings(&[more], &[stated]).len(), 1);
    }

    #[test]
    fn yardstick_may_change() {
        let mut stated = row();
        stated.key[2] = "c".to_owned();
        let mut more = stated.clone();
        more.worsts[0] += 1;
        assert!(faults(&[stated], &[more]).is_empty());
    }

    #[test]
    fn row_on_one_side_only_is_a_fault() {
        assert_eq!(
            faults(&[], &[row()]),
            ["cortex-m3 bank rust inlined was measured and is not in the table"]
        );
        assert_eq!(
            faults(&[row()], &[]),
            ["cortex-m3 bank rust inlined is in the table and was not measured"]
        );
    }

    #[test]
    fn average_is_rounded_to_hundredths() {
        assert_eq!(average(72_000), "9.00");
        assert_eq!(average(39), "0.00");
        assert_eq!(average(40), "0.01");
        assert_eq!(average(35_801), "4.48");
    }
}
