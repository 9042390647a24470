//! Evidence that a board is slower than its design allows: it changes while the set-point rests.
//!
//! Beside its threshold a board does not change however long one waits. One that does was beyond the threshold when
//! the wait began, and whatever stood there for a shorter time without a change says nothing about the threshold.

use super::edges::{Direction, Edge, Edges};
use super::plateau::{Course, SAME_SET};
use super::terminals::Rail;
use std::time::Duration;

/// A stay counts as shorter than another when the difference is no matter of when exactly the reading was taken.
const SHORTER: f64 = 0.9;

/// At one set-point the board took this long to change, longer than its design allows: between the two times.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Slow {
    /// Still in the state before.
    pub(super) longer_than: Duration,
    /// Seen in the state after.
    pub(super) at_most: Duration,
}

impl Slow {
    /// The longest such change in `direction` that took longer than the profile declares.
    pub(super) fn find(
        course: &Course<'_>,
        found: &Edges,
        direction: Direction,
        rail: &Rail,
    ) -> Option<Self> {
        let declared = direction.delay(&course.profile.timing);
        let edges = found.edges.iter().filter(|edge| edge.direction == direction);
        edges
            .filter_map(|edge| Self::at_rest(course, found, edge, rail))
            .filter(|slow| slow.longer_than > declared)
            .filter(|slow| !slow.refuted(course, found, direction))
            .max_by_key(|slow| slow.at_most)
    }

    /// True when no single delay explains what all passes show: noise at the threshold moved it.
    ///
    /// A board that needs longer than `longer_than` was beyond its threshold that long before each of its changes was
    /// seen. And where it stayed for `at_most` or longer, it was not beyond. Both at one set-point is within the noise.
    fn refuted(&self, course: &Course<'_>, found: &Edges, direction: Direction) -> bool {
        if self.outrun(course, found, direction) {
            return true;
        }
        let along = |plateau: usize| direction.along(course.plateaus[plateau].set);
        let beyond = found.edges.iter().filter(|edge| edge.direction == direction).map(|edge| {
            let crossed = course.trace.samples[edge.seen].at.saturating_sub(self.longer_than);
            let before = course.plateaus[..edge.plateau].partition_point(|plateau| plateau.ended < crossed);
            along(before)
        });
        let stayed =
            found.stays.iter().filter(|stay| stay.direction == direction && stay.time >= self.at_most);
        let farthest = stayed.map(|stay| along(stay.plateau)).max_by(f64::total_cmp);
        let nearest = beyond.min_by(f64::total_cmp);
        farthest.zip(nearest).is_some_and(|(stayed, beyond)| stayed > beyond + SAME_SET)
    }

    /// True when the board once changed sooner than that after it had come into the state before: its delay cannot have begun
    /// earlier.
    fn outrun(&self, course: &Course<'_>, found: &Edges, direction: Direction) -> bool {
        found.edges.windows(2).any(|pair| {
            let came = course.plateaus[pair[0].plateau].began;
            let changed = course.trace.samples[pair[1].seen].at;
            pair[0].direction != direction
                && pair[1].direction == direction
                && changed.saturating_sub(came) < self.longer_than
        })
    }

    /// For a change while the set-point rested: how long that took, at least and at most.
    ///
    /// At least: the arrived readings before it; or the time another pass stood at the same set-point, or farther along,
    /// without a change.
    fn at_rest(course: &Course<'_>, found: &Edges, edge: &Edge, rail: &Rail) -> Option<Self> {
        let last = edge.last_before?;
        let plateau = &course.plateaus[edge.plateau];
        let at = |sample: usize| course.trace.samples[sample].at;
        let arrived = (plateau.samples.start..last + 1).find(|sample| {
            let sample = &course.trace.samples[*sample];
            (course.terminals(sample) - rail.at(sample.set)).abs().0 <= rail.tolerance()
        });
        let own = arrived.map(|arrived| at(last).saturating_sub(at(arrived)));
        let at_most = at(edge.seen).saturating_sub(plateau.began);
        let along = edge.direction.along(plateau.set);
        let elsewhere = found
            .stays
            .iter()
            .filter(|stay| stay.direction == edge.direction)
            .filter(|stay| edge.direction.along(course.plateaus[stay.plateau].set) >= along - SAME_SET)
            .map(|stay| stay.time)
            .filter(|time| *time < at_most.mul_f64(SHORTER))
            .max();
        Some(Self { longer_than: own.max(elsewhere)?, at_most })
    }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::trace::Trace;
    use crate::units::Volts;

    fn slow(trace: &Trace) -> Option<(u128, u128)> {
        let profile = profile();
        let course = Course::new(trace, &profile);
        let found = Edges::find(&course);
        let rail = Rail::near(&course, &found.stays, Direction::Down, Volts(6.0)).expect("stays");
        let slow = Slow::find(&course, &found, Direction::Down, &rail)?;
        Some((slow.longer_than.as_millis(), slow.at_most.as_millis()))
    }

    #[test]
    fn readings_at_rest_bound_the_delay_from_both_sides() {
        let trace = staircase(&[on(7.6), on(6.2), on(6.1), on(6.0), on(6.0), on(6.0), off(6.0)]);
        assert_eq!(slow(&trace), Some((200, 400)));
    }

    #[test]
    fn another_pass_that_stayed_for_less_bounds_it_too() {
        let first = [on(7.6), on(6.04), on(6.02), on(6.0), off(5.98), off(5.0), on(6.5), on(7.6)];
        let held = [on(6.0), off(6.0)];
        assert_eq!(slow(&staircase(&[&first[..], &held[..]].concat())), Some((100, 200)));
    }

    #[test]
    fn a_long_stay_beyond_what_it_once_changed_at_is_noise_and_no_delay() {
        let changed =
            [on(7.6), on(6.2), on(6.1), on(6.0), on(6.0), on(6.0), off(6.0), off(5.0), on(6.5), on(7.6)];
        assert!(slow(&staircase(&changed)).is_some());
        let stayed = [on(5.98); 8];
        assert_eq!(slow(&staircase(&[&changed[..], &stayed[..]].concat())), None);
    }

    #[test]
    fn a_board_that_once_tripped_sooner_after_it_came_back_is_not_slow() {
        let held = [on(7.6), on(6.2), on(6.0), on(6.0), on(6.0), on(6.0), off(6.0), off(5.9)];
        assert!(slow(&staircase(&held)).is_some());
        // 200 ms at most lie between coming back and the next trip, 300 ms at least were needed at rest.
        assert_eq!(slow(&staircase(&[&held[..], &[on(6.5), off(5.9)]].concat())), None);
    }

    #[test]
    fn arrival_polls_before_the_change_are_no_slow_detector() {
        let mut trace = staircase(&[on(7.6), on(6.2), on(6.1), on(6.0), on(5.9), on(5.9), on(5.9), off(5.9)]);
        for (sample, volts) in trace.samples.iter_mut().skip(4).zip([5.99, 5.97, 5.95]) {
            sample.sense = Some(Volts(volts));
        }
        assert_eq!(slow(&trace), None);
    }
}
