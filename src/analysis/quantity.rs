//! One measured quantity: value, uncertainty and where the uncertainty comes from.

use crate::profile::QuantityName;
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
}

impl Contribution {
    /// A line of the budget.
    pub fn new(source: &str, standard_uncertainty: f64) -> Self {
        Self { source: source.to_owned(), standard_uncertainty }
    }
}
