//! Two ends and what lies between them.

use serde::Serialize;

/// A range of values, both ends included, in SI units.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Window {
    /// Lower end.
    pub min: f64,
    /// Upper end.
    pub max: f64,
}

impl Window {
    /// Everything within `half_width` of `centre`.
    pub fn around(centre: f64, half_width: f64) -> Self {
        Self { min: centre - half_width, max: centre + half_width }
    }

    /// The same window with `value` in it.
    #[must_use]
    pub fn with(self, value: f64) -> Self {
        Self { min: self.min.min(value), max: self.max.max(value) }
    }

    /// What is left when the ends move inward; `None` when nothing is.
    pub fn narrowed(self, from_below: f64, from_above: f64) -> Option<Self> {
        let left = Self { min: self.min + from_below, max: self.max - from_above };
        (left.min < left.max).then_some(left)
    }

    /// Upper less lower end.
    pub fn width(self) -> f64 {
        self.max - self.min
    }

    /// Whether `value` lies inside; never for NaN.
    pub fn contains(self, value: f64) -> bool {
        self.min <= value && value <= self.max
    }
}

/// `5.827 to 6.173 V`, or `at most 6.173 V` where the other end is out of reach.
impl std::fmt::Display for Window {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match (self.min.is_finite(), self.max.is_finite()) {
            (true, true) => {
                let (scale, decimals, unit) = form(self.min.abs().max(self.max.abs()));
                write!(f, "{:.decimals$} to {:.decimals$} {unit}", self.min * scale, self.max * scale)
            }
            (true, false) => write!(f, "at least {}", volts(self.min)),
            (false, true) => write!(f, "at most {}", volts(self.max)),
            (false, false) => write!(f, "any"),
        }
    }
}

/// A voltage to the millivolt, and to the tenth of a millivolt below one volt: what limits are written in.
pub fn volts(value: f64) -> String {
    let (scale, decimals, unit) = form(value.abs());
    format!("{:.decimals$} {unit}", value * scale)
}

fn form(magnitude: f64) -> (f64, usize, &'static str) {
    if magnitude < 1.0 { (1e3, 1, "mV") } else { (1.0, 3, "V") }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn both_ends_stand_under_one_prefix() {
        assert_eq!(Window { min: 0.3, max: 0.5 }.to_string(), "300.0 to 500.0 mV");
        assert_eq!(Window { min: 0.9, max: 1.1 }.to_string(), "0.900 to 1.100 V");
        assert_eq!(Window { min: f64::NEG_INFINITY, max: 10.58 }.to_string(), "at most 10.580 V");
    }

    #[test]
    fn nothing_is_left_of_a_window_narrowed_too_far() {
        assert_eq!(Window::around(6.0, 0.1).narrowed(0.1, 0.1), None);
        assert!(!Window::around(6.0, 0.1).contains(f64::NAN));
    }
}
