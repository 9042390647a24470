//! Student's t distribution.

use super::{Distribution, Tails, special};
use std::f64::consts::PI;

/// Student's t distribution.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StudentT {
    degrees_of_freedom: f64,
    log_peak: f64,
}

impl StudentT {
    /// With positive, finite degrees of freedom; else `None`.
    pub fn new(degrees_of_freedom: f64) -> Option<Self> {
        if !(degrees_of_freedom > 0.0 && degrees_of_freedom.is_finite()) {
            return None;
        }
        let half = 0.5 * degrees_of_freedom;
        let log_peak =
            special::log_gamma(half + 0.5) - special::log_gamma(half) - 0.5 * (PI * degrees_of_freedom).ln();
        Some(Self { degrees_of_freedom, log_peak })
    }

    /// Probability density at `t`.
    pub fn density(&self, t: f64) -> f64 {
        let degrees = self.degrees_of_freedom;
        (self.log_peak - 0.5 * (degrees + 1.0) * (t * t / degrees).ln_1p()).exp()
    }
}

impl Distribution for StudentT {
    fn tails(&self, t: f64) -> Tails {
        let degrees = self.degrees_of_freedom;
        if t == 0.0 {
            return Tails { lower: 0.5, upper: 0.5 };
        }
        let ratio = t * t / degrees;
        let outside =
            special::incomplete_beta(0.5 * degrees, 0.5, 1.0 / (1.0 + ratio), 1.0 / (1.0 + 1.0 / ratio));
        let far = 0.5 * outside.lower;
        let right = Tails { lower: 1.0 - far, upper: far };
        if t < 0.0 { right.mirrored() } else { right }
    }

    fn centre(&self) -> f64 {
        0.0
    }
}
