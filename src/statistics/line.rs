//! A straight line through points by weighted least squares.
//!
//! The sums are taken about the weighted mean, so that points far from zero lose no digits.

/// A point with its weight: the inverse of its variance, or 1 for all where the variances are not known.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Point {
    /// Where.
    pub x: f64,
    /// What was found there.
    pub y: f64,
    /// How much it counts.
    pub weight: f64,
}

impl Point {
    /// A point as good as any other.
    pub fn plain(x: f64, y: f64) -> Self {
        Self { x, y, weight: 1.0 }
    }
}

/// The line `y = mean_y + slope * (x - mean_x)`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Line {
    mean_x: f64,
    mean_y: f64,
    /// Change of y per unit of x.
    pub slope: f64,
    /// Standard deviation of the points about the line in units of weight 1, from `count - 2` degrees of freedom;
    /// `None` for two points.
    pub scatter: Option<f64>,
    weights: f64,
    spread: f64,
}

impl Line {
    /// Fits a line; `None` with fewer than two different x.
    pub fn fit(points: impl Iterator<Item = Point> + Clone) -> Option<Self> {
        let mut count = 0_usize;
        let (mut weights, mut sum_x, mut sum_y) = (0.0, 0.0, 0.0);
        for point in points.clone() {
            count += 1;
            weights += point.weight;
            sum_x += point.weight * point.x;
            sum_y += point.weight * point.y;
        }
        let (mean_x, mean_y) = (sum_x / weights, sum_y / weights);
        let (mut spread, mut product) = (0.0, 0.0);
        for point in points.clone() {
            spread += point.weight * (point.x - mean_x).powi(2);
            product += point.weight * (point.x - mean_x) * (point.y - mean_y);
        }
        let slope = product / spread;
        if !slope.is_finite() {
            return None;
        }
        let mut line = Self { mean_x, mean_y, slope, scatter: None, weights, spread };
        if count > 2 {
            let squares: f64 = points.map(|point| point.weight * (point.y - line.at(point.x)).powi(2)).sum();
            line.scatter = Some((squares / (count - 2) as f64).sqrt());
        }
        Some(line)
    }

    /// The line of slope `slope` through one point.
    pub fn through(x: f64, y: f64, slope: f64) -> Self {
        Self { mean_x: x, mean_y: y, slope, scatter: None, weights: 1.0, spread: f64::INFINITY }
    }

    /// Value at `x`.
    pub fn at(&self, x: f64) -> f64 {
        self.mean_y + self.slope * (x - self.mean_x)
    }

    /// Standard uncertainty of the value at `x`, for a standard deviation `sigma` of a point of weight 1.
    pub fn uncertainty_at(&self, x: f64, sigma: f64) -> f64 {
        sigma * (1.0 / self.weights + (x - self.mean_x).powi(2) / self.spread).sqrt()
    }

    /// Standard uncertainty of the slope, likewise.
    pub fn slope_uncertainty(&self, sigma: f64) -> f64 {
        sigma / self.spread.sqrt()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Certified values carry fifteen digits; six lost to the arithmetic would already be too many.
    const TOLERANCE: f64 = 1e-10;

    /// NIST Statistical Reference Datasets, linear regression, Norris: certified values.
    #[test]
    fn the_norris_line_of_nist_comes_out_as_certified() {
        let text = include_str!("../../tests/data/nist/strd_linreg_norris.json");
        let file: serde_json::Value = serde_json::from_str(text).expect("reference data");
        let list = |key: &str| -> Vec<f64> {
            serde_json::from_value(file["data"][key].clone()).expect("a list of numbers")
        };
        let certified = |label: &str| -> f64 {
            let published = file["published"].as_array().expect("a list");
            let entry = published.iter().find(|entry| entry["label"] == label).expect("the label");
            entry["printed"].as_str().expect("text").parse().expect("a number")
        };
        let (x, y) = (list("x"), list("y"));
        let line = Line::fit(x.iter().zip(&y).map(|(x, y)| Point::plain(*x, *y))).expect("a line");
        let scatter = line.scatter.expect("36 points");
        for (label, value) in [
            ("B0", line.at(0.0)),
            ("B1", line.slope),
            ("residual_sd", scatter),
            ("sd_B0", line.uncertainty_at(0.0, scatter)),
            ("sd_B1", line.slope_uncertainty(scatter)),
        ] {
            let wanted = certified(label);
            assert!(((value - wanted) / wanted).abs() < TOLERANCE, "{label}: {value} against {wanted}");
        }
    }

    #[test]
    fn a_heavy_point_pulls_the_line() {
        let points = [(0.0, 0.0, 1.0), (1.0, 1.0, 1e12), (2.0, 0.0, 1.0)];
        let line = Line::fit(points.iter().map(|&(x, y, weight)| Point { x, y, weight })).expect("a line");
        assert!((line.at(1.0) - 1.0).abs() < 1e-9);
    }

    #[test]
    fn points_above_one_another_make_no_line() {
        assert_eq!(Line::fit([Point::plain(1.0, 1.0), Point::plain(1.0, 2.0)].into_iter()), None);
        assert_eq!(Line::fit(std::iter::empty()), None);
    }

    #[test]
    fn millivolts_on_a_million_keep_their_digits() {
        let points = (0..10).map(|i| Point::plain(1e6 + f64::from(i) * 1e-3, f64::from(i)));
        let slope = Line::fit(points).expect("a line").slope;
        assert!((slope - 1000.0).abs() < 1e-3, "{slope}");
    }
}
