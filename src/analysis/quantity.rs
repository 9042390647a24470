//! One measured quantity: value, uncertainty and where the uncertainty comes from.

use crate::profile::QuantityName;
pub use crate::statistics::influence::Shape;
use serde::{Deserialize, Serialize};

/// A quantity read from a trace, in the SI unit of its name.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Quantity {
    /// Which quantity.
    pub name: QuantityName,
    /// Best estimate.
    pub value: f64,
    /// Combined standard uncertainty (JCGM 100:2008, 5.1.2).
    pub standard_uncertainty: f64,
    /// What the uncertainty is made of.
    pub contributions: Vec<Contribution>,
}

impl Quantity {
    /// Combines independent contributions by the root of the sum of squares (JCGM 100:2008, 5.1.2).
    pub fn new(name: QuantityName, value: f64, contributions: Vec<Contribution>) -> Self {
        let variance: f64 = contributions.iter().map(|part| part.standard_uncertainty.powi(2)).sum();
        Self { name, value, standard_uncertainty: variance.sqrt(), contributions }
    }
}

/// One line of an uncertainty budget.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Contribution {
    /// Where it comes from, in plain words.
    pub source: String,
    /// Its standard uncertainty in the unit of the quantity, sensitivity included.
    pub standard_uncertainty: f64,
    /// How its values are spread.
    #[serde(default)]
    pub shape: Shape,
    /// Degrees of freedom of its standard uncertainty; `None` where it is known exactly (JCGM 100:2008, G.4.3).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub degrees_of_freedom: Option<f64>,
}

impl Contribution {
    /// A bell-shaped influence of known standard uncertainty.
    pub fn normal(source: &str, standard_uncertainty: f64) -> Self {
        Self {
            source: source.to_owned(),
            standard_uncertainty,
            shape: Shape::Normal,
            degrees_of_freedom: None,
        }
    }

    /// An influence anywhere within `half_width` of its estimate (JCGM 100:2008, 4.3.7).
    pub fn rectangular(source: &str, half_width: f64) -> Self {
        let standard_uncertainty = half_width.abs() / 3.0_f64.sqrt();
        Self { shape: Shape::Rectangular, ..Self::normal(source, standard_uncertainty) }
    }

    /// A standard uncertainty worked out from readings that scatter (type A, JCGM 100:2008, 4.2).
    pub fn scatter(source: &str, standard_uncertainty: f64, degrees_of_freedom: f64) -> Self {
        Self { degrees_of_freedom: Some(degrees_of_freedom), ..Self::normal(source, standard_uncertainty) }
    }
}
