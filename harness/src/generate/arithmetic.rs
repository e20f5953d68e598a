//! Exponentials, logarithms and sines in whole numbers, the same on every platform.
//!
//! The functions of a platform's mathematical library differ in the last digits from one to the next, and a
//! threshold crossed one nanosecond later is another recording. Everything here is built on integer square roots.

/// One, in numbers with 62 bits after the point.
const ONE: u128 = 1 << 62;

/// The logarithm of e to the base 2, with 62 bits after the point.
///
/// 1.442695040888963407 (handbook value), times 2^62.
const LOG2_E: u128 = 1_442_695_040_888_963_407 * ONE / 1_000_000_000_000_000_000;

/// The natural logarithm of 2 with 62 bits after the point: 0.693147180559945309 (handbook value).
const LN_2: u128 = 693_147_180_559_945_309 * ONE / 1_000_000_000_000_000_000;

/// Bits of a binary fraction that are looked at.
const BITS: usize = 44;

/// `2^(-2^-(i+1))` at place i: each is the square root of the one before, the first that of one half.
const ROOTS: [u128; BITS] = {
    let mut roots = [0; BITS];
    let mut last = ONE / 2;
    let mut place = 0;
    while place < BITS {
        last = (last * ONE).isqrt();
        roots[place] = last;
        place += 1;
    }
    roots
};

/// `value * e^(-elapsed / constant)`, towards zero; a constant of 0 decays at once.
pub(super) fn decayed(value: i64, elapsed: u64, constant: u64) -> i64 {
    // After 44 time constants nothing of 64 bits is left.
    if constant == 0 || u128::from(elapsed) >= u128::from(constant) * 45 {
        return if elapsed == 0 && constant > 0 { value } else { 0 };
    }
    // Below 45 * 2^62, so the product with LOG2_E fits once it has been shifted.
    let turns = (u128::from(elapsed) << 32) / u128::from(constant);
    let power = (turns * LOG2_E) >> 32;
    let (whole, fraction) = (power >> 62, power & (ONE - 1));
    let mut factor = ONE;
    for (place, root) in ROOTS.iter().enumerate() {
        if fraction >> (61 - place) & 1 == 1 {
            factor = (factor * root) >> 62;
        }
    }
    // A magnitude of 63 bits times a factor of at most one, shifted back, fits again.
    let left = ((u128::from(value.unsigned_abs()) * (factor >> whole)) >> 62) as i64;
    if value < 0 { -left } else { left }
}

/// The logarithm of `value` to the base 2, with 62 bits after the point, 44 of them right; of 0 it is 0.
fn log2(value: u64) -> u128 {
    let Some(whole) = value.checked_ilog2() else { return 0 };
    let mut mantissa = (u128::from(value) << 62) >> whole;
    let mut fraction = 0;
    for place in 0..BITS {
        mantissa = (mantissa * mantissa) >> 62;
        if mantissa >= 2 * ONE {
            mantissa >>= 1;
            fraction |= ONE >> (place + 1);
        }
    }
    (u128::from(whole) << 62) + fraction
}

/// `constant * ln(from / to)` rounded up: how long an exponential takes to fall from one value to another.
pub(super) fn time_to_fall(constant: u64, from: u64, to: u64) -> u64 {
    if from <= to {
        return 0;
    }
    if to == 0 {
        return u64::MAX;
    }
    // Below 64 * 2^62; the shift keeps the products within 128 bits.
    let ratio = (((log2(from) - log2(to)) >> 22) * (LN_2 >> 22)) >> 40;
    let product = (ratio >> 8).saturating_mul(u128::from(constant));
    u64::try_from(product.div_ceil(1 << 32)).unwrap_or(u64::MAX)
}

/// Steps of a full turn.
pub(super) const STEPS_A_TURN: usize = 64;

/// The sine at each of 64 even steps of a turn, times 2^30.
///
/// From the half-angle formula for the step and the recurrence `s[n+1] = 2 cos(step) s[n] - s[n-1]`.
pub(super) const SINE: [i64; STEPS_A_TURN] = {
    // cos(90 degrees) is 0; four halvings give the cosine of 1/64 of a turn.
    let (mut cosine, mut halvings) = (0_u128, 0);
    while halvings < 4 {
        cosine = ((ONE + cosine) / 2 * ONE).isqrt();
        halvings += 1;
    }
    let sine = (ONE * ONE - cosine * cosine).isqrt();
    // Both are at most 2^62.
    let (cosine, mut last, mut now) = (cosine.cast_signed(), 0_i128, sine.cast_signed());
    let mut table = [0; STEPS_A_TURN];
    let mut step = 1;
    while step < STEPS_A_TURN {
        // At most 2^30 in size.
        table[step] = (now >> 32) as i64;
        (last, now) = (now, ((2 * cosine * (now >> 2)) >> 60) - last);
        step += 1;
    }
    table
};

#[cfg(test)]
mod tests {
    use super::*;

    /// Against the platform's own exponential, which is good to about 16 digits.
    #[test]
    fn decay_agrees_with_the_exponential_function() {
        for elapsed in [0_u64, 1, 99, 1_000, 12_345, 100_000, 700_000, 4_000_000] {
            let exact = -5e12 * (-(elapsed as f64) / 100_000.0).exp();
            let found = decayed(-5_000_000_000_000, elapsed, 100_000) as f64;
            assert!((found - exact).abs() <= exact.abs() * 1e-9 + 1.0, "{elapsed}: {found} against {exact}");
        }
        assert_eq!((decayed(7, 0, 5), decayed(7, 9, 0), decayed(7, u64::MAX, 1)), (7, 0, 0));
        assert_eq!(decayed(i64::MAX, 0, u64::MAX), i64::MAX);
    }

    /// Published worked values: 1 kOhm and 1 mF reach 3.16 V of 5 V after one time constant; 10 kOhm and 5 uF
    /// take 34.65 ms to one half (worked solutions of two teaching pages).
    #[test]
    fn decay_agrees_with_worked_examples() {
        let after_one = 5_000_000 - decayed(5_000_000, 1_000_000_000, 1_000_000_000);
        assert_eq!((after_one + 5_000) / 10_000, 316);
        assert_eq!(time_to_fall(50_000_000, 2, 1) / 1_000, 34_657);
    }

    #[test]
    fn time_to_fall_agrees_with_the_logarithm() {
        for (from, to) in
            [(2, 1), (3_300_000, 1_300_000), (3_300_000, 800_000), (u64::MAX, 1), (1_000_001, 1_000_000)]
        {
            let exact = 200_000.0 * (from as f64 / to as f64).ln();
            let found = time_to_fall(200_000, from, to) as f64;
            assert!((found - exact).abs() <= 1.0 + exact * 1e-9, "{from} {to}: {found} against {exact}");
        }
        assert_eq!((time_to_fall(9, 1, 1), time_to_fall(9, 1, 2), time_to_fall(9, 1, 0)), (0, 0, u64::MAX));
        assert!(time_to_fall(u64::MAX, u64::MAX, 1) == u64::MAX);
    }

    #[test]
    fn sine_agrees_with_the_function() {
        for (step, &found) in SINE.iter().enumerate() {
            let exact =
                (std::f64::consts::TAU * step as f64 / STEPS_A_TURN as f64).sin() * f64::from(1 << 30);
            assert!((found as f64 - exact).abs() < 4.0, "{step}: {found} against {exact}");
        }
    }
}
