//! Writes traces as a value change dump: exact, and the same bytes for the same traces.

use std::io::{self, Write};

use debounce_core::Position;

use super::Trace;

/// Scope of a channel whose name has none.
const SCOPE: &str = "harness";

/// Writes traces as a VCD with a time scale of 1 ns; `1` is closed.
///
/// The parts of a name before its last point become scopes. White space in a name becomes `_`, because VCD
/// cannot hold it. No date is written. A trace that starts later or ends earlier than the others is `x`
/// there. The resolution of a trace is not kept: VCD has no place for it but the time scale.
///
/// # Errors
/// Those of `out`.
pub fn write_vcd(out: &mut impl Write, traces: &[(&str, &Trace)], comment: &str) -> io::Result<()> {
    let comment = comment.replace("$end", "$ end");
    if !comment.trim().is_empty() {
        writeln!(out, "$comment\n  {}\n$end", comment.trim())?;
    }
    writeln!(out, "$timescale 1 ns $end")?;
    declare(out, traces)?;
    writeln!(out, "$enddefinitions $end")?;

    let start_ns = traces.iter().map(|(_, trace)| trace.start_ns()).min().unwrap_or(0);
    let end_ns = traces.iter().map(|(_, trace)| trace.end_ns()).max().unwrap_or(0);
    writeln!(out, "#{start_ns}\n$dumpvars")?;
    for (number, (_, trace)) in traces.iter().enumerate() {
        let value = if trace.start_ns() == start_ns { value(trace.initial()) } else { 'x' };
        writeln!(out, "{value}{}", code(number))?;
    }
    writeln!(out, "$end")?;

    let mut lanes: Vec<Lane<'_>> =
        traces.iter().map(|(_, trace)| Lane::new(trace, start_ns, end_ns)).collect();
    while let Some(now_ns) = lanes.iter().filter_map(Lane::due_ns).min() {
        writeln!(out, "#{now_ns}")?;
        for (number, lane) in lanes.iter_mut().enumerate() {
            if lane.due_ns() == Some(now_ns) {
                writeln!(out, "{}{}", lane.advance(), code(number))?;
            }
        }
        if now_ns == end_ns {
            return Ok(());
        }
    }
    // The end of the recording is a time with no change after it.
    if end_ns > start_ns { writeln!(out, "#{end_ns}") } else { Ok(()) }
}

/// What a trace still has to write, by a count of the changes written.
#[derive(Debug)]
struct Lane<'a> {
    trace: &'a Trace,
    starts_late: Option<u64>,
    edges: usize,
    ends_early: Option<u64>,
}

impl<'a> Lane<'a> {
    fn new(trace: &'a Trace, start_ns: u64, end_ns: u64) -> Self {
        let starts_late = Some(trace.start_ns()).filter(|&own| own > start_ns);
        // A last edge at the very end of a short trace has no time to be seen, and its place is taken.
        let ends_early = Some(trace.end_ns())
            .filter(|own| *own < end_ns && trace.edges().last() != Some(own) && *own > trace.start_ns());
        Self { trace, starts_late, edges: 0, ends_early }
    }

    fn due_ns(&self) -> Option<u64> {
        self.starts_late.or_else(|| self.trace.edges().get(self.edges).copied()).or(self.ends_early)
    }

    fn advance(&mut self) -> char {
        if self.starts_late.take().is_some() {
            return value(self.trace.initial());
        }
        if self.edges < self.trace.edges().len() {
            self.edges += 1;
            return value(self.trace.position_after(self.edges));
        }
        self.ends_early = None;
        'x'
    }
}

fn value(position: Position) -> char {
    match position {
        Position::Open => '0',
        Position::Closed => '1',
    }
}

/// The identifier code of a variable: its number in base 94, the lowest digit first.
fn code(mut number: usize) -> String {
    let mut code = String::new();
    loop {
        // A remainder below 94 fits a byte, and the sum stays below 127.
        code.push(char::from(b'!' + (number % 94) as u8));
        number /= 94;
        if number == 0 {
            return code;
        }
        number -= 1;
    }
}

/// Writes the variables, opening and closing scopes as the names demand.
fn declare(out: &mut impl Write, traces: &[(&str, &Trace)]) -> io::Result<()> {
    let mut open: Vec<String> = Vec::new();
    for (number, (name, _)) in traces.iter().enumerate() {
        let mut scopes: Vec<String> = name.split('.').map(legal).collect();
        let last = scopes.pop().unwrap_or_else(|| legal(""));
        if scopes.is_empty() {
            scopes.push(SCOPE.to_owned());
        }
        let common = open.iter().zip(&scopes).take_while(|(a, b)| a == b).count();
        for _ in open.drain(common..) {
            writeln!(out, "$upscope $end")?;
        }
        for scope in &scopes[common..] {
            writeln!(out, "$scope module {scope} $end")?;
        }
        open = scopes;
        writeln!(out, "$var wire 1 {} {last} $end", code(number))?;
    }
    for _ in open {
        writeln!(out, "$upscope $end")?;
    }
    Ok(())
}

/// A name that VCD can hold: printable, without white space, not empty, no keyword.
fn legal(part: &str) -> String {
    let kept: String = part
        .chars()
        .map(|letter| if letter.is_whitespace() || letter.is_control() { '_' } else { letter })
        .collect();
    match kept.strip_prefix('$') {
        _ if kept.is_empty() => "_".to_owned(),
        Some(rest) => format!("_{rest}"),
        None => kept,
    }
}
