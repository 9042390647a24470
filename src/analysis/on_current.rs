//! The on current: what the board draws at its trip, before the switch opens.
//!
//! It is read a little above the trip: at the nearest voltage at which the board was held on, for a single reading may have
//! caught the switch on its way, or else at the last at which it stayed on. The load may be a resistance or
//! draw the same at any voltage, so the current at the trip lies between the reading and its proportion: the middle is
//! taken, as a rectangle (JCGM 100:2008, 4.3.7).

use super::accuracy;
use super::contribution::Contribution;
use super::plateau::{Course, SAME_SET};
use super::quantity::Quantity;
use super::settled::Settled;
use super::threshold::Threshold;
use crate::profile::QuantityName;
use crate::trace::SwitchState;
use crate::units::Volts;

/// The current at `trip`, from the settled readings next to it.
pub(super) fn on_current(course: &Course<'_>, trip: &Threshold) -> Option<Quantity> {
    let read = held(course, trip).unwrap_or(trip.stayed);
    // What a board draws whose load has stopped is not its on current.
    if course.stopped[course.plateaus[read].samples.end - 1] {
        return None;
    }
    let settled = settled(course, read)?;
    let half_way = settled.amps.0 * ((trip.value - settled.volts) / settled.volts) / 2.0;
    let mut lines = vec![Contribution::rectangular("distance to the trip", half_way)];
    if let Some(scatter) = settled.scatter() {
        lines.push(Contribution::scatter("scatter of the readings", scatter, settled.count as f64 - 1.0));
    }
    lines.extend(accuracy::of_current(&course.trace.claims, settled.range, settled.amps));
    Some(Quantity::new(QuantityName::OnCurrent, settled.amps.0 + half_way, lines))
}

/// Readings of a plateau from which on one that caught the switch on its way would show.
const HELD: usize = 3;
/// How far from the trip such a plateau may lie, as a share of the voltage.
const NEAR: f64 = 0.01;

/// The nearest plateau above `trip` on which the board was held on.
pub(super) fn held(course: &Course<'_>, trip: &Threshold) -> Option<usize> {
    let set = |at: usize| course.plateaus[at].set;
    let stayed = set(trip.stayed);
    let near = |set: Volts| set >= stayed - Volts(SAME_SET) && set <= stayed * (1.0 + NEAR);
    let is_held = |at: &usize| {
        let plateau = &course.plateaus[*at];
        let is_on = plateau.in_scope && plateau.settled == SwitchState::On && near(plateau.set);
        is_on && settled(course, *at).is_some_and(|settled| settled.count >= HELD)
    };
    (0..course.plateaus.len()).filter(is_held).min_by(|a, b| set(*a).0.total_cmp(&set(*b).0))
}

fn settled(course: &Course<'_>, plateau: usize) -> Option<Settled> {
    Settled::of(course, course.ranges(plateau).last()?)
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
