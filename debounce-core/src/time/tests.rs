//! Rounding at its boundaries, and against samples taken one by one.

extern crate std;

use std::vec::Vec;

use proptest::prelude::*;

use super::{Period, TickClock};

const MS: u64 = 1_000_000;

#[test]
fn period_of_thirty_hertz_is_exact() {
    let period = Period::from_hz(30);
    assert_eq!((period.numerator_ns(), period.denominator()), (100_000_000, 3));
    assert_ne!(period, Period::from_us(33_333));
    assert_ne!(Some(period), Period::try_from_ratio(33_333_333, 1));
}

#[test]
fn period_in_any_unit_is_in_lowest_terms() {
    assert_eq!(Period::from_ms(1), Period::from_us(1_000));
    assert_eq!(Period::from_ms(1), Period::from_ns(MS));
    assert_eq!(Period::from_ms(1), Period::from_hz(1_000));
    assert_eq!(Period::try_from_ratio(6, 4), Period::try_from_ratio(3, 2));
    assert_eq!(Period::from_hz(u32::MAX).denominator(), u32::MAX / 5); // 4 294 967 295 and 10^9 share a 5
    assert_eq!(Period::try_from_ratio(u64::MAX, u32::MAX).unwrap().denominator(), 1);
}

#[test]
fn period_of_zero_is_refused() {
    assert_eq!(Period::try_from_ratio(0, 1), None);
    assert_eq!(Period::try_from_ratio(1, 0), None);
    assert!(Period::try_from_ratio(1, 1).is_some());
}

/// Below, at and above a whole number of periods.
#[track_caller]
fn around(clock: TickClock, at_ns: u64, touched: [u32; 3], seen: [u32; 3]) {
    let times = [at_ns - 1, at_ns, at_ns + 1];
    assert_eq!(times.map(|time| clock.samples_touched(time)), touched, "touched");
    assert_eq!(times.map(|time| clock.samples_seen(time)), seen, "seen");
}

#[test]
fn clock_at_whole_periods_rounds_to_the_safe_side() {
    let clock = TickClock::new(Period::from_ms(1));
    around(clock, 1, [0, 1, 1], [0, 0, 0]);
    around(clock, MS, [1, 1, 2], [0, 1, 1]);
    around(clock, 5 * MS, [5, 5, 6], [4, 5, 5]);
}

#[test]
fn clock_of_thirty_hertz_turns_between_two_nanoseconds() {
    let clock = TickClock::new(Period::from_hz(30));
    // One period is 33 333 333 1/3 ns, three are 0.1 s.
    around(clock, 33_333_333, [1, 1, 2], [0, 0, 1]);
    around(clock, 66_666_667, [2, 3, 3], [1, 2, 2]);
    around(clock, 100 * MS, [3, 3, 4], [2, 3, 3]);
}

#[test]
fn clock_tolerance_shortens_what_disturbs_and_lengthens_what_sees() {
    let clock = TickClock::new(Period::from_ms(1)).tolerance_ppm(100_000);
    // 0.9 ms and 1.1 ms.
    around(clock, 9 * MS, [10, 10, 11], [8, 8, 8]);
    around(clock, 11 * MS, [13, 13, 13], [9, 10, 10]);
}

#[test]
fn clock_jitter_widens_what_disturbs_and_narrows_what_sees() {
    let clock = TickClock::new(Period::from_ms(1)).jitter_ns(200_000);
    around(clock, 4_800_000, [5, 5, 6], [4, 4, 4]);
    around(clock, 5_200_000, [6, 6, 6], [4, 5, 5]);
    assert_eq!(clock.samples_touched(0), 0);
    assert_eq!(clock.samples_seen(100), 0);
}

