//! Where the board changed state, where it stayed, and where it switched by itself.
//!
//! A change bounds a threshold from beyond, whatever the delay: the terminals had been no farther than that. Staying
//! bounds it from before, but only if the board was given more time than its delay; so every stay carries its time.

use super::plateau::{Course, SAME_SET};
use crate::profile::{QuantityName, Timing};
use crate::trace::SwitchState;
use crate::units::Volts;
use std::time::Duration;

/// Which threshold.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Direction {
    /// On to off: the trip.
    Down,
    /// Off to on: the re-enable.
    Up,
}

impl Direction {
    /// The direction in which a board in `state` may change; `None` for neither.
    pub(super) fn from(state: SwitchState) -> Option<Self> {
        match state {
            SwitchState::On => Some(Direction::Down),
            SwitchState::Off => Some(Direction::Up),
            SwitchState::Neither => None,
        }
    }

    /// The direction in which a threshold is passed; `None` for other quantities.
    pub(super) fn of(threshold: QuantityName) -> Option<Self> {
        match threshold {
            QuantityName::Trip => Some(Direction::Down),
            QuantityName::ReEnable => Some(Direction::Up),
            _ => None,
        }
    }

    /// What its delay is called.
    pub(super) fn delay_name(self) -> QuantityName {
        match self {
            Direction::Down => QuantityName::DetectDelay,
            Direction::Up => QuantityName::ReleaseDelay,
        }
    }

    /// Distance along the direction: larger is nearer to the change, or farther beyond it.
    pub(super) fn along(self, volts: Volts) -> f64 {
        match self {
            Direction::Down => -volts.0,
            Direction::Up => volts.0,
        }
    }

    /// The voltage at a distance along the direction.
    pub(super) fn volts(self, along: f64) -> Volts {
        match self {
            Direction::Down => Volts(-along),
            Direction::Up => Volts(along),
        }
    }

    /// The slowest the design allows.
    pub(super) fn delay(self, timing: &Timing) -> Duration {
        match self {
            Direction::Down => timing.detect_delay,
            Direction::Up => timing.release_delay,
        }
    }
}

/// A change of state.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Edge {
    /// Which threshold was passed.
    pub(super) direction: Direction,
    /// The plateau on which the change was seen.
    pub(super) plateau: usize,
    /// The last sample of that plateau still in the state before.
    pub(super) last_before: Option<usize>,
    /// The first sample in the state after.
    pub(super) seen: usize,
}

/// A plateau on which the board did not change.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Stay {
    /// Which threshold was not passed.
    pub(super) direction: Direction,
    /// The plateau.
    pub(super) plateau: usize,
    /// For how long this set-point, or one farther along, stood without a change.
    pub(super) time: Duration,
    /// The set-point was reached in the direction of the threshold.
    pub(super) approached: bool,
}

/// What happened to the state in the course of a run.
#[derive(Debug, Default)]
pub(super) struct Edges {
    /// Changes, in order.
    pub(super) edges: Vec<Edge>,
    /// Stays, in no particular order.
    pub(super) stays: Vec<Stay>,
    /// Plateaus on which the board switched although the set-point gave no cause.
    pub(super) reversals: Vec<usize>,
    /// Changes that took more than one go, and then held.
    pub(super) bounces: Vec<Bounce>,
}

/// A change of state in which the switch went back and forth before it rested in the state after.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Bounce {
    /// Which threshold was passed.
    pub(super) direction: Direction,
    /// The plateau on which it was seen.
    pub(super) plateau: usize,
    /// Changes of state seen; a reading half way and back counts two.
    pub(super) changes: usize,
}

impl Edges {
    /// Walks through `course` once.
    pub(super) fn find(course: &Course<'_>) -> Self {
        let mut walk = Walk {
            course,
            found: Self::default(),
            state: None,
            been_on: false,
            run: 0,
            run_began: Duration::ZERO,
        };
        for plateau in 0..course.plateaus.len() {
            walk.step(plateau);
        }
        if let (Some(direction), Some(last)) = (walk.state, course.plateaus.last()) {
            walk.end_run(direction, course.plateaus.len(), last.ended);
        }
        walk.keep_stays_of_the_drop_before_the_trip();
        walk.found
    }
}

