//! Where a board rests off: below every set-point at which it rested on.
//!
//! A board on its way off is still on for its delay at voltages at which it rests off. So it rested on only where it
//! stayed on for longer than that.

use super::edges::{Direction, Edges, Stay};
use super::plateau::{Course, Plateau, SAME_SET};
use super::slow::Slow;
use crate::trace::SwitchState;
use crate::units::Volts;

/// The set-point below which the board rests off; `slow` is its delay where that is longer than the design's.
///
/// Of a board that switches by itself nobody can say where it rests: there every reading that showed it on counts.
pub(super) fn rests_off_below(course: &Course<'_>, found: &Edges, slow: Option<Slow>) -> Volts {
    let lowest = if found.reversals.is_empty() && found.bounces.is_empty() {
        let declared = Direction::Down.delay(&course.profile.timing);
        let delay = slow.map_or(declared, |slow| slow.at_most.max(declared));
        let rested = |stay: &&Stay| stay.direction == Direction::Down && stay.time > delay;
        found.stays.iter().filter(rested).map(|stay| course.plateaus[stay.plateau].set.0).reduce(f64::min)
    } else {
        let on = |plateau: &&Plateau| plateau.settled == SwitchState::On;
        course.in_scope().filter(on).map(|plateau| plateau.set.0).reduce(f64::min)
    };
    Volts(lowest.unwrap_or(f64::INFINITY) - SAME_SET)
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use std::time::Duration;

    fn below(readings: &[(f64, f64)], slow: Option<Duration>) -> f64 {
        let (trace, profile) = (staircase(readings), profile());
        let course = Course::new(&trace, &profile);
        let slow = slow.map(|at_most| Slow { longer_than: at_most / 2, at_most });
        rests_off_below(&course, &Edges::find(&course), slow).0
    }

    /// Readings are 100 ms apart.
    #[test]
    fn where_a_slow_board_was_on_for_less_than_its_delay_it_may_rest_off() {
        let readings = [on(7.6), on(6.1), on(6.0), on(5.6), off(5.2), off(5.6)];
        assert!((below(&readings, None) - 5.6).abs() < 1e-4);
        assert!((below(&readings, Some(Duration::from_millis(150))) - 6.0).abs() < 1e-4);
    }

    #[test]
    fn of_a_board_that_switches_by_itself_every_reading_counts() {
        let readings = [on(7.6), on(6.1), off(6.0), on(5.9), off(5.8)];
        assert!((below(&readings, Some(Duration::from_secs(1))) - 5.9).abs() < 1e-4);
    }
}