#[test]
fn clock_lost_ticks_are_not_seen() {
    let clock = TickClock::new(Period::from_ms(1)).lost(2);
    assert_eq!([1, 2, 3, 5].map(|ms| clock.samples_seen(ms * MS)), [0, 0, 1, 3]);
    assert_eq!(clock.samples_touched(3 * MS), 3);
    assert_eq!(clock.delay_ns(3), (2 * MS, 5 * MS));
}

#[test]
fn clock_delay_lies_between_its_two_ends() {
    assert_eq!(TickClock::new(Period::from_ms(1)).delay_ns(0), (0, 0));
    assert_eq!(TickClock::new(Period::from_ms(1)).delay_ns(1), (0, MS));
    assert_eq!(TickClock::new(Period::from_hz(30)).delay_ns(2), (33_333_333, 66_666_667));
    let wandering = TickClock::new(Period::from_ms(1)).tolerance_ppm(1_000).jitter_ns(5);
    assert_eq!(wandering.delay_ns(11), (9_989_995, 11_011_005));
    assert_eq!(wandering.delay_ns(1), (0, 1_001_005));
}

/// Common practice of the trade: a hand-operated button sampled without any filter.
#[test]
fn clock_of_common_practice_sees_what_practice_says() {
    let at = |hz| TickClock::new(Period::from_hz(hz));
    // 30 Hz: 33 ms of bounce touch one sample, a press of 70 ms is seen by one more.
    assert_eq!((at(30).samples_touched(33 * MS), at(30).samples_seen(70 * MS)), (1, 2));
    // 10 Hz and 5 Hz: a press of 150 ms may be seen by one sample, or by none.
    assert_eq!((at(10).samples_seen(150 * MS), at(5).samples_seen(150 * MS)), (1, 0));
}

#[test]
fn clock_beyond_its_numbers_stops_at_the_largest() {
    let fast = TickClock::new(Period::try_from_ratio(1, u32::MAX).unwrap())
        .tolerance_ppm(999_999)
        .jitter_ns(u64::MAX);
    assert_eq!(fast.samples_touched(u64::MAX), u32::MAX);
    assert_eq!(TickClock::new(Period::from_ns(1)).samples_seen(u64::MAX), u32::MAX);
    let slow = TickClock::new(Period::from_ns(u64::MAX)).tolerance_ppm(999_999).lost(u32::MAX);
    assert_eq!(slow.delay_ns(u32::MAX).1, u64::MAX);
    assert_eq!(slow.samples_touched(u64::MAX), 1_000_000);
}

#[test]
fn clock_tolerance_of_all_or_more_is_refused() {
    let clock = TickClock::new(Period::from_ms(1));
    assert_eq!(clock.try_tolerance_ppm(999_999).map(|clock| clock.ppm()), Some(999_999));
    assert_eq!(clock.try_tolerance_ppm(1_000_000), None);
    assert_eq!(clock.try_tolerance_ppm(u32::MAX), None);
}

#[test]
fn clock_gives_back_what_it_was_made_of() {
    let clock = TickClock::new(Period::from_hz(30)).tolerance_ppm(7).jitter_ns(8).lost(9);
    assert_eq!(
        (clock.period(), clock.ppm(), clock.jitter(), clock.lost_ticks()),
        (Period::from_hz(30), 7, 8, 9)
    );
}

/// A clock and the sample instants it came out with, in units of `1 / (denominator * 10^6)` ns, in which the
/// nominal, shortest and longest period, the jitter and every whole nanosecond are whole numbers.
#[derive(Debug)]
struct Course {
    clock: TickClock,
    unit: i128,
    // Delivered samples: every instant except one run of lost ticks.
    samples: Vec<i128>,
    // The change or the beginning of a disturbance, well inside the course.
    begin: i128,
}

