//! Fisher's F distribution: ratio of two variances.

use super::{Distribution, Tails, special};

/// Fisher's F distribution.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Fisher {
    numerator: f64,
    denominator: f64,
}

impl Fisher {
    /// With positive, finite degrees of freedom of both variances; else `None`.
    pub fn new(numerator: f64, denominator: f64) -> Option<Self> {
        let sound = |degrees: f64| degrees > 0.0 && degrees.is_finite();
        (sound(numerator) && sound(denominator)).then_some(Self { numerator, denominator })
    }
}

impl Distribution for Fisher {
    fn tails(&self, x: f64) -> Tails {
        if x <= 0.0 {
            return Tails { lower: 0.0, upper: 1.0 };
        }
        let ratio = self.numerator * x / self.denominator;
        special::incomplete_beta(
            0.5 * self.numerator,
            0.5 * self.denominator,
            1.0 / (1.0 + 1.0 / ratio),
            1.0 / (1.0 + ratio),
        )
    }

    fn centre(&self) -> f64 {
        1.0
    }

    fn is_positive(&self) -> bool {
        true
    }
}
