//! When, after a step across its threshold, a board changed: from below and from above.
//!
//! A reading is a mean over its integration time, so the share of the load's current in it tells when within it the switch
//! changed. When the switch closes, the load's capacitors take more than that for a while: then the share bounds the
//! moment from below only, and the voltage at the load, which they hold back, from above.

use super::edges::{Direction, Edge};
use super::plateau::Course;
use crate::trace::{Sample, SwitchState};
use crate::units::Amps;
use std::ops::Range;

/// How far a share may be off: the voltage moved within the reading, the load warmed up, small capacitors.
pub(super) const SHARE: f64 = 0.03;

/// A span of time since the start of the run, s.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Span {
    /// Not before.
    pub(super) from: f64,
    /// Not after.
    pub(super) to: f64,
}

/// When the readings of one sample began and ended, s.
#[derive(Clone, Copy, Debug)]
struct Window {
    start: Span,
    end: Span,
}

/// The readings after a step across a threshold.
pub(super) struct Burst<'c, 't> {
    course: &'c Course<'t>,
    direction: Direction,
    /// The last sample before the step.
    before: usize,
    samples: Range<usize>,
    integration: Option<f64>,
    /// Conductance of the closed switch and its load, S.
    on: f64,
    /// Share of the terminal voltage that a closed switch leaves to the load.
    load: Option<f64>,
}

impl<'c, 't> Burst<'c, 't> {
    /// The readings of the plateau of `edge`, which came after a plateau in the state before.
    pub(super) fn of(course: &'c Course<'t>, edge: &Edge) -> Option<Self> {
        let samples = course.plateaus[edge.plateau].samples.clone();
        let before = samples.start.checked_sub(1)?;
        let closed = match edge.direction {
            Direction::Down => before,
            Direction::Up => samples.end - 1,
        };
        let sample = &course.trace.samples[closed];
        let volts = course.terminals(sample);
        let on = sample.current.amps()?.0 / volts.0;
        let draws = course.states[closed] == SwitchState::On && !course.stopped[closed];
        (draws && volts.0 > 0.0).then(|| Self {
            course,
            direction: edge.direction,
            before,
            samples,
            integration: course.trace.claims.times.map(|times| times.integration.as_secs_f64()),
            on,
            load: sample.load.map(|load| load / volts),
        })
    }

    /// What the closed switch and its load draw at the set-point.
    pub(super) fn on_current(&self) -> Amps {
        Amps(self.on * self.first().set.0)
    }

    /// When the set-point moved: after the last reading before it, and before the first after it.
    pub(super) fn stepped(&self) -> Span {
        // A reading takes at least as long as it integrates, whatever else it waits for.
        let half = self.integration.unwrap_or(0.0) / 2.0;
        Span { from: self.at(self.before) + half, to: self.at(self.samples.start) - half }
    }

    /// When the switch changed.
    pub(super) fn changed(&self) -> Option<Span> {
        let first = self.samples.clone().find(|sample| !self.is_before(*sample))?;
        let earlier = first.checked_sub(1).filter(|before| *before >= self.samples.start);
        // What is taken for one state throughout may hold a little of the other.
        let slack = SHARE * self.integration.unwrap_or(0.0);
        let from = earlier.map_or(self.stepped().from, |before| self.window(before).end.from - slack);
        let window = self.window(first);
        let clean = self.direction == Direction::Down && self.course.states[first] == SwitchState::Off;
        let whole = Span { from, to: if clean { window.start.to + slack } else { window.end.to } };
        let within = if clean { None } else { self.within(first, window) };
        Some(within.map_or(whole, |part| Span { from: whole.from.max(part.from), to: whole.to.min(part.to) }))
    }

    /// The sample that is certainly no longer moved by the step's settling: the terminals as they stood after it.
    pub(super) fn first(&self) -> &'t Sample {
        &self.course.trace.samples[self.samples.start]
    }

    /// When within a reading the switch changed, from the share of it during which the load drew current.
    fn within(&self, sample: usize, window: Window) -> Option<Span> {
        let integration = self.integration?;
        let slack = SHARE * integration;
        let on = self.on_share(sample)?.clamp(0.0, 1.0) * integration;
        Some(match self.direction {
            Direction::Down => {
                Span { from: window.start.from + on - slack, to: window.start.to + on + slack }
            }
            Direction::Up => {
                let at_load = self.load_share(sample).map(|share| share.clamp(0.0, 1.0) * integration);
                let to = at_load.map_or(f64::INFINITY, |closed| window.end.to - closed + slack);
                Span { from: window.end.from - on - slack, to }
            }
        })
    }

    /// Share of a reading during which the switch was closed, as the current tells; above one where capacitors were charged.
    fn on_share(&self, sample: usize) -> Option<f64> {
        let sample = &self.course.trace.samples[sample];
        let full = self.course.terminals(sample).0 * self.on;
        sample.current.amps().map(|amps| amps.0 / full).filter(|share| share.is_finite())
    }

    /// The same as the voltage at the load tells; too small where capacitors were charged.
    fn load_share(&self, sample: usize) -> Option<f64> {
        let sample = &self.course.trace.samples[sample];
        let share = sample.load? / self.course.terminals(sample) / self.load?;
        share.is_finite().then_some(share)
    }

    /// True for a reading during all of which the board was in the state before.
    fn is_before(&self, sample: usize) -> bool {
        match self.direction {
            Direction::Down => self.on_share(sample).is_some_and(|share| share >= 1.0 - SHARE),
            Direction::Up => self.course.states[sample] == SwitchState::Off,
        }
    }

    fn at(&self, sample: usize) -> f64 {
        self.course.trace.samples[sample].at.as_secs_f64()
    }

    /// The times of a reading. Its middle is known, and it took no longer than fits between the neighbours' middles.
    fn window(&self, sample: usize) -> Window {
        let at = self.at(sample);
        let after = (sample + 1 < self.samples.end).then(|| self.at(sample + 1) - at);
        let spacing = after.map_or(at - self.at(sample - 1), |after| after.min(at - self.at(sample - 1)));
        match self.integration {
            Some(integration) => {
                let half = integration / 2.0;
                let loose = (spacing - integration).max(0.0);
                let about = |middle: f64| Span { from: middle - loose, to: middle + loose };
                Window { start: about(at - half), end: about(at + half) }
            }
            None => Window {
                start: Span { from: at - spacing, to: at },
                end: Span { from: at, to: at + spacing },
            },
        }
    }
}
