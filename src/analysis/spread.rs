//! Where the truth may lie about a measured value, from the shapes of all influences together.

use super::quantity::Quantity;
use crate::profile::Limit;
use crate::statistics::coverage;
use crate::statistics::distribution::{Distribution, Normal};
use crate::statistics::quotient::Quotient;
use crate::statistics::risk::{Interval, nonconformance};

/// The distribution of a quantity's error.
pub(crate) enum Spread {
    /// Nothing is uncertain.
    Certain,
    /// A sum of influences.
    Sum(coverage::Spread),
    /// A quotient, and its standard uncertainty.
    Quotient(Quotient, f64),
}

impl Spread {
    pub(crate) fn of(quantity: &Quantity) -> Self {
        if let Some(quotient) = quantity.as_quotient() {
            return Self::Quotient(quotient, quantity.standard_uncertainty);
        }
        coverage::Spread::new(&quantity.influences()).map_or(Self::Certain, Self::Sum)
    }

    /// How many standard uncertainties cover the truth with `probability`: from the shapes that are there and their
    /// degrees of freedom, and that of a normal distribution where nothing is uncertain.
    pub(crate) fn coverage_factor(&self, probability: f64) -> f64 {
        let exact = match self {
            Self::Certain => None,
            Self::Sum(spread) => spread.half_width(probability).map(|it| it / spread.standard_uncertainty()),
            Self::Quotient(quotient, uncertainty) => {
                quotient.half_width(probability).map(|it| it / uncertainty)
            }
        };
        exact.or_else(|| Normal.upper_quantile((1.0 - probability) / 2.0)).unwrap_or(f64::NAN)
    }

    /// Probability that the truth lies on the other side of `limit` than `value`: the specific risk of the decision (JCGM
    /// 106:2012, 9.3.2, with nothing taken as known of the board beforehand); `None` for a value that is no number.
    pub(crate) fn risk(&self, value: f64, limit: &Limit) -> Option<f64> {
        if !value.is_finite() {
            return None;
        }
        let outside = match self {
            Self::Certain => return Some(0.0),
            Self::Sum(spread) => nonconformance(value, spread, Interval { min: limit.min, max: limit.max }),
            Self::Quotient(quotient, _) => {
                let below = limit.min.map_or(0.0, |min| quotient.below(min));
                below + limit.max.map_or(0.0, |max| 1.0 - quotient.below(max))
            }
        };
        let is_inside = limit.min.is_none_or(|min| value >= min) && limit.max.is_none_or(|max| value <= max);
        let risk = if is_inside { outside } else { 1.0 - outside };
        risk.is_finite().then_some(risk)
    }
}
