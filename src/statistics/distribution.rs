//! Distributions: probabilities of both tails, densities and quantiles.
//!
//! Both tails are kept apart, so that a probability of 1e-12 in either keeps its digits. Quantiles are found from the
//! tails by this module's own search, which loses none of those digits.

mod chi_squared;
mod fisher;
mod non_central_t;
mod normal;
mod special;
mod student;

pub use chi_squared::ChiSquared;
pub use fisher::Fisher;
pub use non_central_t::NonCentralT;
pub use normal::Normal;
pub use student::StudentT;

use super::root::root;

/// Quantiles are good to this, relative to themselves.
const QUANTILE_TOLERANCE: f64 = 4.0 * f64::EPSILON;

/// The probabilities on both sides of a value; they add up to one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Tails {
    /// Probability of a value at or below.
    pub lower: f64,
    /// Probability of a value above.
    pub upper: f64,
}

impl Tails {
    fn mirrored(self) -> Self {
        Self { lower: self.upper, upper: self.lower }
    }
}

/// A continuous distribution of one number.
pub trait Distribution {
    /// Probabilities below and above `x`; not a number where `x` is none.
    fn tails(&self, x: f64) -> Tails;

    /// A value well inside the distribution, from where the search for a quantile starts.
    fn centre(&self) -> f64;

    /// True where no value is negative.
    fn is_positive(&self) -> bool {
        false
    }

    /// Probability of a value at or below `x`.
    fn lower(&self, x: f64) -> f64 {
        self.tails(x).lower
    }

    /// Probability of a value above `x`.
    fn upper(&self, x: f64) -> f64 {
        self.tails(x).upper
    }

    /// The value that is not exceeded with probability `p`; `None` unless `0 < p < 1`.
    fn quantile(&self, p: f64) -> Option<f64> {
        // From a half on the subtraction is exact, and the smaller tail the sharper question.
        if p > 0.5 { self.upper_quantile(1.0 - p) } else { search(self, p, |tails| tails.lower, -1.0) }
    }

    /// The value that is exceeded with probability `q`; `None` unless `0 < q < 1`.
    fn upper_quantile(&self, q: f64) -> Option<f64> {
        if q > 0.5 { self.quantile(1.0 - q) } else { search(self, q, |tails| tails.upper, 1.0) }
    }
}

/// Finds where one tail has the probability `wanted`; `outward` is the direction in which that tail shrinks.
fn search<D: Distribution + ?Sized>(
    distribution: &D,
    wanted: f64,
    tail: impl Fn(Tails) -> f64,
    outward: f64,
) -> Option<f64> {
    if !(wanted > 0.0 && wanted < 1.0) {
        return None;
    }
    // In logarithms a far tail is nearly straight.
    let miss = |x: f64| (tail(distribution.tails(x)) / wanted).ln();
    let start = distribution.centre();
    let inside = miss(start);
    if inside == 0.0 {
        return Some(start);
    }
    let direction = if inside > 0.0 { outward } else { -outward };
    let (mut near, mut step) = (start, 1.0);
    loop {
        let far = if !distribution.is_positive() {
            start + direction * step
        } else if direction > 0.0 {
            near * 2.0
        } else {
            near / 2.0
        };
        let there = miss(far);
        if there.is_nan() || !far.is_finite() {
            return None;
        }
        if (there > 0.0) != (inside > 0.0) {
            return root(miss, near, far, QUANTILE_TOLERANCE);
        }
        near = far;
        step *= 2.0;
    }
}

#[cfg(test)]
mod tests;
