//! Where the truth may lie about a measured value, from the shapes of all influences together.

use super::quantity::Quantity;
use crate::profile::Limit;
use crate::statistics::coverage;
use crate::statistics::distribution::{Distribution, Normal};
use crate::statistics::risk::{Interval, nonconformance};

/// The distribution of a quantity's error; `None` inside where nothing is uncertain.
pub(crate) struct Spread(Option<coverage::Spread>);

impl Spread {
    pub(crate) fn of(quantity: &Quantity) -> Self {
        Self(coverage::Spread::new(&quantity.influences()))
    }

    /// How many standard uncertainties cover the truth with `probability`: from the shapes that are there and their
    /// degrees of freedom, and that of a normal distribution where nothing is uncertain.
    pub(crate) fn coverage_factor(&self, probability: f64) -> f64 {
        let exact = self
            .0
            .as_ref()
            .and_then(|spread| Some(spread.half_width(probability)? / spread.standard_uncertainty()));
        exact.or_else(|| Normal.upper_quantile((1.0 - probability) / 2.0)).unwrap_or(f64::NAN)
    }

    /// Probability that the truth lies on the other side of `limit` than `value`: the specific risk of the decision (JCGM
    /// 106:2012, 9.3.2, with nothing taken as known of the board beforehand); `None` for a value that is no number.
    pub(crate) fn risk(&self, value: f64, limit: &Limit) -> Option<f64> {
        if !value.is_finite() {
            return None;
        }
        let Some(spread) = &self.0 else { return Some(0.0) };
        let outside = nonconformance(value, spread, Interval { min: limit.min, max: limit.max });
        let is_inside = limit.min.is_none_or(|min| value >= min) && limit.max.is_none_or(|max| value <= max);
        let risk = if is_inside { outside } else { 1.0 - outside };
        risk.is_finite().then_some(risk)
    }
}
