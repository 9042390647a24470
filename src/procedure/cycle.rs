//! One cycle of a study: down through the trip and up through the re-enable, at a given rate, and off.
//!
//! A cycle is a whole run of its own: it begins with the pre-check and ends with the output off. Where the thresholds
//! are, earlier cycles have told; the first one finds them by a coarse ramp over the whole range.

use super::desk::Desk;
use super::plan::Pace;
use super::pre_check::pre_check;
use super::probe::{arm_off, arm_on, probe, state};
use super::progress::Stage;
use super::switch_off::switch_off;
use super::walk::{MOST_UNDECIDED, set_points, walk_down, walk_up};
use super::{Action, Plan};
use crate::trace::{Ending, Sample, Stop, SwitchState};
use crate::units::Volts;
use std::rc::Rc;
use std::time::Duration;

/// How one cycle goes through the thresholds.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Sweep {
    /// Where the thresholds are, as set-points, if that is known; otherwise a coarse ramp finds them first.
    pub window: Option<Window>,
    /// How fast the set-point moves, V/s; `None` for the pace of the profile, which waits out the board's delays.
    pub rate: Option<f64>,
}

/// Set-points at which the board changed in earlier cycles.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Window {
    /// The highest at which it tripped.
    pub trip: Volts,
    /// The lowest at which it came back.
    pub re_enable: Volts,
}

/// A staircase with a step and a time for each.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Steps {
    /// Height of a step.
    pub height: Volts,
    /// Time from one step to the next; `None` at the pace of the profile.
    pub period: Option<Duration>,
}

impl Steps {
    /// The staircase nearest to a ramp of this rate on this bench: steps as small as its shortest period allows, and
    /// whole digits of the supply.
    pub fn of(plan: &Plan, rate: Option<f64>) -> Self {
        let Some(rate) = rate else {
            return Self { height: plan.fine_step.unwrap_or(plan.survey_step), period: None };
        };
        let digit = plan.set_step.0;
        let height = (shortest_period(plan).as_secs_f64() * rate / digit - ROUNDING).ceil().max(1.0) * digit;
        Self { height: Volts(height), period: Some(Duration::from_secs_f64(height / rate)) }
    }

    fn time_of_one(&self, plan: &Plan, pace: Pace) -> Duration {
        self.period.unwrap_or(plan.settle + pace.dwell + plan.read_time)
    }
}

/// The shortest time from one step to the next: set and confirm, settle, read.
pub fn shortest_period(plan: &Plan) -> Duration {
    SETTING + plan.settle + plan.read_time
}

/// Time in which a set-point is on its way and confirmed; two messages to a serial instrument are faster.
const SETTING: Duration = Duration::from_millis(20);

/// Shares of a digit that are rounding.
const ROUNDING: f64 = 1e-6;

/// Steps of the fine ramp before the place where the board changed earlier: enough to tell the drop in the leads.
const LEAD_IN: f64 = 12.0;

/// The whole cycle. Whatever ends the measuring, the output is switched off.
pub(super) async fn run(desk: Rc<Desk>, plan: Plan, sweep: Sweep) -> Ending {
    desk.begin().await;
    let stop = match measure(&desk, &plan, sweep).await {
        Ok(()) => Stop::Completed,
        Err(stop) => stop,
    };
    switch_off(&desk, &plan, stop).await
}

async fn measure(desk: &Desk, plan: &Plan, sweep: Sweep) -> Result<(), Stop> {
    let steps = Steps::of(plan, sweep.rate);
    desk.enter(Stage::PreCheck, expected(plan, &steps));
    pre_check(desk, plan).await?;
    desk.order(Action::LimitCurrent(plan.current_limit)).await?;
    arm_on(desk, plan).await?;
    let window = match sweep.window {
        Some(window) => Some(window),
        None => survey(desk, plan).await?,
    };
    match window {
        Some(window) => fine(desk, plan, &steps, window).await,
        None => Ok(()),
    }
}

/// Time from the pre-check to the end of a cycle whose window is known.
fn expected(plan: &Plan, steps: &Steps) -> Duration {
    let count = (LEAD_IN + 2.0).max(plan.survey_step / steps.height + 2.0) as u32;
    (steps.time_of_one(plan, plan.down) + steps.time_of_one(plan, plan.up)) * count
        + plan.down.hold
        + plan.up.hold
        + (plan.settle + plan.read_time) * 8
}

/// A coarse ramp over the whole range; `None` when the board does not trip, or does not come back.
async fn survey(desk: &Desk, plan: &Plan) -> Result<Option<Window>, Stop> {
    let (start, floor, step) = (plan.start, plan.floor, plan.survey_step);
    let count = ((start - floor) / step).ceil() as u32;
    desk.enter(Stage::SurveyDown, (plan.settle + plan.down.dwell + plan.read_time) * count * 2);
    let Some(trip) = walk_down(desk, plan, start, floor, step, plan.down).await? else { return Ok(None) };
    desk.enter(Stage::SurveyUp, (plan.settle + plan.up.dwell + plan.read_time) * count);
    let Some(back) = walk_up(desk, plan, trip.changed, start, step, plan.up).await? else { return Ok(None) };
    arm_on(desk, plan).await?;
    Ok(Some(Window { trip: trip.unchanged, re_enable: back.unchanged }))
}

