//! How far a run has come, for the operator.

use super::plan::Pace;
use super::{Plan, deep, delay, hum, in_band, ramps, rebound};
use crate::trace::WHOLE_LINE_PERIODS;
use crate::units::Volts;
use std::time::Duration;

/// The part of a run that is under way and the time still to come.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Progress {
    /// What is being done.
    pub stage: Stage,
    /// Run time at which this stage began.
    pub since: Duration,
    /// Time expected from the beginning of this stage to the end of the run.
    pub left: Duration,
}

impl Progress {
    pub(super) fn at_start() -> Self {
        Self { stage: Stage::PreCheck, since: Duration::ZERO, left: Duration::ZERO }
    }

    /// Share of the run that is over at `now`, from 0 to 1. A stage that takes longer than expected holds the bar
    /// just short of where the next stage begins: it never runs ahead of what was done.
    pub fn share(&self, now: Duration) -> f64 {
        let end = self.since + self.left;
        let next = self.since + self.left.mul_f64(0.98);
        if end.is_zero() { 0.0 } else { (now.min(next).as_secs_f64() / end.as_secs_f64()).clamp(0.0, 1.0) }
    }
}

/// The parts of a run, in order.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Stage {
    /// Low voltage, little current: short? reversed?
    PreCheck,
    /// Bringing the board into its on state, and listening for hum.
    Arm,
    /// Looking for both thresholds together.
    Search,
    /// Down in steps until it trips, and on to the floor.
    SurveyDown,
    /// Below the trip, down to the floor.
    Descend,
    /// Reading the off current.
    OffCurrent,
    /// Up in steps until it comes back.
    SurveyUp,
    /// Small steps through the trip.
    NarrowDown,
    /// Small steps through the re-enable voltage.
    NarrowUp,
    /// Waiting just above the trip to see that nothing moves.
    ConfirmTrip,
    /// Waiting just below the re-enable voltage to see that nothing moves.
    ConfirmReEnable,
    /// Steps and ramps across the thresholds, read as fast as the bench can.
    Delays,
    /// Off, and on again between trip and re-enable.
    InBand,
    /// Down from the floor to the deep floor.
    DeepSweep,
    /// Lifted after a trip as by its battery, to see that it stays off.
    Rebound,
    /// Output off, board discharging.
    SwitchOff,
}

impl Stage {
    /// The stage in a few words.
    pub fn title(self) -> &'static str {
        match self {
            Stage::PreCheck => "pre-check",
            Stage::Arm => "arming",
            Stage::Search => "searching",
            Stage::SurveyDown => "ramp down",
            Stage::Descend => "below the trip",
            Stage::OffCurrent => "off current",
            Stage::SurveyUp => "ramp up",
            Stage::NarrowDown => "fine ramp down",
            Stage::NarrowUp => "fine ramp up",
            Stage::ConfirmTrip | Stage::ConfirmReEnable => "confirming",
            Stage::Delays => "delays",
            Stage::InBand => "switching on inside the band",
            Stage::DeepSweep => "deep sweep",
            Stage::Rebound => "rebound",
            Stage::SwitchOff => "switching off",
        }
    }
}

/// Time expected from the beginning of `stage` to the end of a run that goes as planned.
pub(super) fn left(plan: &Plan, stage: Stage) -> Duration {
    let mut parts = match &plan.search {
        Some(search_plan) => search(plan, search_plan.expected()),
        None => staircase(plan),
    };
    parts.extend(more(plan));
    let from = parts.iter().position(|(known, _)| *known == stage).unwrap_or(0);
    parts[from..].iter().map(|(_, time)| *time).sum()
}

fn step(plan: &Plan, pace: Pace) -> Duration {
    plan.settle + pace.dwell + plan.read_time
}

fn steps(span: Volts, step: Volts) -> u32 {
    (span / step).ceil() as u32 + 1
}

fn search(plan: &Plan, seconds: f64) -> Vec<(Stage, Duration)> {
    let (down, up) = (step(plan, plan.down), step(plan, plan.up));
    let below_trip = (plan.start - plan.floor) / 3.0;
    vec![
        pre_check(plan),
        (Stage::Arm, up + hum::expected(plan)),
        (Stage::Search, Duration::from_secs_f64(seconds)),
        (Stage::ConfirmTrip, down * 2 + plan.down.hold),
        (Stage::ConfirmReEnable, up * 2 + plan.up.hold),
        (Stage::Descend, down * steps(below_trip, plan.survey_step)),
        off_current(plan),
    ]
}

fn staircase(plan: &Plan) -> Vec<(Stage, Duration)> {
    let (down, up) = (step(plan, plan.down), step(plan, plan.up));
    let span = plan.start - plan.floor;
    let narrow = |step: Duration| match plan.fine_step {
        Some(fine) => step * (steps(plan.survey_step, fine) + 2),
        None => Duration::ZERO,
    };
    vec![
        pre_check(plan),
        (Stage::Arm, up + hum::expected(plan)),
        (Stage::SurveyDown, down * steps(span, plan.survey_step)),
        off_current(plan),
        (Stage::SurveyUp, up * steps(span * 0.5, plan.survey_step)),
        (Stage::NarrowDown, narrow(down)),
        (Stage::ConfirmTrip, up + down + plan.down.hold),
        (Stage::NarrowUp, narrow(up)),
        (Stage::ConfirmReEnable, down + up + plan.up.hold),
    ]
}

/// What comes after the thresholds, in either mode.
fn more(plan: &Plan) -> [(Stage, Duration); 5] {
    [
        (Stage::Delays, delay::expected(plan) + ramps::expected(plan)),
        (Stage::InBand, in_band::expected(plan)),
        (Stage::DeepSweep, deep::expected(plan)),
        (Stage::Rebound, rebound::duration(plan)),
        (Stage::SwitchOff, plan.settle + plan.read_time),
    ]
}

fn pre_check(plan: &Plan) -> (Stage, Duration) {
    (Stage::PreCheck, plan.range_settle + plan.settle * 3 + plan.read_time * 3)
}

fn off_current(plan: &Plan) -> (Stage, Duration) {
    let point = plan.settle + plan.range_settle * 2 + plan.read_time * 4 + WHOLE_LINE_PERIODS;
    (Stage::OffCurrent, point * plan.off_points.len() as u32)
}
