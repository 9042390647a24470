//! A battery rises once its load is gone. Here the supply does the same, and the board must stay off.

use super::Plan;
use super::desk::Desk;
use super::probe::{arm_off, arm_on, probe, state};
use super::progress::{Stage, left};
use super::walk::Edge;
use crate::profile::Rebound;
use crate::trace::{Stop, SwitchState};
use std::time::Duration;

/// The trial, as the profile wants it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Trial {
    /// How far the battery rises.
    pub rebound: Rebound,
    /// How long the board is held.
    pub hold: Duration,
}

/// Trips the board, lifts its terminals by what the battery would rise, and holds them there. A board that comes back
/// ends the trial; the trace shows when, and the analysis says what it means.
pub(super) async fn try_rebound(desk: &Desk, plan: &Plan, trip: Edge) -> Result<(), Stop> {
    let Some(Trial { rebound, hold }) = plan.rebound else { return Ok(()) };
    desk.enter(Stage::Rebound, left(plan, Stage::Rebound));
    arm_on(desk, plan).await?;
    let above = probe(desk, plan, trip.unchanged.min(plan.start), plan.down).await?;
    let is_on = state(plan, &above) == SwitchState::On;
    let current = above.current.amps().filter(|_| is_on).unwrap_or(trip.unchanged / plan.load.resistance);
    // With the switch open no drop in the leads stands between set-point and terminals.
    let at_trip = above.terminals() - (trip.unchanged - trip.changed) / 2.0;
    let risen = (at_trip + rebound.rise(current)).min(plan.maximum);
    arm_off(desk, plan, (trip.changed - plan.survey_step).max(plan.floor)).await?;

    let mut sample = probe(desk, plan, risen, plan.up).await?;
    let end = desk.now() + hold;
    while state(plan, &sample) != SwitchState::On && desk.now() < end {
        desk.wait(POLL).await?;
        sample = desk.read().await?;
    }
    if state(plan, &sample) == SwitchState::On {
        // Once more, so that the trace shows where it came to rest.
        desk.read().await?;
    }
    Ok(())
}

/// How long the trial takes.
pub(super) fn duration(plan: &Plan) -> Duration {
    let step = |dwell: Duration| plan.settle + dwell + plan.read_time;
    plan.rebound
        .map_or(Duration::ZERO, |trial| trial.hold + step(plan.up.dwell) * 2 + step(plan.down.dwell) * 2)
}

/// No board that restarts by itself stays on for less: its own capacitors and the battery's see to that.
const POLL: Duration = Duration::from_millis(20);

/// The trial a profile asks for.
pub(super) fn trial(rebound: Option<Rebound>) -> Option<Trial> {
    let rebound = rebound?;
    rebound.hold.map(|hold| Trial { rebound, hold })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units::{Amps, Ohms, Volts};

    /// 109 mA through 150 mohm and 200 mV: 216.4 mV, by Ohm's law.
    #[test]
    fn a_battery_rises_by_its_resistance_and_its_recovery() {
        let rebound = Rebound { resistance: Ohms(0.15), recovery: Volts(0.2), tolerance: 0.0, hold: None };
        assert!((rebound.rise(Amps(6.0 / 55.0)) - Volts(0.216_363_6)).abs() < Volts(1e-6));
        assert_eq!(trial(Some(rebound)), None, "worked out, not tried");
    }
}
