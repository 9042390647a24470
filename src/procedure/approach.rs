//! Where a pass through a bracket begins: as near as it may, and far enough that the board has not changed yet.
//!
//! A board that moves beside its bracket is slow, or its threshold lies so near that noise reached it. Either way it was
//! late by no more than the time in which it moved, and a slower pass need not begin farther back than that.

use super::Plan;
use super::plan::Pace;
use super::walk::Edge;
use crate::units::Volts;
use std::time::Duration;

/// The beginnings of the passes through one bracket.
#[derive(Clone, Copy, Debug)]
pub(super) struct Approach {
    /// Found by the survey, at the same pace as the first pass.
    survey: Edge,
    /// One step of a pass, away from the threshold.
    step: Volts,
    survey_step: Volts,
    /// No pass begins farther away.
    limit: Volts,
    /// Where the pass that reached farthest away began.
    farthest: Volts,
    /// Whether the board is known not to have changed yet at the farthest.
    proven: bool,
    moved: f64,
}

/// Steps that the first pass begins before the survey's bracket.
const FIRST: f64 = 2.0;

/// Survey steps by which each further pass begins farther away, as long as none has begun on the right side.
const WIDER: f64 = 2.0;

impl Approach {
    /// For passes that begin between the survey's bracket and `limit`. Without a fine step the survey is the first pass,
    /// and it began at the limit.
    pub(super) fn new(plan: &Plan, survey: Edge, limit: Volts) -> Self {
        let away = (survey.unchanged - survey.changed).0.signum();
        let step = plan.fine_step.unwrap_or(plan.survey_step) * away;
        let first = if plan.fine_step.is_some() { survey.unchanged + step * FIRST } else { limit };
        let mut approach = Self {
            survey,
            step,
            survey_step: plan.survey_step * away,
            limit,
            farthest: limit,
            proven: false,
            moved: 0.0,
        };
        approach.farthest = approach.nearer(first, limit);
        approach
    }

    /// Where the first pass begins.
    pub(super) fn first(&self) -> Volts {
        self.farthest
    }

    /// Where the next pass begins, after the board has moved beside `edge`, which was found at `pace`, within `seen`.
    pub(super) fn after_move(&mut self, plan: &Plan, edge: Edge, pace: Pace, seen: Duration) -> Volts {
        self.moved += 1.0;
        let near = edge.unchanged + self.step * lateness(plan, pace, seen);
        self.proven |= self.nearer(near, self.farthest) == near;
        if self.proven {
            return self.nearer(near, self.farthest);
        }
        // The board may have been beyond its threshold when the pass began: the survey was too fast as well.
        let far = self.survey.unchanged + self.survey_step * (WIDER * self.moved);
        self.farthest = self.nearer(far, self.limit);
        self.farthest
    }

    /// The one that lies nearer to the threshold.
    fn nearer(&self, a: Volts, b: Volts) -> Volts {
        if self.step > Volts::ZERO { a.min(b) } else { a.max(b) }
    }
}

/// Steps by which a board that takes `seen` to change was late at this pace, and two to spare.
fn lateness(plan: &Plan, pace: Pace, seen: Duration) -> f64 {
    let step = plan.settle + pace.dwell + plan.read_time;
    (seen.as_secs_f64() / step.as_secs_f64()).ceil() + 2.0
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::procedure::tests::plan;
    use crate::profile::Ramp;

    const SURVEY: Edge = Edge { unchanged: Volts(6.04), changed: Volts(5.97) };
    const SEEN: Duration = Duration::from_millis(250);

    fn approach() -> (Plan, Approach) {
        let plan = plan(Ramp::Search { resolution: Volts(2e-3) });
        let approach = Approach::new(&plan, SURVEY, plan.start);
        (plan, approach)
    }

    fn edge(unchanged: f64) -> Edge {
        Edge { unchanged: Volts(unchanged), changed: Volts(unchanged - 0.002) }
    }

    #[test]
    fn a_board_that_stood_long_before_it_changed_is_approached_from_nearby() {
        let (plan, mut approach) = approach();
        assert!((approach.first() - Volts(6.044)).abs() < Volts(1e-9));
        let next = approach.after_move(&plan, edge(6.0), plan.down, SEEN);
        assert!(next > Volts(6.006) && next < Volts(6.03), "{next}");
        // Slower still, and no farther than where the first pass was on the right side.
        let last = approach.after_move(&plan, edge(6.04), plan.down.slower(SEEN), SEEN);
        assert!((last - approach.first()).abs() < Volts(1e-9), "{last}");
    }

    #[test]
    fn a_board_that_changed_soon_after_the_beginning_is_approached_from_farther_each_time() {
        let (plan, mut approach) = approach();
        let next = approach.after_move(&plan, edge(6.042), plan.down, SEEN);
        assert!((next - SURVEY.unchanged - plan.survey_step * 2.0).abs() < Volts(1e-9), "{next}");
        let last = approach.after_move(&plan, edge(next.0), plan.down.slower(SEEN), SEEN);
        assert!((last - SURVEY.unchanged - plan.survey_step * 4.0).abs() < Volts(1e-9), "{last}");
    }
}
