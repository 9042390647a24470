//! How a threshold of one board goes with temperature.

use crate::statistics::line::{Line, Point};
use serde::Serialize;

/// Coverage factor of what is stated here.
const COVERAGE_FACTOR: f64 = 2.0;

/// The temperature to which the coefficient is referred, degC; usual on data sheets.
const REFERENCE: f64 = 25.0;

/// The slope of a straight line over temperature, per kelvin and as a share of the threshold at 25 degC.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct TemperatureCoefficient {
    /// Change of the threshold, V/K.
    pub slope_v_per_k: f64,
    /// The same as a share of the threshold at 25 degC, 1/K.
    pub relative_per_k: f64,
    /// Its expanded uncertainty, k = 2, 1/K.
    pub expanded_uncertainty_per_k: f64,
    /// Probability of residuals as large as these if the course is a line; absent for two temperatures.
    pub line_probability: Option<f64>,
}

/// A threshold at a temperature, with its standard uncertainty: degC, V, V.
pub(super) type AtTemperature = (f64, f64, f64);

impl TemperatureCoefficient {
    /// Through two or more temperatures. The instrument's own error is the same at all of them and cancels in the slope,
    /// so the uncertainties are those of the cycles alone, taken together: a few cycles tell their scatter too poorly for
    /// it to weigh one temperature against another. Where the points scatter more than that, their scatter counts.
    pub(super) fn of(points: &[AtTemperature]) -> Option<Self> {
        let squares: f64 = points.iter().map(|(_, _, uncertainty)| uncertainty.powi(2)).sum();
        let weight = points.len() as f64 / squares;
        let line = Line::fit(points.iter().map(|&(x, y, _)| Point { x, y, weight }))?;
        let sigma = line.scatter.unwrap_or(1.0).max(1.0);
        let reference = line.at(REFERENCE);
        Some(Self {
            slope_v_per_k: line.slope,
            relative_per_k: line.slope / reference,
            expanded_uncertainty_per_k: COVERAGE_FACTOR * line.slope_uncertainty(sigma) / reference.abs(),
            line_probability: line.residual_test(),
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// By hand: -18 mV in 60 K are -0.3 mV/K; at 25 degC 6.012 - 45 x 0.0003 = 5.9985 V, so -50.01 ppm/K. Of the slope
    /// root 2 x 0.3 mV / 60 K = 7.071 uV/K, twice that over 5.9985 V is 2.358 ppm/K.
    #[test]
    fn a_line_through_two_temperatures_worked_out_by_hand() {
        let found = TemperatureCoefficient::of(&[(-20.0, 6.012, 3e-4), (40.0, 5.994, 3e-4)]).expect("a line");
        assert!((found.slope_v_per_k + 3e-4).abs() < 1e-12, "{found:?}");
        assert!((found.relative_per_k * 1e6 + 50.0125).abs() < 1e-3, "{found:?}");
        assert!((found.expanded_uncertainty_per_k * 1e6 - 2.3576).abs() < 1e-3, "{found:?}");
        assert_eq!(found.line_probability, None);
    }

    #[test]
    fn one_temperature_has_no_slope() {
        assert_eq!(TemperatureCoefficient::of(&[(25.0, 6.0, 1e-3)]), None);
        assert_eq!(TemperatureCoefficient::of(&[(25.0, 6.0, 1e-3), (25.0, 6.1, 1e-3)]), None);
    }
}
