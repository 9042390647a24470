//! Rectangles much narrower than the bell they are added to: they blur it a little.
//!
//! Over so narrow a range the bell is a polynomial, and three points stand for the rectangles: the rule of Gauss that
//! has their variance and fourth moment, exact up to the fifth power.

use super::bell::Bell;

/// Up to this part of the bell's width the sixth power moves no factor by 1e-5.
const NARROW: f64 = 0.4;

/// A narrow sum of rectangles.
#[derive(Clone, Copy, Debug)]
pub(super) struct Blur {
    /// The largest value of the sum.
    pub(super) reach: f64,
    /// Where the outer points stand.
    outer: f64,
    /// Probability of each of them.
    weight: f64,
}

impl Blur {
    /// The sum of rectangles of these half widths, where it is narrow beside `bell`; else `None`.
    pub(super) fn new(half_widths: &[f64], bell: &Bell) -> Option<Self> {
        let reach: f64 = half_widths.iter().sum();
        if half_widths.is_empty() || reach > NARROW * bell.width() {
            return None;
        }
        let variance = half_widths.iter().map(|a| a.powi(2)).sum::<f64>() / 3.0;
        let fourth = 3.0 * variance.powi(2) - half_widths.iter().map(|a| a.powi(4)).sum::<f64>() / 7.5;
        let square = fourth / variance;
        Some(Self { reach, outer: square.sqrt(), weight: 0.5 * variance / square })
    }

    /// Probability that `bell` and this together lie within `c` of zero.
    pub(super) fn within(&self, bell: &Bell, c: f64) -> f64 {
        let outer = bell.within(c + self.outer) + bell.within(c - self.outer);
        (1.0 - 2.0 * self.weight) * bell.within(c) + self.weight * outer
    }
}