impl Edges {
    /// What says where the thresholds are: all but what was read at once after a step, for a delay.
    pub(super) fn at_rest(&self, course: &Course<'_>) -> Self {
        let at_rest = |plateau: usize| !course.is_read_at_once(plateau);
        Self {
            edges: self.edges.iter().filter(|edge| at_rest(edge.plateau)).cloned().collect(),
            stays: self.stays.iter().filter(|stay| at_rest(stay.plateau)).cloned().collect(),
            reversals: self.reversals.clone(),
            bounces: self.bounces.clone(),
        }
    }
}

/// The walk: the state the board is in, and the run of plateaus on which it has been moving towards the change.
struct Walk<'c, 't> {
    course: &'c Course<'t>,
    found: Edges,
    state: Option<Direction>,
    /// The board has been on before.
    been_on: bool,
    run: usize,
    run_began: Duration,
}

impl Walk<'_, '_> {
    fn step(&mut self, index: usize) {
        let plateau = &self.course.plateaus[index];
        if !plateau.in_scope {
            if let Some(direction) = self.state.take() {
                self.end_run(direction, index, plateau.began);
            }
            return;
        }
        let flips = self.flips(index);
        let bounced = self.state.is_some_and(|before| flips.bounced(before));
        if flips.restless() && !bounced {
            self.found.reversals.push(index);
        }
        let been_on = self.been_on;
        self.been_on |= flips.been_on;
        let Some(direction) = self.state else {
            self.state = Direction::from(plateau.settled);
            self.begin_run(index, plateau.began);
            return;
        };
        if self.moved_back(direction, index) {
            self.end_run(direction, index, plateau.began);
            self.begin_run(index, plateau.began);
        }
        let last_before = self.time_of(flips.last_before).unwrap_or(plateau.began);
        let Some(seen) = flips.seen else {
            if Direction::from(plateau.settled).is_none() {
                self.end_run(direction, index, last_before);
                self.begin_run(index + 1, plateau.ended);
                self.note_half_seen(direction, index, flips.last_before);
            }
            return;
        };
        self.end_run(direction, index, last_before);
        if bounced {
            let changes = flips.count + 2 * flips.returns;
            self.found.bounces.push(Bounce { direction, plateau: index, changes });
        }
        if flips.count == 1 && self.moved_back(direction, index) {
            if been_on {
                self.found.reversals.push(index);
            } else {
                self.forget_stays_from(plateau.set);
            }
        } else if flips.count == 1 || bounced {
            self.found.edges.push(Edge { direction, plateau: index, last_before: flips.last_before, seen });
        }
        self.state = Some(flips.direction);
        self.begin_run(index, self.time_of(Some(seen)).unwrap_or(plateau.ended));
    }

    /// A board just connected comes on when its release delay is over. Until then it was off at voltages at which it
    /// rests on.
    fn forget_stays_from(&mut self, set: Volts) {
        let course = self.course;
        self.found.stays.retain(|stay| course.plateaus[stay.plateau].set < set);
    }

    /// A set-point rested, and the last reading caught the board in the middle of its change.
    fn note_half_seen(&mut self, direction: Direction, plateau: usize, last_before: Option<usize>) {
        let seen = self.course.plateaus[plateau].samples.end - 1;
        if last_before.is_some() && self.course.is_between(seen) {
            self.found.edges.push(Edge { direction, plateau, last_before, seen });
            self.state = None;
        }
    }

    /// How often the state changed within one plateau.
    fn flips(&self, index: usize) -> Flips {
        let samples = self.course.plateaus[index].samples.clone();
        let first = samples.clone().find_map(|sample| Direction::from(self.course.states[sample]));
        let now = self.state.or(first).unwrap_or(Direction::Down);
        let mut flips = Flips {
            count: 0,
            returns: 0,
            last_before: None,
            seen: None,
            direction: now,
            held: 0,
            been_on: false,
        };
        let mut left = false;
        // A reading half way at once is no change when the next one shows the state of the set-point before.
        let mut any = self.state.is_some();
        for sample in samples {
            let Some(direction) = Direction::from(self.course.states[sample]) else {
                left |= any && self.course.is_between(sample);
                flips.held = 0;
                continue;
            };
            flips.been_on |= direction == Direction::Down;
            flips.held = if direction == flips.direction { flips.held + 1 } else { 1 };
            if direction != flips.direction {
                flips.direction = direction;
                flips.count += 1;
                flips.seen = flips.seen.or(Some(sample));
            } else if flips.count == 0 {
                flips.last_before = Some(sample);
            }
            flips.returns += usize::from(left && direction == flips.direction && flips.seen != Some(sample));
            (left, any) = (false, true);
        }
        flips
    }

