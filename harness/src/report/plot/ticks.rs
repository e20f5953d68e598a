//! Where an axis is marked: at 1, 2 and 5 times powers of ten, the round numbers of printed scales.

/// The values of a linear scale from `from` to `until` at round numbers, at most `most` of them, and their step.
#[must_use]
pub fn linear_ticks(from: f64, until: f64, most: usize) -> (Vec<f64>, f64) {
    let step = round_step((until - from) / most.max(1) as f64);
    let (first, last) = ((from / step - 1e-9).ceil(), (until / step + 1e-9).floor());
    let mut values = Vec::new();
    let mut at = first;
    // Whole multiples, so that no error adds up from tick to tick.
    while at <= last {
        // A zero without a sign.
        values.push(at * step + 0.0);
        at += 1.0;
    }
    (values, step)
}

/// The least of 1, 2 and 5 times a power of ten that is not below `least`.
fn round_step(least: f64) -> f64 {
    if !least.is_finite() || least <= 0.0 {
        return 1.0;
    }
    let power = 10_f64.powf(least.log10().floor());
    // Division by a power of ten may leave a hair above a round number.
    let steps = [1.0, 2.0, 5.0, 10.0].map(|step| step * power);
    steps.into_iter().find(|step| *step >= least * (1.0 - 1e-9)).unwrap_or(10.0 * power)
}

/// The values of a logarithmic scale: 1, 2 and 5 times each power of ten, or the powers alone where these are many.
#[must_use]
pub fn log_ticks(from: f64, until: f64, most: usize) -> Vec<f64> {
    let (from, until) = (from.max(f64::MIN_POSITIVE), until.max(f64::MIN_POSITIVE));
    let powers = (from.log10() - 1e-9).floor() as i32..=(until.log10() + 1e-9).ceil() as i32;
    let of = |steps: &[f64]| -> Vec<f64> {
        let all = powers.clone().flat_map(|power| steps.iter().map(move |step| step * 10_f64.powi(power)));
        all.filter(|value| *value >= from * (1.0 - 1e-9) && *value <= until * (1.0 + 1e-9)).collect()
    };
    let fine = of(&[1.0, 2.0, 5.0]);
    if fine.len() <= most { fine } else { of(&[1.0]) }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn linear_ticks_are_round_and_within() {
        assert_eq!(linear_ticks(0.0, 10.0, 5), (vec![0.0, 2.0, 4.0, 6.0, 8.0, 10.0], 2.0));
        assert_eq!(linear_ticks(0.3, 1.1, 4), (vec![0.4, 0.6000000000000001, 0.8, 1.0], 0.2));
        assert_eq!(linear_ticks(-1.0, 1.0, 2), (vec![-1.0, 0.0, 1.0], 1.0));
    }

    #[test]
    fn linear_ticks_of_nothing_end() {
        assert_eq!(linear_ticks(5.0, 5.0, 4).0, [5.0]);
    }

    #[test]
    fn log_ticks_thin_out_over_many_decades() {
        assert_eq!(log_ticks(0.2, 6.0, 8), [0.2, 0.5, 1.0, 2.0, 5.0]);
        assert_eq!(log_ticks(1.0, 1e6, 8).len(), 7);
    }
}
