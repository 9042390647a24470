//! A straight line through points by weighted least squares.
//!
//! The sums are taken about the weighted mean, so that points far from zero lose no digits.

use super::distribution::{ChiSquared, Distribution};

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
    /// How many points there are more than two.
    spare: usize,
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
        let spare = count.saturating_sub(2);
        let mut line = Self { mean_x, mean_y, slope, scatter: None, spare, weights, spread };
        if spare > 0 {
            let squares: f64 = points.map(|point| point.weight * (point.y - line.at(point.x)).powi(2)).sum();
            line.scatter = Some((squares / spare as f64).sqrt());
        }
        Some(line)
    }

    /// The line of slope `slope` through one point.
    pub fn through(x: f64, y: f64, slope: f64) -> Self {
        Self { mean_x: x, mean_y: y, slope, scatter: None, spare: 0, weights: 1.0, spread: f64::INFINITY }
    }

    /// Weighted mean of x: there the value is independent of the slope.
    pub fn middle(&self) -> f64 {
        self.mean_x
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

    /// Covariance of the value at `x` and the slope, likewise; none at the weighted mean (JCGM 100:2008, H.3.5).
    pub fn covariance_at(&self, x: f64, sigma: f64) -> f64 {
        sigma * sigma * (x - self.mean_x) / self.spread
    }

    /// Probability that points whose weights are the inverses of their true variances scatter about a straight line as
    /// much as these do, or more (chi-squared test of the residuals). A small one says that the course is no line, or
    /// that the points scatter more than they claim. `None` where no point is left to tell.
    pub fn residual_test(&self) -> Option<f64> {
        let degrees = self.spare as f64;
        Some(ChiSquared::new(degrees)?.upper(degrees * self.scatter?.powi(2)))
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
        let correlation = line.covariance_at(0.0, scatter)
            / line.uncertainty_at(0.0, scatter)
            / line.slope_uncertainty(scatter);
        assert!((correlation + 0.773_828_082_088).abs() < 1e-10, "{correlation}");
        // The certified sum of squares, 26.6174, as chi-squared of 34 degrees: upper tail by mpmath, 30 digits.
        assert!((line.residual_test().expect("36 points") - 0.812_527_119_105_3).abs() < 1e-9);
    }

    /// GUM (JCGM 100:2008) H.3: correction of a thermometer against its reading, as a line about 20 degrees. Inputs
    /// from two public copies of Table H.6, printed results from memory.
    #[test]
    fn the_thermometer_of_the_gum_comes_out_as_printed() {
        let text = include_str!("../../tests/data/statistics/gum_h3_thermometer.json");
        let file: serde_json::Value = serde_json::from_str(text).expect("reference data");
        let list =
            |key: &str| -> Vec<f64> { serde_json::from_value(file["data"][key].clone()).expect("a list") };
        let (readings, corrections) = (list("t_degC"), list("b_degC"));
        let line =
            Line::fit(readings.iter().zip(&corrections).map(|(t, b)| Point::plain(*t, *b))).expect("a line");
        let scatter = line.scatter.expect("11 points");
        let (at_20, slope) = (line.uncertainty_at(20.0, scatter), line.slope_uncertainty(scatter));
        let correlation = line.covariance_at(20.0, scatter) / (at_20 * slope);
        // At 30 degrees from the two at 20 and their correlation (H.14), and directly.
        let combined =
            (at_20.powi(2) + (10.0 * slope).powi(2) + 20.0 * line.covariance_at(20.0, scatter)).sqrt();
        for (what, found, printed, digit) in [
            ("intercept at 20", line.at(20.0), -0.1712, 1e-4),
            ("its uncertainty", at_20, 0.0029, 1e-4),
            ("slope", line.slope, 0.00218, 1e-5),
            ("its uncertainty", slope, 0.00067, 1e-5),
            ("correlation", correlation, -0.930, 1e-3),
            ("scatter", scatter, 0.0035, 1e-4),
            ("correction at 30", line.at(30.0), -0.1494, 1e-4),
            ("its uncertainty", line.uncertainty_at(30.0, scatter), 0.0041, 1e-4),
            ("the same by propagation", combined, 0.0041, 1e-4),
        ] {
            assert!((found - printed).abs() <= 0.5 * digit, "{what}: {found} against {printed}");
        }
        assert!((combined / line.uncertainty_at(30.0, scatter) - 1.0).abs() < 1e-12);
        let mean = readings.iter().sum::<f64>() / 11.0;
        assert!(line.covariance_at(mean, scatter).abs() < 1e-15);
    }

    #[test]
    fn a_bent_course_does_not_fit() {
        let course = |bend: f64| {
            let y = move |x: f64| 3.0 - 2.0 * x + bend * x * x;
            let points = (0..8).map(f64::from).zip([0.1, -0.05, -0.1, 0.05, 0.02, -0.08, 0.1, -0.04]);
            Line::fit(points.map(|(x, error)| Point { x, y: y(x) + error, weight: 100.0 })).expect("a line")
        };
        assert!(course(0.0).residual_test().is_some_and(|p| p > 0.1), "{:?}", course(0.0).residual_test());
        assert!(course(0.1).residual_test().is_some_and(|p| p < 1e-6), "{:?}", course(0.1).residual_test());
        assert_eq!(
            Line::fit([Point::plain(0.0, 0.0), Point::plain(1.0, 1.0)].into_iter())
                .and_then(|l| l.residual_test()),
            None
        );
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