/// Down until it trips, a coarse step farther so that it rests there, and up until it comes back.
async fn fine(desk: &Desk, plan: &Plan, steps: &Steps, window: Window) -> Result<(), Stop> {
    let lead_in = plan.survey_step.max(steps.height * LEAD_IN);
    let left = expected(plan, steps);
    desk.enter(Stage::NarrowDown, left);
    let down = Leg { steps, until: SwitchState::Off, pace: plan.down, to: plan.floor };
    let mut tripped = down.walk(desk, plan, (window.trip + lead_in).min(plan.start)).await?;
    if tripped == Reached::AtOnce {
        arm_on(desk, plan).await?;
        tripped = down.walk(desk, plan, plan.start).await?;
    }
    let Reached::At(tripped) = tripped else { return Ok(()) };

    let below = (tripped - plan.survey_step).max(plan.floor);
    arm_off(desk, plan, below).await?;
    desk.enter(Stage::NarrowUp, left / 2);
    let up = Leg { steps, until: SwitchState::On, pace: plan.up, to: plan.start };
    if up.walk(desk, plan, (window.re_enable - lead_in).max(below)).await? == Reached::AtOnce {
        arm_off(desk, plan, below).await?;
        up.walk(desk, plan, below).await?;
    }
    Ok(())
}

/// A ramp in one direction.
struct Leg<'s> {
    steps: &'s Steps,
    until: SwitchState,
    pace: Pace,
    to: Volts,
}

/// Where a ramp found the board changed.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Reached {
    /// At this set-point.
    At(Volts),
    /// Before the ramp began, so that nothing was learned.
    AtOnce,
    /// Not at all.
    Never,
}

impl Leg<'_> {
    async fn walk(&self, desk: &Desk, plan: &Plan, from: Volts) -> Result<Reached, Stop> {
        // A slow board that is beyond its threshold already would seem to have one here.
        probe(desk, plan, from, self.pace).await?;
        desk.wait(self.pace.hold).await?;
        if state(plan, &desk.read().await?) == self.until {
            return Ok(Reached::AtOnce);
        }
        let height = if self.until == SwitchState::Off { -self.steps.height } else { self.steps.height };
        let mut due = desk.now();
        let mut undecided = 0;
        for volts in set_points(from, self.to, height) {
            let sample = match self.steps.period {
                None => probe(desk, plan, volts, self.pace).await?,
                Some(period) => {
                    due += period;
                    timed(desk, plan, volts, due).await?
                }
            };
            match state(plan, &sample) {
                // A change counts when the next reading says so too.
                found if found == self.until && state(plan, &desk.read().await?) == self.until => {
                    return Ok(Reached::At(volts));
                }
                SwitchState::Neither => undecided += 1,
                _ => undecided = 0,
            }
            if undecided >= MOST_UNDECIDED {
                let current = sample.current.amps().unwrap_or(plan.on_range);
                return Err(Stop::Undecided { at: sample.terminals(), current });
            }
        }
        Ok(Reached::Never)
    }
}

/// One step of a ramp, read at its end, so that the step is over at `due`. A bench that is late makes the ramp slower;
/// the trace tells how fast it was.
async fn timed(desk: &Desk, plan: &Plan, volts: Volts, due: Duration) -> Result<Sample, Stop> {
    desk.set(volts).await?;
    let settled = desk.now() + plan.settle;
    let begin = due.saturating_sub(plan.read_time).max(settled);
    desk.wait(begin.saturating_sub(desk.now())).await?;
    desk.read().await
}

#[cfg(test)]
mod tests {
    use super::super::tests::plan;
    use super::*;
    use crate::profile::Ramp;

    #[test]
    fn a_rate_makes_whole_digits_and_exactly_the_rate() {
        let plan = plan(Ramp::Search { resolution: Volts(2e-3) });
        // 57 ms at 0.1 V/s are 5.7 mV: six digits in 60 ms.
        let steps = Steps::of(&plan, Some(0.1));
        assert!((steps.height - Volts(6e-3)).abs() < Volts(1e-12), "{steps:?}");
        assert_eq!(steps.period.map(|period| period.as_millis()), Some(60));
        // Slower than a digit in the shortest period: one digit, and longer periods.
        let slow = Steps::of(&plan, Some(0.01));
        assert_eq!((slow.height, slow.period), (Volts(1e-3), Some(Duration::from_millis(100))));
        assert_eq!(Steps::of(&plan, None), Steps { height: Volts(2e-3), period: None });
    }
}
