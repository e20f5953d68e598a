//! Places for letters, so that no two labels cover each other.

/// How wide a text will be at most, for letters of `size`: digits and capitals of a wide sans serif.
#[must_use]
pub fn text_width(text: &str, size: f64) -> f64 {
    text.chars().count() as f64 * size * 0.62
}

/// Moves places in one dimension apart until neighbours are at least `apart` from each other, in their given order of
/// size, and all lie between the ends where there is room.
#[must_use]
pub fn kept_apart(places: &[f64], apart: f64, (least, most): (f64, f64)) -> Vec<f64> {
    let mut order: Vec<usize> = (0..places.len()).collect();
    order.sort_by(|&a, &b| places[a].total_cmp(&places[b]).then(a.cmp(&b)));
    let mut moved = places.to_vec();
    let mut reach = least;
    for &index in &order {
        moved[index] = moved[index].max(reach);
        reach = moved[index] + apart;
    }
    let mut reach = most;
    for &index in order.iter().rev() {
        moved[index] = moved[index].min(reach);
        reach = moved[index] - apart;
    }
    moved
}

/// A row for each stretch, from 0, so that no two in a row touch: the lowest row that is free, from left to right.
#[must_use]
pub fn rows_apart(stretches: &[(f64, f64)], apart: f64) -> Vec<usize> {
    let mut order: Vec<usize> = (0..stretches.len()).collect();
    order.sort_by(|&a, &b| stretches[a].0.total_cmp(&stretches[b].0).then(a.cmp(&b)));
    let mut ends: Vec<f64> = Vec::new();
    let mut rows = vec![0; stretches.len()];
    for index in order {
        let (from, until) = stretches[index];
        let free = ends.iter().position(|&end| end + apart <= from);
        let row = free.unwrap_or_else(|| {
            ends.push(f64::MIN);
            ends.len() - 1
        });
        ends[row] = until;
        rows[index] = row;
    }
    rows
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn places_too_near_are_moved_apart() {
        assert_eq!(kept_apart(&[10.0, 12.0, 50.0], 10.0, (0.0, 100.0)), [10.0, 20.0, 50.0]);
        assert_eq!(kept_apart(&[95.0, 97.0], 10.0, (0.0, 100.0)), [90.0, 100.0]);
    }

    #[test]
    fn stretches_that_touch_get_rows_of_their_own() {
        assert_eq!(rows_apart(&[(0.0, 10.0), (5.0, 15.0), (12.0, 20.0)], 1.0), [0, 1, 0]);
    }
}
