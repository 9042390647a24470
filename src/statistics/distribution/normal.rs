//! The standard normal distribution: mean 0, standard deviation 1.

use super::{Distribution, Tails, special};
use std::f64::consts::TAU;

/// The standard normal distribution.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Normal;

impl Normal {
    /// Probability density at `z`.
    pub fn density(z: f64) -> f64 {
        (-0.5 * z * z).exp() / TAU.sqrt()
    }
}

impl Distribution for Normal {
    fn tails(&self, z: f64) -> Tails {
        special::normal(z)
    }

    fn centre(&self) -> f64 {
        0.0
    }
}
