//! Small comparisons that the parts of a definition share.

use crate::document::{At, Table};
use crate::units::Quantity;

/// Notes a problem unless the value is above zero.
pub(super) fn above_zero<Q: Quantity>(at: &Option<At<Q>>, table: &Table<'_, '_>) {
    if let Some(at) = at
        && at.value.si() <= 0.0
    {
        table.problem(at, "not above zero");
    }
}

/// Notes a problem unless the value is zero or more.
pub(super) fn not_negative(at: &Option<At<f64>>, table: &Table<'_, '_>) {
    if let Some(at) = at
        && at.value < 0.0
    {
        table.problem(at, "below zero");
    }
}
