//! The delays by step tests: from just before a threshold to clearly beyond it, read without a pause until it has changed.
//!
//! One reading averages over a while, and the share of it during which the load drew current tells when within it the
//! switch changed. Each further step begins its readings a part of a reading later, so that together they narrow what
//! one alone leaves open. They go on for a while after the change: a switch that bounces is seen.

use super::Plan;
use super::desk::Desk;
use super::plan::Pace;
use super::probe::{arm_off, arm_on, arming, probe, state};
use super::progress::{Stage, left};
use super::walk::{Edge, band};
use crate::trace::{Stop, SwitchState};
use crate::units::Volts;
use std::time::Duration;

/// Steps in each direction, each with its readings shifted by a further part of a reading.
const STEPS: u32 = 4;
/// How far a step goes beyond the threshold, as a share of the hysteresis: clearly beyond, and far from the other.
const BEYOND: f64 = 0.25;
/// At least as many steps of the ramp beyond.
const LEAST_BEYOND: f64 = 4.0;
/// Readings that go on after the change.
const AFTERWARDS: u32 = 6;
/// A board that does not change within this, or ten times its longest delay, is left as it is.
const PATIENCE: Duration = Duration::from_millis(500);

/// Steps across both thresholds, as far as the profile asks for them.
pub(super) async fn measure_delays(
    desk: &Desk,
    plan: &Plan,
    trip: Edge,
    re_enable: Option<Edge>,
) -> Result<(), Stop> {
    if !plan.measure.detect_delay && !plan.measure.release_delay {
        return Ok(());
    }
    desk.enter(Stage::Delays, left(plan, Stage::Delays));
    let step = plan.fine_step.unwrap_or(plan.survey_step);
    let beyond = (band(trip, re_enable) * BEYOND).max(step * LEAST_BEYOND);
    let below = (trip.changed - beyond).max(plan.floor);
    for shift in (0..STEPS).map(|index| plan.read_time * index / STEPS) {
        if plan.measure.detect_delay {
            arm_on(desk, plan).await?;
            let beside = (trip.unchanged + step).min(plan.start);
            let across = Step { from: beside, to: below, until: SwitchState::Off, pace: plan.down, shift };
            across.take(desk, plan).await?;
        }
        if let Some(re_enable) = re_enable.filter(|_| plan.measure.release_delay) {
            arm_off(desk, plan, below).await?;
            let beside = (re_enable.unchanged - step).max(below);
            let above = (re_enable.changed + beyond).min(plan.start);
            let across = Step { from: beside, to: above, until: SwitchState::On, pace: plan.up, shift };
            across.take(desk, plan).await?;
        }
    }
    Ok(())
}

/// One step across a threshold.
struct Step {
    from: Volts,
    to: Volts,
    until: SwitchState,
    pace: Pace,
    shift: Duration,
}

impl Step {
    async fn take(&self, desk: &Desk, plan: &Plan) -> Result<(), Stop> {
        let before = probe(desk, plan, self.from, self.pace).await?;
        if state(plan, &before) == self.until {
            return Ok(());
        }
        desk.set(self.to).await?;
        if !self.shift.is_zero() {
            desk.wait(self.shift).await?;
        }
        let patience = desk.now() + PATIENCE.max(self.pace.hold);
        while state(plan, &desk.read().await?) != self.until && desk.now() < patience {}
        for _ in 0..AFTERWARDS {
            desk.read().await?;
        }
        Ok(())
    }
}

/// Time the steps take on a board of the longest delays.
pub(super) fn expected(plan: &Plan) -> Duration {
    let probe = |pace: Pace| plan.settle + pace.dwell + plan.read_time;
    let burst = plan.read_time * (AFTERWARDS + 2);
    let one = |asked: bool, pace: Pace| if asked { probe(pace) + pace.dwell + burst } else { Duration::ZERO };
    let both =
        one(plan.measure.detect_delay, plan.down) + one(plan.measure.release_delay && !plan.latched, plan.up);
    let arm = if both.is_zero() { Duration::ZERO } else { arming(plan) + probe(plan.down) };
    (both + arm) * STEPS
}
