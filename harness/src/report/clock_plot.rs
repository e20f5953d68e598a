//! Worst delay against tick period as a plot of plain characters, at most 78 columns wide.

use std::fmt;

use crate::clock_range::{ClockRange, Curve};
use crate::quantity::Time;

/// Columns and rows inside the axes.
const COLUMNS: u64 = 64;
const ROWS: u64 = 14;

/// A mark for each curve; where two meet, the first is shown.
const MARKS: [char; 4] = ['o', '+', 'x', 'm'];

/// The curves of a [`ClockRange`]: in each column the longer of the two worst delays at the tick period of its middle.
///
/// A row of `-` is the longest delay that is allowed. Where the delay jumps, the envelope comes to a sample more or
/// less.
#[derive(Clone, Copy, Debug)]
pub struct ClockPlot<'a> {
    /// What is drawn.
    pub range: &'a ClockRange,
    /// The longest delay allowed, the shorter of make and break.
    pub allowed_ns: u64,
}

impl ClockPlot<'_> {
    /// The longest tick period at which anything works.
    fn until_ns(&self) -> Option<u64> {
        self.range.curves.iter().filter_map(|curve| Some(curve.works.last()?.until_ns)).max()
    }

    fn period_ns(&self, column: u64, until_ns: u64) -> u64 {
        let from_ns = self.range.span.from_ns;
        from_ns + (until_ns - from_ns) * (2 * column + 1) / (2 * COLUMNS)
    }

    fn delay_ns(&self, curve: &Curve, period_ns: u64) -> Option<u64> {
        let below = curve.at(period_ns)?.below_at(&self.range.clock, period_ns);
        Some(below.make.max(below.break_))
    }
}

impl fmt::Display for ClockPlot<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let Some(until_ns) = self.until_ns() else { return Ok(()) };
        // Later than this is too late whatever is drawn.
        let top_ns = (self.allowed_ns + self.allowed_ns / 4).max(1);
        let row_of = |ns: u64| ns.saturating_mul(ROWS) / top_ns;
        let mut cells = vec![vec![' '; COLUMNS as usize]; ROWS as usize];
        if let Some(row) = cells.get_mut(row_of(self.allowed_ns) as usize) {
            row.fill('-');
        }
        for (curve, mark) in self.range.curves.iter().zip(MARKS).rev() {
            for column in 0..COLUMNS {
                let delay = self.delay_ns(curve, self.period_ns(column, until_ns));
                if let Some(row) = delay.and_then(|ns| cells.get_mut(row_of(ns) as usize)) {
                    row[column as usize] = mark;
                }
            }
        }
        for (index, row) in cells.iter().enumerate().rev() {
            let label = match index as u64 {
                0 => "0".to_owned(),
                index if index == row_of(self.allowed_ns) => Time::from_ns(self.allowed_ns).to_string(),
                _ => String::new(),
            };
            let row: String = row.iter().collect();
            writeln!(f, "{}", format!("{label:>10} |{row}").trim_end())?;
        }
        writeln!(f, "{:>10} +{}", "", "-".repeat(COLUMNS as usize))?;
        let (left, right) =
            (Time::from_ns(self.range.span.from_ns).to_string(), Time::from_ns(until_ns).to_string());
        let between = (COLUMNS as usize + 1).saturating_sub(left.len());
        writeln!(f, "{:>10} {left}{right:>between$}", "")?;
        let legend: Vec<String> = self
            .range
            .curves
            .iter()
            .zip(MARKS)
            .map(|(curve, mark)| format!("{mark} {}", curve.family))
            .collect();
        writeln!(f, "{:>10}  worst delay against tick period", "")?;
        writeln!(f, "{:>10}  {}", "", legend.join(", "))
    }
}
