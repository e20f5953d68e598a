//! One side of a terminal diagram: where a sample leads from each state, as lines that share a lane to a target.

/// Where one sample leads from a state.
pub(super) struct Way {
    pub(super) target: usize,
    /// What stands on the line, such as the edge it reports.
    pub(super) label: &'static str,
}

/// All lines to one target; rows `from..=until`.
struct Lane {
    target: usize,
    from: usize,
    until: usize,
    column: usize,
}

/// Two rows a state, drawn to the right of its box: the upper one takes in, the lower one leads out.
pub(super) fn side(ways: &[Way]) -> Vec<String> {
    let lanes = lanes(ways);
    let indent = ways.iter().map(|way| way.label.len()).max().unwrap_or(0) + 2;
    let column = |lane: &Lane| indent + 2 * lane.column + 1;
    let width = lanes.iter().map(column).max().unwrap_or(0) + 1;
    let mut grid = vec![vec![' '; width.max(" stays".len())]; 2 * ways.len()];
    for lane in &lanes {
        (lane.from..=lane.until).for_each(|row| grid[row][column(lane)] = '|');
    }
    for (state, way) in ways.iter().enumerate() {
        if let Some(lane) = lanes.iter().find(|lane| lane.target == state) {
            run(&mut grid[2 * state], "<", column(lane));
        }
        if way.target == state {
            " stays".chars().zip(&mut grid[2 * state + 1]).for_each(|(letter, slot)| *slot = letter);
        } else if let Some(lane) = lanes.iter().find(|lane| lane.target == way.target) {
            run(&mut grid[2 * state + 1], &format!("-{}", way.label), column(lane));
        }
    }
    grid.into_iter().map(|row| row.into_iter().collect::<String>().trim_end().to_owned()).collect()
}

/// Draws a line from the box to a lane; lanes on the way are crossed.
fn run(row: &mut [char], begin: &str, lane: usize) {
    let begin = begin.chars().chain(core::iter::repeat('-'));
    for (slot, letter) in row[..lane].iter_mut().zip(begin) {
        if *slot == ' ' {
            *slot = letter;
        }
    }
    row[lane] = '+';
}

/// A lane for each target, the shortest nearest to the boxes, none over another.
fn lanes(ways: &[Way]) -> Vec<Lane> {
    let mut lanes: Vec<Lane> = Vec::new();
    for target in 0..ways.len() {
        let leads_here = |&(state, way): &(usize, &Way)| way.target == target && state != target;
        let out_rows = ways.iter().enumerate().filter(leads_here).map(|(state, _)| 2 * state + 1);
        let rows: Vec<usize> = out_rows.chain([2 * target]).collect();
        if let (Some(&from), Some(&until), 2..) = (rows.iter().min(), rows.iter().max(), rows.len()) {
            lanes.push(Lane { target, from, until, column: 0 });
        }
    }
    lanes.sort_by_key(|lane| (lane.until - lane.from, lane.from));
    for at in 0..lanes.len() {
        let (placed, rest) = lanes.split_at_mut(at);
        let lane = &mut rest[0];
        let meets = |other: &&Lane| other.from <= lane.until && lane.from <= other.until;
        let taken: Vec<usize> = placed.iter().filter(meets).map(|other| other.column).collect();
        lane.column = (0..).find(|column| !taken.contains(column)).unwrap_or(taken.len());
    }
    lanes
}
