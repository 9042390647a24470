//! The current with the switch open: on a sensitive range, but only while the switch is proven open.

use super::desk::Desk;
use super::probe::{probe, state};
use super::{Action, Plan};
use crate::trace::{Sample, Stop, SwitchState};
use crate::units::Amps;

/// Reads the off current at each planned voltage and returns the ammeter to the range that carries the load.
///
/// A board that cannot be shown to be off keeps the large range: its off current is not measured.
pub(super) async fn measure_off_current(desk: &Desk, plan: &Plan) -> Result<(), Stop> {
    for volts in &plan.off_points {
        let sample = probe(desk, plan, *volts, plan.down).await?;
        let again = desk.read().await?;
        if state(plan, &sample) == SwitchState::Off && state(plan, &again) == SwitchState::Off {
            read_settled(desk, plan, again).await?;
            desk.order(Action::Range(plan.on_range)).await?;
            desk.wait(plan.range_settle).await?;
        }
    }
    Ok(())
}

/// Changes to the most sensitive range that holds what flows and reads until readings agree.
async fn read_settled(desk: &Desk, plan: &Plan, proven: Sample) -> Result<(), Stop> {
    let flows = proven.current.amps().unwrap_or(plan.on_range);
    let zero = plan.on_range * ON_RANGE_ZERO;
    for range in plan.off_ranges.iter().filter(|range| **range + zero >= flows) {
        desk.order(Action::Range(*range)).await?;
        desk.wait(plan.range_settle).await?;
        if settle_on_range(desk).await? {
            return Ok(());
        }
    }
    Ok(())
}

/// Reads until two successive pairs agree to one per cent; false when the range overflows.
async fn settle_on_range(desk: &Desk) -> Result<bool, Stop> {
    let mut last: Option<Amps> = None;
    let mut agreed = 0;
    for _ in 0..LONGEST {
        let Some(now) = desk.read().await?.current.amps() else { return Ok(false) };
        agreed = match last {
            Some(before) if (now - before).abs() <= now.abs().max(SMALL) * AGREE => agreed + 1,
            _ => 0,
        };
        if agreed >= 2 {
            break;
        }
        last = Some(now);
    }
    Ok(true)
}

/// Zero error of the large range that must not keep a sensitive one from being tried, as a share of full scale.
const ON_RANGE_ZERO: f64 = 5e-4;
/// Successive readings agree within this share.
const AGREE: f64 = 0.01;
/// Below this the share is taken of this.
const SMALL: Amps = Amps(0.5e-6);
/// Readings before an unsettled current is taken as it is.
const LONGEST: usize = 50;
