//! Deviations added by the root of the sum of their squares, to first order.
//!
//! Two figures are told apart. The *root sum square at full tolerance* adds the largest deviation of each part; it is
//! often read as "what nearly all boards keep", and is too small for that as soon as one bounded part dominates. *Three
//! standard deviations* adds the standard deviations and takes three of the result; the same bounded part makes it
//! wider than the worst case. Neither is a coverage interval; Monte Carlo gives that.

use super::input::Input;
use super::window::Window;
use super::worst_case::nominals;

/// Step for the derivative as a share of an input's half width: small enough for the curvature of a tolerance, large
/// enough for sixteen digits.
const STEP: f64 = 1e-3;

/// What a stack is to first order.
#[derive(Clone, Debug, PartialEq)]
pub struct RootSumSquare {
    /// Nominal value less and plus the root sum square of the full deviations to that side.
    pub full_tolerance: Window,
    /// Expectation of the result to first order.
    pub mean: f64,
    /// Standard deviation of the result to first order (JCGM 100:2008, equation 10).
    pub standard_deviation: f64,
    /// Share of each input in the variance, between 0 and 1.
    pub shares: Vec<f64>,
}

impl RootSumSquare {
    /// The mean less and plus three standard deviations.
    pub fn three_sigma(&self) -> Window {
        Window::around(self.mean, 3.0 * self.standard_deviation)
    }
}

/// Adds up `inputs` through the first derivatives of `model`.
pub fn root_sum_square(inputs: &[Input], model: impl Fn(&[f64]) -> f64) -> RootSumSquare {
    let mut values = nominals(inputs);
    let nominal = model(&values);
    let (mut below, mut above, mut mean) = (0.0, 0.0, nominal);
    let mut variances = Vec::with_capacity(inputs.len());
    for (index, input) in inputs.iter().enumerate() {
        if !input.varies() {
            variances.push(0.0);
            continue;
        }
        let step = STEP * (input.high - input.low) / 2.0;
        let mut at = |value| {
            values[index] = value;
            model(&values)
        };
        let slope = (at(input.nominal + step) - at(input.nominal - step)) / (2.0 * step);
        values[index] = input.nominal;
        let ends = [slope * (input.low - input.nominal), slope * (input.high - input.nominal)];
        below += ends[0].min(ends[1]).powi(2);
        above += ends[0].max(ends[1]).powi(2);
        mean += slope * (input.mean() - input.nominal);
        variances.push((slope * input.standard_deviation()).powi(2));
    }
    let variance: f64 = variances.iter().sum();
    let share = |part: f64| if variance > 0.0 { part / variance } else { 0.0 };
    RootSumSquare {
        full_tolerance: Window { min: nominal - below.sqrt(), max: nominal + above.sqrt() },
        mean,
        standard_deviation: variance.sqrt(),
        shares: variances.into_iter().map(share).collect(),
    }
}
