//! From a trace to quantities with uncertainty, and findings about the board or the bench. Pure.

mod finding;
mod quantity;

pub use finding::{About, Finding, FindingCode};
pub use quantity::{Contribution, Quantity};

/// What a trace says.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Analysis {
    /// Quantities found, each at most once, in the order of [`crate::profile::QuantityName`].
    pub quantities: Vec<Quantity>,
    /// Findings, the most telling first.
    pub findings: Vec<Finding>,
}
