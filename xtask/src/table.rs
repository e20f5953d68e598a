//! The table at the end of a run.

use std::io::{self, Write};

/// What came of one check.
pub(crate) struct Row {
    pub(crate) name: &'static str,
    pub(crate) seconds: f64,
    pub(crate) failures: Vec<String>,
}

/// Writes every failure with its check, and the table below them.
pub(crate) fn write(out: &mut impl Write, rows: &[Row]) -> io::Result<()> {
    writeln!(out)?;
    for row in rows {
        for failure in &row.failures {
            writeln!(out, "{}: {failure}", row.name)?;
        }
    }
    writeln!(out, "{:<16} {:<6} {:>8}", "check", "result", "seconds")?;
    for row in rows {
        let result = if row.failures.is_empty() { "ok" } else { "FAILED" };
        writeln!(out, "{:<16} {result:<6} {:>8.1}", row.name, row.seconds)?;
    }
    let seconds: f64 = rows.iter().map(|row| row.seconds).sum();
    let failed = rows.iter().filter(|row| !row.failures.is_empty()).count();
    writeln!(out, "{:<16} {failed:>6} {seconds:>8.1}", "failed, in all")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn table_lists_failures_before_the_rows() {
        let rows = [
            Row { name: "check-format", seconds: 1.25, failures: Vec::new() },
            Row {
                name: "check-host",
                seconds: 100.0,
                failures: vec!["it rains".to_owned(), "it pours".to_owned()],
            },
        ];
        let mut out = Vec::new();
        write(&mut out, &rows).unwrap();
        let expected = "
check-host: it rains
check-host: it pours
check            result  seconds
check-format     ok          1.2
check-host       FAILED    100.0
failed, in all        1    101.2
";
        assert_eq!(String::from_utf8(out).unwrap(), expected);
    }
}
