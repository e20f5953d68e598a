//! Preferred values of parts, IEC 60063: E6 to E24 as listed there, E48 to E192 by their rule.

/// A series of preferred values.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Series(u16);

/// Two digits; every second one is E12, every fourth E6.
const E24: [u16; 24] =
    [10, 11, 12, 13, 15, 16, 18, 20, 22, 24, 27, 30, 33, 36, 39, 43, 47, 51, 56, 62, 68, 75, 82, 91];

impl Series {
    /// The series that goes with a tolerance: E6 with 20 %, E12 with 10 %, E24 with 5 %, E48 with 2 %, E96 with 1 % and
    /// E192 below.
    #[must_use]
    pub const fn of_tolerance(ppm: u32) -> Self {
        Self(match ppm {
            200_000.. => 6,
            100_000.. => 12,
            50_000.. => 24,
            20_000.. => 48,
            10_000.. => 96,
            _ => 192,
        })
    }

    /// How many values a decade has.
    #[must_use]
    pub const fn values(self) -> u16 {
        self.0
    }

    /// The values of one decade, in hundredths of its beginning: 100, 110, up to below 1000.
    #[must_use]
    pub fn decade(self) -> Vec<u16> {
        match self.0 {
            6 | 12 | 24 => E24.iter().step_by(usize::from(24 / self.0)).map(|value| value * 10).collect(),
            count => (0..count)
                .map(|index| {
                    let exact = 100.0 * 10_f64.powf(f64::from(index) / f64::from(count));
                    // The list has 920 where the rule gives 919.
                    if exact.round() as u16 == 919 { 920 } else { exact.round() as u16 }
                })
                .collect(),
        }
    }

    /// The preferred value nearest to `value` by ratio, if it is not one already.
    #[must_use]
    pub fn instead_of(self, value: f64) -> Option<f64> {
        let decade = 10_f64.powf(value.log10().floor());
        let mut values: Vec<f64> = self.decade().iter().map(|&v| f64::from(v) / 100.0 * decade).collect();
        values.push(10.0 * decade);
        let off = |candidate: f64| (candidate / value).ln().abs();
        let nearest = values.into_iter().min_by(|&a, &b| off(a).total_cmp(&off(b)))?;
        (off(nearest) > 1e-6).then_some(nearest)
    }
}

/// The preferred value nearest to `value` where neither E24 nor `series` holds it; parts of E24 are sold in every
/// tolerance (common practice).
#[must_use]
pub fn not_preferred(value: f64, series: Series) -> Option<f64> {
    if !value.is_finite() || value <= 0.0 {
        return None;
    }
    Series(24).instead_of(value)?;
    series.instead_of(value)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// IEC 60063.
    #[test]
    fn series_are_those_of_the_standard() {
        assert_eq!(Series(6).decade(), [100, 150, 220, 330, 470, 680]);
        assert_eq!(Series(12).decade(), [100, 120, 150, 180, 220, 270, 330, 390, 470, 560, 680, 820]);
        assert_eq!(Series(24).decade().len(), 24);
        let eighth: Vec<u16> = Series(96).decade().into_iter().step_by(8).collect();
        assert_eq!(eighth, [100, 121, 147, 178, 215, 261, 316, 383, 464, 562, 681, 825]);
        let finest = Series(192).decade();
        assert!(finest.contains(&920) && !finest.contains(&919));
        let every_other: Vec<u16> = finest.into_iter().step_by(2).collect();
        assert_eq!(every_other, Series(96).decade(), "E96 is every second value of E192");
    }

    /// E24 is no rounding of its own rule at eight places.
    #[test]
    fn series_e24_differs_from_its_rule_at_eight_places() {
        let rule = |index: i32| (10.0 * 10_f64.powf(f64::from(index) / 24.0)).round() as u16;
        let off: Vec<u16> =
            (0..24).filter(|&i| rule(i) != E24[i as usize]).map(|i| E24[i as usize]).collect();
        assert_eq!(off, [27, 30, 33, 36, 39, 43, 47, 82]);
    }

    #[test]
    fn value_outside_every_series_gets_its_neighbour() {
        assert_eq!(not_preferred(10e3, Series::of_tolerance(10_000)), None);
        assert_eq!(not_preferred(33e-9, Series::of_tolerance(100_000)), None);
        assert_eq!(not_preferred(10.2e3, Series::of_tolerance(10_000)), None, "E96");
        let near = not_preferred(10.2e3, Series::of_tolerance(50_000)).expect("not in E24");
        assert!((near - 10e3).abs() < 1e-6);
        let near = not_preferred(9.9e3, Series::of_tolerance(50_000)).expect("not in E24");
        assert!((near - 10e3).abs() < 1e-6, "{near}");
    }
}
