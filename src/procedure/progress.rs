//! How far a run has come, for the operator.

use super::{Plan, deep, delay, in_band, rebound};
use crate::trace::WHOLE_LINE_PERIODS;
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
    /// Bringing the board into its on state.
    Arm,
    /// Down in steps until it trips, and on to the floor.
    SurveyDown,
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
    /// Steps across the thresholds, read as fast as the bench can.
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
            Stage::SurveyDown => "ramp down",
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
    let step_down = plan.settle + plan.down.dwell + plan.read_time;
    let step_up = plan.settle + plan.up.dwell + plan.read_time;
    let steps = |span: f64, step: f64| (span / step).ceil() as u32 + 1;
    let span = plan.start.0 - plan.floor.0;
    let narrow = |step: Duration| match plan.fine_step {
        Some(fine) => step * (steps(plan.survey_step.0, fine.0) + 2),
        None => Duration::ZERO,
    };
    let parts = [
        (Stage::PreCheck, plan.settle * 3 + plan.read_time * 3),
        (Stage::Arm, step_up),
        (Stage::SurveyDown, step_down * steps(span, plan.survey_step.0)),
        (
            Stage::OffCurrent,
            (plan.settle + plan.range_settle * 2 + plan.read_time * 4 + WHOLE_LINE_PERIODS)
                * plan.off_points.len() as u32,
        ),
        (Stage::SurveyUp, step_up * steps(span * 0.5, plan.survey_step.0)),
        (Stage::NarrowDown, narrow(step_down)),
        (Stage::ConfirmTrip, step_up + step_down + plan.down.hold),
        (Stage::NarrowUp, narrow(step_up)),
        (Stage::ConfirmReEnable, step_down + step_up + plan.up.hold),
        (Stage::Delays, delay::expected(plan)),
        (Stage::InBand, in_band::expected(plan)),
        (Stage::DeepSweep, deep::expected(plan)),
        (Stage::Rebound, rebound::duration(plan)),
        (Stage::SwitchOff, plan.settle + plan.read_time),
    ];
    let from = parts.iter().position(|(known, _)| *known == stage).unwrap_or(0);
    parts[from..].iter().map(|(_, time)| *time).sum()
}
