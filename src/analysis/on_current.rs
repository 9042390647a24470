//! The on current: what the board draws at its trip, before the switch opens.
//!
//! It is read at the last voltage at which the board stayed on, a little above the trip. The load may be a resistance or
//! draw the same at any voltage, so the current at the trip lies between the reading and its proportion: the middle is
//! taken, as a rectangle (JCGM 100:2008, 4.3.7).

use super::accuracy;
use super::contribution::Contribution;
use super::plateau::Course;
use super::quantity::Quantity;
use super::settled::Settled;
use super::threshold::Threshold;
use crate::profile::QuantityName;

/// The current at `trip`, from the settled readings next to it.
pub(super) fn on_current(course: &Course<'_>, trip: &Threshold) -> Option<Quantity> {
    let samples = course.ranges(trip.stayed).last()?;
    // What a board draws whose load has stopped is not its on current.
    if course.stopped[samples.end - 1] {
        return None;
    }
    let settled = Settled::of(course, samples)?;
    let half_way = settled.amps.0 * ((trip.value - settled.volts) / settled.volts) / 2.0;
    let mut lines = vec![Contribution::rectangular("distance to the trip", half_way)];
    if let Some(scatter) = settled.scatter() {
        lines.push(Contribution::scatter("scatter of the readings", scatter, settled.count as f64 - 1.0));
    }
    lines.extend(accuracy::of_current(&course.trace.claims, settled.range, settled.amps));
    Some(Quantity::new(QuantityName::OnCurrent, settled.amps.0 + half_way, lines))
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use crate::analysis::analyse;
    use crate::profile::QuantityName;

    #[test]
    fn it_is_read_on_the_last_plateau_before_the_trip_and_brought_half_way_there() {
        let trace = staircase(&[on(7.6), on(6.1), on(6.0), on(6.0), off(5.9), off(5.2)]);
        let analysis = analyse(&trace, &profile());
        let found = analysis.quantities.iter().find(|quantity| quantity.name == QuantityName::OnCurrent);
        // Read at 6.00 V, the trip lies within a millivolt of 5.95 V: half of 0.05 V less.
        assert!((found.expect("an on current").value - 5.975 / 55.0).abs() < 0.0005 / 55.0);
    }
}
