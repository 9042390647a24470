//! The on current: what the board draws at its trip, before the switch opens.
//!
//! It is read a little above the trip: at the nearest voltage at which the board was held on, for a single reading may have
//! caught the switch on its way, or else at the last at which it stayed on. What the current changes from there to the trip
//! is read off the load itself, from where the board was on a little higher up. Where it was not, the load may be a
//! resistance or draw the same at any voltage, so the current at the trip lies between the reading and its proportion: the
//! middle is taken, as a rectangle (JCGM 100:2008, 4.3.7).

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
    let way = Way::of(course, &settled, trip.value);
    let mut lines = vec![
        Contribution::rectangular("distance to the trip", way.in_doubt),
        Contribution::normal("place of the trip", way.per_volt * trip.bracket_uncertainty()),
    ];
    if let Some(scatter) = settled.scatter() {
        let scatter = scatter * way.scatter;
        lines.push(Contribution::scatter("scatter of the readings", scatter, settled.count as f64 - 1.0));
    }
    lines.extend(accuracy::of_current(&course.trace.claims, settled.range, settled.amps));
    Some(Quantity::new(QuantityName::OnCurrent, settled.amps.0 + way.change, lines))
}

/// From a reading above the trip down to it.
struct Way {
    /// What the current changes by.
    change: f64,
    /// How far that may be off, either way.
    in_doubt: f64,
    /// What the current changes by for each volt, S.
    per_volt: f64,
    /// Scatter of the result over that of the reading.
    scatter: f64,
}

/// How far above the reading, as a share of its voltage, the load is looked at: near enough to be the same, and far
/// enough apart for the slope not to be noise.
const HIGHER: (f64, f64) = (0.005, 0.3);

impl Way {
    fn of(course: &Course<'_>, near: &Settled, trip: Volts) -> Self {
        let distance = trip - near.volts;
        match higher(course, near) {
            Some(higher) => {
                let apart = higher.volts - near.volts;
                let change = (higher.amps - near.amps).0 * (distance / apart);
                // The slope down here is not that up there: for a load of constant power it is larger by this share.
                let bend = (higher.volts - trip) / trip;
                let fewer = near.count as f64 / higher.count as f64;
                let share = distance / apart;
                Self {
                    change,
                    in_doubt: change * bend,
                    per_volt: ((higher.amps - near.amps).0 / apart.0).abs(),
                    scatter: ((1.0 - share).powi(2) + share.powi(2) * fewer).sqrt(),
                }
            }
            None => {
                let half_way = near.amps.0 * (distance / near.volts) / 2.0;
                let per_volt = near.amps.0 / near.volts.0;
                Self { change: half_way, in_doubt: half_way, per_volt, scatter: 1.0 }
            }
        }
    }
}

/// The lowest readings of the load clearly above `near`, on its range and in no plateau into which the board was switched.
fn higher(course: &Course<'_>, near: &Settled) -> Option<Settled> {
    let on = |at: usize| course.plateaus[at].in_scope && course.plateaus[at].settled == SwitchState::On;
    let (from, to) = (near.volts * (1.0 + HIGHER.0), near.volts * (1.0 + HIGHER.1));
    (1..course.plateaus.len())
        .filter(|at| on(*at - 1) && on(*at) && !course.stopped[course.plateaus[*at].samples.end - 1])
        .filter_map(|at| settled(course, at))
        .filter(|it| it.volts >= from && it.volts <= to && it.range == near.range)
        .min_by(|a, b| a.volts.0.total_cmp(&b.volts.0))
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
    use crate::analysis::{Quantity, analyse};
    use crate::profile::QuantityName;
    use crate::units::Volts;

    /// With a voltmeter at the load, without which nothing is stated of a load that regulates.
    fn found(readings: &[(f64, f64)]) -> Quantity {
        let mut trace = staircase(readings);
        for sample in &mut trace.samples {
            let is_on = sample.current.amps().is_some_and(|amps| amps.0 > 0.01);
            sample.load = if is_on { sample.sense } else { Some(Volts::ZERO) };
        }
        let found = analyse(&trace, &profile()).quantities;
        found.into_iter().find(|quantity| quantity.name == QuantityName::OnCurrent).expect("an on current")
    }

    /// A resistance draws 5.95/55 A at 5.95 V, and six tenths of a watt 0.6/5.95 A (Ohm's law, and the definition of power).
    #[test]
    fn the_load_itself_tells_what_it_draws_at_the_trip() {
        let watts = |volts: f64| (volts, 0.6 / volts);
        let resistance = found(&[on(7.6), on(6.6), on(6.3), on(6.0), on(6.0), off(5.9), off(5.2)]);
        // The trip lies within a millivolt of 5.95 V.
        assert!((resistance.value - 5.95 / 55.0).abs() < 0.001 / 55.0, "{resistance:?}");
        let power = [watts(7.6), watts(6.6), watts(6.3), watts(6.0), watts(6.0), off(5.9), off(5.2)];
        let power = found(&power);
        // The slope from 6.3 V to 6.0 V is too small by 6.3/5.95, 5.9 %: the end of the rectangle.
        let way = 0.6 / 5.95 - 0.1;
        assert!((power.value - 0.1 - way / 1.0588).abs() < 2e-5, "{power:?}");
        assert!(
            (power.contributions[0].standard_uncertainty - 0.0588 * way / 1.0588 / 3.0_f64.sqrt()).abs()
                < 2e-6,
            "{power:?}"
        );
    }

    #[test]
    fn it_is_read_on_the_last_plateau_before_the_trip_and_brought_half_way_there() {
        let found = found(&[on(7.6), on(6.0), on(6.0), off(5.9), off(5.2)]);
        // Read at 6.00 V, the trip lies within a millivolt of 5.95 V: half of 0.05 V less.
        assert!((found.value - 5.975 / 55.0).abs() < 0.0005 / 55.0);
    }
}
