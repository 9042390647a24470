//! The current with the switch open: on a sensitive range, but only while the switch is proven open.

use super::desk::Desk;
use super::plan::Pace;
use super::probe::{probe, state};
use super::progress::{Stage, left};
use super::settling::settle_on_range;
use super::{Action, Plan};
use crate::trace::{Sample, Stop, SwitchState};
use crate::units::Amps;

/// Reads the off current at each planned voltage and returns the ammeter to the range that carries the load.
///
/// A board that cannot be shown to be off keeps the large range: its off current is not measured.
pub(super) async fn measure_off_current(desk: &Desk, plan: &Plan) -> Result<(), Stop> {
    desk.enter(Stage::OffCurrent, left(plan, Stage::OffCurrent));
    // The way to the higher points is up, and a board that would come back there gets the time to do so.
    let pace = Pace { dwell: plan.down.dwell.max(plan.up.dwell), hold: plan.up.hold };
    for volts in &plan.off_points {
        let sample = match probe(desk, plan, *volts, pace).await {
            // Below the floor there are other points. A supply that cannot sink need not hold up the run for this one.
            Err(Stop::NotArrived { .. }) if *volts < plan.floor => continue,
            sample => sample?,
        };
        let again = desk.read().await?;
        if state(plan, &sample) == SwitchState::Off && state(plan, &again) == SwitchState::Off {
            read_settled(desk, plan, again).await?;
        }
    }
    Ok(())
}

/// Changes to the most sensitive range that holds what flows, reads until they stand, and returns to the large range.
/// After an overload the next range is tried only once the switch is proven open again.
pub(super) async fn read_settled(desk: &Desk, plan: &Plan, proven: Sample) -> Result<(), Stop> {
    let flows = proven.current.amps().unwrap_or(plan.on_range);
    for range in plan.off_ranges.iter().filter(|range| **range + plan.on_zero() >= flows) {
        change_range(desk, plan, *range).await?;
        let settled = settle_on_range(desk, plan).await?;
        change_range(desk, plan, plan.on_range).await?;
        if settled || state(plan, &desk.read().await?) != SwitchState::Off {
            break;
        }
    }
    Ok(())
}

async fn change_range(desk: &Desk, plan: &Plan, range: Amps) -> Result<(), Stop> {
    desk.order(Action::Range(range)).await?;
    desk.wait(plan.range_settle).await
}
