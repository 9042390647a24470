//! Below the ramp's floor: does the switch stay open down to where its detector has long stopped working?
//!
//! A detector below its minimum operating voltage says anything. Where that is above what the switch's gate needs, the
//! switch conducts again and drains the battery it was to save. The ammeter stays on the range that carries the load
//! while the voltage moves; only where the switch is proven open may it look closer.

use super::desk::Desk;
use super::off_current::read_settled;
use super::probe::{above_set_point, arm_off, state};
use super::progress::{Stage, left};
use super::walk::{Edge, set_points};
use super::{Action, Plan};
use crate::trace::{Sample, Stop, SwitchState};
use crate::units::Volts;
use std::time::Duration;

/// Below this a detector may stop working; detectors are stated to work from 0.65 V to 1.5 V on (common data sheets).
const FINE_BELOW: Volts = Volts(2.0);
/// Steps there: a window of conduction is some 0.3 V wide (from memory), so several fall into it.
const FINE: Volts = Volts(0.05);
/// Steps above it.
const COARSE: Volts = Volts(0.25);
/// Longest time for the whole sweep; a supply that cannot sink may need it.
const LONGEST: Duration = Duration::from_secs(60);
/// Pause between looks at a voltage that falls by itself.
const POLL: Duration = Duration::from_millis(20);
/// Share of the limit that the large range's standard uncertainty may take.
const FINE_SHARE: f64 = 0.25;

/// From below the trip down to the deep floor, reading at every step; ends early where the voltage does not come down.
pub(super) async fn sweep_deep(desk: &Desk, plan: &Plan, trip: Edge) -> Result<(), Stop> {
    let Some(deep_floor) = plan.measure.deep_floor else { return Ok(()) };
    desk.enter(Stage::DeepSweep, left(plan, Stage::DeepSweep));
    arm_off(desk, plan, (trip.changed - plan.survey_step).max(plan.floor)).await?;
    desk.order(Action::LimitCurrent(plan.pre_check_limit(plan.floor))).await?;
    let deadline = desk.now() + LONGEST;
    for volts in points(plan.floor, deep_floor) {
        let Some(sample) = descend(desk, plan, volts, deadline).await? else { return Ok(()) };
        let again = desk.read().await?;
        if closer(plan) && state(plan, &sample) == SwitchState::Off && state(plan, &again) == SwitchState::Off
        {
            read_settled(desk, plan, again).await?;
        }
    }
    Ok(())
}

/// True when the limit is finer than the range that carries the load can judge.
fn closer(plan: &Plan) -> bool {
    plan.deep_limit.is_some_and(|limit| plan.on_uncertainty > limit * FINE_SHARE)
}

/// Set-points from the floor to the deep floor, close together where detectors stop working.
fn points(floor: Volts, deep_floor: Volts) -> impl Iterator<Item = Volts> {
    let bend = FINE_BELOW.max(deep_floor);
    let upper = set_points(floor, bend, -COARSE).filter(move |volts| *volts > bend);
    upper.chain(set_points(bend.min(floor), deep_floor, -FINE))
}

/// Sets `volts` and reads until the terminals have come down to it; `None` when time is up before.
async fn descend(desk: &Desk, plan: &Plan, volts: Volts, deadline: Duration) -> Result<Option<Sample>, Stop> {
    desk.set(volts).await?;
    desk.settle(plan, plan.down.dwell).await?;
    loop {
        let sample = desk.read().await?;
        if !above_set_point(plan, &sample) {
            return Ok(Some(sample));
        }
        if desk.now() >= deadline {
            return Ok(None);
        }
        desk.wait(POLL).await?;
    }
}

/// Time the sweep takes on a supply that follows its set-point.
pub(super) fn expected(plan: &Plan) -> Duration {
    let Some(deep_floor) = plan.measure.deep_floor else { return Duration::ZERO };
    let close = if closer(plan) { plan.range_settle * 2 + plan.read_time * 4 } else { Duration::ZERO };
    let point = plan.settle + plan.down.dwell + plan.read_time * 2 + close;
    point * points(plan.floor, deep_floor).count() as u32
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_sweep_goes_from_the_floor_to_the_deep_floor_and_is_finest_where_detectors_stop() {
        let points: Vec<Volts> = points(Volts(5.2), Volts(0.3)).collect();
        assert_eq!((points[0], points[points.len() - 1]), (Volts(5.2), Volts(0.3)));
        let falls = points.windows(2).all(|pair| pair[0] > pair[1]);
        let fine = points.windows(2).filter(|pair| pair[0] < Volts(2.0));
        assert!(falls && fine.clone().count() > 30, "{points:?}");
        assert!(fine.clone().all(|pair| pair[0] - pair[1] < Volts(0.051)), "{points:?}");
        // A floor below the bend, and a deep floor above it.
        for (floor, deep_floor) in [(1.2, 0.3), (5.2, 3.0)] {
            let points: Vec<Volts> = super::points(Volts(floor), Volts(deep_floor)).collect();
            assert_eq!((points[0], points[points.len() - 1]), (Volts(floor), Volts(deep_floor)));
        }
    }
}
