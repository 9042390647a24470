//! The chi-squared distribution: sum of squares of standard normal numbers.

use super::{Distribution, Tails, special};

/// The chi-squared distribution.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ChiSquared {
    degrees_of_freedom: f64,
}

impl ChiSquared {
    /// With positive, finite degrees of freedom; else `None`.
    pub fn new(degrees_of_freedom: f64) -> Option<Self> {
        (degrees_of_freedom > 0.0 && degrees_of_freedom.is_finite()).then_some(Self { degrees_of_freedom })
    }
}

impl Distribution for ChiSquared {
    fn tails(&self, x: f64) -> Tails {
        if x <= 0.0 {
            return Tails { lower: 0.0, upper: 1.0 };
        }
        special::incomplete_gamma(0.5 * self.degrees_of_freedom, 0.5 * x)
    }

    fn centre(&self) -> f64 {
        self.degrees_of_freedom
    }

    fn is_positive(&self) -> bool {
        true
    }
}