fn courses() -> impl Strategy<Value = Course> {
    let clocks = (1_u64..5_000, 1_u32..50, 0_u32..300_000, 0_u32..90, 0_u32..4);
    clocks
        .prop_flat_map(|(numerator, denominator, ppm, jitter, lost)| {
            let ticks = prop::collection::vec((extreme(), extreme()), 60);
            (Just((numerator, denominator, ppm, jitter, lost)), ticks, 0..50_usize, 0_u32..1_001)
        })
        .prop_map(|((numerator, denominator, ppm, jitter, lost), ticks, lost_at, phase)| {
            let period = Period::try_from_ratio(numerator, denominator).unwrap();
            let unit = i128::from(period.denominator()) * 1_000_000;
            let nominal = i128::from(period.numerator_ns()) * 1_000_000;
            let swing = i128::from(period.numerator_ns()) * i128::from(ppm);
            // In whole nanoseconds and shorter than the shortest period, so that samples keep their order.
            let jitter_ns = (nominal - swing) * i128::from(jitter) / 100 / unit;
            let clock = TickClock::new(period)
                .tolerance_ppm(ppm)
                .jitter_ns(u64::try_from(jitter_ns).unwrap())
                .lost(lost);
            let mut instant = 0;
            let mut samples = Vec::new();
            for (late, wander) in ticks {
                instant += nominal - swing + 2 * swing * late / 1_000;
                samples.push(instant + jitter_ns * unit * wander / 1_000);
            }
            // Within one period of the tenth sample; 0 is exactly on it.
            let begin = samples[10] + nominal * i128::from(phase) / 1_000;
            samples.drain(lost_at..lost_at + lost as usize);
            Course { clock, unit, samples, begin }
        })
}

/// A share in thousandths, often at one of its ends.
fn extreme() -> impl Strategy<Value = i128> {
    prop_oneof![Just(0_i128), Just(1_000), 0_i128..=1_000]
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(2_000))]

    #[test]
    fn clock_samples_taken_one_by_one_stay_within_the_formulas(
        course in courses(), periods in 0_u64..30, part in 0_u64..1_000,
    ) {
        let Course { clock, unit, samples, begin } = course;
        let period = clock.period();
        let nominal_ns = period.numerator_ns() / u64::from(period.denominator());
        let time = nominal_ns * periods + nominal_ns * part / 1_000;
        let end = begin + i128::from(time) * unit;
        // Only intervals that the course covers whole: it goes on for at least one sample.
        prop_assume!(samples.last().is_some_and(|&last| last >= end));
        let inside = samples.iter().filter(|&&at| begin <= at && at < end).count() as u32;
        prop_assert!(inside <= clock.samples_touched(time), "{inside} touched in {time} ns");
        prop_assert!(inside >= clock.samples_seen(time), "{inside} seen in {time} ns");
    }

    #[test]
    fn clock_delay_of_the_kth_sample_stays_within_the_formula(course in courses(), k in 1_u32..20) {
        let Course { clock, unit, samples, begin } = course;
        let report = samples.iter().filter(|&&at| at >= begin).nth(k as usize - 1);
        let delay = *report.unwrap() - begin;
        let (least, below) = clock.delay_ns(k);
        prop_assert!(delay >= i128::from(least) * unit);
        prop_assert!(delay < i128::from(below) * unit);
    }

    /// Regular ticks, with the interval put where it catches most and fewest samples.
    #[test]
    fn clock_formulas_without_jitter_are_attained(
        numerator in 1_i128..2_000, denominator in 1_u32..40, time in 1_i128..20_000,
    ) {
        let period = Period::try_from_ratio(numerator as u64, denominator).unwrap();
        let clock = TickClock::new(period);
        let (step, length) = (i128::from(period.numerator_ns()), time * i128::from(period.denominator()));
        // Samples at multiples of `step`; the interval is half-open.
        let caught = |begin: i128| (begin + length - 1).div_euclid(step) - (begin - 1).div_euclid(step);
        prop_assert_eq!(i128::from(clock.samples_touched(time as u64)), caught(0));
        prop_assert_eq!(i128::from(clock.samples_seen(time as u64)), caught(1));
    }
}
