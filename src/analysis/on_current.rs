//! The on current: what the board drew at the last voltage at which it stayed on, just above the trip.

use super::plateau::Course;
use super::quantity::{Contribution, Quantity};
use super::settled::Settled;
use super::threshold::Threshold;
use crate::profile::QuantityName;

/// The settled current on the plateau next to `trip`.
pub(super) fn on_current(course: &Course<'_>, trip: &Threshold) -> Option<Quantity> {
    let settled = Settled::of(course, course.ranges(trip.stayed).last()?)?;
    let mut parts = Vec::new();
    if let Some(scatter) = settled.scatter() {
        parts.push(Contribution::normal("scatter of the readings", scatter));
    }
    if let Some(accuracy) = course.trace.claims.current_accuracy(settled.range, settled.amps) {
        parts.push(Contribution::normal("ammeter", accuracy.standard_uncertainty(settled.amps.0)));
    }
    Some(Quantity::new(QuantityName::OnCurrent, settled.amps.0, parts))
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use crate::analysis::analyse;
    use crate::profile::QuantityName;

    #[test]
    fn it_is_read_on_the_last_plateau_before_the_trip() {
        let trace = staircase(&[on(7.6), on(6.1), on(6.0), on(6.0), off(5.9), off(5.2)]);
        let analysis = analyse(&trace, &profile());
        let found = analysis.quantities.iter().find(|quantity| quantity.name == QuantityName::OnCurrent);
        assert!((found.expect("an on current").value - 6.0 / 55.0).abs() < 1e-12);
    }
}