    fn time_of(&self, sample: Option<usize>) -> Option<Duration> {
        Some(self.course.trace.samples.get(sample?)?.at)
    }

    /// True when the step to this plateau led away from the change.
    fn moved_back(&self, direction: Direction, index: usize) -> bool {
        self.advance(direction, index).is_some_and(|advance| advance < -SAME_SET)
    }

    /// How far the step to this plateau led along the direction.
    fn advance(&self, direction: Direction, index: usize) -> Option<f64> {
        let before = self.course.plateaus.get(index.checked_sub(1)?)?;
        Some(direction.along(self.course.plateaus[index].set) - direction.along(before.set))
    }

    /// With its load stopped a board draws nothing and its leads drop nothing. Only stays that were like the one before
    /// the trip say what stood at the terminals there.
    fn keep_stays_of_the_drop_before_the_trip(&mut self) {
        let course = self.course;
        let trip = self.found.edges.iter().rfind(|edge| edge.direction == Direction::Down);
        let Some(before) = trip.and_then(|edge| edge.seen.checked_sub(1)) else { return };
        let like = |stay: &Stay| {
            course.stopped[course.plateaus[stay.plateau].samples.end - 1] == course.stopped[before]
        };
        self.found.stays.retain(|stay| stay.direction == Direction::Up || like(stay));
    }

    fn begin_run(&mut self, plateau: usize, at: Duration) {
        self.run = plateau;
        self.run_began = at;
    }

    /// Every plateau since the run began stood unchanged until `last`.
    fn end_run(&mut self, direction: Direction, end: usize, last: Duration) {
        for plateau in self.run..end {
            let began =
                if plateau == self.run { self.run_began } else { self.course.plateaus[plateau].began };
            let approached = self.advance(direction, plateau).is_some_and(|advance| advance > 0.0);
            let time = last.saturating_sub(began);
            self.found.stays.push(Stay { direction, plateau, time, approached });
        }
    }
}

/// Readings in one state after which a board rests in it.
const HELD: usize = 4;

/// What the state did within one plateau.
struct Flips {
    /// Changes between on and off.
    count: usize,
    /// Times it left a state without reaching the other, and came back.
    returns: usize,
    /// Last reading in the state before.
    last_before: Option<usize>,
    /// First reading in the state after.
    seen: Option<usize>,
    /// The state at the end.
    direction: Direction,
    /// Readings at the end that all show it.
    held: usize,
    /// A reading showed the board on.
    been_on: bool,
}

impl Flips {
    /// Switching by itself: more than the one change a set-point can cause. A board just connected may turn on once.
    fn restless(&self) -> bool {
        self.count > 1 || self.returns > 0
    }

    /// Restless at first, then at rest in the state after the change: the set-point did cause it, in several goes.
    fn bounced(&self, before: Direction) -> bool {
        self.restless() && self.direction != before && self.held >= HELD
    }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;

    fn edges(readings: &[(f64, f64)]) -> Edges {
        let (trace, profile) = (staircase(readings), profile());
        Edges::find(&Course::new(&trace, &profile))
    }

    #[test]
    fn a_staircase_down_and_up_has_two_edges() {
        let found = edges(&[on(7.6), on(6.1), on(6.0), off(5.9), off(5.8), off(6.3), off(6.4), on(6.5)]);
        let seen: Vec<_> = found.edges.iter().map(|edge| (edge.direction, edge.plateau)).collect();
        assert_eq!(seen, [(Direction::Down, 3), (Direction::Up, 7)]);
        assert!(found.reversals.is_empty());
    }

