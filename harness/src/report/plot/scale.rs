//! From values to places in a plot.

/// How values are spread over a stretch of the plot.
#[derive(Clone, Copy, PartialEq, Debug)]
enum Kind {
    Linear,
    Logarithmic,
}

/// A mapping from values to coordinates.
#[derive(Clone, Copy, PartialEq, Debug)]
pub struct Scale {
    kind: Kind,
    values: (f64, f64),
    places: (f64, f64),
}

impl Scale {
    /// Evenly spread. Where both values are the same, a little room is made above.
    #[must_use]
    pub fn linear(values: (f64, f64), places: (f64, f64)) -> Self {
        let (from, until) = values;
        let until = if until > from { until } else { from + 1.0 };
        Self { kind: Kind::Linear, values: (from, until), places }
    }

    /// Evenly spread by their logarithms. Values must be above 0; where both are the same, room is made around.
    #[must_use]
    pub fn logarithmic(values: (f64, f64), places: (f64, f64)) -> Self {
        let (from, until) = (values.0.max(f64::MIN_POSITIVE), values.1);
        let values = if until > from { (from, until) } else { (from / 2.0, from * 2.0) };
        Self { kind: Kind::Logarithmic, values, places }
    }

    /// The place of a value, also outside the plot.
    #[must_use]
    pub fn at(&self, value: f64) -> f64 {
        let part = match self.kind {
            Kind::Linear => (value - self.values.0) / (self.values.1 - self.values.0),
            Kind::Logarithmic => {
                let least = value.max(f64::MIN_POSITIVE);
                (least / self.values.0).ln() / (self.values.1 / self.values.0).ln()
            }
        };
        self.places.0 + part * (self.places.1 - self.places.0)
    }

    /// The place of a value, or the nearest end of the scale.
    #[must_use]
    pub fn within(&self, value: f64) -> f64 {
        self.at(value.clamp(self.values.0, self.values.1))
    }

    /// The first and the last value.
    #[must_use]
    pub const fn values(&self) -> (f64, f64) {
        self.values
    }

    /// The places of the first and the last value.
    #[must_use]
    pub const fn places(&self) -> (f64, f64) {
        self.places
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn scale_maps_ends_and_middle() {
        let linear = Scale::linear((10.0, 20.0), (100.0, 0.0));
        assert_eq!([10.0, 15.0, 20.0, 25.0].map(|value| linear.at(value)), [100.0, 50.0, 0.0, -50.0]);
        assert_eq!([5.0, 25.0].map(|value| linear.within(value)), [100.0, 0.0]);
        let logarithmic = Scale::logarithmic((1.0, 100.0), (0.0, 80.0));
        assert!((logarithmic.at(10.0) - 40.0).abs() < 1e-9);
    }

    #[test]
    fn scale_of_a_single_value_still_has_a_width() {
        assert_eq!(Scale::linear((3.0, 3.0), (0.0, 10.0)).at(3.0), 0.0);
        assert!((Scale::logarithmic((8.0, 8.0), (0.0, 10.0)).at(8.0) - 5.0).abs() < 1e-9);
    }
}
