use super::*;

#[track_caller]
fn check_close(found: f64, expected: f64, within: f64) {
    assert!((found - expected).abs() <= within, "found {found}, expected {expected}");
}

/// Critical numbers of runs at 2.5 % on each side, F. S. Swed, C. Eisenhart, Ann. Math. Stat. 14 (1943) 66-87, as
/// reprinted in many textbooks (from memory): at most the lower or at least the upper number is significant.
#[test]
fn runs_test_critical_numbers_agree_with_the_published_table() {
    for (n, lower, upper) in [(5, 2, 10), (8, 4, 14), (10, 6, 16), (12, 7, 19), (15, 10, 22), (20, 14, 28)] {
        assert!(runs_at_most(n, n, lower) <= 0.025, "{n}: {lower}");
        assert!(runs_at_most(n, n, lower + 1) > 0.025, "{n}: {lower}");
        assert!(1.0 - runs_at_most(n, n, upper - 1) <= 0.025, "{n}: {upper}");
        assert!(1.0 - runs_at_most(n, n, upper - 2) > 0.025, "{n}: {upper}");
    }
}

/// All orders of 3 above and 2 below, counted by hand: of the 10 orders 2 have two runs, 3 have three, 4 have four
/// and 1 has five.
#[test]
fn runs_test_distribution_of_three_and_two_is_counted_by_hand() {
    for (runs, of_ten) in [(1, 0.0), (2, 2.0), (3, 5.0), (4, 9.0), (5, 10.0)] {
        check_close(runs_at_most(3, 2, runs), of_ten / 10.0, 1e-12);
    }
}

/// Tails of Kendall's S, M. G. Kendall, Rank Correlation Methods, appendix table 1 (from memory: the same figures
/// stand in R. O. Gilbert's table A18, 1987): one-sided probabilities.
#[test]
fn trend_test_tails_agree_with_the_published_table() {
    for (n, s, one_sided) in [
        (4, 2, 0.375),
        (4, 4, 0.167),
        (4, 6, 0.042),
        (5, 4, 0.242),
        (5, 6, 0.117),
        (5, 8, 0.042),
        (5, 10, 0.0083),
    ] {
        check_close(trend_p_value(n, s), 2.0 * one_sided, 1.1e-3);
    }
    // Gilbert's worked series 10, 15, 14, 20 (from memory): S = 4.
    let test = TrendTest::of(&[10, 15, 14, 20]).unwrap();
    assert_eq!(test.s, 4);
    check_close(test.p_value, 2.0 * 4.0 / 24.0, 1e-12);
    assert_eq!(TrendTest::of(&[4, 3, 2, 1]).unwrap().s, -6);
}

/// Computed with SciPy 1.17.1, `scipy.stats.kendalltau(method="exact")`.
#[test]
fn trend_test_agrees_with_a_reference_library() {
    let rising = TrendTest::of(&[0, 5, 10, 15, 7, 12, 17, 9, 14, 19, 11, 16, 21]).unwrap();
    check_close(rising.tau, 0.589_743_589_7, 1e-9);
    check_close(rising.p_value, 0.004_289_283_568_8, 1e-12);
    let forty = TrendTest::of(&(0..40).map(|i| i * 17 % 41).collect::<Vec<_>>()).unwrap();
    check_close(forty.tau, 0.017_948_717_949, 1e-9);
    check_close(forty.p_value, 0.880_410_169_051, 1e-10);
}

#[test]
fn trend_test_with_ties_counts_each_pair_once() {
    let values = [3, 1, 3, 2, 2, 5, 3, 4, 4, 6];
    let brute: i64 = (0..values.len())
        .flat_map(|i| (i + 1..values.len()).map(move |j| (i, j)))
        .map(|(i, j): (usize, usize)| i64::from(values[j] > values[i]) - i64::from(values[j] < values[i]))
        .sum();
    assert_eq!(TrendTest::of(&values).unwrap().s, brute);
}

#[test]
fn independence_of_drifting_or_clustered_values_is_doubtful() {
    let drifting: Vec<u64> = (0..60).map(|i| 1_000 + i * 10 + (i * 7919) % 97).collect();
    let found = Independence::of(&drifting);
    assert!(found.is_doubtful() && found.trend.unwrap().tau > 0.5);
    let clustered: Vec<u64> =
        (0..60).map(|i| if i / 15 % 2 == 0 { 10 + i % 3 } else { 20 + i % 3 }).collect();
    let runs = Independence::of(&clustered).runs.unwrap();
    assert!(runs.runs == 4 && runs.p_value < 1e-6);
    let alternating: Vec<u64> = (0..60).map(|i| 10 + i % 2).collect();
    assert_eq!(Independence::of(&alternating).runs.unwrap().runs, 60);
    assert!(Independence::of(&alternating).is_doubtful());
}

/// With independent values either test may find something by accident, and only so often.
#[test]
fn independence_of_independent_values_is_seldom_doubtful() {
    use crate::generate::{Between, Dice};
    let doubtful = (0..2_000)
        .filter(|&stream| {
            let mut dice = Dice::new(41, stream);
            let values: Vec<u64> = (0..50).map(|_| dice.draw(Between(0, 1 << 40))).collect();
            Independence::of(&values).is_doubtful()
        })
        .count();
    // Twice 1 % of 2000, less what discrete distributions leave unused.
    assert!((10..=45).contains(&doubtful), "{doubtful}");
}

#[test]
fn independence_of_alike_or_few_values_is_not_tested() {
    assert_eq!(Independence::of(&[5; 100]), Independence { runs: None, trend: None });
    assert_eq!(Independence::of(&[]), Independence { runs: None, trend: None });
    assert_eq!(TrendTest::of(&[1, 2, 3]), None);
}

/// The normal distributions of many values join the exact ones.
#[test]
fn independence_exact_and_normal_chances_join() {
    check_close(runs_p_value(1_001, 1_000, 960), runs_p_value(1_000, 1_000, 959), 0.01);
    let values: Vec<u64> = (0..40_u64).map(|i| i * 17 % 41).collect();
    let exact = TrendTest::of(&values).unwrap();
    let normal =
        two_sided((exact.s.unsigned_abs() as f64 - 1.0).max(0.0) / (40.0 * 39.0 * 85.0 / 18.0_f64).sqrt());
    check_close(exact.p_value, normal, 0.01);
    check_close(two_sided(1.959_963_984_540_054), 0.05, 1e-12);
}