    #[test]
    fn the_last_plateau_before_a_change_stayed_shortest() {
        let found = edges(&[on(7.6), on(6.1), on(6.0), off(5.9)]);
        let times: Vec<_> = found.stays.iter().map(|stay| (stay.plateau, stay.time.as_millis())).collect();
        assert_eq!(times, [(0, 200), (1, 200), (2, 100), (3, 0)]);
    }

    #[test]
    fn pre_check_and_discharge_are_no_edges() {
        let found = edges(&[(0.3, 0.0), (1.0, 0.018), (7.6, 1e-6), on(7.6), on(6.0), (0.0, 0.0), (0.0, 0.0)]);
        assert!(found.edges.is_empty() && found.reversals.is_empty(), "{found:?}");
    }

    #[test]
    fn coming_back_on_the_way_down_is_a_reversal() {
        let found = edges(&[on(7.6), on(6.1), off(6.0), on(5.9), off(5.8)]);
        assert_eq!(found.reversals, [3]);
    }

    #[test]
    fn coming_on_late_when_just_connected_is_neither_a_reversal_nor_an_edge() {
        let found = edges(&[off(7.6), off(7.5), on(7.4), on(6.1), off(6.0), off(5.9), on(6.5)]);
        assert!(found.reversals.is_empty(), "{found:?}");
        assert_eq!(found.edges.len(), 2);
        let up = |stay: &&Stay| stay.direction == Direction::Up;
        assert!(found.stays.iter().filter(up).all(|stay| stay.plateau > 3), "{found:?}");
        assert_eq!(edges(&[off(7.6), on(7.5), off(7.4), on(7.3)]).reversals, [3], "once is enough");
    }

    #[test]
    fn switching_twice_at_one_set_point_is_a_reversal() {
        assert_eq!(edges(&[on(7.6), on(6.1), off(6.1), on(6.1)]).reversals, [1]);
    }

    #[test]
    fn several_goes_that_end_at_rest_are_a_change_that_bounced() {
        let steady = [on(6.5); 4];
        let found = edges(&[&[off(5.9), off(6.5), on(6.5), off(6.5)][..], &steady].concat());
        let wanted = Bounce { direction: Direction::Up, plateau: 1, changes: 3 };
        assert_eq!((found.bounces, found.reversals.len(), found.edges.len()), (vec![wanted], 0, 1));
        let cut = edges(&[&[off(5.9), off(6.5), on(6.5), off(6.5)][..], &steady[..3]].concat());
        assert_eq!((cut.bounces.len(), cut.reversals), (0, vec![1]), "not at rest yet");
    }

    #[test]
    fn leaving_a_state_half_way_and_coming_back_is_a_reversal() {
        let half = (7.6, 0.03);
        assert_eq!(edges(&[off(7.6), half, half, off(7.6), half]).reversals, [0]);
        assert!(edges(&[off(7.6), half, on(7.6), on(6.1), (6.0, 0.02), off(6.0)]).reversals.is_empty());
    }

    #[test]
    fn a_reading_that_catches_the_change_at_rest_is_an_edge() {
        let found = edges(&[on(7.6), on(6.1), on(6.1), (6.1, 0.03), on(7.6)]);
        assert_eq!(found.edges.len(), 1);
        assert_eq!((found.edges[0].plateau, found.edges[0].last_before), (1, Some(2)));
        assert!(found.reversals.is_empty());
    }

    #[test]
    fn a_change_while_held_keeps_the_last_sample_before() {
        let found = edges(&[on(7.6), on(6.1), on(6.1), off(6.1)]);
        let edge = &found.edges[0];
        assert_eq!((edge.last_before, edge.seen), (Some(2), 3));
        assert!(found.stays.iter().all(|stay| stay.direction != Direction::Down || stay.plateau != 1));
    }

    #[test]
    fn neither_ends_a_stay_without_being_a_change() {
        let found = edges(&[on(7.6), on(6.1), (6.0, 0.02), off(5.9)]);
        assert_eq!(found.edges.len(), 1);
        assert_eq!(found.edges[0].plateau, 3);
        assert!(found.stays.iter().all(|stay| stay.plateau != 2));
    }
}
