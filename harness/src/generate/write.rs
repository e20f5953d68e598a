//! Invented recordings as tables: levels and volts.

use std::io::{self, Write};

use super::panel::MadeLine;

/// Writes levels as CSV: a row at every change of any channel, times in nanoseconds, `1` is closed.
///
/// # Errors
/// Those of `out`.
pub fn write_levels_csv(out: &mut dyn Write, lines: &[MadeLine]) -> io::Result<()> {
    let columns = lines.iter().map(|line| {
        let trace = &line.trace;
        let initial = (trace.start_ns(), u8::from(trace.initial().is_closed()).to_string());
        let edges = trace.edges().iter().enumerate();
        let changes =
            edges.map(|(n, &at)| (at, u8::from(trace.position_after(n + 1).is_closed()).to_string()));
        std::iter::once(initial).chain(changes)
    });
    let names: Vec<String> = lines.iter().map(|line| line.name.clone()).collect();
    write_rows(out, &names, columns.collect(), end_ns(lines))
}

/// Writes the volts at the inputs as CSV: a row wherever one of them changes, times in nanoseconds, held until the
/// next row. A line without volts is left out.
///
/// # Errors
/// Those of `out`.
pub fn write_volts_csv(out: &mut dyn Write, lines: &[MadeLine]) -> io::Result<()> {
    let with_volts = || lines.iter().filter_map(|line| Some((&line.name, line.volts.as_ref()?)));
    let names: Vec<String> = with_volts().map(|(name, _)| format!("{name} (V)")).collect();
    let columns = with_volts().map(|(_, volts)| volts.iter().map(|&(at, uv)| (at, in_volts(uv))));
    write_rows(out, &names, columns.collect(), end_ns(lines))
}

fn end_ns(lines: &[MadeLine]) -> u64 {
    lines.iter().map(|line| line.trace.end_ns()).max().unwrap_or(0)
}

fn in_volts(microvolts: i64) -> String {
    let sign = if microvolts < 0 { "-" } else { "" };
    let size = microvolts.unsigned_abs();
    format!("{sign}{}.{:06}", size / 1_000_000, size % 1_000_000)
}

fn write_rows<I: Iterator<Item = (u64, String)>>(
    out: &mut dyn Write,
    names: &[String],
    columns: Vec<I>,
    end_ns: u64,
) -> io::Result<()> {
    let mut rows = csv::Writer::from_writer(out);
    rows.write_record(std::iter::once("time (ns)").chain(names.iter().map(String::as_str)))?;
    let mut columns: Vec<_> = columns.into_iter().map(Iterator::peekable).collect();
    let mut values = vec![String::new(); columns.len()];
    let mut last = None;
    while let Some(now) = columns.iter_mut().filter_map(|column| column.peek().map(|next| next.0)).min() {
        for (column, value) in columns.iter_mut().zip(&mut values) {
            while let Some((_, next)) = column.next_if(|next| next.0 == now) {
                *value = next;
            }
        }
        write_row(&mut rows, now, &values)?;
        last = Some(now);
    }
    if last.is_some_and(|last| last < end_ns) {
        write_row(&mut rows, end_ns, &values)?;
    }
    rows.flush()
}

fn write_row(rows: &mut csv::Writer<&mut dyn Write>, at_ns: u64, values: &[String]) -> io::Result<()> {
    let at = at_ns.to_string();
    Ok(rows.write_record(std::iter::once(&at).chain(values))?)
}
